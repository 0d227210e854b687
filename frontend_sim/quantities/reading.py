"""Text with a unit becomes a float in SI.

The arithmetic is decimal and unrounded until the last step, so ``"9.1 ms"`` becomes the float
nearest to 0.0091 and events meet conversion instants exactly.
"""

from __future__ import annotations

import datetime
import math
import re
from decimal import Context, Decimal
from numbers import Real

from frontend_sim.errors import QuantityError
from frontend_sim.quantities import rkm
from frontend_sim.quantities.counting import counted
from frontend_sim.quantities.dimension import RATIO, Dimension
from frontend_sim.quantities.part import Part
from frontend_sim.quantities.unit_factor import factor
from frontend_sim.quantities.units import zero_of

_DIGITS = r"[0-9]+(?:_[0-9]+)*"
_NUMBER = re.compile(
    rf"([+-]?(?:{_DIGITS}(?:\.(?:{_DIGITS})?)?|\.{_DIGITS})(?:[eE][+-]?[0-9]+)?)\s*(.*)", re.S
)
_LONGEST = 100
"""A text longer than this is no quantity."""

_EXACT = Context(prec=4 * _LONGEST, Emin=-999999, Emax=999999, traps=[])
"""No product of two such numbers is rounded; what overflows becomes infinite."""


def shown(value: object) -> str:
    """Return a value as a file would show it, short enough for a message."""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        cut = value if len(value) <= 60 else f"{value[:57]}..."
        escaped = cut.replace("\\", "\\\\").replace('"', '\\"')
        return '"' + "".join(c if c.isprintable() else repr(c)[1:-1] for c in escaped) + '"'
    if isinstance(value, (datetime.date, datetime.time)):
        return f"the date or time {value.isoformat()}"
    if isinstance(value, (list, tuple)):
        if len(value) <= 4 and not any(isinstance(item, (list, tuple, dict)) for item in value):
            return f"[{', '.join(shown(item) for item in value)}]"
        return f"an array of {counted(len(value), 'item')}"
    if isinstance(value, dict):
        return "a table"
    if isinstance(value, int) and abs(value) >= 10**20:
        return "a number of more than 20 digits"
    return str(value)


def parse(value: object, dimension: Dimension) -> float:
    """Read one quantity into its SI unit.

    Parameters
    ----------
    value
        Text with a unit, RKM code for parts, or a bare number which is taken as SI.
    dimension
        What is expected.

    Returns
    -------
    The value in ``dimension.unit``; a ``Part`` where an RKM code tells a tolerance.

    Raises
    ------
    QuantityError
        If the text is no number with a unit, the unit is unknown or of another dimension, or the
        number is not finite or beyond any magnitude of its dimension. The message tells what was
        given and what was expected.
    """
    if isinstance(value, bool) or not isinstance(value, (Real, Decimal, str)):
        raise QuantityError(f"given {shown(value)}; expected {dimension.expected}")
    try:
        number = _of_text(value.strip(), dimension) if isinstance(value, str) else _of(value)
        _check_magnitude(number, dimension)
    except QuantityError as error:
        error = _per_kelvin(value, dimension) or error
        stop = " Expected" if str(error).endswith("?") else "; expected"
        raise QuantityError(f"given {shown(value)}: {error}{stop} {dimension.expected}") from None
    return number


def _per_kelvin(value: object, dimension: Dimension) -> QuantityError | None:
    """Return what to say of a drift whose unit lacks the kelvin, ``"50 ppm"``; else None."""
    if not isinstance(value, str) or not dimension.unit.endswith("/K"):
        return None
    wanted = f"{value.strip()}/K"
    try:
        _of_text(wanted, dimension)
    except QuantityError:
        return None
    return QuantityError(f'a drift is per kelvin; write "{wanted}", if that is meant')


def _of(value: Real | Decimal) -> float:
    try:
        return float(value)
    except OverflowError:
        return math.inf


def _check_magnitude(number: float, dimension: Dimension) -> None:
    if not math.isfinite(number):
        raise QuantityError("not a finite number")
    suffix = f" {dimension.unit}" if dimension.unit else ""
    if abs(number) > dimension.largest:
        raise QuantityError(f"beyond the largest {dimension.name}, {dimension.largest:g}{suffix}")
    if 0.0 < abs(number) < dimension.smallest:
        raise QuantityError(
            f"below the smallest {dimension.name} other than zero, {dimension.smallest:g}{suffix}"
        )


def _of_text(text: str, dimension: Dimension) -> float:
    if len(text) > _LONGEST:
        raise QuantityError("too long for a number with a unit")
    text = text.replace("\u2212", "-")  # the sign for minus
    code = rkm.read(text, dimension.unit)
    if code is not None:
        value = float(code.value)
        return Part(value, float(code.tolerance)) if code.tolerance else value
    match = _NUMBER.fullmatch(text)
    if match is None:
        raise QuantityError(_why_no_number(text))
    digits, unit = match.groups()
    _refuse_more_digits(digits, unit)
    number = _EXACT.create_decimal(digits.replace("_", ""))
    if unit == "dB" and dimension is RATIO:
        return _from_decibel(number)
    if dimension.unit in ("dB", "LSB"):
        if unit not in ("", dimension.unit):
            raise QuantityError(f"{unit!r} is not {dimension.unit}")
        return float(number)
    if unit == "" and dimension.unit != "":
        raise QuantityError(
            f'the unit is missing; write "{text} {dimension.unit}", or the bare number without '
            f"quotes for {dimension.unit}"
        )
    zero = zero_of(unit) if dimension.absolute else None
    if zero is not None:
        above, numerator, denominator = zero
        kelvin = _EXACT.multiply(_EXACT.add(number, above), numerator)
        return float(_EXACT.divide(kelvin, denominator))
    return float(_EXACT.multiply(number, factor(unit, dimension.unit)))


def _from_decibel(level: Decimal) -> float:
    if not abs(level) <= 6000:
        raise QuantityError("beyond any ratio")
    return float(Decimal(10) ** (level / 20))


def _why_no_number(text: str) -> str:
    if text == "":
        return "the text is empty"
    if re.match(r"[+-]?(?:nan|inf)", text, re.I):
        return "not a finite number"
    if re.fullmatch(r"[A-Za-z\u00b5\u03bc\u2126Ω°%/]+", text):
        return "the number is missing"
    return "not a number with a unit"


def _refuse_more_digits(digits: str, unit: str) -> None:
    """Refuse what reads like more of the number after its end: commas, groups, arithmetic."""
    if re.match(r",[0-9]", unit):
        if re.match(r",[0-9]{3}(?![0-9])", unit):
            whole = digits + "".join(re.findall(r"(?<=,)[0-9]{3}", unit))
            raise QuantityError(
                f"a comma is neither a decimal point nor a separator of thousands here; write "
                f"{whole} or {digits}.{unit[1:4]}"
            )
        raise QuantityError(f"write the decimal point as '.': \"{digits}.{unit[1:]}\"")
    if re.match(r"['’.]?[0-9]", unit) and not re.match(r"1\s*/", unit):
        raise QuantityError("write the digits of a number without gaps, or with '_' between them")
    if re.match(r"[-+*/^±]", unit):
        raise QuantityError("write one number and its unit; nothing is worked out here")
