"""A ladder of series and shunt elements that load each other."""

from __future__ import annotations

from itertools import groupby
from typing import Annotated, ClassVar, Literal, Self

from pydantic import Field, model_validator

from frontend_sim.analog.block import Block
from frontend_sim.analog.network import (
    GROUND,
    SIGNAL,
    Capacitor,
    Circuit,
    Held,
    Inductor,
    Part,
    Resistor,
    solve,
)
from frontend_sim.analog.stages.network_stage import NetworkStage
from frontend_sim.quantities import Capacitance, Inductance, Resistance
from frontend_sim.values import Value

VALUES = ("resistance", "inductance", "capacitance")
"""Keys of which an element has one."""


class Element(Value):
    """One element of a ladder: a resistance, an inductance or a capacitance."""

    place: Literal["series", "shunt"] = Field(
        description="series: from what stands before to what follows; shunt: from there to ground"
    )
    resistance: Resistance | None = Field(default=None, description="of a resistor")
    inductance: Inductance | None = Field(default=None, description="of an inductor")
    capacitance: Capacitance | None = Field(default=None, description="of a capacitor")
    series_resistance: Resistance | None = Field(
        default=None, description="resistance in series with the inductance or the capacitance"
    )
    leakage_resistance: Resistance | None = Field(
        default=None, description="leakage in parallel with the capacitance"
    )

    @model_validator(mode="after")
    def _one_value(self) -> Self:
        given = [key for key in VALUES if getattr(self, key) is not None]
        if len(given) != 1:
            told = f"has {' and '.join(given)}" if given else "has none of them"
            raise ValueError(
                f"an element is one of resistance, inductance and capacitance; this one {told}"
            )
        if self.resistance is not None and self.series_resistance is not None:
            raise ValueError("series_resistance goes with an inductance or a capacitance")
        if self.capacitance is None and self.leakage_resistance is not None:
            raise ValueError("leakage_resistance goes with a capacitance")
        return self

    @property
    def conducts(self) -> bool:
        """Whether a constant current can flow."""
        return self.capacitance is None or self.leakage_resistance is not None

    @property
    def lossless(self) -> bool:
        """Whether a constant current meets no resistance at all."""
        return self.inductance is not None and self.series_resistance is None

    def parts(self, first: str, second: str, number: int) -> list[Part]:
        """Return the element between two nodes, named by its number in the ladder."""
        if self.resistance is not None:
            return [Resistor(f"element {number}", first, second, self.resistance)]
        parts: list[Part] = []
        if self.series_resistance is not None:
            inner = f"inside element {number}"
            name = f"series resistance of element {number}"
            parts.append(Resistor(name, first, inner, self.series_resistance))
            first = inner
        if self.inductance is not None:
            return [*parts, Inductor(first, second, self.inductance)]
        assert self.capacitance is not None
        parts.append(Capacitor(first, second, self.capacitance))
        if self.leakage_resistance is not None:
            name = f"leakage of element {number}"
            parts.append(Resistor(name, first, second, self.leakage_resistance))
        return parts


class Ladder(NetworkStage):
    """A ladder of series and shunt elements between a source and a load, which load each other

        V_out / V_in = 1 / (chain matrix of the whole ladder)_11.

    All poles come from the nodal equations of the whole, solved exactly; see
    docs/theory/networks.md. Source: two-port and nodal analysis, any textbook of circuits.
    """

    passive: ClassVar[bool] = True
    kind: Literal["ladder"] = "ladder"
    element: Annotated[tuple[Element, ...], Field(min_length=1, max_length=64)] = Field(
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
        sections: list[list[Element]] = []
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
