"""What a run takes on the disk and in memory is told before it begins."""

from __future__ import annotations

from pathlib import Path

import h5py
import pytest

import frontend_sim as fe
from frontend_sim.archive import room
from frontend_sim.archive.room import Room, check_room, free_bytes, told_bytes
from frontend_sim.cli import main
from frontend_sim.errors import OutputError
from frontend_sim.measure.checks import Keeper
from frontend_sim.scenario import parse_scenario
from frontend_sim.simulation import ScanSimulation, Simulation

SCENARIOS = Path(__file__).parents[2] / "scenarios"

CHECKED = '[[check]]\nkind = "clipping"\n[[check]]\nkind = "snr"\nat_least = "20 dB"\n'

SINE = """
format = 1
[stimulus]
kind = "sine"
amplitude = "1 V"
offset = "1.5 V"
frequency = "997 Hz"
[[chain]]
kind = "rc-lowpass"
name = "input"
resistance = "10 kohm"
capacitance = "4.7 nF"
[adc]
rate = "20 kHz"
bits = 12
low = "0 V"
high = "3.3 V"
[simulation]
duration = "{} s"
waveform_rate = "10 kHz"
waveform_points = ["input"]
"""


def simulation(seconds: float, checks: str = "") -> Simulation:
    """Return a run that is ready to begin."""
    scenario = parse_scenario(SINE.format(seconds) + checks)
    assert isinstance(scenario, fe.Scenario)
    return Simulation(scenario)


def test_the_size_of_a_record_lies_within_what_is_told(tmp_path: Path) -> None:
    """10 s: 200 000 pins and 100 000 points of 8 bytes do not shrink, the rest does.

    Checksums and what is written once add less than 10 %.
    """
    run = simulation(10.0)
    told = Room.of(run)
    assert told.conversions == 200_000
    assert told.least == 300_000 * 8
    # time, code, voltage and flag of each conversion, and the time of each point
    assert told.most == told.least + 200_000 * (8 + 2 + 8 + 1) + 100_000 * 8
    size = fe.record_run(run, tmp_path / "run.h5").stat().st_size
    assert told.least < size < 1.1 * told.most


@pytest.mark.parametrize("name", ["converter/input-network", "stages/rtd"])
def test_all_that_a_record_holds_is_counted(name: str, tmp_path: Path) -> None:
    """The voltage that was held and the quantity at a sensor have columns of their own."""
    run = Simulation(fe.load_single_scenario(SCENARIOS / f"{name}.toml"))
    told = Room.of(run)
    with h5py.File(fe.record_run(run, tmp_path / "run.h5")) as record:
        columns = [data for group in ("adc", "waveform") if group in record
                   for data in record[group].values()]  # fmt: skip
        assert told.most == pytest.approx(sum(data.size * data.dtype.itemsize for data in columns))
        full = [data for data in columns if data.compression is None]
        assert told.least == sum(data.size * data.dtype.itemsize for data in full)


@pytest.mark.parametrize("name", ["sequential", "charge_memory", "simultaneous"])
def test_the_channels_of_a_scan_add_up(name: str, tmp_path: Path) -> None:
    """Conversions that the scan throws away are not stored."""
    scenario = fe.load_scenario(SCENARIOS / "scan" / f"{name}.toml")
    assert isinstance(scenario, fe.ScanScenario)
    run = ScanSimulation(scenario)
    told = Room.of(run)
    with fe.open_record(fe.record_run(run, tmp_path / "scan.h5")) as record:
        assert isinstance(record, fe.ScanRecord)
        assert told.conversions == sum(channel.count for channel in record.channels.values())


def test_checks_tell_the_memory_that_they_take() -> None:
    """As many bytes as the arrays have that are kept in the end."""
    run = simulation(1.0, CHECKED)
    keeper = Keeper(run.scenario)
    for block in run.blocks():
        keeper.add(block)
    kept = keeper.finished(None)
    names = ("time", "pin", "held", "codes", "voltage", "overrange")
    assert Room.of(run).memory == sum(getattr(kept, name).nbytes for name in names) > 0
    assert Room.of(simulation(1.0)).memory == 0


def test_a_record_larger_than_the_disk_is_refused_before_the_run(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """2e10 conversions: one message with the size, what is free and what to do; nothing is left."""
    (tmp_path / "huge.toml").write_text(SINE.format("1e6"))
    monkeypatch.chdir(tmp_path)
    monkeypatch.setattr(room, "free_bytes", lambda directory: 239_999_999_999)
    assert main(["run", "huge.toml"]) == 2
    told = capsys.readouterr().err
    assert "20,000,000,000 conversions needs at least 240 GB" in told
    assert "has 240 GB left; shorten simulation.duration" in told
    with pytest.raises(OutputError, match="at least 240 GB"):
        fe.record_run(simulation(1e6), tmp_path / "huge.h5")
    assert [path.name for path in tmp_path.iterdir()] == ["huge.toml"]


def test_what_depends_on_compression_is_a_note(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """A disk between the least and the most, and a memory below what is kept: the run goes on."""
    (tmp_path / "short.toml").write_text(SINE.format(1.0) + CHECKED)
    monkeypatch.chdir(tmp_path)
    monkeypatch.setattr(room, "free_bytes", lambda directory: 400_000)
    monkeypatch.setattr(room, "memory_bytes", lambda: 100_000)
    assert main(["run", "short.toml"]) == 0
    told = capsys.readouterr().err
    assert "note: short.h5 will take 240 kB to 700 kB" in told
    assert "of 20,000 conversions in memory, and this machine has 100 kB" in told
    monkeypatch.setattr(room, "memory_bytes", lambda: None)
    monkeypatch.setattr(room, "free_bytes", lambda directory: 10**9)
    assert check_room(simulation(1.0, CHECKED), tmp_path / "short.h5") == ()


def test_free_space_of_a_place_to_come(tmp_path: Path) -> None:
    """A folder that is not there yet lies on the disk of the one above."""
    assert free_bytes(tmp_path / "a" / "b") == pytest.approx(free_bytes(tmp_path), rel=0.1)
    assert [told_bytes(size) for size in (999.0, 1.25e9, 2e15)] == ["999 B", "1.25 GB", "2e+03 TB"]
