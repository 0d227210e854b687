"""The record and what is drawn of it give each point of the chain in its own unit."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import h5py
import numpy as np
import pytest
from archived import made_run, scenario

from frontend_sim.archive import open_record, save_record
from frontend_sim.present import run_figure, run_summary
from frontend_sim.simulation import Run

KEPT = {"duration": "10 ms", "waveform_rate": "1 kHz"}
DIODE: list[dict[str, Any]] = [
    {"kind": "photodiode", "name": "diode", "responsivity": "0.6 A/W"},
    {"kind": "transimpedance-amplifier", "name": "amplifier", "feedback_resistance": "1 Mohm"},
]
PROBE: list[dict[str, Any]] = [
    {"kind": "thermal-lag", "name": "pocket", "time_constant": "2 s"},
    {"kind": "rtd", "name": "probe", "excitation_current": "1 mA"},
]
PEDAL: list[dict[str, Any]] = [
    {"kind": "potentiometer", "name": "pedal", "resistance": 1e4, "excitation_voltage": 3}
]
CASES = [
    (DIODE, {"kind": "step", "after": "1 uW"}, ["W", "A", "V"]),
    (PROBE, {"kind": "step", "before": 290, "after": 300}, ["K", "K", "V"]),
    (PEDAL, {"kind": "step", "after": "50 %"}, ["1", "V"]),
]


def run(chain: list[dict[str, Any]], stimulus: dict[str, Any]) -> Run:
    """Return a run of random numbers through a chain with a sensor."""
    values = scenario(chain=chain, stimulus=stimulus, simulation=KEPT)
    return made_run(values, 20, values.points())


@pytest.mark.parametrize(("chain", "stimulus", "units"), CASES)
def test_each_waveform_has_the_unit_of_its_point(
    tmp_path: Path, chain: list[dict[str, Any]], stimulus: dict[str, Any], units: list[str]
) -> None:
    """A general reader of HDF5 finds the unit and what it is at every dataset."""
    made = run(chain, stimulus)
    save_record(made, tmp_path / "a.h5")
    with h5py.File(tmp_path / "a.h5") as file:
        found = [file["waveform"][name].attrs["units"] for name in made.scenario.points()]
        assert found == units
        assert file["adc/pin"].attrs["units"] == "V"
        described = file["waveform/stimulus"].attrs["description"]
    assert described.endswith(" at this point")
    with open_record(tmp_path / "a.h5") as record:
        assert record.scenario.units() == made.scenario.units()
        assert np.array_equal(record.waveform["stimulus"], made.waveform["stimulus"])


def test_each_unit_has_a_panel_of_its_own() -> None:
    """Watts, amperes and volts are not drawn on one axis; temperatures are in degrees."""
    labels = [axes.get_ylabel() for axes in run_figure(run(*CASES[0][:2])).axes]
    assert [label.split(" [")[0] for label in labels[2:]] == ["power", "current", "waveforms"]
    figure = run_figure(run(*CASES[1][:2]))
    assert figure.axes[2].get_ylabel() == "temperature [degC]"
    lines = {line.get_label() for line in figure.axes[2].lines}
    assert lines == {"stimulus", "pocket"}
    drawn = figure.axes[2].lines[0].get_ydata()
    kelvin = run(*CASES[1][:2]).waveform["stimulus"]
    assert np.min(drawn) == pytest.approx(np.min(kelvin) - 273.15, rel=1e-12)


def test_the_summary_tells_the_stimulus_in_its_unit() -> None:
    """For programs in SI, where its waveform is kept; else there is none."""
    made = run(*CASES[0][:2])
    told = run_summary(made)["stimulus"]
    assert told["unit"] == "W"
    assert told["highest"] == np.max(made.waveform["stimulus"])
    assert run_summary(made_run(made.scenario, 20))["stimulus"] is None
