"""What solve found, for the terminal."""

from __future__ import annotations

from typing import TYPE_CHECKING

from frontend_sim.present.numbers import engineering, plain
from frontend_sim.present.result_table import PREFIXED, SIGNS, STYLES
from frontend_sim.quantities.counting import counted

if TYPE_CHECKING:
    from rich.console import RenderableType
    from rich.table import Table
    from rich.text import Text

    from frontend_sim.measure.result import Result
    from frontend_sim.solve import PassMap, Solution, Trial

DIGITS = 6
"""Either side of a boundary differs little."""


def solution_tables(solution: Solution) -> tuple[RenderableType, ...]:
    """Return the answer in words, the checks on either side of the boundary, and all boundaries."""
    from rich.text import Text

    passes = solution.answer is not None
    style = STYLES["holds" if passes else "fails"]
    first, *others = solution.sentences()
    shown: list[RenderableType] = [Text(first, style=style), *map(Text, others)]
    if solution.answer is not None:
        shown.append(_sides(solution, solution.answer))
    elif solution.trials:
        nearest = max(solution.trials, key=lambda trial: trial.score)
        if nearest.results:
            shown.append(_alone(solution, nearest))
    if len(solution.boundaries) > 1:
        shown.append(_boundaries(solution))
    return tuple(shown)


def _sides(solution: Solution, answer: Trial) -> Table:
    from rich.text import Text

    beyond = solution.beyond
    table = _table("On either side of the boundary" if beyond else "At the bound")
    table.add_column("check")
    table.add_column("limit", justify="right")
    for trial in (answer, beyond):
        if trial is not None:
            table.add_column(f"with {solution.key.text(trial.values[0])}", justify="right")
            table.add_column("verdict")
    others = {row.name: row for row in beyond.results} if beyond else {}
    for row in answer.results:
        cells: list[str | Text] = [Text(row.name), limit(row), number(row, row.value), row.verdict]
        if beyond is not None:
            cells += _other(others.get(row.name), row)
        table.add_row(*cells)
    return table


def _other(row: Result | None, first: Result) -> list[str]:
    """Return value and verdict on the other side, with its limit where that is what is varied."""
    if row is None:
        return ["none", "cannot be run"]
    own = "" if row.limit in (None, first.limit) else f", {limit(row)}"
    return [f"{number(row, row.value) or 'none'}{own}", row.verdict]


def _alone(solution: Solution, nearest: Trial) -> Table:
    from rich.text import Text

    table = _table("Nearest to passing")
    table.add_column("check")
    table.add_column("limit", justify="right")
    table.add_column(f"with {solution.key.text(nearest.values[0])}", justify="right")
    table.add_column("verdict")
    for row in nearest.results:
        table.add_row(Text(row.name), limit(row), number(row, row.value) or "none", row.verdict)
    return table


def _boundaries(solution: Solution) -> Table:
    from rich.text import Text

    table = _table("Boundaries")
    table.add_column("passes", justify="right")
    table.add_column("fails", justify="right")
    table.add_column("decided by")
    by_value = {trial.values[0]: trial for trial in solution.trials}
    for each in solution.boundaries:
        stops = by_value[each.fails]
        text = solution.key.text
        told = Text(stops.decides or stops.reason)
        table.add_row(text(each.passes), text(each.fails), told)
    return table


def map_tables(found: PassMap) -> tuple[RenderableType, ...]:
    """Return, for each value of the second key, which values of the first one pass."""
    from rich.text import Text

    first, second = found.first, found.second
    table = _table(f"Which {first.key} passes, of {counted(len(found.columns), 'value')}")
    table.add_column(Text(second.key), justify="right", overflow="fold")
    table.add_column("passes")
    table.add_column("stopped by")
    for place, value in enumerate(found.rows):
        ranges = [
            first.text(low) if low == high else f"{first.text(low)} to {first.text(high)}"
            for low, high in found.ranges(place)
        ]
        tried = all(cell is not None for cell in found.cells[place])
        told = ", ".join(ranges) or ("none" if tried else "")
        more = "" if tried else " (interrupted)"
        style = STYLES["holds" if ranges else "fails"] if tried else ""
        stoppers = Text(", ".join(found.stoppers(place)))
        table.add_row(second.text(value), told + more, stoppers, style=style)
    whole = len(found.columns) * len(found.rows)
    told = f"{found.passing:,} of {counted(found.tried, 'pair')} pass"
    if not found.complete:
        told += f"; interrupted, {whole} were to be tried"
    if found.corners:
        told += ", with every part at either end of its tolerance"
    return table, Text(told, style=STYLES["holds" if found.passing else "fails"])


def limit(row: Result) -> str:
    """Return the limit of a verdict with its sign; "" where there is none."""
    return SIGNS.get(row.bound, "") + number(row, row.limit) if row.limit is not None else ""


def number(row: Result, value: float | None) -> str:
    """Return a number of a verdict with its unit; shares read as percent."""
    if value is None:
        return ""
    if row.unit in PREFIXED:
        return engineering(value, row.unit, DIGITS)
    if row.unit in ("", "1"):
        return f"{plain(100.0 * value, DIGITS)} %"
    return f"{plain(value, DIGITS)} {row.unit}"


def _table(title: str) -> Table:
    from rich.table import Table
    from rich.text import Text

    return Table(title=Text(title), title_justify="left")
