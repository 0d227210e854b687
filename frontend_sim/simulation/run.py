"""What a run gives: blocks of conversions and waveform while it goes on, the whole at its end."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, fields
from typing import Any, Self

import numpy as np
from numpy.typing import NDArray

from frontend_sim.scenario.model import Scenario

Real = NDArray[np.float64]
Codes = NDArray[np.int64]


@dataclass(frozen=True, eq=False)
class GridReport:
    """How far a discrete model of the chain, or the grid of its limiters, lies from exact.

    Parameters
    ----------
    method : zoh, foh or bilinear; exact for exact steps between limiters on a grid
    grid_rate : points per second [Hz]
    estimate : error estimated before the run [LSB], None where the grid was given; for limiters it
        is an upper bound
    largest_error, rms_error : over all conversions, distance of a discrete model from the exact
        mode; for limiters, what half as many points per second would change [LSB]
    warping : shift of frequency at half the conversion rate, as a share of it; 0 where the method
        does not warp
    """

    method: str
    grid_rate: float
    estimate: float | None
    largest_error: float
    rms_error: float
    warping: float


@dataclass(frozen=True, eq=False)
class RunBlock:
    """Some conversions in a row, and the waveform over the same stretch of time.

    Parameters
    ----------
    start : number of the first conversion of the block
    time : sampling instants, shape (K,) [s]
    pin : exact analog value at these instants, before noise and rounding, shape (K,) [V]
    codes : shape (K,) [counts]
    voltage : the codes read back, shape (K,) [V]
    overrange : where the code was clipped, shape (K,)
    waveform_time : shape (W,) [s], empty where no waveform is kept
    waveform : name of the point of the chain -> shape (W,) [V]
    stimulus : what arrives at the sensor at the sampling instants, in the SI unit of the stimulus,
        shape (K,); empty where it is a voltage
    held : voltage of the sampling capacitor that is converted, before noise and rounding, shape
        (K,) [V]; empty where the converter has no input network
    """

    start: int
    time: Real
    pin: Real
    codes: Codes
    voltage: Real
    overrange: NDArray[np.bool_]
    waveform_time: Real
    waveform: dict[str, Real]
    stimulus: Real = field(default_factory=lambda: np.empty(0))
    held: Real = field(default_factory=lambda: np.empty(0))


@dataclass(frozen=True, eq=False)
class Run:
    """A finished run: the arrays of all its blocks, joined.

    ``notes`` tells what was decided on the way (how gaps of a recording were filled, a grid that
    is too coarse); the remaining names are those of ``RunBlock``.
    """

    scenario: Scenario
    time: Real
    pin: Real
    codes: Codes
    voltage: Real
    overrange: NDArray[np.bool_]
    waveform_time: Real
    waveform: dict[str, Real]
    grid: GridReport | None = None
    notes: tuple[str, ...] = field(default=())
    stimulus: Real = field(default_factory=lambda: np.empty(0))
    held: Real = field(default_factory=lambda: np.empty(0))

    @classmethod
    def of(
        cls,
        scenario: Scenario,
        blocks: Sequence[RunBlock],
        grid: GridReport | None,
        notes: tuple[str, ...],
    ) -> Self:
        """Join the blocks of a run, of which there is one at least."""

        def joined(name: str) -> Any:
            return np.concatenate([getattr(block, name) for block in blocks])

        waveform = {
            name: np.concatenate([block.waveform[name] for block in blocks])
            for name in blocks[0].waveform
        }
        names = {field.name for field in fields(RunBlock)} - {"start", "waveform"}
        arrays = {name: joined(name) for name in names}
        return cls(scenario=scenario, waveform=waveform, grid=grid, notes=notes, **arrays)
