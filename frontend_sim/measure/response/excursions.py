"""The furthest excursions of a step response from its end, and its last exit from a band."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.measure.response.decay import Decay, Samples

CLOSE = 1e-3
"""Turning points whose estimate comes this close to what is looked for are computed exactly."""

FINEST = 2.0**-46
"""Share of the time at which a bisection ends."""


def furthest(decay: Decay, sign: float) -> tuple[float, float]:
    """Return the largest value of sign · e(t) for t >= 0, and its time [s].

    Nodes and turning points are searched in order of time, until the bound says that nothing
    larger can follow.
    """
    best, when = -np.inf, 0.0
    for bound, samples in decay.cells(last_first=False):
        if bound < max(best, 0.0):
            break
        turning = _turning_estimate(decay, samples, sign)
        highest = np.maximum(turning, sign * samples.distance[:-1])
        if not np.any(highest > best):
            continue
        interval = int(np.argmax(highest))
        value, time = _highest_in(decay, samples, interval, sign)
        if value > best:
            best, when = value, time
    return best, when


def last_exit(decay: Decay, band: float) -> float:
    """Return the last time at which |e(t)| leaves a band, 0 if it never does [s].

    Stretches are searched from late to early, beginning where the bound first allows an excursion
    as large as the band. In the first interval that holds one, the turning points are computed
    exactly and the crossing after the last excursion is bisected.
    """
    for _, samples in decay.cells(last_first=True, bounded_by=band):
        size = np.maximum(
            _turning_estimate(decay, samples, 1.0), _turning_estimate(decay, samples, -1.0)
        )
        largest = np.maximum(size, np.abs(samples.distance[:-1]))
        for interval in np.flatnonzero(largest > band * (1.0 - CLOSE))[::-1]:
            crossing = _exit_in(decay, samples, int(interval), band)
            if crossing is not None:
                return crossing
    return 0.0


def _turning_estimate(decay: Decay, samples: Samples, sign: float) -> Real:
    """Return for each interval the highest turning point of sign · e within, -inf without one.

    The cubic through the values and slopes at both ends (Hermite) stands for the response.
    """
    step = decay.ladder.length(samples.rung)
    first, last = sign * samples.distance[:-1], sign * samples.distance[1:]
    rise0, rise1 = sign * samples.slope[:-1] * step, sign * samples.slope[1:] * step
    # p(x) = first + rise0 x + q x² + k x³ for x from 0 to 1.
    k = rise0 + rise1 - 2.0 * (last - first)
    q = 3.0 * (last - first) - 2.0 * rise0 - rise1
    root = np.sqrt(np.maximum(q * q - 3.0 * k * rise0, 0.0))
    larger = -(q + np.copysign(root, q))
    highest = np.full(len(first), -np.inf)
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        for x in (larger / (3.0 * k), rise0 / larger):
            inside = (x > 0.0) & (x < 1.0) & (q * q >= 3.0 * k * rise0)
            value = first + x * (rise0 + x * (q + x * k))
            highest = np.where(inside, np.maximum(highest, value), highest)
    return highest


def _pieces(decay: Decay, samples: Samples, interval: int) -> tuple[Real, Real]:
    """Return times since the interval's start, shape (K,), and states, between which e is monotone.

    The interval is cut in four, and each quarter at its turning point where the slope changes sign.
    """
    step = decay.ladder.length(samples.rung)
    state = samples.states[interval]
    quarters = step * np.arange(5.0) / 4.0
    states = decay.at(state, quarters)
    _, slopes = decay.outputs(states)
    times, found = [0.0], [states[0]]
    for part in range(4):
        if slopes[part] * slopes[part + 1] < 0.0:
            turned, there = decay.ladder.last(
                states[part], step / 4.0, _finest(samples, step), _same_slope(decay, slopes[part])
            )
            times.append(float(quarters[part]) + turned)
            found.append(there)
        times.append(float(quarters[part + 1]))
        found.append(states[part + 1])
    return np.array(times), np.array(found)


def _same_slope(decay: Decay, slope: float) -> Callable[[Real], bool]:
    return lambda state: bool(decay.outputs(state)[1] * slope > 0.0)


def _finest(samples: Samples, step: float) -> float:
    return FINEST * max(samples.start, step)


def _highest_in(decay: Decay, samples: Samples, interval: int, sign: float) -> tuple[float, float]:
    times, states = _pieces(decay, samples, interval)
    values = sign * decay.outputs(states)[0]
    highest = int(np.argmax(values))
    start = samples.start + interval * decay.ladder.length(samples.rung)
    return float(values[highest]), start + float(times[highest])


def _exit_in(decay: Decay, samples: Samples, interval: int, band: float) -> float | None:
    """Return the last time in an interval at which |e| comes back into the band, if it is out."""
    times, states = _pieces(decay, samples, interval)
    out = np.flatnonzero(np.abs(decay.outputs(states)[0]) > band)
    step = decay.ladder.length(samples.rung)
    start = samples.start + interval * step
    if len(out) == 0:
        return None
    last = int(out[-1])
    if last == len(times) - 1:
        return start + float(times[-1])
    within, _ = decay.ladder.last(
        states[last],
        float(times[last + 1] - times[last]),
        _finest(samples, step),
        lambda state: bool(np.abs(decay.outputs(state)[0]) > band),
    )
    return start + float(times[last]) + within
