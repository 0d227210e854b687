"""Pulses: width at half height, trains far in time, edges that leave no top."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from drives import outputs
from hypothesis import given
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy.optimize import brentq

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.stages import RcLowpass
from frontend_sim.errors import ScenarioError
from frontend_sim.stimulus.drive import PiecewiseDrive
from frontend_sim.stimulus.pulse import Pulse

EDGES = st.floats(0.0, 1e-3).map(lambda v: round(v, 9))
LEVELS = st.floats(-5.0, 5.0).map(lambda v: round(v, 9))


def _drive(pulse: Pulse) -> PiecewiseDrive:
    (drive,) = pulse.drives((1,))
    assert isinstance(drive, PiecewiseDrive)
    return drive


def _at(drive: PiecewiseDrive, time: float) -> float:
    return float(drive.values(np.array([time]))[0])


@given(rise=EDGES, fall=EDGES, top=EDGES, low=LEVELS, swing=st.sampled_from([-3.0, 2.0]))
def test_width_is_taken_at_half_height(
    rise: float, fall: float, top: float, low: float, swing: float
) -> None:
    """Found as an instrument would: the instants at half height lie ``width`` apart."""
    width = 0.5 * (rise + fall) + top + 1e-9
    pulse = Pulse(low=low, high=low + swing, at=1e-3, width=width, rise=rise, fall=fall)
    drive = _drive(pulse)
    middle = 1e-3 + rise + 0.5 * (top + 1e-9)

    def above(time: float) -> float:
        return (_at(drive, time) - low) / swing - 0.5

    crossings = [brentq(above, a, b, xtol=1e-15) for a, b in ((0.0, middle), (middle, 9e-3))]
    assert crossings[1] - crossings[0] == pytest.approx(width, abs=1e-12)
    assert _at(drive, middle) == pytest.approx(low + swing, rel=1e-9)


@given(
    period=st.floats(1.1, 3.0),
    cycle=st.integers(0, 10**9),
    share=st.floats(0.0, 1.0, exclude_max=True),
)
def test_a_train_repeats_for_ever(period: float, cycle: int, share: float) -> None:
    """Pulse number 1e9 has the shape of the first, to the rounding of its time."""
    pulse = Pulse(high=2.0, width=0.5, rise=0.25, fall=0.5, period=period, at=0.125)
    drive = _drive(pulse)
    since = share * period
    time = 0.125 + cycle * period + since
    single = np.interp(since, [0.0, 0.25, 0.375, 0.875], [0.0, 2.0, 2.0, 0.0])
    assert _at(drive, time) == pytest.approx(single, abs=8.0 * 8.0 * np.spacing(time) + 1e-15)


@given(cycle=st.integers(0, 10**6), period=st.floats(0.3, 3.0))
def test_every_jump_takes_effect_at_its_own_event(cycle: int, period: float) -> None:
    """Wherever ``events`` puts a jump, the value is new there and old one rounding before."""
    drive = _drive(Pulse(high=1.0, width=0.2, period=period, at=0.1))
    events = drive.events(cycle * period, (cycle + 2) * period)
    assert len(events) in (3, 4, 5)
    here, before = drive.values(events), drive.values(np.nextafter(events, 0.0))
    np.testing.assert_array_equal(here + before, 1.0)
    np.testing.assert_array_equal(np.abs(np.diff(here)), 1.0)


def test_a_counted_train_ends() -> None:
    """Three pulses, then low for ever, and no event after the last edge."""
    drive = _drive(Pulse(low=-1.0, high=1.0, width=0.2, period=0.5, count=3))
    np.testing.assert_allclose(drive.events(0.0, 1e9), [0.2, 0.5, 0.7, 1.0, 1.2])
    np.testing.assert_array_equal(
        drive.values(np.array([1.1, 1.2, 1.5, 1.6, 1e12])), [1, *[-1] * 4]
    )


@given(rise=EDGES, fall=EDGES, period=st.none() | st.just(1.0))
def test_pulses_without_a_top_keep_their_order(rise: float, fall: float, period: Any) -> None:
    """A triangle of any two edges stays a triangle when its corners are rounded."""
    if rise + fall == 0.0:
        return
    width = 0.5 * (rise + fall)
    drive = _drive(Pulse(high=1.0, width=width, rise=rise, fall=fall, at=0.25, period=period))
    events = drive.events(0.0, 0.9)
    assert np.all(np.diff(events) >= 0.0)
    times = np.linspace(0.2, 0.3, 300)
    true = np.interp(times, [0.25, 0.25 + rise, 0.25 + rise + fall], [0.0, 1.0, 0.0])
    slopes = [1.0 / edge for edge in (rise, fall) if edge]
    np.testing.assert_allclose(drive.values(times), true, atol=1e-15 * max(slopes) + 1e-14)


def test_a_train_through_a_low_pass_reaches_its_cycle() -> None:
    """Square pulses through 1/(1 + s tau): the known ripple of the periodic state, to 1e-12.

    At the end of the high part y = (1 - a)/(1 - a b), at the end of the low part b y, with
    a = exp(-high part/tau) and b = exp(-low part/tau).
    """
    tau = 1e-3
    chain = chain_of([RcLowpass(resistance=1e3, capacitance=1e-6)])
    drive = _drive(Pulse(high=1.0, width=0.3e-3, period=1.1e-3))
    times: NDArray[np.float64] = 1.1e-3 * 40 + np.array([0.0, 0.3e-3])
    a, b = np.exp(-0.3e-3 / tau), np.exp(-0.8e-3 / tau)
    top = (1.0 - a) / (1.0 - a * b)
    found = outputs(chain, [drive], times)
    np.testing.assert_allclose(found, [b * top, top], rtol=0, atol=1e-12)


@pytest.mark.parametrize(
    ("values", "message"),
    [
        ({"width": 1e-3, "rise": 2e-3, "fall": 1e-3}, "shorter than its edges allow"),
        ({"width": 1e-3, "count": 2}, "count needs a period"),
        ({"width": 1e-3, "period": 1.5e-3, "rise": 1e-3, "fall": 1e-3}, "shorter than the pulse"),
        ({"width": 1e-3, "period": 2e-3, "count": 0}, "greater than or equal to 1"),
        ({"width": 0.0}, "above 0"),
    ],
)
def test_impossible_pulses_are_refused(values: dict[str, Any], message: str) -> None:
    """Each contradiction is told in words of its own."""
    with pytest.raises(ScenarioError, match=message):
        Pulse(high=1.0, **values)
