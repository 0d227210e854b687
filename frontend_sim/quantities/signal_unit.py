"""The unit in which a reader is told values of a signal: the one that the file has for it."""

from __future__ import annotations

import re
from dataclasses import dataclass
from decimal import Decimal

from frontend_sim.quantities.level import SIGNALS
from frontend_sim.quantities.unit_factor import factor
from frontend_sim.quantities.units import SHARES, spell, symbols, zero_of

_UNIT = re.compile(r"[^\d\s.]\D*$")
"""What stands behind the number; a product of units has digits in it, or is none of one symbol."""


@dataclass(frozen=True)
class SignalUnit:
    """A unit without prefix, and how large it is: a value in SI is zero + size · number.

    Parameters
    ----------
    name : ``g``, ``bar``, ``degC``; empty for a share
    si : SI unit of the signal, a key of ``SIGNALS``
    size, zero : in the SI unit
    """

    name: str
    si: str
    size: float = 1.0
    zero: float = 0.0

    @classmethod
    def of(cls, si: str, written: str = "") -> SignalUnit:
        """Return the unit that a text is written in, ``"500 mbar"``, without its prefix.

        Left out, or of another signal, it is the SI unit; of temperatures degC.
        """
        return _written(si, written) or (_written(si, "degC") if si == "K" else None) or cls(si, si)

    @property
    def difference(self) -> str:
        """Name of the unit that differences are in: kelvin, where values are in degC."""
        return "K" if self.name == "degC" else self.name

    def number(self, value: float) -> float:
        """Return a value of the signal, in SI, as a number of this unit."""
        return (value - self.zero) / self.size

    def number_of_difference(self, value: float) -> float:
        """Return a difference of two values, in SI, as a number of this unit."""
        return value / self.size


def _written(si: str, text: str) -> SignalUnit | None:
    match = _UNIT.search(text.strip())
    unit = spell(match.group()) if match else ""
    if si == "" and unit in SHARES:
        return SignalUnit(unit, si, float(Decimal(SHARES[unit])))
    symbol = symbols().get(unit)
    if symbol is None or not si or symbol.unit.noun != SIGNALS[si].name:
        return None
    name = next(iter(symbol.unit.symbols), symbol.unit.name)
    size = float(factor(name, si))
    scale = zero_of(name)
    zero = 0.0 if scale is None else float(scale[0] * scale[1] / scale[2])
    return SignalUnit(name, si, size, zero)
