"""The exact mode against 50-digit arithmetic, at conversions that meet nothing else."""

from __future__ import annotations

from typing import Any

import mpmath as mp
import numpy as np
import oracles
import pytest
from numpy.typing import NDArray

from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import simulate

TOLERANCE = 1e-9
"""Share of full scale, as the design promises for every conversion."""

# Twelve decades: 100 ns (a fast amplifier) beside 10 s (an AC coupling), with equal poles between.
CHAINS: dict[str, tuple[list[dict[str, Any]], list[oracles.System]]] = {
    "one pole": (
        [{"kind": "rc-lowpass", "resistance": 10e3, "capacitance": 4.7e-9}],
        [oracles.low_pass(10e3 * 4.7e-9)],
    ),
    "double pole": (
        [{"kind": "rc-lowpass", "resistance": 1e3, "capacitance": 1e-7}] * 2,
        [oracles.low_pass(1e3 * 1e-7)] * 2,
    ),
    "triple pole with gains": (
        [
            {"kind": "rc-lowpass", "resistance": 1e3, "capacitance": 1e-7},
            {"kind": "gain", "gain": 20.0},
        ]
        * 3,
        [oracles.low_pass(1e3 * 1e-7), oracles.amplifier(20.0)] * 3,
    ),
    "from 100 ns to 10 s": (
        [
            {"kind": "rc-lowpass", "resistance": 100.0, "capacitance": 1e-9},
            {"kind": "rc-highpass", "resistance": 1e6, "capacitance": 1e-5},
            {"kind": "rc-lowpass", "resistance": 1e3, "capacitance": 1e-7},
            {"kind": "rc-lowpass", "resistance": 1e6, "capacitance": 1e-5},
        ],
        [
            oracles.low_pass(100.0 * 1e-9),
            oracles.high_pass(1e6 * 1e-5),
            oracles.low_pass(1e3 * 1e-7),
            oracles.low_pass(1e6 * 1e-5),
        ],
    ),
    "resonance of quality 30": (
        [{"kind": "second-order", "corner": 2.3e3, "quality_factor": 30.0}],
        [oracles.resonance(2.0 * np.pi * 2.3e3, 30.0)],
    ),
}

INTEGRATOR: tuple[list[dict[str, Any]], list[oracles.System]] = (
    [
        {"kind": "poles-zeros", "poles": [0.0], "gain": 50.0},
        {"kind": "rc-lowpass", "resistance": 1e3, "capacitance": 1e-7},
        {"kind": "rc-highpass", "resistance": 1e6, "capacitance": 1e-5},
    ],
    [oracles.integrator(50.0), oracles.low_pass(1e3 * 1e-7), oracles.high_pass(1e6 * 1e-5)],
)

STEP = ({"kind": "step", "before": 0.4, "after": 1.9, "at": 1.23e-3}, 0.4)
RAMP = ({"kind": "ramp", "before": 0.3, "slope": 90.0, "at": 0.77e-3, "length": 7.1e-3}, 0.3)
SINE = ({"kind": "sine", "amplitude": 1.3, "frequency": 7321.1, "phase": 0.4}, None)
PULSES = (
    {
        "kind": "pulse",
        "low": 0.2,
        "high": 2.2,
        "at": 0.31e-3,
        "width": 0.7e-3,
        "period": 2.9e-3,
        "rise": 3e-6,
        "fall": 110e-6,
        "count": 2,
    },
    0.2,
)


def _pieces(stimulus: dict[str, Any]) -> list[oracles.Piece]:
    with mp.workdps(oracles.DIGITS):
        if stimulus["kind"] == "step":
            return [oracles.held(stimulus["at"], stimulus["after"])]
        if stimulus["kind"] == "ramp":
            at, slope, length = stimulus["at"], stimulus["slope"], stimulus["length"]
            end = mp.mpf(stimulus["before"]) + mp.mpf(slope) * mp.mpf(length)
            last = oracles.held(at, 0.0)
            last.start, last.state = mp.mpf(at) + mp.mpf(length), mp.matrix([end])
            return [oracles.line(at, stimulus["before"], slope), last]
        if stimulus["kind"] == "sine":
            return [oracles.tone(stimulus["amplitude"], stimulus["frequency"], stimulus["phase"])]
        return _pulse_pieces(stimulus)


def _pulse_pieces(stimulus: dict[str, Any]) -> list[oracles.Piece]:
    low, high = mp.mpf(stimulus["low"]), mp.mpf(stimulus["high"])
    rise, fall, width = (mp.mpf(stimulus[key]) for key in ("rise", "fall", "width"))
    pieces = []
    for cycle in range(stimulus["count"]):
        at = mp.mpf(stimulus["at"]) + cycle * mp.mpf(stimulus["period"])
        down = at + rise / 2 + width - fall / 2
        for start, value, slope in (
            (at, low, (high - low) / rise),
            (at + rise, high, 0),
            (down, high, (low - high) / fall),
            (down + fall, low, 0),
        ):
            piece = oracles.line(0.0, 0.0, 0)
            piece.start, piece.state = start, mp.matrix([value, slope])
            pieces.append(piece)
    return pieces


def _run(stimulus: dict[str, Any], chain: list[dict[str, Any]], initial: str) -> Any:
    return simulate(
        Scenario.model_validate(
            {
                "seed": 5,
                "stimulus": stimulus,
                "chain": chain,
                # A period of 1/1873 s with jitter: no conversion meets an event or another run.
                "adc": {"rate": 1873.0, "bits": 16, "high": 3.3, "aperture_jitter": 20e-6},
                "simulation": {"duration": 9e-3, "initial": initial},
            }
        )
    )


def _full_scale(values: NDArray[np.float64]) -> float:
    return max(float(np.max(np.abs(values))), 1.0)


@pytest.mark.parametrize("name", CHAINS)
@pytest.mark.parametrize("stimulus", [STEP, RAMP, SINE, PULSES], ids=lambda s: s[0]["kind"])
def test_every_conversion_agrees(name: str, stimulus: tuple[dict[str, Any], float | None]) -> None:
    """Steps, ramps, sines and pulses through stiff and defective chains, conversions jittered."""
    stages, systems = CHAINS[name]
    values, initial = stimulus
    run = _run(values, stages, "settled" if initial is not None else "rest")
    true = oracles.response(oracles.in_a_row(systems), _pieces(values), run.time, initial)
    np.testing.assert_allclose(run.pin, true, rtol=0, atol=TOLERANCE * _full_scale(true))


@pytest.mark.parametrize("stimulus", [STEP, SINE, PULSES], ids=lambda s: s[0]["kind"])
def test_a_pole_at_the_origin_agrees(stimulus: tuple[dict[str, Any], float | None]) -> None:
    """An integrator in the chain needs no special case when it starts from rest."""
    stages, systems = INTEGRATOR
    values = {**stimulus[0]}
    for key in ("before", "low"):
        if key in values:
            values[key] = 0.0
    run = _run(values, stages, "rest")
    true = oracles.response(oracles.in_a_row(systems), _pieces(values), run.time, None)
    np.testing.assert_allclose(run.pin, true, rtol=0, atol=TOLERANCE * _full_scale(true))
