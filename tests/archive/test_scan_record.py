"""The record of a scan: written, read, verified, run again."""

from __future__ import annotations

from pathlib import Path

import h5py
import numpy as np
import pytest
from scanned import LOW_PASS, level, scan_of, sine

from frontend_sim.archive import (
    Record,
    ScanRecord,
    open_record,
    open_single_record,
    record_run,
    rerun,
    save_record,
)
from frontend_sim.errors import RecordError, ScenarioError
from frontend_sim.measure.checks import evaluate_checks
from frontend_sim.scenario import ScanScenario
from frontend_sim.simulation import ScanSimulation, simulate

CHECKS = (
    'waveform_rate = 1e4\n[[check]]\nkind = "clipping"\n'
    '[[check]]\nkind = "headroom"\nchannel = "c1/a"\nat_least = "5 V"\n'
)


def scan(more: str = CHECKS) -> ScanScenario:
    """Return a scan whose second channel has a name that no group can have."""
    made = scan_of([sine(50), level(1.5)], chain=LOW_PASS, adc="input_noise = 1e-3")
    text = made.source.replace('"c1"', '"c1/a"').replace("[adc]", more + "[adc]")
    from frontend_sim.scenario import parse_scenario

    again = parse_scenario(text)
    assert isinstance(again, ScanScenario)
    return again


@pytest.fixture
def path(tmp_path: Path) -> Path:
    """Return the record of a scan."""
    return record_run(ScanSimulation(scan()), tmp_path / "scan.h5")


def test_a_record_holds_what_the_run_gave(path: Path) -> None:
    """All arrays of all channels, their checks, the timing."""
    run = simulate(scan())
    with open_record(path) as record:
        assert isinstance(record, ScanRecord)
        assert list(record.channels) == ["c0", "c1/a"]
        assert record.verdict == "fails"
        assert [each.verdict for each in record.channels.values()] == ["holds", "fails"]
        for name, channel in record.channels.items():
            one = run.channels[name]
            for field in ("time", "pin", "codes", "voltage", "overrange", "waveform_time"):
                np.testing.assert_array_equal(getattr(channel, field), getattr(one, field))
            assert list(channel.waveform) == list(one.waveform)
            assert channel.scenario.resolved() == one.scenario.resolved()
            verdicts = [row for row in channel.results if row.verdict != "none"]
            again = [row for row in evaluate_checks(one) if row.verdict != "none"]
            assert verdicts == again
        names = [row.name for row in record.results]
        assert "skew of c1/a" in names
        assert record.skew == {"c0": 0.0, "c1/a": pytest.approx(50e-6)}
        assert record.scenario.digest() == scan().digest() == record.scenario_digest
        record.verify()


def test_it_is_run_again_with_the_same_codes(path: Path) -> None:
    """From the record alone."""
    with open_record(path) as record:
        assert isinstance(record, ScanRecord)
        again = rerun(record)
        for name, channel in record.channels.items():
            np.testing.assert_array_equal(again.channels[name].codes, channel.codes)


def test_a_finished_run_makes_the_same_record(path: Path, tmp_path: Path) -> None:
    """Saved after the run or while it goes on."""
    other = save_record(simulate(scan()), tmp_path / "other.h5")
    with open_record(path) as one, open_record(other) as two:
        assert one.results == two.results
        assert isinstance(one, ScanRecord)
        assert isinstance(two, ScanRecord)
        for name in one.channels:
            np.testing.assert_array_equal(one.channels[name].codes, two.channels[name].codes)
            assert one.channels[name].results == two.channels[name].results


def test_other_programs_find_a_group_for_each_channel(path: Path) -> None:
    """The group of a channel is laid out as a record of one channel is."""
    with h5py.File(path) as file:
        assert file.attrs["format_version"] == 2
        assert list(file["channel"].attrs["order"]) == ["c0", "c1/a"]
        group = file["channel/c1%2Fa"]
        assert group.attrs["name"] == "c1/a"
        assert set(group["adc"]) == {"time", "code", "pin", "voltage", "overrange"}
        assert group["adc/code"].dims[0].keys() == ["time"]


def test_damage_in_a_channel_is_found(path: Path) -> None:
    """A changed attribute or text of a channel does not verify."""
    with h5py.File(path, "r+") as file:
        file["channel/c0"].attrs["skew"] = 1.0
    with open_record(path) as record, pytest.raises(RecordError, match="differ"):
        record.verify()


def test_a_channel_that_is_not_whole_is_refused(path: Path) -> None:
    """Datasets of different length are told."""
    with h5py.File(path, "r+") as file:
        file["channel/c0/adc/code"].resize(3, axis=0)
    with pytest.raises(RecordError, match="differ in length"):
        open_record(path)


def test_a_channel_that_is_gone_is_told(path: Path) -> None:
    """The order of visits names it, and its group is not there."""
    with h5py.File(path, "r+") as file:
        del file["channel/c0"]
    with pytest.raises(RecordError, match="group of channel 'c0' is missing"):
        open_record(path)


def test_what_takes_one_channel_says_so(path: Path) -> None:
    """And a record of one channel opens either way."""
    with pytest.raises(RecordError, match="record of a scan of 2 channels"):
        open_single_record(path)
    one = save_record(simulate(scan()).channels["c0"], path.with_name("one.h5"))
    with open_single_record(one) as record:
        assert isinstance(record, Record)


def test_checks_that_no_run_answers_are_refused_before(tmp_path: Path) -> None:
    """A tone on uneven conversions; the message names channel, key and line."""
    uneven = scan('[[check]]\nkind = "sinad"\nfrequency = "50 Hz"\nat_least = "40 dB"\n')
    uneven = uneven.model_copy(
        update={"scan": uneven.scan.model_copy(update={"order": ("c0", "c0", "c1/a")})}
    )
    with pytest.raises(ScenarioError, match=r"check\[1\].*'c0'.*not"):
        record_run(ScanSimulation(uneven), tmp_path / "no.h5")
    assert not list(tmp_path.iterdir())
