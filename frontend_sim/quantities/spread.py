"""Values of parts as a file gives them: a quantity, or a table with its spread."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from frontend_sim.errors import QuantityError, nearest
from frontend_sim.quantities.dimension import DRIFT, FRACTION, Dimension
from frontend_sim.quantities.part import TOLERANCE, Part
from frontend_sim.quantities.preferred import SERIES, preferred
from frontend_sim.quantities.reading import parse, shown
from frontend_sim.quantities.writing import as_share, as_text

KEYS = ("value", "tolerance", "drift", "series")


class SpreadError(QuantityError):
    """One key of a part's table is wrong; ``key`` tells which."""

    def __init__(self, key: str, text: str) -> None:
        """Keep the key beside the message."""
        self.key = key
        super().__init__(text)


def parse_part(value: object, dimension: Dimension) -> float:
    """Read the value of a part: a quantity, or a table of value, tolerance, drift and series.

    Parameters
    ----------
    value : text, number, ``Part``, or a table ``{value = "10 kohm", tolerance = "1 %"}``
    dimension : of the value

    Returns
    -------
    The nominal value in ``dimension.unit``, a ``Part`` where there is a spread.

    Raises
    ------
    QuantityError
        If a quantity cannot be read; of a table, its ``SpreadError`` names the key.
    """
    if isinstance(value, Part):
        parse(float(value), dimension)
        _checked("tolerance", value.tolerance)
        return value
    if not isinstance(value, Mapping):
        part = parse(value, dimension)
        if isinstance(part, Part):
            _checked("tolerance", part.tolerance)
        return part
    return _of_table(value, dimension)


def _of_table(table: Mapping[Any, object], dimension: Dimension) -> float:
    for key in table:
        if key not in KEYS:
            raise SpreadError(str(key), f"unknown key{nearest(str(key), KEYS)}")
    if "value" not in table:
        raise QuantityError(
            f"given a table without value; write {{ value = {dimension.first_example}, "
            'tolerance = "1 %" }'
        )
    value = _parsed("value", table["value"], dimension)
    coded = value.tolerance if isinstance(value, Part) else 0.0
    tolerance = _tolerance(table["tolerance"]) if "tolerance" in table else coded
    if coded and tolerance != coded:
        raise SpreadError(
            "tolerance",
            f"given {shown(table['tolerance'])}, but the letter in the value, "
            f"{shown(table['value'])}, says {as_share(coded)}; keep one of them",
        )
    _checked("tolerance", tolerance)
    drift = _parsed("drift", table["drift"], DRIFT) if "drift" in table else 0.0
    series = _series(table["series"], float(value), dimension) if "series" in table else ""
    spread = tolerance or drift or series
    return Part(value, tolerance, drift, series) if spread else float(value)


def _parsed(key: str, value: object, dimension: Dimension) -> float:
    try:
        return parse(value, dimension)
    except QuantityError as error:
        raise SpreadError(key, str(error)) from None


def _tolerance(value: object) -> float:
    plain = value.strip().removeprefix("±") if isinstance(value, str) else value
    return _checked("tolerance", _parsed("tolerance", plain, FRACTION), value)


def _checked(key: str, tolerance: float, given: object = None) -> float:
    if TOLERANCE.complaint(tolerance, "") is not None:
        told = shown(given) if given is not None else as_share(tolerance)
        raise SpreadError(key, f"given {told}; a tolerance must be at least 0 and below 100 %")
    return tolerance


def _series(series: object, value: float, dimension: Dimension) -> str:
    if series not in SERIES:
        text = nearest(series, SERIES) if isinstance(series, str) else ""
        raise SpreadError(
            "series", f"given {shown(series)}; expected one of {', '.join(SERIES)}{text}"
        )
    if not value > 0.0:
        raise SpreadError("series", f"preferred numbers are above 0; given {value:g}")
    found = preferred(value, str(series))
    if not found.member:
        below, above = (as_text(each, dimension) for each in (found.below, found.above))
        raise SpreadError(
            "value",
            f"given {as_text(value, dimension, 9)}, which is not in series {series} of IEC 60063; "
            f"its neighbours are {below} and {above}",
        )
    return str(series)


def part_table(part: Part, dimension: Dimension) -> dict[str, str | float]:
    """Return a part as the table that a file has for it; it reads back as the same part."""
    value = as_text(part, dimension) if dimension.unit else float(part)
    table: dict[str, str | float] = {"value": value}
    if part.tolerance:
        table["tolerance"] = as_share(part.tolerance)
    if part.drift:
        table["drift"] = as_text(part.drift, DRIFT)
    if part.series:
        table["series"] = part.series
    return table
