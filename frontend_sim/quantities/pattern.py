"""Regular expressions for editors: what text may stand for a quantity of some dimension.

Everything that ``reading.parse`` takes matches. Of what it refuses, the pattern refuses what is
most often written: a unit of something else, a missing unit, a decimal comma, words. Products of
units are not worked out. The expressions are in the dialect that JSON Schema asks for (ECMA 262).
"""

from __future__ import annotations

import re
from functools import cache

from frontend_sim.quantities.dimension import Dimension
from frontend_sim.quantities.units import PREFIXES, SHARES, UNITS, Unit, symbols

_DIGITS = r"[0-9]+(?:_[0-9]+)*"
_NUMBER = rf"[+\-\u2212]?(?:{_DIGITS}(?:\.(?:{_DIGITS})?)?|\.{_DIGITS})(?:[eE][+\-\u2212]?[0-9]+)?"
_SIGN = r"A-Za-z%\u00b0\u2030\u03a9\u2126\u00b5\u03bc\u221a("
"""What the name of a unit, or a product of some, may begin with."""

_BETWEEN = r"*/^\u00b7\u22c5\u00d7\u207b\u2070\u00b9\u00b2\u00b3\u2074"
_MORE = rf"(?:[{_BETWEEN}][\s\S]*|\s\S[\s\S]*|\([\s\S]*)"
_PRODUCT = rf"(?:1\s*/[\s\S]+|[{_SIGN}][\s\S]*{_MORE})"
"""A product, a quotient or a power: more than letters alone."""

_CODES = {
    "ohm": r"[-\u2212]?(?:[0-9]+[LRKkMGT][0-9]*|[LRKkMGT][0-9]+)[A-Z]?",
    "F": r"[-\u2212]?(?:[0-9]+[pnumF\u00b5\u03bc][0-9]*|[pnumF\u00b5\u03bc][0-9]+)[A-Z]?",
    "H": r"[-\u2212]?(?:[0-9]+[numH\u00b5\u03bc][0-9]*|[numH\u00b5\u03bc][0-9]+)[A-Z]?",
}
"""The codes of IEC 60062, by the unit of the part."""

_NOUNS = {"m/s^2": "acceleration"}
"""What a product of units measures, where a single unit measures it too."""

_LETTERS = "|".join(
    [f"[{''.join(PREFIXES)}\u00b5\u03bc]", *(name for name, _ in PREFIXES.values())]
)


@cache
def pattern(dimension: Dimension) -> str:
    """Return the regular expression of text for a dimension."""
    unit = dimension.unit
    if unit == "":
        units = "|".join(["", "dB", *(re.escape(share) for share in SHARES if share)])
    elif unit in ("dB", "LSB", "bit"):
        units = f"|{unit}s?"
    else:
        units = "|".join(_written(row) for row in _fitting(unit))
    number = rf"{_NUMBER}\s*(?:{units}|{_PRODUCT})" if units else rf"{_NUMBER}\s*{_PRODUCT}"
    code = f"|{_CODES[unit]}" if unit in _CODES else ""
    return rf"^\s*(?:{number}{code})\s*$"


def _fitting(unit: str) -> list[Unit]:
    """Return the rows of the table of units that measure the same."""
    symbol = symbols().get(unit)
    noun = _NOUNS.get(unit) if symbol is None else symbol.unit.noun
    return [row for row in UNITS if row.noun == noun]


def _written(row: Unit) -> str:
    """Return every way to write a unit of the table, its prefixes included."""
    names = [*row.symbols, row.name, f"{row.name}s"]
    if row.name == "turn":
        names += ["rev", "revolution"]
    names += [name.replace("\u03a9", "\u2126") for name in names if "\u03a9" in name]
    names += [f"{sign}{name[1:]}" for name in names if name == "ug" for sign in "\u00b5\u03bc"]
    choice = "|".join(re.escape(name) for name in names)
    return rf"(?:{_LETTERS})?(?:{choice})" if row.prefixed else f"(?:{choice})"
