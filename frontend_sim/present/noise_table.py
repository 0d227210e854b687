"""The noise budget and what loading does, for the terminal."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from frontend_sim.measure.noise_budget import NoiseBudget
from frontend_sim.measure.response.gain import Corner
from frontend_sim.measure.response.loading import Loading
from frontend_sim.present.numbers import engineering, fixed, plain

if TYPE_CHECKING:
    from rich.table import Table


def noise_table(budget: NoiseBudget) -> Table:
    """Return the sources of noise at the pin, the largest first, and their sum in power."""
    from rich.table import Table
    from rich.text import Text

    place = "sampling capacitor" if budget.sampled else "pin"
    what = "Noise of a code, referred to" if budget.filtered else "Noise at"
    title = f"{what} the {place}, down to {engineering(budget.lowest, 'Hz')}"
    table = Table(title=title, title_justify="left", show_footer=len(budget.rows) > 1)
    table.add_column("source", footer="together", overflow="fold")
    table.add_column("rms", justify="right", footer=engineering(budget.rms, "V"))
    table.add_column("LSB", justify="right", footer=plain(budget.lsb, 3))
    table.add_column("share", justify="right", footer="100.0 %")
    folded = engineering(budget.folded, "V")
    table.add_column("above half the rate", justify="right", footer=folded)
    for row in budget.rows:
        table.add_row(
            Text(row.source),
            engineering(row.rms, "V"),
            plain(row.lsb, 3),
            fixed(100.0 * row.share, 1, "%"),
            engineering(row.folded, "V"),
        )
    return table


def loading_table(rows: Sequence[Loading]) -> Table:
    """Return what the sections of ladders do to each other."""
    from rich.table import Table
    from rich.text import Text

    table = Table(title="What loading does", title_justify="left")
    table.add_column("ladder")
    table.add_column("")
    table.add_column("as it is", justify="right")
    table.add_column("sections buffered", justify="right")
    for row in rows:
        table.add_row(Text(row.stage), "in the end", _end(row.end), _end(row.buffered_end))
        table.add_row("", "-3 dB corners", _corners(row.corners), _corners(row.buffered_corners))
    return table


def _end(value: float | None) -> str:
    return "rings for ever" if value is None else plain(value)


def _corners(corners: Sequence[Corner]) -> str:
    return ", ".join(engineering(corner.frequency, "Hz", 4) for corner in corners) or "none"
