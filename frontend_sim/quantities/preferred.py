"""Preferred numbers of resistors and capacitors: the E series of IEC 60063."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cache

from frontend_sim.errors import QuantityError, nearest

_E24 = (
    10, 11, 12, 13, 15, 16, 18, 20, 22, 24, 27, 30,
    33, 36, 39, 43, 47, 51, 56, 62, 68, 75, 82, 91,
)  # fmt: skip

SERIES = ("E3", "E6", "E12", "E24", "E48", "E96", "E192")

ROUNDING = 1e-9
"""Relative difference up to which a value counts as a member of a series."""


@dataclass(frozen=True)
class Preferred:
    """A value among the members of a series.

    Parameters
    ----------
    nearest : member nearest by ratio; of two equally near ones the larger
    below, above : largest member not above the value, and smallest not below it
    """

    nearest: float
    below: float
    above: float

    @property
    def member(self) -> bool:
        """Whether the value is a member itself."""
        return self.below == self.above


@cache
def mantissas(series: str) -> tuple[int, ...]:
    """Return the members of a series in the decade from 100 on.

    Up to E24 the numbers are tabulated: they are older than the rule. From E48 on they follow it,
    100 · 10^(i/N) rounded to three digits, but for one: E192 has 920 where the rule gives 919.
    Source: IEC 60063, from memory, the standard was not at hand.

    Raises
    ------
    QuantityError
        If there is no such series.
    """
    if series not in SERIES:
        raise QuantityError(f"there is no series {series!r}{nearest(series, SERIES)}")
    count = int(series[1:])
    if count <= 24:
        return tuple(10 * number for number in _E24[:: 24 // count])
    by_rule = (round(100.0 * 10.0 ** (i / count)) for i in range(count))
    return tuple(920 if number == 919 else number for number in by_rule)


def preferred(value: float, series: str) -> Preferred:
    """Return the members of a series around a value.

    Parameters
    ----------
    value : above 0, in any unit
    series : ``E3``, ``E6``, ``E12``, ``E24``, ``E48``, ``E96`` or ``E192``

    Returns
    -------
    Preferred : nearest member, and those below and above

    Raises
    ------
    QuantityError
        If the value is not above zero and finite, or there is no such series.

    Examples
    --------
    >>> preferred(4.8e3, "E24").nearest
    4700.0
    """
    if not 0.0 < value < math.inf:
        raise QuantityError(f"preferred numbers are above 0; given {value:g}")
    decade = math.floor(math.log10(value))
    members = [
        float(f"{mantissa}e{power - 2}")
        for power in (decade - 1, decade, decade + 1)
        for mantissa in mantissas(series)
    ]
    below = max(member for member in members if member <= value * (1.0 + ROUNDING))
    above = min(member for member in members if member >= value * (1.0 - ROUNDING))
    return Preferred(above if value / below >= above / value else below, below, above)
