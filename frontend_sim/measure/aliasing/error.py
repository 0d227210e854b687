"""What aliasing does to the codes of a run, as a waveform."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np

from frontend_sim.analog.chain import Chain
from frontend_sim.errors import MeasureError, ModelError
from frontend_sim.measure.aliasing.sieve import MOST_LOOKS
from frontend_sim.measure.aliasing.source import Above
from frontend_sim.measure.aliasing.split import Edges, Points, split_above
from frontend_sim.measure.arrays import Real
from frontend_sim.quantities.counting import counted
from frontend_sim.simulation.linear import Axis, Initial, Linear
from frontend_sim.stimulus.drive import Drive, UniformDrive

FINEST, COARSEST = 64, 8
"""Points per period of the rate at which a response without a spectrum of its own is split."""

MARGIN = 256
"""Periods of the rate before and after the run that a split of a response still sees."""

ON_GRID = 1e-6
"""An instant this share of the grid's interval beside one of its points is that point."""

BEYOND = 1024
"""Points of a recording behind the end of the run that the split still sees."""


@dataclass(frozen=True, eq=False)
class AliasError:
    """The codes less those that a perfect band limit before the chain would give.

    Parameters
    ----------
    time : shape (K,) [s]
    volts : the error, before rounding, shape (K,) [V]
    lsb : width of a code [V]
    unsure : how far the split of the response is known, 0 where it is exact, shape (K,) [V]
    methods : how the part above half the rate was found, source by source
    """

    time: Real
    volts: Real
    lsb: float
    unsure: Real
    methods: tuple[str, ...]

    @property
    def uncertainty(self) -> float:
        """How far the least certain code is known [V]."""
        return float(np.max(self.unsure, initial=0.0))

    @cached_property
    def rms(self) -> float:
        """Root mean square over the run [V]."""
        return math.sqrt(float(np.mean(self.volts**2))) if len(self.volts) else 0.0

    @cached_property
    def peak(self) -> float:
        """Largest size [V]."""
        return float(np.max(np.abs(self.volts), initial=0.0))

    @property
    def peak_time(self) -> float:
        """When it is largest [s]."""
        return float(self.time[np.argmax(np.abs(self.volts))]) if len(self.time) else 0.0

    @property
    def rms_lsb(self) -> float:
        """Root mean square over the run [LSB]."""
        return self.rms / self.lsb

    @property
    def peak_lsb(self) -> float:
        """Largest size [LSB]."""
        return self.peak / self.lsb


@dataclass(frozen=True, eq=False)
class Response:
    """A point of a linear chain, asked for the answer to drives of any choice.

    Constant sources of the stages are left out: they belong to no drive.

    Parameters
    ----------
    chain : of small signals;  point : number of the point
    initial : where the chain was before t = 0
    """

    chain: Chain
    point: int
    initial: Initial

    def before(self, drives: Sequence[Drive]) -> float:
        """Return the answer to what drives rested at before t = 0 [V]."""
        if self.initial == "rest":
            return 0.0
        level = sum(drive.initial for drive in drives)
        states = self.chain.settled(level)
        return float(self.chain.c[self.point] @ states + self.chain.d[self.point] * level)

    def to(self, drives: Sequence[Drive], instants: Real) -> Real:
        """Return the answer to drives at increasing instants, shape (K,) [V].

        Raises
        ------
        MeasureError
            If the chain would have drifted away on what a drive rested at before the run.
        """
        if not drives or not len(instants):
            return np.zeros(len(instants))
        still = replace(self.chain, offset=np.zeros(len(self.chain.points)))
        longest = max(float(np.max(np.diff(instants), initial=0.0)), float(instants[0]), 1e-12)
        try:
            axis = Axis(longest, longest)
            model = Linear.of(still, drives, [self.point], self.initial, axis)
            _, found = model.advance(model.start(), 0, instants)
        except ModelError as error:
            raise MeasureError(str(error)) from error
        return np.asarray(found[0])


def above_in(
    response: Response, part: Above, instants: Real, limit: float, edges: Edges
) -> tuple[Real, Real, str]:
    """Return what the part of a stimulus above a frequency does to a point of the chain.

    Parameters
    ----------
    part : of one stimulus
    instants : increasing, shape (K,) [s]
    limit : [Hz]
    edges : how a recording goes on beyond its ends

    Returns
    -------
    The waveform and its uncertainty, both of shape (K,) [V], and how it was found.
    """
    if part.whole:
        return _split_of_response(response, part, instants, limit, edges)
    drives, how = list(part.drives), "exact: its lines above, through the chain"
    if part.points:
        high = [_points_above(drive, instants, limit, edges) for drive in part.points]
        drives += [drive for drive in high if drive is not None]
        how = f"ideal split of its points, {edges} ends; what remains goes through the chain"
    sure = np.zeros(len(instants))
    if not drives:
        return sure, sure, f"{part.source}: nothing lies above"
    return response.to(drives, instants), sure, f"{part.source}: {how}"


def _points_above(drive: UniformDrive, instants: Real, limit: float, edges: Edges) -> Points | None:
    """Return the part of points above a frequency; none where their rate cannot hold any."""
    if 0.5 * drive.rate <= limit * (1.0 + 1e-9):
        return None
    needed = math.ceil((float(instants[-1]) - drive.origin) * drive.rate) + 2
    known = getattr(drive, "count", None)
    count = needed if known is None else min(needed + BEYOND, int(known))
    if count < 2:
        return None
    _refuse_many(count)
    row = split_above(drive.points(0, count), drive.rate, limit, edges)
    return Points(row, drive.rate, drive.origin, drive.between)


def _split_of_response(
    response: Response, part: Above, instants: Real, limit: float, edges: Edges
) -> tuple[Real, Real, str]:
    """Split the response itself, on a fine grid, where the stimulus has edges."""
    stop, rate = float(instants[-1]), 2.0 * limit
    cells = max(math.ceil(stop * rate), 1) + 1 + 2 * MARGIN
    fine = FINEST
    while fine > COARSEST and cells * fine > MOST_LOOKS:
        fine //= 2
    _refuse_many(cells * fine)
    times = np.arange(-MARGIN * fine, (cells - MARGIN) * fine) / (fine * rate)
    run = times >= 0.0
    values = np.full(len(times), response.before(part.whole))
    values[run] = response.to(part.whole, times[run])
    found = []
    for step in (1, 2):
        high = split_above(values[::step], fine * rate / step, limit, edges)
        found.append(_between(times[::step], values[::step] - high, instants))
    whole = response.to(part.whole, instants)
    how = f"ideal split of its response at {fine} points for each code, {edges} ends"
    return whole - found[0], np.abs(found[0] - found[1]), f"{part.source}: {how}"


def _between(times: Real, values: Real, instants: Real) -> Real:
    """Return a smooth row at instants of any choice: where they meet its own, the values there."""
    place = (instants - times[0]) / (times[1] - times[0])
    nearest = np.round(place)
    if np.all(np.abs(place - nearest) < ON_GRID):
        return np.asarray(values[nearest.astype(np.int64)])
    from scipy.interpolate import make_interp_spline

    return np.asarray(make_interp_spline(times, values, k=5)(instants))


def _refuse_many(count: int) -> None:
    if count > MOST_LOOKS:
        raise MeasureError(
            f"the split in parts below and above half the rate takes {counted(count, 'point')} at "
            f"once, more than {MOST_LOOKS}; shorten simulation.duration, or cut the recording with "
            "end"
        )
