"""Evaluates how far a discrete model lies from the exact answer."""

from __future__ import annotations

from frontend_sim.measure.checks import words
from frontend_sim.measure.checks.answer import Answer
from frontend_sim.measure.checks.events import last_change
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.scenario.checks.grid_error import GridErrorCheck
from frontend_sim.stimulus.drive import PiecewiseDrive, UniformDrive


def grid_error(check: GridErrorCheck, subject: Subject) -> Answer:
    """Return the largest distance of the run from the exact answer; none in the exact mode."""
    grid = subject.finished.grid
    if grid is None:
        return Answer(0.0, "LSB", check.at_most, "at most", "exact steps, which need no grid")
    value = grid.largest_error

    def advice() -> str:
        factor = (value / check.at_most) ** (1.0 / _order(subject, grid.method))
        wanted = words.frequency(factor * grid.grid_rate)
        return (
            f'raise simulation.grid_rate to about {wanted}, or set it to "auto" with '
            f"simulation.accuracy = {check.at_most:g}"
        )

    method = f"{grid.method} at {words.frequency(grid.grid_rate)} against the reference run"
    return Answer(value, "LSB", check.at_most, "at most", method, advice)


def _order(subject: Subject, method: str) -> float:
    """Return the power of the step with which the error falls: 2 for a smooth signal, else 1."""
    if method == "zoh":
        return 1.0
    uniform = [drive for drive in subject.drives if isinstance(drive, UniformDrive)]
    pieces = [drive for drive in subject.drives if isinstance(drive, PiecewiseDrive)]
    jumps = any(drive.between == "hold" for drive in uniform)
    return 1.0 if jumps or last_change(pieces, subject.duration, False) else 2.0
