"""A ladder of series and shunt elements that load each other."""

from __future__ import annotations

from itertools import groupby
from typing import Annotated, ClassVar, Literal

from pydantic import Field

from frontend_sim.analog.block import Block
from frontend_sim.analog.network import (
    GROUND,
    SIGNAL,
    Capacitor,
    Circuit,
    Held,
    Injected,
    Part,
    Resistor,
    solve,
)
from frontend_sim.analog.stages.ladder_element import LadderElement
from frontend_sim.analog.stages.network_stage import NetworkStage
from frontend_sim.quantities import Capacitance, Resistance

PROBE = "probing current"
"""Input of the circuit by which the resistance of its output is found."""


class Ladder(NetworkStage):
    """A ladder of series and shunt elements between a source and a load, which load each other

        V_out / V_in = 1 / (chain matrix of the whole ladder)_11.

    All poles come from the nodal equations of the whole, solved exactly; see
    docs/theory/networks.md. Source: two-port and nodal analysis, any textbook of circuits.
    """

    passive: ClassVar[bool] = True
    kind: Literal["ladder"] = "ladder"
    element: Annotated[tuple[LadderElement, ...], Field(min_length=1, max_length=64)] = Field(
        description="the elements in order from the source to the load"
    )
    source_resistance: Resistance | None = Field(
        default=None, description="resistance of the source; left out, the source is ideal"
    )
    load_resistance: Resistance | None = Field(
        default=None, description="resistance of the load; left out, nothing loads the ladder"
    )
    load_capacitance: Capacitance | None = Field(
        default=None, description="capacitance of the load"
    )

    def check(self) -> None:
        """Raise ValueError if the ladder has no level at rest, see ``NetworkStage``."""
        if self.source_resistance is None:
            if all(element.place == "shunt" for element in self.element):
                raise ValueError(
                    "every element is a shunt straight across an ideal source, so the ladder does "
                    "nothing; give source_resistance, or a series element"
                )
            self._refuse_a_short()
        if self.load_resistance is None:
            self._refuse_a_floating_output()

    def _refuse_a_short(self) -> None:
        """Refuse a way from an ideal source to ground on which a constant current meets nothing."""
        for number, element in enumerate(self.element, start=1):
            if not element.lossless:
                if element.place == "series":
                    return
            elif element.place == "shunt":
                raise ValueError(
                    f"the current through the inductance of element {number} would grow without "
                    "end: no resistance stands between it and an ideal source; give it a "
                    "series_resistance, or give source_resistance"
                )

    def _refuse_a_floating_output(self) -> None:
        """Refuse an output that no resistance ties to the source or to ground."""
        for number in range(len(self.element), 0, -1):
            element = self.element[number - 1]
            if element.place == "shunt" and element.conducts:
                return
            if element.place == "series" and not element.conducts:
                raise ValueError(
                    "nothing defines the level of the output at rest: no resistance leads from it "
                    f"to ground behind the capacitance of element {number}; give load_resistance, "
                    "a shunt element that conducts, or a leakage_resistance"
                )

    def circuit(self) -> Circuit:
        """Return the ladder as a circuit."""
        parts: list[Part] = [Held("source", SIGNAL)]
        node = "source"
        if self.source_resistance is not None:
            node = "node 0"
            parts.append(Resistor("source_resistance", "source", node, self.source_resistance))
        for number, element in enumerate(self.element, start=1):
            if element.place == "shunt":
                parts += element.parts(node, GROUND, number)
                continue
            parts += element.parts(node, f"node {number}", number)
            node = f"node {number}"
        if self.load_resistance is not None:
            parts.append(Resistor("load_resistance", node, GROUND, self.load_resistance))
        if self.load_capacitance is not None:
            parts.append(Capacitor(node, GROUND, self.load_capacitance))
        return Circuit(tuple(parts), node)

    def resistance_at_rest(self) -> float | None:
        """Return what a constant current into the output would raise it by, per ampere [ohm]."""
        circuit = self.circuit()
        # A capacitor changes nothing at rest, and bounds the answer where an inductance ends.
        ends = Injected(circuit.output, PROBE), Capacitor(circuit.output, GROUND, 1e-9)
        probed = Circuit((*circuit.parts, *ends), circuit.output)
        return solve(probed).levels[PROBE]

    def buffered(self) -> tuple[Block, ...]:
        """Return the blocks of the ladder's sections, each as if a buffer stood behind it.

        A section is a run of series elements with the shunt elements that follow; the source
        belongs to the first and the load to the last. The product of these blocks against the
        ladder's own response is what the sections do to each other.

        Raises
        ------
        ModelError
            If a section alone has no answer.
        """
        sections: list[list[LadderElement]] = []
        for place, run in groupby(self.element, key=lambda element: element.place):
            if place == "series" or not sections:
                sections.append([])
            sections[-1] += run
        last = len(sections) - 1
        return tuple(
            solve(
                self.model_copy(
                    update={
                        "element": tuple(section),
                        "source_resistance": self.source_resistance if number == 0 else None,
                        "load_resistance": self.load_resistance if number == last else None,
                        "load_capacitance": self.load_capacitance if number == last else None,
                    }
                ).circuit()
            ).block
            for number, section in enumerate(sections)
        )
