"""A record is run again from itself, and gives the same codes."""

from __future__ import annotations

import hashlib
import shutil
from pathlib import Path
from typing import Any

import h5py
import numpy as np
import pytest
from archived import assert_same, scenario

from frontend_sim import simulation
from frontend_sim.archive import (
    open_record,
    provenance,
    record_run,
    repeat,
    rerun,
    rerun_scenario,
    save_record,
)
from frontend_sim.errors import RecordError
from frontend_sim.scenario import Scenario, load_scenario

SIGNAL = "".join(f"{0.001 * k:.3f},{abs(k % 40 - 20) / 10:.2f}\n" for k in range(100))

PROJECT = """
title = "Invented: a triangle through a second-order filter"
seed = 3
[stimulus]
kind = "recording"
file = "signals/triangle.csv"
time = 1
column = 2
[[chain]]
kind = "butterworth"
order = 2
corner = "200 Hz"
[adc]
rate = "3 kHz"
bits = 14
high = "3.3 V"
input_noise = "2 mV"
aperture_jitter = "1 us"
[simulation]
waveform_rate = "10 kHz"
"""


@pytest.fixture
def project(tmp_path: Path) -> Path:
    """Return a folder with a scenario, its recording and its record."""
    folder = tmp_path / "project"
    (folder / "signals").mkdir(parents=True)
    (folder / "out").mkdir()
    (folder / "signals/triangle.csv").write_text(SIGNAL)
    (folder / "triangle.toml").write_text(PROJECT)
    run = simulation.Simulation(load_scenario(folder / "triangle.toml"))
    record_run(run, folder / "out/triangle.h5")
    return folder


def test_identical_codes(project: Path) -> None:
    """All of the run comes again bit by bit, noise and jitter included, and so does its record."""
    with open_record(project / "out/triangle.h5") as record:
        again = rerun(record)
        assert_same(record, again)
        assert again.scenario.source == PROJECT
        with open_record(save_record(again, project / "out/again.h5")) as second:
            assert second.scenario_digest == record.scenario_digest
            assert second.scenario_text == record.scenario_text


@pytest.mark.parametrize(
    "changes",
    [
        {},
        {"chain": [], "simulation": {"duration": "1 ms", "initial": "rest"}},
        {"simulation": {"duration": "10 ms", "discretization": "bilinear", "grid_rate": "100 kHz"}},
        {"simulation": {"duration": "10 ms", "discretization": "zoh"}},
        {"stimulus": {"kind": "noise-burst", "rms": 0.5, "bandwidth": "2 kHz", "length": "5 ms"}},
        {"chain": [{"kind": "poles-zeros", "poles": [[-1e3, 2e3], [-1e3, -2e3]], "gain": 5e6}]},
        {"stimulus": {"kind": "sum", "term": [
            {"kind": "sine", "amplitude": 0.3, "frequency": "1 kHz", "phase": "30 deg"},
            {"kind": "ramp", "slope": "0.1 V/ms"},
        ]}},
    ],
)  # fmt: skip
def test_scenarios_made_in_python(tmp_path: Path, changes: dict[str, Any]) -> None:
    """Every value of a scenario goes through JSON and comes back equal."""
    values = scenario(**changes)
    run = simulation.simulate(values)
    with open_record(save_record(run, tmp_path / "r.h5")) as record:
        assert rerun_scenario(record) == values
        assert_same(rerun(record), run)


def test_a_folder_that_moved(project: Path, tmp_path: Path) -> None:
    """Record and recording moved together: the recording is found as seen from the record."""
    moved = tmp_path / "elsewhere"
    project.rename(moved)
    with open_record(moved / "out/triangle.h5") as record:
        assert rerun_scenario(record).stimulus.files() == (moved / "signals/triangle.csv",)
        np.testing.assert_array_equal(rerun(record).codes, record.codes)


def test_a_recording_beside_the_record(project: Path, tmp_path: Path) -> None:
    """A record that was sent with its recording in one folder is run there."""
    shutil.copy(project / "signals/triangle.csv", tmp_path)
    shutil.copy(project / "out/triangle.h5", tmp_path)
    shutil.rmtree(project)
    with open_record(tmp_path / "triangle.h5") as record:
        assert rerun_scenario(record).stimulus.files() == (tmp_path / "triangle.csv",)
        np.testing.assert_array_equal(rerun(record).codes, record.codes)


def test_a_changed_recording(project: Path) -> None:
    """It is told by name, with both digests, and nothing is run; the arrays can still be read."""
    recording = project / "signals/triangle.csv"
    then = hashlib.sha256(recording.read_bytes()).hexdigest()
    recording.write_text(SIGNAL.replace("0.10", "0.11"))
    now = hashlib.sha256(recording.read_bytes()).hexdigest()
    with open_record(project / "out/triangle.h5") as record:
        with pytest.raises(RecordError, match=r"has changed since.*restore the file") as caught:
            rerun(record)
        for told in (str(recording), then, now):
            assert told in str(caught.value)
        assert record.scenario.adc.bits == 14
        assert record.codes.shape == (300,)


def test_the_right_recording_is_taken_from_several(project: Path) -> None:
    """Where the stored path holds another file now, the one with the digest is looked for."""
    recording = project / "signals/triangle.csv"
    shutil.copy(recording, project / "out/triangle.csv")
    recording.write_text("0,1\n1,1\n")
    with open_record(project / "out/triangle.h5") as record:
        assert rerun_scenario(record).stimulus.files() == (project / "out/triangle.csv",)


def test_a_missing_recording(project: Path) -> None:
    """The message names the places that were looked at, and the digest of what is wanted."""
    recording = project / "signals/triangle.csv"
    digest = hashlib.sha256(recording.read_bytes()).hexdigest()
    recording.unlink()
    with open_record(project / "out/triangle.h5") as record:
        with pytest.raises(RecordError, match=r"is missing \(looked for ") as caught:
            rerun_scenario(record)
        for told in (str(recording), str(project / "out/triangle.csv"), digest):
            assert told in str(caught.value)
        assert record.scenario.stimulus.files() == (recording,)
        assert len(record.codes) == record.count


def test_the_record_names_its_files(project: Path) -> None:
    """Path, size and digest of the recording stand in the resolved values."""
    recording = project / "signals/triangle.csv"
    with open_record(project / "out/triangle.h5") as record:
        assert record.resolved["files"] == [
            {
                "name": str(recording),
                "path": str(recording),
                "from_record": "../signals/triangle.csv",
                "size": len(SIGNAL),
                "sha256": hashlib.sha256(SIGNAL.encode()).hexdigest(),
            }
        ]


def test_other_versions_are_told(project: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Other libraries may round differently, so the notes of the new run name them."""
    now = {**provenance.versions(), "numpy": "99.0"}
    monkeypatch.setattr(repeat, "versions", lambda: now)
    with open_record(project / "out/triangle.h5") as record:
        *notes, note = rerun(record).notes
        assert tuple(notes) == record.notes
    assert note.startswith("run again with numpy 99.0, recorded with ")


def test_values_of_another_program(project: Path) -> None:
    """Values that this version does not know are told with their key."""
    path = project / "out/triangle.h5"
    with h5py.File(path, "r+") as file:
        text = file["resolved"].asstr()[()]
        file["resolved"][()] = text.replace('"bits": 14', '"bits": 14, "color": "red"')
    message = r"cannot be built again, adc\.sampling\.color"
    with open_record(path) as record, pytest.raises(RecordError, match=message):
        rerun_scenario(record)


def test_the_whole_scenario_is_the_fixture(project: Path) -> None:
    """The record's scenario equals the one of the file, source included."""
    with open_record(project / "out/triangle.h5") as record:
        made: Scenario = record.scenario
    assert made == load_scenario(project / "triangle.toml")
