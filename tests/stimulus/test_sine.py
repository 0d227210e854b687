"""Sines and tones through a chain, near and far in time, against the steady state in mpmath."""

from __future__ import annotations

from typing import Any

import mpmath as mp
import numpy as np
import pytest
from drives import outputs
from numpy.typing import NDArray

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.stages import RcHighpass, RcLowpass
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import simulate
from frontend_sim.stimulus.drive import PiecewiseDrive
from frontend_sim.stimulus.sine import FRESH, Sine
from frontend_sim.stimulus.tones import Tones, ToneValue

TAU = 1e-4
RC = RcLowpass(resistance=1e3, capacitance=1e-7)


def _steady(tones: list[tuple[float, float, float]], times: Any) -> NDArray[np.float64]:
    """Return the steady state of 1/(1 + s TAU), the phase of each instant at 40 digits."""
    values = []
    with mp.workdps(40):
        for time in times:
            total = mp.mpf(0)
            for amplitude, frequency, phase in tones:
                w = 2 * mp.pi * mp.mpf(frequency)
                h = 1 / mp.mpc(1, w * mp.mpf(TAU))
                total += amplitude * (h * mp.expj(w * mp.mpf(float(time)) + mp.mpf(phase))).imag
            values.append(float(total))
    return np.array(values)


@pytest.mark.parametrize("far", [0.1, 10.0, 1e3, 2e5])
def test_a_sine_stays_in_phase(far: float) -> None:
    """1 kHz through an RC low pass, up to 2e8 cycles from the start: 1e-12 of the amplitude.

    Each instant is a float, and is taken as what it is.
    """
    sine = Sine(amplitude=1.0, frequency=1001.7, phase=0.3)
    times = far + np.arange(60) * 0.7123e-3
    found = outputs(chain_of([RC]), list(sine.drives((1,))), times)
    np.testing.assert_allclose(found, _steady([(1.0, 1001.7, 0.3)], times), rtol=0, atol=1e-12)


def test_conversions_a_million_cycles_from_the_start() -> None:
    """The whole way, from scenario to pin, in a run that begins to convert after 1e6 cycles."""
    scenario = Scenario.model_validate(
        {
            "stimulus": {"kind": "sine", "amplitude": 1.2, "frequency": 9973.0, "offset": 1.5},
            "chain": [{"kind": "rc-lowpass", "resistance": 1e3, "capacitance": 1e-7}],
            "adc": {"rate": 44.1e3, "bits": 16, "high": 3.3, "first": 100.3},
            "simulation": {"duration": 100.302},
        }
    )
    run = simulate(scenario)
    assert len(run.time) == 89
    true = 1.5 + _steady([(1.2, 9973.0, 0.0)], run.time)
    np.testing.assert_allclose(run.pin, true, rtol=0, atol=1e-9)


def test_tones_add_up() -> None:
    """Three tones are the sum of their steady states, plus one offset."""
    tones = [(1.0, 312.0, 0.0), (0.4, 1931.1, 1.2), (0.05, 50.0, -0.4)]
    stimulus = Tones(
        offset=-0.7,
        tone=tuple(ToneValue(amplitude=a, frequency=f, phase=p) for a, f, p in tones),
    )
    times = 0.5 + np.arange(80) * 0.377e-3
    found = outputs(chain_of([RC]), list(stimulus.drives((1,))), times)
    np.testing.assert_allclose(found, _steady(tones, times) - 0.7, rtol=0, atol=1e-12)


def test_a_settled_chain_starts_from_the_first_value() -> None:
    """Before zero the sine rests on its value at t = 0, so a high pass starts at zero there."""
    sine = Sine(amplitude=2.0, frequency=50.0, phase=np.pi / 2, offset=0.5)
    chain = chain_of([RcHighpass(resistance=1e3, capacitance=1e-6)])
    found = outputs(chain, list(sine.drives((1,))), np.array([0.0, 1e-9]))
    np.testing.assert_allclose(found, 0.0, atol=1e-12)


def test_long_gaps_keep_their_phase() -> None:
    """Over a gap of many times FRESH cycles the states are set anew: right to 1e-11."""
    sine = Sine(amplitude=1.0, frequency=333.3)
    (drive,) = sine.drives((1,))
    assert isinstance(drive, PiecewiseDrive)
    assert drive.fresh == pytest.approx(FRESH / 333.3, rel=1e-15)
    times = np.array([0.9, 1.1, 17.3, 900.7]) * FRESH / 333.3
    found = outputs(chain_of([RC]), [drive], times)
    np.testing.assert_allclose(found, _steady([(1.0, 333.3, 0.0)], times), rtol=0, atol=1e-11)
