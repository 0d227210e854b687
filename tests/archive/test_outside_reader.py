"""A record as any reader of HDF5 sees it, who knows nothing of this program."""

from __future__ import annotations

import json
import tomllib
from collections.abc import Iterator
from datetime import UTC, datetime, timedelta
from typing import Any

import h5py
import numpy as np
import pytest
from archived import Cut, made_run, scenario

from frontend_sim.archive import Result, record_run
from frontend_sim.simulation import GridReport, Run

UNITS = {
    "scenario": "1",
    "resolved": "1",
    "notes": "1",
    "adc/time": "s",
    "adc/code": "1",
    "adc/pin": "V",
    "adc/voltage": "V",
    "adc/overrange": "1",
    "waveform/time": "s",
    "waveform/stimulus": "V",
    "waveform/in%2Fout": "V",
    "measure": "per row",
    "check": "per row",
}


@pytest.fixture(scope="module")
def run() -> Run:
    """Return a run that has a bit of everything."""
    chain = [{"kind": "gain", "name": "in/out", "gain": 2}]
    grid = GridReport("foh", 1e6, 0.01, 0.02, 0.005, 0.0)
    return made_run(scenario(chain=chain), 300, ("stimulus", "in/out"), ("one", "two"), grid)


@pytest.fixture(scope="module")
def file(run: Run, tmp_path_factory: pytest.TempPathFactory) -> Iterator[h5py.File]:
    """Open the record of the run with h5py alone."""
    results = [Result("overshoot", 4.5, "%", 5.0, 0.5, "holds", "peak over final value")]
    path = record_run(Cut(run, 70), tmp_path_factory.mktemp("out") / "r.h5", results=results)
    with h5py.File(path) as opened:
        yield opened


def datasets(file: h5py.File) -> dict[str, Any]:
    """Return every dataset by its path."""
    found: dict[str, Any] = {}
    file.visititems(
        lambda name, item: found.update({name: item} if isinstance(item, h5py.Dataset) else {})
    )
    return found


def test_head(file: h5py.File, run: Run) -> None:
    """The root says what this is, from what and when."""
    head = dict(file.attrs)
    assert list(head)[:2] == ["format", "format_version"]
    assert head["format"] == "frontend_sim record"
    assert head["format_version"] == 1
    assert head["title"] == run.scenario.title
    assert head["scenario_digest"] == run.scenario.digest()
    assert head["seed"] == run.scenario.seed
    assert head["verdict"] == "holds"
    created = datetime.fromisoformat(head["created"])
    assert created.utcoffset() == timedelta(0)
    assert abs(datetime.now(UTC) - created) < timedelta(minutes=10)


def test_every_dataset_has_a_unit_and_a_description(file: h5py.File) -> None:
    """The datasets are those of the design, each with its unit and a sentence."""
    found = datasets(file)
    assert {name: dataset.attrs["units"] for name, dataset in found.items()} == UNITS
    assert all(dataset.attrs["description"] for dataset in found.values())


def test_time_is_the_axis(file: h5py.File) -> None:
    """Each row of numbers has the time of its group attached as its dimension scale."""
    for group in (file["adc"], file["waveform"]):
        assert group["time"].is_scale
        for name, dataset in group.items():
            if name != "time":
                assert [scale.name for scale in dataset.dims[0].values()] == [group["time"].name]
                assert dataset.dims[0].label == "time"


def test_every_number_has_a_checksum(file: h5py.File) -> None:
    """All numbers and tables are stored in chunks with Fletcher's checksum."""
    for name, dataset in datasets(file).items():
        if h5py.check_string_dtype(dataset.dtype) is None:
            assert dataset.fletcher32, name


def test_numbers(file: h5py.File, run: Run) -> None:
    """Types are those that the design names, values those of the run."""
    adc = file["adc"]
    assert {name: adc[name].dtype for name in adc} == {
        "time": np.float64, "code": np.uint16, "pin": np.float64, "voltage": np.float64,
        "overrange": np.bool_,
    }  # fmt: skip
    np.testing.assert_array_equal(adc["code"][:], run.codes)
    np.testing.assert_array_equal(adc["overrange"][:], run.overrange)
    np.testing.assert_array_equal(file["waveform/in%2Fout"][:], run.waveform["in/out"])
    assert list(file["waveform"]) == ["time", "stimulus", "in%2Fout"]
    assert file["waveform/in%2Fout"].attrs["point"] == "in/out"


def test_a_code_can_be_read_without_the_scenario(file: h5py.File, run: Run) -> None:
    """The group of the conversions tells what a code is worth."""
    about = file["adc"].attrs
    assert about["bits"] == 12
    assert about["code_format"] == "straight-binary"
    assert (about["lowest_code"], about["highest_code"]) == (0, 4095)
    assert about["low"] == 0.0
    assert about["lsb"] == pytest.approx(3.3 / 4096, rel=1e-15)


def test_text(file: h5py.File, run: Run) -> None:
    """The scenario is TOML, the resolved values are JSON in SI, the notes are a row of texts."""
    assert tomllib.loads(file["scenario"].asstr()[()])["seed"] == 7
    resolved = json.loads(file["resolved"][()])
    assert resolved["scenario"]["adc"]["rate"] == 20000.0
    assert resolved["scenario"]["simulation"]["initial"] == "settled"
    assert resolved["versions"]["numpy"] == np.__version__
    assert {"frontend-sim", "python", "scipy", "h5py", "hdf5"} <= resolved["versions"].keys()
    assert resolved["platform"]
    assert list(file["notes"].asstr()[:]) == ["one", "two"]


def test_tables(file: h5py.File) -> None:
    """A table has the columns of the design and two more; the grid is among the measures."""
    names = (
        "name", "value", "unit", "limit", "margin", "verdict", "method", "bound", "advice",
    )  # fmt: skip
    assert file["measure"].dtype.names == file["check"].dtype.names == names
    check = file["check"][0]
    assert (check["name"], check["verdict"]) == (b"overshoot", b"holds")
    assert (check["value"], check["limit"], check["margin"]) == (4.5, 5.0, 0.5)
    measures = {row["name"].decode(): row["value"] for row in file["measure"][:]}
    assert measures["grid rate"] == 1e6
    assert measures["grid error, largest"] == 0.02
