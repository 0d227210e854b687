"""Rows of tables about a converter's input network."""

from __future__ import annotations

from frontend_sim.measure.acquisition import Acquisition
from frontend_sim.present.numbers import engineering, plain


def acquisition_rows(found: Acquisition) -> list[tuple[str, str]]:
    """Return name and value of what the input network does, for a table of two columns."""
    needed = found.time_needed
    rows = [
        ("acquisition time", engineering(found.time, "s", 4)),
        (
            f"left of the largest step, {engineering(found.step, 'V', 4)}",
            f"{plain(found.step_error, 3)} LSB",
        ),
        (
            "time that leaves half an LSB of it",
            "never" if needed is None else engineering(needed, "s", 4),
        ),
        ("largest error of an input at rest", f"{plain(found.steady_error, 3)} LSB"),
        ("largest current of an input at rest", engineering(found.steady_current, "A", 3)),
    ]
    if found.noise > 0.0:
        rows.append(("thermal noise of the capacitor, rms", engineering(found.noise, "V", 3)))
    return rows
