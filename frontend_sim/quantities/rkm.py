"""The RKM code of IEC 60062: a letter stands in place of the decimal point."""

from __future__ import annotations

import re
from decimal import Decimal
from typing import NamedTuple

from frontend_sim.errors import QuantityError

_CODE = re.compile(r"(-?)([0-9]*)([A-Za-z\u00b5\u03bc])([0-9]*)([A-Z]?)")

# From memory, the standard was not at hand; lower-case k is common practice.
_MICRO = dict.fromkeys("u\u00b5\u03bc", "1e-6")  # the sign and the Greek letter
_LETTERS: dict[str, dict[str, str]] = {
    "ohm": {"L": "1e-3", "R": "1", "K": "1e3", "k": "1e3", "M": "1e6", "G": "1e9", "T": "1e12"},
    "F": {"p": "1e-12", "n": "1e-9", **_MICRO, "m": "1e-3", "F": "1"},
    "H": {"n": "1e-9", **_MICRO, "m": "1e-3", "H": "1"},
}


TOLERANCES = {
    "E": "0.00005", "L": "0.0001", "P": "0.0002", "W": "0.0005", "B": "0.001", "C": "0.0025",
    "D": "0.005", "F": "0.01", "G": "0.02", "H": "0.03", "J": "0.05", "K": "0.1", "M": "0.2",
    "N": "0.3",
}  # fmt: skip
"""Letters for symmetric tolerances in IEC 60062, as shares; from memory."""

SMALL = Decimal("1e-11")
"""Below this capacitance the letters mean picofarads [F]."""

_IN_PICOFARADS = {"B": "0.1e-12", "C": "0.25e-12", "D": "0.5e-12", "F": "1e-12", "G": "2e-12"}


class Code(NamedTuple):
    """What a code says: a value, and a tolerance as a share, 0 where it has none."""

    value: Decimal
    tolerance: Decimal


def read(text: str, unit: str) -> Code | None:
    """Return what an RKM code says (``4k7``, ``R47``, ``100n``, ``4k7J``), or None if it is none.

    A sign is read, so that a negative part is refused for what it is.

    Parameters
    ----------
    unit : ``ohm``, ``F`` or ``H``; other units have no code

    Raises
    ------
    QuantityError
        If the letter is written in the wrong case, the tolerance is unknown or not symmetric, or
        its letter could as well be the unit.
    """
    match = _CODE.fullmatch(text)
    letters = _LETTERS.get(unit)
    if match is None or letters is None:
        return None
    sign, whole, letter, fraction, tolerance = match.groups()
    if not (whole or fraction) or (tolerance == unit and not fraction):  # "100nF" has a unit
        return None
    if letter not in letters:
        other = letter.swapcase()
        if other in letters and fraction:
            raise QuantityError(f'the letter is {other!r} here: "{sign}{whole}{other}{fraction}"')
        return None
    if tolerance == unit:
        raise QuantityError(
            f"the {unit} at its end may be the unit or the letter for a tolerance; write "
            f'"{text[:-1]}" or {{ value = "{text[:-1]}", tolerance = "{_percent(unit)}" }}'
        )
    value = Decimal(f"{sign}{whole or '0'}.{fraction or '0'}") * Decimal(letters[letter])
    return Code(value, _tolerance(tolerance, value, unit))


def _tolerance(letter: str, value: Decimal, unit: str) -> Decimal:
    if not letter:
        return Decimal(0)
    if unit == "F" and 0 < value < SMALL and letter in _IN_PICOFARADS:
        return Decimal(_IN_PICOFARADS[letter]) / value
    if letter in TOLERANCES:
        return Decimal(TOLERANCES[letter])
    raise QuantityError(
        f"{letter!r} is no letter for a tolerance that is read here; known are "
        f"{', '.join(sorted(TOLERANCES))}"
    )


def _percent(letter: str) -> str:
    return f"{Decimal(TOLERANCES[letter]) * 100:f} %".replace(".00 ", " ")
