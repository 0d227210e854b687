"""A converter on a signal that is known in closed form, without the engine."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from frontend_sim.converter import AnyAdc
from frontend_sim.converter.clock import look_count
from frontend_sim.converter.digitizer import Converted

Real = NDArray[np.float64]
Signal = Callable[[Real], Real]


def constant(voltage: float) -> Signal:
    """Return a signal that stays."""
    return lambda times: np.full(len(times), voltage)


def digitized(
    adc: AnyAdc,
    signal: Signal,
    codes: int,
    seed: int = 0,
    cuts: Iterable[int] = (),
    temperature: float = 298.15,
) -> Converted:
    """Return so many codes of a signal, with the looks cut into calls at the given places."""
    digitizer, looks = adc.digitizer(seed, temperature), look_count(adc, codes)
    edges = sorted({0, looks, *(cut for cut in cuts if 0 < cut < looks)})
    state, parts, count = digitizer.start(), [], 0
    for start, stop in pairwise(edges):
        times = digitizer.instants(start, stop)
        state, part = digitizer.convert(state, start, times, signal(times))
        assert len(part.codes) == 0 or part.start == count
        count += len(part.codes)
        parts.append(part)
    assert count == codes
    names = ("time", "pin", "codes", "voltage", "overrange")
    return Converted(
        0, *(np.concatenate([getattr(part, name) for part in parts]) for name in names)
    )


def residual(voltage: Real, time: Real, frequency: float) -> tuple[float, Real]:
    """Return the amplitude of the best sine of a known frequency, and what it leaves."""
    angle = 2.0 * np.pi * np.modf(frequency * time)[0]
    columns = np.column_stack([np.sin(angle), np.cos(angle), np.ones(len(time))])
    weights, *_ = np.linalg.lstsq(columns, voltage, rcond=None)
    return float(np.hypot(*weights[:2])), voltage - columns @ weights
