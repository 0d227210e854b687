"""The switched input network against circuit equations at 50 digits."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.port import OutputImpedance, Port
from frontend_sim.analog.stages.base import Stage
from frontend_sim.analog.stages.buffer import Buffer
from frontend_sim.analog.stages.gain import Gain
from frontend_sim.analog.stages.ladder import Ladder
from frontend_sim.analog.stages.rc_lowpass import RcLowpass
from frontend_sim.converter.adc import Adc
from frontend_sim.converter.input_network import InputNetwork
from frontend_sim.simulation.linear import Axis
from frontend_sim.simulation.models import Models, Stepping
from frontend_sim.simulation.switched import SwitchedInput, network_of
from frontend_sim.simulation.switched_steps import HeldSteps
from frontend_sim.stimulus.drive import Drive, Lines
from frontend_sim.stimulus.sine import Sine
from tests import switching
from tests.drives import InMemory

FULL_SCALE = 2.5
RATE = 100e3
COUNT = 8
OPENED = 4e-6
"""Length of the acquisition [s]."""

LOW_PASS = RcLowpass(resistance=1e3, capacitance=2e-9)
LADDER = Ladder.model_validate(
    {
        "element": [
            {"place": "series", "inductance": 1e-3, "series_resistance": 150.0},
            {"place": "shunt", "capacitance": 1e-9},
        ]
    }
)
FOLLOWER = Buffer(gain_bandwidth=1e6, output_resistance=80.0)
"""Parts of the circuits below; their values are invented."""

Case = tuple[Stage, dict[str, float], Callable[[], switching.Circuit]]
CIRCUITS: dict[str, Case] = {
    "ideal source behind a resistance": (
        Gain(gain=1.0),
        {"source_resistance": 2e3, "pin_capacitance": 100e-12},
        lambda: switching.behind_resistance(2e3, 100e-12, 1e3, 20e-12),
    ),
    "ideal source, nothing at the pin": (
        Gain(gain=1.0),
        {"source_resistance": 30e3},
        lambda: switching.straight(30e3, 1e3, 20e-12),
    ),
    "reservoir that recovers slowly": (
        Gain(gain=1.0),
        {"source_resistance": 10e3, "pin_capacitance": 10e-9},
        lambda: switching.behind_resistance(10e3, 10e-9, 1e3, 20e-12),
    ),
    "low pass without a buffer": (
        LOW_PASS,
        {"source_resistance": 50.0, "pin_capacitance": 15e-12},
        lambda: switching.low_pass(1e3, 2e-9, 50.0, 15e-12, 1e3, 20e-12),
    ),
    "low pass straight at the switch": (
        LOW_PASS,
        {},
        lambda: switching.low_pass_alone(1e3, 2e-9, 1e3, 20e-12),
    ),
    "ladder that rings": (
        LADDER,
        {},
        lambda: switching.resonant(150.0, 1e-3, 1e-9, 1e3, 20e-12),
    ),
    "amplifier with an output resistance": (
        FOLLOWER,
        {"source_resistance": 40.0, "pin_capacitance": 200e-12},
        lambda: switching.follower(1e6, 80.0, 40.0, 200e-12, 1e3, 20e-12),
    ),
}

POINTS = np.array([0.3, 2.1, 1.0, 0.1, 2.4, 2.4, 0.7, 1.9, 0.2, 1.1, 2.0, 0.5, 1.5, 1.2, 0.9, 2.2])
STEP = [0.0, 2.5e-5, 4.8e-5, 7.1e-5]
"""The second is inside a window, the third at an instant of sampling, the fourth before one."""


def _step() -> tuple[Drive, switching.Signal]:
    levels = [0.4, 2.2, 0.1, 1.7]
    return Lines.of(0.4, STEP, levels), switching.lines(STEP, levels, [0.0] * 4)


def _sine() -> tuple[Drive, switching.Signal]:
    (drive,) = Sine(amplitude=1.1, frequency=17e3, offset=1.2).drives(())
    return drive, switching.sine(1.2, 1.1, 17e3)


def _recording(between: Any, rate: float) -> tuple[Drive, switching.Signal]:
    times = np.arange(len(POINTS)) / rate
    last = np.append(POINTS[1:], POINTS[-1])
    slopes = (last - POINTS) * rate if between == "line" else np.zeros(len(POINTS))
    drive = InMemory(POINTS, rate, between)
    return drive, switching.lines(times.tolist(), POINTS.tolist(), slopes.tolist())


STIMULI: dict[str, Callable[[], tuple[Drive, switching.Signal]]] = {
    "steps inside windows": _step,
    "sine": _sine,
    "held points at a commensurate rate": lambda: _recording("hold", 2.0 * RATE),
    "points joined by lines at an odd rate": lambda: _recording("line", 0.73 * RATE),
}


def _port(stage: Stage, values: InputNetwork) -> Port:
    impedance = OutputImpedance.of(stage.output_circuit())
    return Port.of(impedance, values.source_resistance, values.pin_capacitance)


def _network(keys: dict[str, Any], stage: Stage) -> SwitchedInput:
    values = InputNetwork.model_validate(
        {
            "switch_resistance": 1e3,
            "sampling_capacitance": 20e-12,
            "acquisition_time": OPENED,
            **keys,
        }
    )
    adc = Adc(rate=RATE, bits=16, high=FULL_SCALE, first=8e-6, input=values)
    return SwitchedInput(adc, values, network_of(_port(stage, values), values))


def _held(
    stage: Stage,
    keys: dict[str, Any],
    drive: Drive,
    instants: np.ndarray,
    initial: Any = "settled",
    cuts: tuple[int, ...] = (),
) -> np.ndarray:
    """Run the recursion of the package over instants, in one piece or cut."""
    network = _network(keys, stage)
    models = Models(chain_of([stage]), None, (drive,), initial, 1e-3)
    axis = Axis(1.0 / RATE, 2.0 / RATE)
    steps = HeldSteps(network, network.signals(models, axis, Stepping()), initial, 0.0, 0)
    parts = []
    for begin, end in zip((0, *cuts), (*cuts, len(instants)), strict=True):
        parts.append(steps.advance(begin, instants[begin:end]))
    return np.concatenate(parts)


def _instants(count: int = COUNT) -> np.ndarray:
    return 8e-6 + np.arange(count) / RATE


@pytest.mark.parametrize("stimulus", STIMULI)
@pytest.mark.parametrize("circuit", CIRCUITS)
def test_held_voltages_are_those_of_the_circuit_equations(circuit: str, stimulus: str) -> None:
    """The held voltages agree with the alternating circuit within 1e-9 of full scale."""
    stage, keys, independent = CIRCUITS[circuit]
    drive, signal = STIMULI[stimulus]()
    instants = _instants()
    found = _held(stage, keys, drive, instants)
    wanted = switching.held(
        independent(), signal, instants.tolist(), OPENED, (1.0, 0.0, 0.0), 1.0 / RATE,
        float(drive.initial),
    )  # fmt: skip
    assert np.max(np.abs(found - np.array(wanted, float))) < 1e-9 * FULL_SCALE


@pytest.mark.parametrize(
    ("keys", "starts"),
    [
        ({"holds": "zero"}, (0.0, 0.0, 0.0)),
        ({"holds": "mid-scale"}, (0.0, 1.25, 0.0)),
        ({"holds": "voltage", "held_voltage": 0.6}, (0.0, 0.6, 0.0)),
        ({"precharge_share": 0.9}, (0.1, 0.0, 0.9)),
        ({"holds": "zero", "precharge_share": 0.75}, (0.0, 0.0, 0.75)),
    ],
)
@pytest.mark.parametrize("initial", ["settled", "rest"])
def test_what_the_capacitor_has_when_the_switch_closes(
    keys: dict[str, Any], starts: tuple[float, float, float], initial: str
) -> None:
    """Every way of holding, and both ways of beginning, agree with the circuit equations."""
    stage, parts, independent = CIRCUITS["low pass without a buffer"]
    drive, signal = STIMULI["sine"]()
    instants = _instants()
    found = _held(stage, {**parts, **keys}, drive, instants, initial)
    wanted = switching.held(
        independent(), signal, instants.tolist(), OPENED, starts, 1.0 / RATE,
        float(drive.initial) if initial == "settled" else None,
    )  # fmt: skip
    assert np.max(np.abs(found - np.array(wanted, float))) < 1e-9 * FULL_SCALE


def test_uneven_instants_are_exact_too() -> None:
    """Instants off the even clock, as jitter makes them, agree within 1e-9 of full scale."""
    stage, keys, independent = CIRCUITS["reservoir that recovers slowly"]
    drive, signal = STIMULI["points joined by lines at an odd rate"]()
    shift = np.array([0.0, 3e-7, -2.1e-7, 1e-9, 4.4e-7, -3e-7, 0.0, 1.7e-7])
    instants = _instants() + shift
    found = _held(stage, keys, drive, instants)
    wanted = switching.held(
        independent(), signal, instants.tolist(), OPENED, (1.0, 0.0, 0.0), 1.0 / RATE,
        float(drive.initial),
    )  # fmt: skip
    assert np.max(np.abs(found - np.array(wanted, float))) < 1e-9 * FULL_SCALE


def test_scratch_memory_never_shows(monkeypatch: pytest.MonkeyPatch) -> None:
    """Uneven instants give the same bits, whatever unwritten memory holds: here, no numbers."""
    stage, keys, _ = CIRCUITS["ladder that rings"]
    drive, _ = STIMULI["sine"]()
    instants = _instants() + np.array([2e-7, 3e-7, -2.1e-7, 1e-9, 4.4e-7, -3e-7, 0.0, 1.7e-7])
    wanted = _held(stage, keys, drive, instants)
    monkeypatch.setattr(np, "empty", lambda shape, dtype=float: np.full(shape, np.nan, dtype))
    assert np.array_equal(_held(stage, keys, drive, instants), wanted)


def test_no_cut_of_time_changes_a_bit() -> None:
    """Blocks of any length hold the same voltages, bit by bit."""
    stage, keys, _ = CIRCUITS["ladder that rings"]
    drive, _ = STIMULI["held points at a commensurate rate"]()
    instants = _instants()
    whole = _held(stage, keys, drive, instants)
    for cuts in ((1,), (5, 6), (3, 4, 7)):
        assert np.array_equal(_held(stage, keys, drive, instants, cuts=cuts), whole)
