"""One element of a ladder."""

from __future__ import annotations

from typing import Literal, Self

from pydantic import Field, model_validator

from frontend_sim.analog.network import Capacitor, Inductor, Part, Resistor
from frontend_sim.quantities import Capacitance, Inductance, Resistance
from frontend_sim.values import Value

VALUES = ("resistance", "inductance", "capacitance")
"""Keys of which an element has one."""


class LadderElement(Value):
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
