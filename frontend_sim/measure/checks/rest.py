"""What a point of the chain does while the stimulus rests: where it ends, and how it gets there."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.chain import Chain, compose
from frontend_sim.errors import ModelError
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.response.decay import Decay
from frontend_sim.measure.response.excursions import furthest, last_exit
from frontend_sim.measure.response.roots import without_hidden_drift
from frontend_sim.scenario.model import Scenario, SimulationSettings
from frontend_sim.simulation import Simulation
from frontend_sim.simulation.linear import Axis, Linear
from frontend_sim.stimulus.drive import Drive, PiecewiseDrive
from frontend_sim.stimulus.step import Step

JUST_BEFORE = 1e-12
"""An instant this share of its time earlier is before an event, whatever was rounded."""

A_FEW = 4.0
"""Results of the converter that a run must have room for, which averages several conversions."""

NO_CHANGE = 1e-12
"""A change by less than this share is rounding."""

WINDOWS = 1024.0
"""A run is searched for events in windows, the first this share of it, each twice the one before.
"""

FINEST = 1e-9
"""Excursions are searched down to this share of the largest distance from the end."""


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
    """

    since: float
    until: float
    final: float
    before: float
    tail: Tail | None

    @property
    def height(self) -> float:
        """The final value less the one before, with its sign."""
        return self.final - self.before


@dataclass(frozen=True, eq=False)
class Tail:
    """The exact way of a point to its final value.

    Parameters
    ----------
    chain : up to the point, which is its last one
    lack : states in the end less the states when the stretch begins, shape (n,)
    arrival : distance from the end just after the delay is over
    departure : distance from the end just before it is over
    """

    chain: Chain
    lack: Real
    arrival: float
    departure: float

    @property
    def delay(self) -> float:
        """Pure delay from the stimulus to the point [s]."""
        return float(self.chain.delay[-1])

    def leaves(self, band: float, chain: Chain | None = None) -> float:
        """Return when the distance from the end exceeds a band for the last time [s].

        It counts from the begin of the stretch, delay included; 0 where the band is never left.
        That nothing follows is known from the bound of ``Decay``.

        Parameters
        ----------
        band : half its width
        chain : in place of the own one, to see what a change of it does
        """
        decay = self._decay(chain or self.chain, band)
        out = 0.0 if decay is None else last_exit(decay, band)
        if out > 0.0:
            return out + self.delay
        return self.delay if abs(self.departure) > band else 0.0

    def furthest(self, sign: float) -> float:
        """Return the largest value of sign · (point - end) after the delay, at least 0."""
        if self.chain.order == 0:
            return max(sign * self.arrival, 0.0) + 0.0
        floor = FINEST * max(abs(self.arrival), abs(self.departure))
        decay = self._decay(self.chain, floor) if floor > 0.0 else None
        return 0.0 if decay is None else max(furthest(decay, sign)[0], 0.0)

    def _decay(self, chain: Chain, floor: float) -> Decay | None:
        if chain.order == 0:
            return None
        return Decay.to_rest(chain, len(chain.points) - 1, self.lack, floor)


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
    from_rest = subject.scenario.simulation.initial == "rest"
    drives = [drive for drive in subject.drives if isinstance(drive, PiecewiseDrive)]
    if len(drives) < len(subject.drives):
        return None
    since = last_change(drives, subject.duration, from_rest) if after is None else after
    if not _rests(drives, since):
        return None
    until = next_change(drives, since, subject.duration)
    name, level = subject.chain.points[point], _level(drives, since)
    try:
        final = settled_value(subject.scenario, name, level)
        seen = _Seen.of(subject, point, drives, since, level)
    except ModelError:
        return None
    if not seen.dies_out:
        return None
    if subject.scenario.simulation.discretization == "exact" and not subject.limited:
        tail = Tail(seen.chain, seen.lack, seen.arrival, seen.departure)
        return Rest(since, until, final, final + tail.departure, tail)
    if since > 0.0:
        before = float(subject.at_instants(name, [since * (1.0 - JUST_BEFORE)])[0])
    else:
        before = before_the_run(subject, name)
    return Rest(since, until, final, before, None)


@dataclass(frozen=True, eq=False)
class _Seen:
    """The linear chain up to a point, its states at an instant, and what they lack of the end."""

    chain: Chain
    lack: Real
    jump: float

    @classmethod
    def of(
        cls, subject: Subject, point: int, drives: Sequence[Drive], since: float, level: float
    ) -> _Seen:
        initial = subject.scenario.simulation.initial
        chain = without_hidden_drift(compose(subject.chain.sections[:point]))
        earlier = since * (1.0 - JUST_BEFORE) if since > 0.0 else -1.0
        was = sum(float(drive.values(np.array([earlier]))[0]) for drive in drives)
        if since == 0.0 and initial == "rest":
            was = 0.0
        lack = chain.settled(level)
        if chain.order:
            # The chain with its states as points: the engine tells them at any instant.
            size = chain.order
            points = tuple(map(str, range(size)))
            states = replace(
                chain, c=np.eye(size), d=np.zeros(size), delay=np.zeros(size), points=points,
                noise_d=np.zeros((size, 0)), noise_b=np.zeros((size, 0)), offset=np.zeros(size),
            )  # fmt: skip
            longest = max(since, 1.0 / subject.adc.rate)
            model = Linear.of(states, drives, range(size), initial, Axis(longest, longest))
            _, now = model.advance(model.start(), 0, np.array([since]))
            lack = lack - now[:, 0]
        return cls(chain, lack, float(chain.d[-1]) * (was - level))

    @cached_property
    def dies_out(self) -> bool:
        return bool(np.all(self.chain.poles.real < 0.0))

    @property
    def arrival(self) -> float:
        return -float(self.chain.c[-1] @ self.lack)

    @property
    def departure(self) -> float:
        return self.arrival + self.jump


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
    settings = SimulationSettings(duration=adc.first + A_FEW / adc.rate, noise=False)
    still = scenario.model_copy(
        update={
            "stimulus": Step(before=level, after=level),
            "simulation": settings,
            "check": (),
        }
    )
    return float(Simulation(still).values([point], np.zeros(1))[0, 0])


def last_change(drives: Sequence[PiecewiseDrive], stop: float, from_rest: bool) -> float:
    """Return when a stimulus last changes its course in [0, stop), 0 if it never does [s].

    Parameters
    ----------
    from_rest : whether the chain was at rest before, so that t = 0 is a change in any case
    """
    window, end = stop / WINDOWS, math.nextafter(stop, 0.0)
    while end > 0.0:
        begin = max(end - window, 0.0)
        found = changes(drives, begin, end, from_rest)
        if len(found):
            return float(found[-1])
        end, window = begin, 2.0 * window
    return 0.0


def next_change(drives: Sequence[PiecewiseDrive], start: float, stop: float) -> float:
    """Return when a stimulus next changes its course in (start, stop), infinity if never [s]."""
    window, begin = stop / WINDOWS, start
    while begin < stop:
        end = min(begin + window, math.nextafter(stop, 0.0))
        found = changes(drives, begin, end, False)
        found = found[found > start]
        if len(found):
            return float(found[0])
        begin, window = begin + window, 2.0 * window
    return math.inf


def changes(drives: Sequence[PiecewiseDrive], start: float, stop: float, from_rest: bool) -> Real:
    """Return the times in (start, stop] at which a stimulus changes its course [s].

    t = 0 belongs to a stretch that starts there: what the signal was before is another.
    """
    at_once = np.zeros(1 if start == 0.0 else 0)
    found = [at_once] if from_rest else [np.empty(0)]
    for drive in drives:
        times = np.concatenate([at_once, drive.events(start, stop)])
        if len(times) == 0:
            continue
        earlier = np.where(times > 0.0, times * (1.0 - JUST_BEFORE), -1.0)
        states, before = drive.states(times), drive.states(np.maximum(earlier, 0.0))
        moves, moved = states @ drive.generator.T, before @ drive.generator.T
        moved[times == 0.0] = 0.0  # Before t = 0 there is one value.
        size = np.maximum(np.abs(states), np.abs(before)).sum(axis=1)
        rate = np.maximum(np.abs(moves), np.abs(moved)).sum(axis=1)
        jumps = np.abs(states @ drive.readout - drive.values(earlier)) > NO_CHANGE * size
        turns = np.abs(moves - moved).sum(axis=1) > 1e3 * NO_CHANGE * rate
        found.append(times[jumps | turns])
    return np.unique(np.concatenate(found))


def _rests(drives: Sequence[PiecewiseDrive], instant: float) -> bool:
    at = np.array([instant])
    return not any(np.any(drive.states(at) @ drive.generator.T) for drive in drives)


def _level(drives: Sequence[Drive], instant: float) -> float:
    return sum(float(drive.values(np.array([instant]))[0]) for drive in drives)
