"""The physical quantity at the sensor at the instants of the conversions."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest

import frontend_sim as fe
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import simulate

BRIDGE = {
    "kind": "resistive-bridge", "sensitivity": "2 mV/V", "full_scale": "10 bar",
    "excitation": "5 V",
}  # fmt: skip
LOW = {"kind": "rc-lowpass", "resistance": "10 kohm", "capacitance": "10 nF"}
DELAY = {"kind": "transport-delay", "delay": "123 us"}
CONVERTERS: dict[str, dict[str, Any]] = {
    "plain": {"rate": "20 kHz"},
    "late": {"rate": "20 kHz", "first": "137 us", "aperture_jitter": "100 ns"},
    "averaging": {"rate": "1 kHz", "averaging": {"count": 4}},
    "oversampling": {
        "kind": "oversampling", "modulator_rate": "200 kHz", "data_rate": "10 kHz", "order": 3,
    },
}  # fmt: skip


def scenario(stimulus: dict[str, Any], adc: dict[str, Any]) -> Scenario:
    """Make an invented scenario of a pressure sensor."""
    return Scenario.model_validate(
        {
            "stimulus": stimulus,
            "chain": [BRIDGE, LOW, DELAY],
            "adc": {"bits": 12, "high": "20 mV", **adc},
            "simulation": {"duration": "50 ms"},
        }
    )


@pytest.mark.parametrize("name", CONVERTERS)
def test_a_sine_of_pressure(name):
    """The closed form at each conversion's own instant, in pascal, whatever the chain delays."""
    stimulus = {"kind": "sine", "amplitude": "3 bar", "frequency": "331 Hz", "offset": "5 bar"}
    run = simulate(scenario(stimulus, CONVERTERS[name]))
    expected = 5e5 + 3e5 * np.sin(2.0 * np.pi * 331.0 * run.time)
    np.testing.assert_allclose(run.stimulus, expected, rtol=0.0, atol=1e-6)


def test_points_of_a_recording_are_looked_up(tmp_path: Path):
    """Lines between the points, at every conversion."""
    points = np.random.default_rng(3).uniform(0.0, 1e6, 600)
    np.save(tmp_path / "points.npy", points)
    stimulus = {
        "kind": "recording", "file": str(tmp_path / "points.npy"), "rate": "10 kHz", "unit": "Pa",
    }  # fmt: skip
    run = simulate(scenario(stimulus, CONVERTERS["plain"]))
    expected = np.interp(run.time, np.arange(600) / 10e3, points)
    np.testing.assert_allclose(run.stimulus, expected, rtol=1e-12, atol=1e-6)


def test_a_voltage_is_not_kept_twice():
    """A stimulus in volts is a waveform like any other: nothing is kept at the conversions."""
    values = Scenario.model_validate(
        {
            "stimulus": {"kind": "step", "after": 1.0},
            "adc": {"rate": "1 kHz", "bits": 8, "high": "3 V"},
            "simulation": {"duration": "5 ms"},
        }
    )
    assert len(simulate(values).stimulus) == 0


def test_the_record_keeps_it_with_its_unit(tmp_path: Path):
    """``/adc/stimulus`` has its unit and the axis of the conversions, and reads back."""
    import h5py

    values = scenario({"kind": "ramp", "before": "1 bar", "slope": "20 bar/s"}, CONVERTERS["plain"])
    run = simulate(values)
    path = fe.save_record(run, tmp_path / "run.h5")
    with h5py.File(path) as file:
        dataset = file["adc/stimulus"]
        assert dataset.attrs["units"] == "Pa"
        assert dataset.dims[0][0] == file["adc/time"]
    with fe.open_record(path) as record:
        record.verify()
        np.testing.assert_array_equal(record.stimulus, run.stimulus)
        np.testing.assert_array_equal(record.conversions(3, 7).stimulus, run.stimulus[3:7])
        np.testing.assert_array_equal(record.run().stimulus, run.stimulus)


def test_the_table_tells_it_in_its_unit():
    """Lowest and highest, first and last, in pascal and not in volts."""
    from frontend_sim.present import run_summary

    values = scenario({"kind": "ramp", "before": "1 bar", "slope": "20 bar/s"}, CONVERTERS["plain"])
    told = run_summary(simulate(values))["stimulus"]
    assert told["unit"] == "Pa"
    assert (told["first"], told["lowest"]) == (1e5, 1e5)
    assert told["last"] == told["highest"] == pytest.approx(1e5 + 2e6 * 0.04995, rel=1e-12)
