"""What folds, for the terminal and for programs."""

from __future__ import annotations

import dataclasses
import math
from typing import TYPE_CHECKING, Any

from frontend_sim.errors import InputError
from frontend_sim.measure.aliasing import Alias, AliasError, Aliasing, aliasing_of
from frontend_sim.measure.aliasing.recorded import MOST_POINTS
from frontend_sim.present.numbers import difference, engineering, fixed, plain
from frontend_sim.quantities import SignalUnit
from frontend_sim.quantities.counting import counted
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.told_unit import told_unit
from frontend_sim.simulation.finished import Finished
from frontend_sim.simulation.stretches import stretches_of

if TYPE_CHECKING:
    from rich.table import Table

MOST_ROWS = 10
"""The strongest aliases that a table shows."""

MOST_CODES = 200_000
"""Of a longer run only a check tells the alias error: it takes as long as the run."""


def aliasing_table(aliasing: Aliasing, error: AliasError | None = None) -> Table | None:
    """Return a table of all that folds, the strongest first; None where nothing of a level does.

    Parameters
    ----------
    error : of the run, for the foot of the table; None before a run
    """
    rows = sorted(aliasing.aliases, key=lambda alias: -(alias.lsb or 0.0))
    if all(alias.lsb is None for alias in rows):  # edges alone: they have no level of their own
        return None
    from rich.table import Table
    from rich.text import Text

    half = engineering(aliasing.half, "Hz", 4)
    table = Table(title=f"What folds at half the rate, {half}", title_justify="left")
    table.add_column("source", overflow="fold")
    for name in ("at", "lands at", "arrives", "in the codes", "dBFS", "less by"):
        table.add_column(name, justify="right")
    unit = told_unit(aliasing.scenario)
    for alias in rows[:MOST_ROWS]:
        table.add_row(Text(alias.source), *_cells(alias, unit))
    told = []
    if len(rows) > MOST_ROWS:
        weaker = counted(len(rows) - MOST_ROWS, "weaker one is", "weaker ones are")
        told.append(f"{weaker} not shown")
    if error is not None:
        told.append(_foot(error))
    if told:
        table.caption, table.caption_justify = "; ".join(told), "left"
    return table


def run_alias_error(run: Finished, aliasing: Aliasing) -> AliasError | None:
    """Return the alias error of a whole run, where it is exact and no long work; else None."""
    if stretches_of(run) is not None:
        return None
    if any(part.whole for part in aliasing.parts) or not 0 < len(run.time) <= MOST_CODES:
        return None
    end = float(run.time[-1])
    if any(drive.rate * end > MOST_POINTS for part in aliasing.parts for drive in part.points):
        return None
    try:
        return aliasing.error(run.time)
    except InputError:
        return None


def aliasing_summary(aliasing: Aliasing, error: AliasError | None = None) -> dict[str, Any]:
    """Return what folds as plain data for JSON, in SI units; None for what is not there."""
    rows = [
        {name: _plain(value) for name, value in dataclasses.asdict(alias).items()}
        for alias in aliasing.aliases
    ]
    summary: dict[str, Any] = {
        "half_rate": aliasing.half, "aliases": rows, "notes": list(aliasing.notes)
    }  # fmt: skip
    if error is not None:
        summary["error"] = {"rms": error.rms, "peak": error.peak, "lsb": error.lsb}
    return summary


def aliasing_in(subject: Scenario | Finished) -> Aliasing | None:
    """Return what folds in a scenario, or in that of a run; None where that cannot be told."""
    try:
        found = aliasing_of(subject)
        return found if found.aliases is not None else None  # worked out here, where it may fail
    except InputError:
        return None


def _cells(alias: Alias, unit: SignalUnit) -> list[str]:
    lands, where = engineering(alias.lands, "Hz", 4), engineering(alias.frequency, "Hz", 4)
    if alias.up_to > alias.frequency:
        end = engineering(alias.up_to, "Hz", 4) if math.isfinite(alias.up_to) else "ever higher"
        where += f" to {end}"
        lands += f" to {engineering(alias.lands_up_to, 'Hz', 4)}"
    if alias.arrives is None or alias.volts is None or alias.lsb is None:
        return [where, lands, "edges", "", "", ""]
    measure = " rms" if alias.measure == "rms" else ""
    full = "" if alias.full_scale is None else fixed(alias.full_scale, 1)
    down = "" if alias.attenuation is None else fixed(alias.attenuation, 1, "dB")
    return [
        where,
        lands,
        difference(alias.arrives, unit, 4) + measure,
        f"{plain(alias.lsb, 3)} LSB{measure}",
        full,
        down,
    ]


def _foot(error: AliasError) -> str:
    return (
        f"alias error of the run: {plain(error.rms_lsb, 3)} LSB rms, "
        f"{plain(error.peak_lsb, 3)} LSB at most"
    )


def _plain(value: Any) -> Any:
    return None if isinstance(value, float) and not math.isfinite(value) else value
