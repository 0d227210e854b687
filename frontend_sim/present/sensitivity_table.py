"""What moves the checks of a scenario, for the terminal."""

from __future__ import annotations

from typing import TYPE_CHECKING

from frontend_sim.present.numbers import fixed, plain
from frontend_sim.present.result_table import SIGNS, quantity

if TYPE_CHECKING:
    from rich.console import RenderableType
    from rich.table import Table

    from frontend_sim.measure.sensitivity import CheckSensitivity, Sensitivity

LEGEND = (
    "normalized: (dv/v) / (dp/p), of levels in dB and of bits that of the ratio they stand for; "
    "1 % more: what it adds to the margin; tolerance: what it can cost of the margin"
)

NEGLIGIBLE = 1e-5
"""A parameter of a smaller normalized derivative is named without a row of its own."""


def sensitivity_tables(found: tuple[CheckSensitivity, ...]) -> tuple[RenderableType, ...]:
    """Return, for each check, a table of what moves it, the strongest first, and what does not."""
    from rich.text import Text

    shown: list[RenderableType] = [Text(LEGEND)]
    for each in found:
        rows = strongest(each)
        if rows:
            shown.append(_table(each, rows))
        else:
            shown.append(Text(f"{_title(each)}: {nothing(each)}"))
        shown += [
            Text(f"not resolved: {row.parameter.key}: {row.slope.reason}")
            for row in each.rows
            if not row.resolved
        ]
        idle = [row.parameter.key for row in each.rows if row.resolved and row not in rows]
        if idle:
            shown.append(Text(f"changed a little, without effect: {', '.join(idle)}"))
    return tuple(shown)


def strongest(found: CheckSensitivity) -> list[Sensitivity]:
    """Return the parameters that move a check by more than next to nothing."""
    largest = max((abs(row.slope.value or 0.0) for row in found.rows), default=0.0)
    return [row for row in found.rows if abs(row.slope.value or 0.0) > NEGLIGIBLE * largest]


def nothing(found: CheckSensitivity) -> str:
    """Return what to say of a check that no parameter is known to move."""
    known = any(row.resolved for row in found.rows)
    return "nothing that was changed moves it" if known else "no derivative is known"


def _title(found: CheckSensitivity) -> str:
    result = found.result
    if result.limit is None:
        return f"{found.name}: {result.method}"
    value, limit = _number(result.value, result.unit), _number(result.limit, result.unit)
    sign = SIGNS.get(result.bound, "")
    return f"What moves {found.name}: {value}, {sign}{limit}, {result.verdict}"


def _table(found: CheckSensitivity, rows: list[Sensitivity]) -> Table:
    from rich.table import Table
    from rich.text import Text

    unit = found.result.unit
    spread = any(row.per_tolerance is not None for row in rows)
    table = Table(title=Text(_title(found)), title_justify="left")
    table.add_column("key", overflow="fold")
    for name in ("now", "normalized", "1 % more", "of margin"):
        table.add_column(name, justify="right")
    if spread:
        table.add_column("tolerance", justify="right")
    for row in rows:
        more = ", 1 more" if row.parameter.whole else ""
        cells: list[Text | str] = [
            Text(row.parameter.key),
            row.parameter.text(),
            "" if row.normalized is None else f"{row.normalized:+.3g}",
            _signed(row.per_percent, unit) + more,
            _share(row.share_per_percent),
        ]
        if spread:
            cells.append("" if row.per_tolerance is None else _number(row.per_tolerance, unit))
        table.add_row(*cells)
    return table


def _signed(value: float | None, unit: str) -> str:
    if value is None:
        return ""
    return f"{'+' if value > 0.0 else '-'}{_number(abs(value), unit)}"


def _share(value: float | None) -> str:
    if value is None:
        return ""
    return f"{'+' if value > 0.0 else ''}{fixed(100.0 * value, 2, '%')}"


def _number(value: float | None, unit: str) -> str:
    if value is None:
        return "none"
    return f"{plain(100.0 * value, 3)} %" if unit in ("", "1") else quantity(value, unit)
