"""The phase of a sweep far from its start, against mpmath."""

from __future__ import annotations

import mpmath as mp
import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from frontend_sim.stimulus.swept_phase import SweptPhase

Real = NDArray[np.float64]

KNOWN = 2e-13
"""Cycles: a hundred of them from an anchor round to a few times 1e-14."""


def _true(swept: SweptPhase, time: float, at: float) -> mp.mpf:
    """Return the cycles with 60 digits, of which those before the point are many."""
    start, stop, length = (mp.mpf(v) for v in (swept.start, swept.stop, swept.length))
    t = mp.mpf(time) - mp.mpf(at)
    if swept.logarithmic:
        growth = mp.log(stop / start) / length
        return start * mp.expm1(growth * t) / growth
    return start * t + (stop - start) * t * t / (2 * length)


def _miss(swept: SweptPhase, times: Real, at: float) -> float:
    """Return the largest distance from the true phase, round the circle [cycles]."""
    with mp.workdps(60):
        found = swept.cycles(times, at).tolist()
        pairs = zip(found, times.tolist(), strict=True)
        gaps = [mp.mpf(phase) - _true(swept, time, at) for phase, time in pairs]
        return float(max(abs(gap - mp.nint(gap)) for gap in gaps))


@given(
    start=st.floats(1e-2, 1e6),
    ratio=st.one_of(st.floats(1e-5, 1e5), st.sampled_from([1.0, 1.0 + 1e-12, 1.0 - 1e-6])),
    cycles=st.floats(0.1, 1e11),
    at=st.sampled_from([0.0, 0.0123, 7.7]),
    logarithmic=st.booleans(),
)
@settings(max_examples=150, deadline=None)
def test_right_to_the_last_digits_of_a_cycle(
    start: float, ratio: float, cycles: float, at: float, logarithmic: bool
) -> None:
    """Up, down, steady, late: up to 1e11 cycles from its start the phase is right to 2e-13."""
    stop = start * ratio
    swept = SweptPhase(start, stop, cycles / max(start, stop), logarithmic and start != stop)
    times = at + swept.length * np.array([0.0, 1e-9, 0.013, 0.5, 0.77, 0.999999])
    assert _miss(swept, times, at) <= KNOWN


def test_a_plain_product_would_drift() -> None:
    """The reason for the care: after 1e9 cycles the rounded formula is off by 1e-8 of one."""
    for logarithmic in (False, True):
        swept = SweptPhase(1e3, 2e6, 1300.0, logarithmic)
        times = 1200.0 + np.arange(50) * 1.0123
        with mp.workdps(60):
            pairs = zip(swept.turns(times).tolist(), times.tolist(), strict=True)
            plain = [float(abs(mp.mpf(turns) - _true(swept, t, 0.0))) for turns, t in pairs]
        assert max(plain) > 1e-8
        assert _miss(swept, times, 0.0) <= KNOWN


def test_a_phase_belongs_to_its_instant_alone() -> None:
    """Whatever instants are asked for together, each has the same phase, bit by bit."""
    for logarithmic in (False, True):
        swept = SweptPhase(20.0, 2e4, 3.0, logarithmic)
        times = 0.5 + np.linspace(0.0, 3.0, 1001)
        whole = swept.cycles(times, 0.5)
        parts = [swept.cycles(part, 0.5) for part in np.array_split(times, 37)]
        np.testing.assert_array_equal(np.concatenate(parts), whole)
        single = [swept.cycles(times[k : k + 1], 0.5)[0] for k in range(0, 1001, 50)]
        np.testing.assert_array_equal(single, whole[::50])
