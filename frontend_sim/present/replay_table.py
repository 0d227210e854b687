"""What a set gave, for the terminal: verdicts first, then the worst run of each check."""

from __future__ import annotations

from typing import TYPE_CHECKING, Literal

import numpy as np

from frontend_sim.present.result_table import SIGNS, STYLES, checked
from frontend_sim.quantities.counting import share_of

if TYPE_CHECKING:
    from rich.console import RenderableType
    from rich.table import Table

    from frontend_sim.archive.set_table import CheckColumn, SetTable

LISTED = 5
"""Runs without a result that are told with their reason."""


def replay_tables(table: SetTable) -> tuple[RenderableType, ...]:
    """Return the verdicts of a set, the worst run of each check, and the runs without a result.

    Parameters
    ----------
    table : of the set
    """
    from rich.text import Text

    shown: list[RenderableType] = []
    if table.checks:
        shown.append(_worst(table))
    verdicts = table.verdicts
    runs = len(verdicts) if table.complete else max(table.planned, len(verdicts))
    counts = {name: int(np.sum(verdicts == name)) for name in ("fails", "error", "holds", "none")}
    told = {
        "fails": "a check fails in",
        "error": "a result is missing in",
        "holds": "all checks hold in",
        "none": "nothing is checked in",
    }
    for name, text in told.items():
        if counts[name]:
            style = STYLES.get("fails" if name == "error" else name, "")
            share = share_of(counts[name], runs, "run")
            shown.append(Text(f"{text} {share}", style=style))
    wrong = np.flatnonzero(verdicts == "error")
    errors = table.texts("error")
    shown.extend(Text(f"{table.names[row]}: {errors[row]}") for row in wrong[:LISTED])
    if len(wrong) > LISTED:
        shown.append(Text(f"... and {len(wrong) - LISTED:,} more without a result, see the table"))
    return tuple(shown)


def _worst(table: SetTable) -> Table:
    from rich.table import Table

    rows = Table(title="Worst run of each check", title_justify="left")
    for name in ("check", "fails in", "value", "limit", "margin", "run"):
        side: Literal["left", "right"] = "left" if name in ("check", "run") else "right"
        rows.add_column(name, justify=side, overflow="fold")
    for check in table.checks:
        _add(rows, check, table)
    return rows


def _add(rows: Table, check: CheckColumn, table: SetTable) -> None:
    from rich.text import Text

    judged = np.flatnonzero(check.verdict != "")
    if len(judged) == 0:
        return
    fails = int(np.sum(check.verdict == "fails"))
    # A check that could not be told has no margin; it fails, and is the worst that there is.
    margin = np.where(np.isnan(check.margin), -np.inf, check.margin)[judged]
    worst = judged[int(np.argmin(margin))]
    unit = check.unit
    rows.add_row(
        Text(check.name),
        Text(f"{fails:,} of {len(judged):,}", style=STYLES["fails" if fails else "holds"]),
        checked(float(check.value[worst]), unit),
        SIGNS.get(check.bound_in(worst), "") + checked(float(check.limit[worst]), unit),
        checked(float(check.margin[worst]), unit),
        Text(table.names[worst]),
    )
