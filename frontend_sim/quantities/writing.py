"""A float in SI becomes text with a unit, which reads back as the same float."""

from __future__ import annotations

from decimal import Decimal

from frontend_sim.quantities.dimension import Dimension
from frontend_sim.quantities.units import PREFIXES, symbols

_LETTERS = {power.adjusted(): letter for letter, (_, power) in PREFIXES.items()} | {0: ""}

_ZERO_CELSIUS = Decimal("273.15")
_COLD, _HOT = Decimal("1e-3"), Decimal("1e6")
"""Temperatures between these are written in degrees [K]."""


def as_share(value: float) -> str:
    """Return a share in percent, ``"1 %"``, which reads back as the same float."""
    return f"{_plain(Decimal(repr(float(value))).scaleb(2))} %"


def as_text(value: float, dimension: Dimension, digits: int | None = None) -> str:
    """Return a value with its unit, ``"4.7 nF"``, the exponent a multiple of three.

    Parameters
    ----------
    value : in ``dimension.unit``
    digits : significant digits; left out, as many as give back the very same float
    """
    unit, number = dimension.unit, Decimal(repr(float(value)))
    if dimension.absolute and _COLD <= number <= _HOT:
        unit, number = "degC", number - _ZERO_CELSIUS
    if unit == "1/K":
        unit, number = "ppm/K", number.scaleb(6)
    if digits is not None:
        number = Decimal(f"{number:.{digits}g}")
    exponent = 0
    if unit in symbols() and symbols()[unit].unit.prefixed and number != 0:
        largest = max(_LETTERS) if unit != "K" else 0  # nobody writes kilokelvin
        exponent = min(max(number.adjusted() // 3 * 3, min(_LETTERS)), largest)
        unit = _LETTERS[exponent] + unit
    return f"{_plain(number.scaleb(-exponent))} {unit}".rstrip()


def _plain(number: Decimal) -> str:
    """Return a number without trailing zeros, and without an exponent where it is short."""
    number = number.normalize()
    return f"{number:f}" if -6 <= number.adjusted() < 15 else f"{number}"
