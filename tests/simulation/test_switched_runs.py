"""Runs with an input network: codes, noise, averages, limits, records."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from scipy.integrate import quad

from frontend_sim.archive import open_record, record_run, rerun
from frontend_sim.errors import ModelError, ScenarioError
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import Simulation, simulate
from frontend_sim.simulation.uniform import WAVEFORM_TILE

NETWORK = {
    "source_resistance": 5e3,
    "pin_capacitance": 10e-12,
    "switch_resistance": 1e3,
    "sampling_capacitance": 20e-12,
    "acquisition_time": 400e-9,
}
SINE = {"kind": "sine", "amplitude": 1.0, "frequency": 1.3e3, "offset": 1.2}


def scenario(network: dict[str, Any] | None = None, **keys: Any) -> Scenario:
    """Return a sine into a low pass without a buffer, with some keys of its own."""
    adc = {"rate": 100e3, "bits": 16, "high": 2.5, **keys.pop("adc", {})}
    low_pass = {"kind": "rc-lowpass", "resistance": 1e3, "capacitance": 1e-9}
    values: dict[str, Any] = {
        "stimulus": SINE,
        "chain": [low_pass],
        "adc": {**adc, "input": NETWORK | (network or {})},
        "simulation": {"duration": 5e-3, **keys.pop("simulation", {})},
        **keys,
    }
    return Scenario.model_validate(values)


def test_codes_are_those_of_the_held_voltage() -> None:
    """Without noise each code is the held voltage, rounded; the pin is that without the load."""
    loaded = scenario(simulation={"noise": False})
    run = simulate(loaded)
    assert np.array_equal(run.codes, np.floor(run.held / loaded.adc.lsb + 0.5))
    bare = loaded.model_copy(update={"adc": loaded.adc.model_copy(update={"input": None})})
    free = simulate(bare)
    assert np.array_equal(free.pin, run.pin)
    assert len(free.held) == 0
    assert np.max(np.abs(run.held - run.pin)) > 10.0 * loaded.adc.lsb


def test_blocks_do_not_show() -> None:
    """A short block gives the same held voltages and codes, bit by bit, jitter included."""
    values = {"adc": {"aperture_jitter": 1e-8}, "simulation": {"duration": 0.2}}
    whole = simulate(scenario(**values))
    cut = simulate(scenario(**values), block=WAVEFORM_TILE)
    assert np.array_equal(whole.held, cut.held)
    assert np.array_equal(whole.codes, cut.codes)


def test_thermal_noise_of_the_capacitor_is_in_the_codes() -> None:
    """A steady input is noisy by the square root of kT/C, within five standard errors."""
    values = {
        "stimulus": {"kind": "step", "before": 1.0, "after": 1.0},
        "chain": [],
        "adc": {"bits": 24},
        "simulation": {"duration": 0.2},
    }
    network = {"sampling_capacitance": 1e-12, "source_resistance": 100.0, "pin_capacitance": 0.0}
    run = simulate(scenario(network, **values))
    wanted = math.sqrt(1.380649e-23 * 298.15 / 1e-12)
    error = 5.0 / math.sqrt(2.0 * len(run.codes))
    assert np.std(run.voltage - run.held) == pytest.approx(wanted, rel=error)
    quiet = simulate(scenario({**network, "noise": False}, **values))
    assert np.std(quiet.voltage - quiet.held) < 0.1 * wanted


def test_the_held_voltage_of_an_average_is_that_of_its_last_look() -> None:
    """Averages of four take every fourth held voltage of conversions at four times the rate."""
    adc = {"rate": 25e3, "averaging": {"count": 4}}
    average = simulate(scenario(adc=adc, simulation={"noise": False}))
    single = simulate(scenario(adc={"rate": 100e3}, simulation={"noise": False}))
    np.testing.assert_allclose(average.held, single.held[3::4], rtol=0, atol=1e-13)
    assert len(average.held) == len(average.codes)


def test_bursts_have_intervals_of_their_own() -> None:
    """In a burst the source recovers less than before it: the first look holds more."""
    adc = {"rate": 1e3, "averaging": {"count": 4, "interval": 1e-6}}
    network = {"holds": "zero", "pin_capacitance": 10e-9, "source_resistance": 2e3}
    values = {"stimulus": {"kind": "step", "before": 1.0, "after": 1.0}, "chain": []}
    run = Simulation(scenario(network, adc=adc, simulation={"noise": False}, **values))
    sampler = run.held_steps(run.look_axis())
    assert sampler is not None
    pattern = run.scenario.adc.pattern
    held = sampler.advance(0, pattern.between(0, 8))
    np.testing.assert_allclose(held[4:], held[:4], rtol=0, atol=1e-13)
    assert np.all(np.diff(held[:4]) < -1e-4)


def test_a_clipped_source_is_acquired_clipped() -> None:
    """Behind an amplifier at its rail the held voltage is the integral over the clipped sine.

    The window's impulse response is that of R C alone; quadrature gives the integral. The clipped
    waveform comes from a grid, to 1e-6 of full scale here.
    """
    amplifier = {"kind": "rail-limit", "low": 0.5, "high": 1.9}
    network = {"pin_capacitance": 0.0, "holds": "zero"}
    run = simulate(
        scenario(
            network,
            chain=[amplifier],
            simulation={"noise": False, "duration": 1e-3, "accuracy": 0.001},
        )
    )
    tau, window = 6e3 * 20e-12, 400e-9

    def clipped(t: float) -> float:
        return min(max(1.2 + math.sin(2.0 * math.pi * 1.3e3 * t), 0.5), 1.9)

    wanted = [
        quad(lambda t, end=end: clipped(end - t) * math.exp(-t / tau) / tau, 0.0, window)[0]
        for end in run.time[1:]
    ]
    np.testing.assert_allclose(run.held[1:], wanted, rtol=0, atol=1e-6 * 2.5)


def test_a_record_keeps_what_was_held(tmp_path: Path) -> None:
    """The record has the held voltages, and a run from it alone gives the same codes."""
    loaded = scenario()
    path = record_run(Simulation(loaded), tmp_path / "loaded.h5")
    run = simulate(loaded)
    with open_record(path) as record:
        assert np.array_equal(record.held, run.held)
        assert np.array_equal(record.conversions(7, 90).held, run.held[7:90])
        again = rerun(record)
        record.verify()
    assert np.array_equal(again.codes, run.codes)


def test_a_discrete_model_is_refused() -> None:
    """A grid knows no switch, and the message says what to do."""
    values = scenario(simulation={"discretization": "zoh", "grid_rate": 1e6})
    with pytest.raises(ScenarioError, match='set it to "exact"'):
        Simulation(values)


def test_a_drift_of_parts_counts() -> None:
    """At 75 degC a capacitor of +1000 ppm/K is 5 % larger, and less settles."""
    drifting = {"sampling_capacitance": {"value": "20 pF", "drift": "1000 ppm/K"}}
    hot = {"environment": {"temperature": "75 degC"}, "simulation": {"noise": False}}
    run = simulate(scenario(drifting, **hot))
    direct = simulate(scenario({"sampling_capacitance": 21e-12}, **hot))
    np.testing.assert_allclose(run.held, direct.held, rtol=0, atol=1e-13)


def test_a_source_without_resistance_is_told() -> None:
    """A stage that counts as an ideal source is named in the notes if nothing is behind it."""
    run = simulate(scenario({"source_resistance": 0.0}, chain=[{"kind": "gain", "gain": 1.0}]))
    assert any("counts as a source without resistance" in note for note in run.notes)
    assert not any("without resistance" in note for note in simulate(scenario()).notes)


def test_an_inductance_at_the_switch_is_refused() -> None:
    """A ladder that ends in an inductance has no answer to a switch."""
    element = [
        {"place": "series", "resistance": 100.0},
        {"place": "series", "inductance": 1e-3},
    ]
    with pytest.raises(ModelError, match="capacitance or a resistance to ground"):
        Simulation(scenario(chain=[{"kind": "ladder", "element": element}]))
