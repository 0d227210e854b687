"""Where the search for the limiters' grid begins."""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from frontend_sim.simulation.jumps import NO_JUMP, jump_times
from frontend_sim.simulation.models import Models
from frontend_sim.stimulus.drive import Drive, LineDrive, UniformDrive

PER_RADIAN = 0.5
"""Points of the first grid per radian of the fastest tone, and per time constant."""

LOOKS = 64
"""Parts of a run in which jumps and events are looked for, one after the other."""

EVENT, HELD = 40.0, 8.0
"""Points of the grid that cost as much as an event of a drive, and as a point that is held."""


@dataclass(frozen=True)
class FirstGrid:
    """The rate that the search begins with [Hz], and what had to be decided.

    Parameters
    ----------
    events : what the events of the stimulus cost each time, in points of the grid
    """

    rate: float
    events: float
    notes: tuple[str, ...] = ()


def first_multiple(models: Models, conversion_rate: float, most: int) -> FirstGrid:
    """Return a grid that is worth trying.

    It is a multiple of the rate of a recording, if the stimulus is one and its rate is a multiple
    of the conversion rate or below it; else a multiple of the conversion rate. It has at least one
    point per conversion, and so many that the third grid that is tried has two points per radian of
    a tone; if the stimulus jumps, two per time constant of the poles before a limiter as well, as
    long as ``most`` points are enough for that.
    """
    base = _base(models.drives, conversion_rate)
    rate = base * 2.0 ** max(math.ceil(math.log2(conversion_rate / base) - 1e-9), 0)
    content = max((_content(drive) for drive in models.drives), default=0.0)
    fastest = _fastest_pole(models) if _jump_anywhere(models) else 0.0
    wanted = PER_RADIAN * max(content, fastest)
    # The picked grid is at least four times as fine as the first one.
    affordable = 0.25 * most / models.duration
    notes: tuple[str, ...] = ()
    if PER_RADIAN * fastest > max(affordable, rate):
        notes = (
            "an excursion of less than "
            f"{max(1.0 / affordable, 4.0 / rate) * 0.25:.3g} s between two points of the limiters' "
            f"grid can be missed: a pole at {fastest:.3g} rad/s stands before a limiter; give "
            "simulation.grid_rate to look closer",
        )
        wanted = PER_RADIAN * content
        wanted = max(wanted, affordable)
    if wanted > rate:
        rate *= 2.0 ** math.ceil(math.log2(wanted / rate) - 1e-9)
    events = sum(_events(drive, models.duration) for drive in models.drives)
    return FirstGrid(rate, events, notes)


def _base(drives: tuple[Drive, ...], conversion_rate: float) -> float:
    """Return the rate that the grid is a multiple of, by a power of two [Hz]."""
    if len(drives) == 1 and isinstance(drives[0], UniformDrive):
        recorded = drives[0].rate
        ratio = recorded / conversion_rate
        if ratio < 1.0 or abs(ratio - round(ratio)) < 1e-12 * ratio:
            return recorded
    return conversion_rate


def _content(drive: Drive) -> float:
    """Return a bound of the fastest rate in a drive's generator [rad/s].

    That of a sweep is a chain of integrators, which has no eigenvalues to tell it.
    """
    if isinstance(drive, UniformDrive | LineDrive):
        return 0.0
    return float(np.max(np.sum(np.abs(drive.generator), axis=1), initial=0.0))


def _events(drive: Drive, duration: float) -> float:
    if isinstance(drive, UniformDrive):
        return HELD * duration * drive.rate if drive.between == "hold" else 0.0
    edges = np.linspace(0.0, duration, LOOKS + 1).tolist()
    return EVENT * sum(len(drive.events(start, stop)) for start, stop in pairwise(edges))


def _fastest_pole(models: Models) -> float:
    """Return the fastest pole in front of the last limiter [rad/s].

    A limiter follows its own transients after jumps itself, at any instant.
    """
    assert models.cut is not None
    sections = models.cut.chain.sections[: models.cut.places[-1].entry]
    blocks = [block for part in sections for block in part.blocks]
    return float(np.max(np.abs(np.concatenate([*(block.poles for block in blocks), [0.0]]))))


def _jump_anywhere(models: Models) -> bool:
    """Tell whether the stimulus jumps in the run, or away from what the run begins with."""
    drives, zero = models.drives, np.zeros(1)
    level = sum(drive.initial for drive in drives) if models.initial == "settled" else 0.0
    at_once = sum(float(drive.values(zero)[0]) for drive in drives)
    if abs(at_once - level) > NO_JUMP * max(abs(at_once), abs(level)):
        return True
    edges = np.linspace(0.0, models.duration, LOOKS + 1)
    return any(
        len(jump_times(drives, float(start), float(stop), 0.0)) > 0
        for start, stop in pairwise(edges)
    )
