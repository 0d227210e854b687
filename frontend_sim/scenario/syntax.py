"""What is wrong with a text that is no TOML."""

from __future__ import annotations

import re

from frontend_sim.errors import Problem

_PLACE = re.compile(r"\s*\((?:at line (\d+), column (\d+)|at end of document)\)")
_PAIR = re.compile(r"""\s*([\w."'-]+)\s*=\s*([^"'#\[{]*?)\s*(?:\#.*)?""")

_UNCLOSED = "a text is not closed; its second quote is missing"


def syntax_problem(text: str, error: ValueError) -> Problem:
    """Return where a text stops being TOML, and what to write instead.

    Parameters
    ----------
    error : what ``tomllib`` raised; it is a ValueError, not its own kind, for endless numbers
    """
    rows = text.split("\n")
    digits = next((n for n, row in enumerate(rows, 1) if re.search(r"[0-9_]{1000}", row)), None)
    if "integer string conversion" in str(error):
        return Problem("a number of more than a thousand digits", line=digits)
    quote = re.search(r"Expected [\"']('+)[\"']|Unterminated string", str(error))
    if quote is not None:  # the reader noticed at the end of the file: the last one has no second
        start = text.rfind(quote[1] or '"""')
        return Problem(_UNCLOSED, line=text.count("\n", 0, start) + 1 if start >= 0 else None)
    match = _PLACE.search(str(error))
    reason = _PLACE.sub("", str(error)).strip()
    line = int(match[1]) if match and match[1] else _last_line(rows)
    row = rows[line - 1] if 0 < line <= len(rows) else ""
    return Problem(_advice(reason, row.rstrip("\r")) or f"not TOML: {_lowered(reason)}", line=line)


def _last_line(rows: list[str]) -> int:
    return max((number for number, row in enumerate(rows, start=1) if row.strip()), default=1)


def _lowered(reason: str) -> str:
    return reason[:1].lower() + reason[1:]


def _advice(reason: str, row: str) -> str:
    """Return what to do about the usual slips, or nothing."""
    if "overwrite" in reason or "Duplicate" in reason or "mutate" in reason:
        key = row.split("=")[0].strip() if "=" in row else "a key"
        return f"{key} is given twice, or both as a value and as a table; keep one of them"
    if "twice" in reason:
        return f"the table {row.strip()} stands twice; join the two, or write [[...]] for an array"
    if "\\" in row and re.search(r"Unescaped|hex value|escape", reason):
        return (
            "a backslash between double quotes begins an escape; write a path with '/', or "
            "between single quotes"
        )
    if r"Illegal character '\n'" in reason:
        return _UNCLOSED
    match = _PAIR.fullmatch(row)
    if match is not None:
        return _advice_on_value(*match.groups())
    if "=" not in row and not row.lstrip().startswith("["):
        return f"expected key = value, or a [table], found {row.strip()[:60]!r}"
    return ""


def _advice_on_value(key: str, value: str) -> str:
    if value == "":
        return f"the value of {key} is missing"
    if value.casefold() in ("true", "false"):
        return f"write {key} = {value.casefold()}, in lower case"
    if re.fullmatch(r"[+-]?\d+,\d+", value):
        return f"write the decimal point as '.': {key} = {value.replace(',', '.')}"
    if re.match(r"[+-]?[\d.]", value) and re.search(r"[^\W\d_]|[%°]", value):
        return f'a value with a unit is text and needs quotes: {key} = "{value}"'
    if re.match(r"[^\W\d_]", value):
        return f'text needs quotes: {key} = "{value}"'
    return ""
