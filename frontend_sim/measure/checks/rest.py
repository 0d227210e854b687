"""What a point of the chain does while the stimulus rests: where it ends, and how it gets there."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from frontend_sim.errors import ModelError
from frontend_sim.measure.checks.events import JUST_BEFORE, last_change, next_change
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.checks.tail import Tail, up_to
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.settings import SimulationSettings
from frontend_sim.simulation import Simulation
from frontend_sim.stimulus.drive import Drive, PiecewiseDrive
from frontend_sim.stimulus.step import Step

A_FEW = 4.0
"""Codes after the first one that a run has room for."""


@dataclass(frozen=True, eq=False)
class Rest:
    """A stretch of time in which the stimulus rests, as one point of the chain sees it.

    Parameters
    ----------
    since : when it begins to count [s]
    until : when the stimulus changes again, infinite if it does not within the run [s]
    final : value of the point if the stimulus rests for ever
    before : value of the point just before ``since``
    tail : how the point comes to its final value; None where something limits, where the run goes
        by a discrete model, or where a mode never dies out
    begins : whether something happens at ``since``; False where the stimulus rests in the whole run
    """

    since: float
    until: float
    final: float
    before: float
    tail: Tail | None
    begins: bool = True

    @property
    def height(self) -> float:
        """The final value less the one before, with its sign."""
        return self.final - self.before


def rest_of(subject: Subject, point: str | None, after: float | None) -> Rest | None:
    """Return the stretch of rest that begins at an instant, or with the last event of the run.

    Parameters
    ----------
    point : of the chain; None for the converter's pin
    after : [s]; left out, the last event of the run

    Returns
    -------
    None where the stimulus does not rest then, or the chain has no final value.
    """
    key = ("rest", point, after)
    if key not in subject.kept:
        subject.kept[key] = _rest_of(subject, subject.point(point), after)
    found: Rest | None = subject.kept[key]
    return found


def _rest_of(subject: Subject, point: int, after: float | None) -> Rest | None:
    settings = subject.scenario.simulation
    drives = [drive for drive in subject.drives if isinstance(drive, PiecewiseDrive)]
    if len(drives) < len(subject.drives):
        return None
    since = after
    if since is None:
        since = last_change(drives, subject.duration, settings.initial == "rest")
    begins, since = since is not None, since or 0.0
    if not _rests(drives, since):
        return None
    until = next_change(drives, since, subject.duration)
    name, level = subject.chain.points[point], _level(drives, since)
    try:
        final = settled_value(subject.scenario, name, level)
        tail = Tail.of(up_to(subject.chain, point), drives, settings.initial, since, level)
    except ModelError:
        return None
    if tail is None:
        return None
    if settings.discretization == "exact" and not subject.limited:
        return Rest(since, until, final, final + tail.departure, tail, begins)
    if since > 0.0:
        before = float(subject.at_instants(name, [since * (1.0 - JUST_BEFORE)])[0])
    else:
        before = before_the_run(subject, name)
    return Rest(since, until, final, before, None, begins)


def before_the_run(subject: Subject, point: str) -> float:
    """Return a point of the chain before t = 0. Raises as ``settled_value`` does."""
    drives, initial = subject.drives, subject.scenario.simulation.initial
    level = sum(drive.initial for drive in drives) if initial == "settled" else 0.0
    return settled_value(subject.scenario, point, level)


def settled_value(scenario: Scenario, point: str, level: float) -> float:
    """Return a point of the chain after the stimulus has rested at a level for ever.

    The engine itself says so, limits and offsets included.

    Raises
    ------
    ModelError
        If the point would have drifted away.
    """
    adc = scenario.adc
    settings = SimulationSettings(duration=adc.code_instant(0) + A_FEW / adc.true_rate, noise=False)
    still = scenario.model_copy(
        update={
            "stimulus": Step(before=level, after=level),
            "simulation": settings,
            "check": (),
        }
    )
    return float(Simulation(still).values([point], np.zeros(1))[0, 0])


def _rests(drives: Sequence[PiecewiseDrive], instant: float) -> bool:
    at = np.array([instant])
    return not any(np.any(drive.states(at) @ drive.generator.T) for drive in drives)


def _level(drives: Sequence[Drive], instant: float) -> float:
    return sum(float(drive.values(np.array([instant]))[0]) for drive in drives)
