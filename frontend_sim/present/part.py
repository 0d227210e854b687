"""What is told of a record that keeps a part of its run."""

from __future__ import annotations

from frontend_sim.archive import Record
from frontend_sim.present.numbers import engineering
from frontend_sim.quantities.counting import counted
from frontend_sim.simulation.finished import RunLike


def kept_conversions(run: RunLike) -> str:
    """Return how many conversions a run has, and where a record keeps some of them, of how many."""
    if not isinstance(run, Record) or run.stretches is None:
        return counted(len(run.time), "conversion")
    return f"{run.count:,} of {counted(run.whole_count, 'conversion')}, around failures,"


def part_text(record: Record) -> tuple[str, ...]:
    """Return a paragraph on what a record keeps; none where it keeps all of its run."""
    stretches = record.stretches
    if stretches is None:
        return ()
    kept, whole = record.count, counted(record.whole_count, "conversion")
    if kept == 0:
        what = f"The record keeps none of {whole}: what fails has no place in time."
    else:
        where = counted(len(stretches.spans), "stretch", "stretches")
        around = engineering(stretches.around, "s")
        what = (
            f"The record keeps {kept:,} of {whole}, in {where}: {around} before and behind where "
            "checks fail."
        )
    return (
        f"{what} Verdicts and measures are those of the whole run; what is shown of the signal is "
        "the part that is kept.",
    )
