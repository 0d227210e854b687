"""A float in SI becomes text with a unit, which reads back as the same float."""

from __future__ import annotations

from decimal import Decimal

from frontend_sim.quantities.dimension import Dimension
from frontend_sim.quantities.units import PREFIXES, symbols

_LETTERS = {power.adjusted(): letter for letter, (_, power) in PREFIXES.items()} | {0: ""}


def as_text(value: float, dimension: Dimension, digits: int | None = None) -> str:
    """Return a value with its unit, ``"4.7 nF"``, the exponent a multiple of three.

    Parameters
    ----------
    value : in ``dimension.unit``
    digits : significant digits; left out, as many as give back the very same float
    """
    number = Decimal(repr(float(value)) if digits is None else f"{float(value):.{digits}g}")
    unit = dimension.unit
    exponent = 0
    if unit in symbols() and symbols()[unit].unit.prefixed and number != 0:
        exponent = min(max(number.adjusted() // 3 * 3, min(_LETTERS)), max(_LETTERS))
        unit = _LETTERS[exponent] + unit
    shifted = number.scaleb(-exponent).normalize()
    plain = -6 <= shifted.adjusted() < 15
    return f"{shifted:f} {unit}".rstrip() if plain else f"{shifted} {unit}".rstrip()
