"""The RKM code of IEC 60062: a letter stands in place of the decimal point."""

from __future__ import annotations

import re
from decimal import Decimal

from frontend_sim.errors import QuantityError

_CODE = re.compile(r"([0-9]*)([A-Za-z\u00b5\u03bc])([0-9]*)([A-Z]?)")

# From memory, the standard was not at hand; lower-case k is common practice.
_MICRO = dict.fromkeys("u\u00b5\u03bc", "1e-6")  # the sign and the Greek letter
_LETTERS: dict[str, dict[str, str]] = {
    "ohm": {"L": "1e-3", "R": "1", "K": "1e3", "k": "1e3", "M": "1e6", "G": "1e9", "T": "1e12"},
    "F": {"p": "1e-12", "n": "1e-9", **_MICRO, "m": "1e-3", "F": "1"},
    "H": {"n": "1e-9", **_MICRO, "m": "1e-3", "H": "1"},
}


def read(text: str, unit: str) -> Decimal | None:
    """Return the value of an RKM code (``4k7``, ``R47``, ``100n``), or None if it is none.

    Parameters
    ----------
    unit : ``ohm``, ``F`` or ``H``; other units have no code

    Raises
    ------
    QuantityError
        If the code carries a letter for the tolerance, or the letter is written in the wrong case.
    """
    match = _CODE.fullmatch(text)
    letters = _LETTERS.get(unit)
    if match is None or letters is None:
        return None
    whole, letter, fraction, tolerance = match.groups()
    if not (whole or fraction) or letter + tolerance == letter + unit:
        return None
    if letter not in letters:
        other = letter.swapcase()
        if other in letters and fraction:
            raise QuantityError(f'the letter is {other!r} here: "{whole}{other}{fraction}"')
        return None
    if tolerance:
        raise QuantityError(
            f"it carries the tolerance letter {tolerance!r} of IEC 60062, which is not read here; "
            f'write "{text[:-1]}"'
        )
    return Decimal(f"{whole or '0'}.{fraction or '0'}") * Decimal(letters[letter])
