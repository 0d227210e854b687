"""Runs that differ in their parts go side by side, and each is the run that it is alone."""

from __future__ import annotations

from dataclasses import fields
from pathlib import Path

import numpy as np
import pytest

from frontend_sim import Scenario, Simulation, parse_scenario
from frontend_sim.scenario.vary import with_values
from frontend_sim.simulation.run import RunBlock
from frontend_sim.simulation.together import together

TEXT = """
format = 1
seed = 4

[stimulus]
kind = "recording"
file = "recorded.csv"
rate = "100 kHz"

[[chain]]
kind = "rc-lowpass"
resistance = "10 kohm"
capacitance = "4.7 nF"

[[chain]]
kind = "butterworth"
order = 4
corner = "2 kHz"

[adc]
rate = "10 kHz"
bits = 16
low = "-5 V"
high = "5 V"
input_noise = "100 uV"

[simulation]
waveform_rate = "1 kHz"
"""


@pytest.fixture
def base(tmp_path: Path) -> Scenario:
    """A recording of noise through a filter."""
    points = np.random.default_rng(1).standard_normal(150_000)
    np.savetxt(tmp_path / "recorded.csv", points, header="v", comments="")
    return parse_scenario(TEXT, tmp_path)


def blocks(simulation: Simulation) -> list[RunBlock]:
    """Run a simulation."""
    return list(simulation.blocks())


def same(first: list[RunBlock], second: list[RunBlock]) -> None:
    """Compare all arrays of two runs bit by bit."""
    assert len(first) == len(second)
    for one, other in zip(first, second, strict=True):
        for field in fields(RunBlock):
            values = getattr(one, field.name), getattr(other, field.name)
            if field.name == "waveform":
                assert values[0].keys() == values[1].keys()
                for name in values[0]:
                    assert np.array_equal(values[0][name], values[1][name])
            else:
                assert np.array_equal(*values)


def test_runs_side_by_side_are_the_runs_alone(base: Scenario) -> None:
    """Five draws over one recording: conversions, codes and waveforms are the same."""
    draws = [with_values(base, {"chain[1].resistance": 1e4 + 100 * k, "seed": k}) for k in range(5)]
    side_by_side = [Simulation(each) for each in draws]
    assert together(side_by_side) == 5
    for scenario, simulation in zip(draws, side_by_side, strict=True):
        same(blocks(simulation), blocks(Simulation(scenario)))


@pytest.mark.parametrize(
    "values",
    [
        {"adc.aperture_jitter": "1 us"},
        {"adc.rate": "9999 Hz"},
        {"simulation.discretization": "zoh", "simulation.grid_rate": "100 kHz"},
    ],
)
def test_what_cannot_go_side_by_side_goes_alone(base: Scenario, values: dict[str, object]) -> None:
    """Jitter, another rate, a discrete model: each is still the run that it is alone."""
    draws = [with_values(base, {**values, "chain[1].resistance": 1e4 + k}) for k in range(3)]
    runs = [Simulation(each) for each in draws]
    together(runs)
    for scenario, simulation in zip(draws, runs, strict=True):
        same(blocks(simulation), blocks(Simulation(scenario)))


@pytest.mark.parametrize(
    "values",
    [
        {"adc.rate": "5 kHz"},
        {"adc.first": "100 us"},
        {"adc.aperture_delay": "3 us"},
        {"simulation.duration": "1 s"},
    ],
)
def test_only_those_with_the_same_instants_go_together(
    base: Scenario, values: dict[str, object]
) -> None:
    """A run of another clock or length among the others goes alone."""
    draws = [
        with_values(base, {**(values if k == 2 else {}), "chain[1].resistance": 1e4 + k})
        for k in range(4)
    ]
    runs = [Simulation(each) for each in draws]
    assert together(runs) == 3
    for scenario, simulation in zip(draws, runs, strict=True):
        same(blocks(simulation), blocks(Simulation(scenario)))
