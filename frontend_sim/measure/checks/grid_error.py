"""Evaluates how far a discrete model lies from the exact answer."""

from __future__ import annotations

from frontend_sim.measure.checks import words
from frontend_sim.measure.checks.answer import Answer
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.scenario.checks.grid_error import GridErrorCheck

ORDER = {"zoh": 1.0}
"""Error goes with the step to this power; to the second one for the other methods."""


def grid_error(check: GridErrorCheck, subject: Subject) -> Answer:
    """Return the largest distance of the run from the exact answer; none in the exact mode."""
    grid = subject.finished.grid
    if grid is None:
        return Answer(0.0, "LSB", check.at_most, "at most", "exact steps, which need no grid")
    value = grid.largest_error

    def advice() -> str:
        factor = (value / check.at_most) ** (1.0 / ORDER.get(grid.method, 2.0))
        wanted = words.frequency(factor * grid.grid_rate)
        return (
            f'raise simulation.grid_rate to about {wanted}, or set it to "auto" with '
            f"simulation.accuracy = {check.at_most:g}"
        )

    method = f"{grid.method} at {words.frequency(grid.grid_rate)} against the reference run"
    return Answer(value, "LSB", check.at_most, "at most", method, advice)
