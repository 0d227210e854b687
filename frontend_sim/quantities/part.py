"""The value of a part, with the spread that its maker allows."""

from __future__ import annotations

from frontend_sim.quantities.dimension import Bounds

REFERENCE_TEMPERATURE = 298.15
"""Temperature at which parts have their nominal values, 25 degrees Celsius [K]."""

TOLERANCE = Bounds(least=0.0, below=1.0)
"""A tolerance is a share from 0 to below 1, to either side."""


class Part(float):
    """A nominal value that knows its spread; everywhere else it is the plain number.

    At a temperature T the value is nominal · (1 + drift (T - 298.15 K)); of parts of the same kind
    the nominal value itself lies between nominal · (1 - tolerance) and nominal · (1 + tolerance).
    Two parts are equal if value and spread are; a part with a spread equals no plain number.

    Parameters
    ----------
    value : nominal value in SI
    tolerance : largest deviation to either side, as a share of the nominal value [1]
    drift : relative change with temperature [1/K]
    series : preferred-number series that the nominal value is from, such as ``E24``, or ""
    """

    __slots__ = ("drift", "series", "tolerance")
    tolerance: float
    drift: float
    series: str

    def __new__(
        cls, value: float, tolerance: float = 0.0, drift: float = 0.0, series: str = ""
    ) -> Part:
        """Make a part from its nominal value and spread."""
        part = super().__new__(cls, value)
        part.tolerance, part.drift, part.series = float(tolerance), float(drift), series
        return part

    @property
    def nominal(self) -> float:
        """The plain number."""
        return float(self)

    @property
    def lowest(self) -> float:
        """Smallest value within the tolerance, at the reference temperature."""
        return float(self) - abs(float(self)) * self.tolerance

    @property
    def highest(self) -> float:
        """Largest value within the tolerance, at the reference temperature."""
        return float(self) + abs(float(self)) * self.tolerance

    def at(self, temperature: float) -> float:
        """Return the nominal value at a temperature [K]."""
        return float(self) * (1.0 + self.drift * (temperature - REFERENCE_TEMPERATURE))

    def plain(self) -> dict[str, float | str]:
        """Return value and spread as plain data; what is not there is left out."""
        kept = (("tolerance", self.tolerance), ("drift", self.drift), ("series", self.series))
        return {"value": float(self), **{key: item for key, item in kept if item}}

    def _key(self) -> tuple[float, float, float, str]:
        return (float(self), self.tolerance, self.drift, self.series)

    def __eq__(self, other: object) -> bool:
        """Return whether value and spread are the same."""
        if isinstance(other, Part):
            return self._key() == other._key()
        if self.tolerance or self.drift or self.series:
            return False
        return float(self) == other

    def __ne__(self, other: object) -> bool:
        """Return whether value or spread differ; float would compare the values alone."""
        return not self == other

    def __hash__(self) -> int:
        """Return the hash of value and spread, that of the number where there is no spread."""
        spread = self.tolerance or self.drift or self.series
        return hash(self._key()) if spread else hash(float(self))

    def __repr__(self) -> str:
        """Return ``Part(10000.0, tolerance=0.01)``."""
        told = [f"{key}={item!r}" for key, item in self.plain().items() if key != "value"]
        return f"Part({', '.join([repr(float(self)), *told])})"

    def __reduce__(self) -> tuple[type[Part], tuple[float, float, float, str]]:
        """Return what makes the part again, for copies and other processes."""
        return Part, self._key()
