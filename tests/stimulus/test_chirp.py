"""Sweeps: closed form, and their polynomial pieces through the engine against quadrature."""

from __future__ import annotations

from typing import Any

import mpmath as mp
import numpy as np
import pytest
from drives import outputs
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.stages import RcLowpass
from frontend_sim.stimulus.chirp import BEND, STRIDE, Chirp, Sweep

Real = NDArray[np.float64]

TAU = 1e-3
RC = chain_of([RcLowpass(resistance=1e3, capacitance=1e-6)])
NODES, WEIGHTS = np.polynomial.legendre.leggauss(20)


def _drive(chirp: Chirp) -> Sweep:
    (drive,) = chirp.drives((1,))
    assert isinstance(drive, Sweep)
    return drive


def _formula(chirp: Chirp, times: Real) -> Real:
    """Return the sweep from the phase that its docstring's frequency integrates to."""
    f0, f1, length = chirp.start_frequency, chirp.stop_frequency, chirp.length
    t = np.asarray(times - chirp.at, dtype=np.longdouble)
    if chirp.sweep == "linear" or f0 == f1:
        turns = f0 * t + (f1 - f0) / (2.0 * length) * t * t
    else:
        rate = np.log(np.longdouble(f1) / f0) / length
        turns = f0 * np.expm1(rate * t) / rate
    turns = np.asarray(turns - np.floor(turns), dtype=np.float64)
    wave = chirp.amplitude * np.sin(2.0 * np.pi * turns + chirp.phase)
    inside = (times >= chirp.at) & (times < chirp.at + length)
    return np.asarray(chirp.offset + np.where(inside, wave, 0.0))


def _through_rc(chirp: Chirp, stop: float, count: int) -> tuple[Real, Real]:
    """Return instants and the output of 1/(1 + s TAU), by Gauss quadrature of twenty nodes.

    y[k+1] = e^(-h/TAU) y[k] + integral of e^(-(t[k+1] - s)/TAU) u(s)/TAU over the step.
    """
    edges = np.unique([*np.linspace(0.0, stop, count + 1), chirp.at, chirp.at + chirp.length])
    edges = edges[edges <= stop]
    h = np.diff(edges)
    s = edges[:-1, None] + 0.5 * h[:, None] * (NODES + 1.0)
    kernel = np.exp(-(edges[1:, None] - s) / TAU) / TAU
    parts = 0.5 * h * np.sum(WEIGHTS * kernel * _formula(chirp, s), axis=1)
    y = np.empty(len(edges))
    y[0] = chirp.offset
    for k, part in enumerate(parts):
        y[k + 1] = np.exp(-h[k] / TAU) * y[k] + part
    return edges[1:], y[1:]


SWEEPS: dict[str, dict[str, Any]] = {
    "up": {"start_frequency": 50.0, "stop_frequency": 2e3, "length": 0.2},
    "down": {"start_frequency": 2e3, "stop_frequency": 50.0, "length": 0.2},
    "from almost zero": {"start_frequency": 1e-3, "stop_frequency": 1e3, "length": 0.5},
    "to almost zero": {"start_frequency": 1e3, "stop_frequency": 1e-3, "length": 0.5},
    "short": {"start_frequency": 10.0, "stop_frequency": 500.0, "length": 0.5e-3},
    "steady": {"start_frequency": 400.0, "stop_frequency": 400.0, "length": 0.1},
    "late": {"start_frequency": 30.0, "stop_frequency": 900.0, "length": 0.1, "at": 0.0123},
}
COMMON = {"amplitude": 1.3, "phase": 0.7, "offset": -0.4}


@pytest.mark.parametrize("sweep", ["linear", "logarithmic"])
@pytest.mark.parametrize("name", SWEEPS)
def test_through_the_engine(name: str, sweep: Any) -> None:
    """Through an RC low pass and through nothing, during the sweep and after it, to 1e-9.

    Conversions as far apart as a tenth of the sweep: between two of them the signal comes from
    the polynomials alone.
    """
    chirp = Chirp(**COMMON, **SWEEPS[name], sweep=sweep)
    stop = 1.1 * (chirp.at + chirp.length)
    times, true = _through_rc(chirp, stop, max(int(4.0 * stop * 2e3), 50))
    found = outputs(RC, [_drive(chirp)], times)
    np.testing.assert_allclose(found, true, rtol=0, atol=1e-11)
    step = max(len(times) // 11, 1)
    sparse = outputs(RC, [_drive(chirp)], times[::step])
    np.testing.assert_allclose(sparse, true[::step], rtol=0, atol=1e-11)
    straight = outputs(chain_of([]), [_drive(chirp)], times)
    np.testing.assert_allclose(straight, _formula(chirp, times), rtol=0, atol=1e-11)


@given(
    start=st.floats(1e-3, 1e4),
    ratio=st.floats(1e-6, 1e6),
    turns=st.floats(0.01, 200.0),
    logarithmic=st.booleans(),
)
@settings(max_examples=60, deadline=None)
def test_every_piece_is_its_polynomial(
    start: float, ratio: float, turns: float, logarithmic: bool
) -> None:
    """From joint to joint the Taylor polynomial misses the sweep by at most 1e-11 of it."""
    chirp = Chirp(
        amplitude=1.0,
        start_frequency=start,
        stop_frequency=start * ratio,
        length=turns / (start * max(ratio, 1.0)),
        sweep="logarithmic" if logarithmic else "linear",
    )
    drive = _drive(chirp)
    joints = np.array([0.0, *drive.events(0.0, chirp.length)])
    pieces = np.unique(np.linspace(0, len(joints) - 2, 7).astype(int))
    for left, right in zip(joints[pieces], joints[pieces + 1], strict=True):
        g = drive.states(np.array([left]))[0]
        t = left + (right - left) * np.array([0.5, 0.9, 1.0 - 1e-9])
        scaled = (t - left) * drive.generator[0, 1]
        terms = [g[k] * scaled**k / float(mp.factorial(k)) for k in range(len(g) - 1)]
        np.testing.assert_allclose(np.sum(terms, axis=0), _formula(chirp, t), rtol=0, atol=1e-11)


@pytest.mark.parametrize("sweep", ["linear", "logarithmic"])
def test_frequency_is_what_was_asked(sweep: Any) -> None:
    """The phase turns with start_frequency at the beginning and stop_frequency at the end."""
    chirp = Chirp(
        amplitude=1.0,
        start_frequency=7.0,
        stop_frequency=70.0,
        length=2.0,
        phase=0.4,
        sweep=sweep,
    )
    drive, w = _drive(chirp), 2.0 * np.pi * 70.0
    at = np.array([0.0, 1.0, 2.0 - 1e-12])
    g = drive.states(at)
    # sin and its scaled derivatives: cos = sqrt(1 - sin²), g1 = cos · phase'/w.
    turning = np.abs(g[:, 1]) * w / np.sqrt(1.0 - g[:, 0] ** 2) / (2.0 * np.pi)
    middle = 38.5 if sweep == "linear" else np.sqrt(7.0 * 70.0)
    np.testing.assert_allclose(turning, [7.0, middle, 70.0], rtol=1e-6)


@pytest.mark.parametrize("length", [3, 30000])
@pytest.mark.parametrize("sweep", ["linear", "logarithmic"])
def test_long_sweeps_keep_their_phase(sweep: Any, length: int) -> None:
    """After 1e5 turns, and after 1.5e9, to 2e-12 of the amplitude; the oracle has 50 digits."""
    chirp = Chirp(
        amplitude=1.0, start_frequency=1e3, stop_frequency=1e5, length=length, sweep=sweep
    )
    times = length * np.linspace(0.333, 0.9999, 41)
    with mp.workdps(50):
        true = []
        for time in times.tolist():
            t = mp.mpf(time)
            turns = 1000 * t + mp.mpf(99000) / (2 * length) * t * t
            if sweep == "logarithmic":
                rate = mp.log(100) / length
                turns = 1000 * mp.expm1(rate * t) / rate
            true.append(float(mp.sin(2 * mp.pi * turns)))
    np.testing.assert_allclose(_drive(chirp).values(times), true, rtol=0, atol=2e-12)


def test_joints_are_dense_enough_and_no_denser() -> None:
    """At least one joint for each half radian, and few more where the frequency is steady."""
    chirp = Chirp(amplitude=1.0, start_frequency=900.0, stop_frequency=1100.0, length=1.0)
    joints = _drive(chirp).events(0.0, 2.0)
    phase = 2.0 * np.pi * 1000.0
    bends = np.sqrt(np.pi * 200.0 * 1.0 / BEND)
    assert phase / STRIDE <= len(joints) <= phase / STRIDE + bends + 3.0
    assert joints[-1] == 1.0
