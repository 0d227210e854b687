"""Numbers as engineers write them: three digits, a prefix of the SI, the unit."""

from __future__ import annotations

import math
from decimal import ROUND_HALF_EVEN, Context, Decimal

from frontend_sim.quantities import SignalUnit
from frontend_sim.quantities.units import PREFIXES, symbols

_LETTERS = {0: ""} | {power.adjusted(): letter for letter, (_, power) in PREFIXES.items()}


def rounded(value: float, digits: int) -> Decimal:
    """Return a finite value with so many significant digits, halves to the even neighbour.

    The decision falls on the shortest decimal text of the float, which is what a reader sees:
    2.675 with three digits is 2.68, though the float lies a little below.
    """
    return Context(prec=digits, rounding=ROUND_HALF_EVEN).create_decimal(repr(float(value)))


def engineering(value: float, unit: str, digits: int = 3) -> str:
    """Return a value with a prefix of the SI, ``"4.70 kHz"``, ``"12.3 us"``.

    Parameters
    ----------
    value : in ``unit``; what is not finite is written as a word, without a unit
    unit : unit that takes prefixes
    digits : significant digits, trailing zeros kept
    """
    if not math.isfinite(value):
        return _not_finite(value)
    if value == 0.0:
        return f"0 {unit}"
    number = rounded(value, digits)
    exponent = min(max(number.adjusted() // 3 * 3, min(_LETTERS)), max(_LETTERS))
    return f"{_digits(number.scaleb(-exponent), digits)} {_LETTERS[exponent]}{unit}"


def quantity(value: float, unit: str, digits: int = 3) -> str:
    """Return a value of a signal, with a prefix where its unit takes one.

    Parameters
    ----------
    value : in ``unit``; a temperature is a difference
    unit : of a signal, without a prefix of its own; empty for a share
    """
    if takes_prefix(unit):
        return engineering(value, unit, digits)
    return f"{plain(value, digits)} {unit}".rstrip()


def takes_prefix(unit: str) -> bool:
    """Return whether a unit is written with prefixes; nobody writes millikelvin of a signal."""
    known = symbols().get(unit)
    return known is not None and known.unit.prefixed and unit != "K"


def level(value: float, unit: SignalUnit, digits: int = 3) -> str:
    """Return a value of a signal, in SI, in a unit of it: ``"25.0 degC"``."""
    return quantity(unit.number(value), unit.name, digits)


def difference(value: float, unit: SignalUnit, digits: int = 3) -> str:
    """Return a difference of two values of a signal, in SI, in a unit of it: ``"5.00 K"``."""
    return quantity(unit.number_of_difference(value), unit.difference, digits)


def per_unit(unit: str) -> str:
    """Return the unit of volts for one of a unit: ``V/V``, ``V/(m/s^2)``, ``V/g``."""
    return f"V/({unit})" if "/" in unit else f"V/{unit}" if unit else "V"


def plain(value: float, digits: int = 4) -> str:
    """Return a value without a prefix, ``"0.7071"``; far from one with a power of ten."""
    if not math.isfinite(value):
        return _not_finite(value)
    if value == 0.0:
        return "0"
    return _digits(rounded(value, digits), digits)


def fixed(value: float, decimals: int, unit: str = "") -> str:
    """Return a value with so many decimals and a unit, ``"10.83 %"``, ``"-3.01 dB"``."""
    if not math.isfinite(value):
        return _not_finite(value)
    step = Decimal(1).scaleb(-decimals)
    wide = Context(prec=400, rounding=ROUND_HALF_EVEN)
    number = Decimal(repr(float(value))).quantize(step, context=wide)
    # What rounds to zero has no sign.
    text = f"{abs(number) if number == 0 else number:f}"
    return f"{text} {unit}".rstrip()


def prefix_of(largest: float) -> tuple[float, str]:
    """Return (factor, letter) for an axis whose largest value is given: 0.02 s -> (1e3, "m")."""
    if not math.isfinite(largest) or largest == 0.0:
        return 1.0, ""
    exponent = rounded(abs(largest), 3).adjusted() // 3 * 3
    exponent = min(max(exponent, min(_LETTERS)), max(_LETTERS))
    return float(Decimal(1).scaleb(-exponent)), _LETTERS[exponent]


def _digits(number: Decimal, digits: int) -> str:
    """Write significant digits, trailing zeros kept; far from one with a power of ten."""
    exponent = number.adjusted()
    if not -4 <= exponent < max(digits, 6):
        return f"{number:.{digits - 1}e}"
    return f"{number:.{max(digits - 1 - exponent, 0)}f}"


def _not_finite(value: float) -> str:
    if math.isnan(value):
        return "nan"
    return "infinite" if value > 0.0 else "-infinite"
