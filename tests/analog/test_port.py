"""The output of a stage behind a resistance, with a capacitance at the pin."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest

from frontend_sim.analog.port import OutputImpedance, Port
from frontend_sim.analog.stages.base import Stage
from frontend_sim.analog.stages.buffer import Buffer
from frontend_sim.analog.stages.gain import Gain
from frontend_sim.analog.stages.ladder import Ladder
from frontend_sim.analog.stages.rc_highpass import RcHighpass
from frontend_sim.analog.stages.rc_lowpass import RcLowpass
from frontend_sim.errors import ModelError

Impedance = Callable[[np.ndarray], np.ndarray]


def _parallel(*impedances: np.ndarray) -> np.ndarray:
    return np.asarray(1.0 / sum(1.0 / impedance for impedance in impedances))


LADDER = {
    "element": [
        {"place": "series", "resistance": 100.0},
        {"place": "series", "inductance": 1e-4},
        {"place": "shunt", "capacitance": 1e-9},
    ],
    "load_resistance": 5e3,
}
STAGES: dict[str, tuple[Stage, Impedance]] = {
    "gain": (Gain(gain=3.0), lambda s: 0.0 * s),
    "low pass": (
        RcLowpass(resistance=2e3, capacitance=3e-9),
        lambda s: _parallel(2e3 + 0.0 * s, 1.0 / (s * 3e-9)),
    ),
    "high pass": (
        RcHighpass(resistance=2e3, capacitance=3e-9),
        lambda s: _parallel(2e3 + 0.0 * s, 1.0 / (s * 3e-9)),
    ),
    "ladder": (
        Ladder.model_validate(LADDER),
        lambda s: _parallel(100.0 + s * 1e-4, 1.0 / (s * 1e-9), 5e3 + 0.0 * s),
    ),
    "follower": (
        Buffer(gain_bandwidth=1e6, output_resistance=75.0),
        # Feedback divides the output resistance by 1 + A(s).
        lambda s: 75.0 / (1.0 + 2.0 * np.pi * 1e6 / s),
    ),
}
FREQUENCIES = np.geomspace(1e2, 1e8, 13)


@pytest.mark.parametrize("capacitance", [0.0, 20e-12, 10e-9])
@pytest.mark.parametrize("resistance", [0.0, 330.0])
@pytest.mark.parametrize("name", STAGES)
def test_both_ways_are_those_of_the_circuit(
    name: str, resistance: float, capacitance: float
) -> None:
    """p/v = 1 / (1 + s C (Z + R)) and -p/i = (Z + R) / (1 + s C (Z + R)), to 1e-11 of each."""
    stage, impedance = STAGES[name]
    port = Port.of(OutputImpedance.of(stage.output_circuit()), resistance, capacitance)
    s = 2j * np.pi * FREQUENCIES
    behind = impedance(s) + resistance
    loaded = 1.0 + s * capacitance * behind
    size = len(port.b)
    resolvent = [np.linalg.inv(each * np.eye(size) - port.a) for each in s]
    voltage = np.array([port.c @ r @ port.b + port.d for r in resolvent])
    drop = np.array([port.c @ r @ port.kick + port.series for r in resolvent])
    np.testing.assert_allclose(voltage, 1.0 / loaded, rtol=1e-11)
    np.testing.assert_allclose(drop, behind / loaded, rtol=1e-11, atol=1e-12)


def test_a_source_that_rests_is_seen_whole() -> None:
    """No current flows into a capacitance at rest: the gain at zero frequency is one."""
    for stage, _ in STAGES.values():
        port = Port.of(OutputImpedance.of(stage.output_circuit()), 50.0, 1e-9)
        level = port.d - port.c @ np.linalg.solve(port.a, port.b)
        assert level == pytest.approx(1.0, rel=1e-12)


def test_an_inductance_straight_at_the_switch_is_refused() -> None:
    """An impedance that grows with frequency has no port; the message says what to do."""
    stage = Ladder.model_validate(
        {
            "element": [
                {"place": "series", "resistance": 100.0},
                {"place": "series", "inductance": 1e-3},
            ]
        }
    )
    with pytest.raises(ModelError, match="capacitance or a resistance to ground"):
        OutputImpedance.of(stage.output_circuit())
