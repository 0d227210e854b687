"""Two scans, channel by channel: what differs, what is noise, and what did it."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

import pytest
from scanned import SHARED, level, scan_of, sine

from frontend_sim.archive import ScanRecord, open_record, record_run
from frontend_sim.archive.set_table import SetTable, open_set
from frontend_sim.comparison import (
    RecordComparison,
    attribute,
    attribute_sets,
    changes,
    compare_records,
    compare_runs,
    compare_scans,
    compare_sets,
    over_seeds,
)
from frontend_sim.errors import InputError
from frontend_sim.measure.scan import scan_report
from frontend_sim.present.comparison_plot import comparison_figure
from frontend_sim.replay import replay_set
from frontend_sim.scenario import ScanScenario, Scenario
from frontend_sim.scenario.vary import with_values
from frontend_sim.simulation import ScanSimulation, Simulation

LSB = 8.0 / 65536.0
"""Width of a code of ``scan_of`` [V]."""

AMPLIFIER = '[[channel.chain]]\nkind = "gain"\nname = "amplifier"\ngain = 1.0'

BURST = 'kind = "noise-burst"\nrms = 0.1\nlength = "20 ms"\nbandwidth = "2 kHz"'


def opened(directory: Path, name: str, scan: ScanScenario) -> ScanRecord:
    """Run a scan, and open its record."""
    record_run(ScanSimulation(scan), directory / name)
    record = open_record(directory / name)
    assert isinstance(record, ScanRecord)
    return record


def compared(directory: Path, first: ScanScenario, second: ScanScenario) -> RecordComparison:
    """Run two scans, and compare their records."""
    with opened(directory, "a.h5", first) as one, opened(directory, "b.h5", second) as other:
        return compare_scans(one, other)


def findings(comparison: RecordComparison) -> dict[str, str]:
    """Return signal -> what it comes to."""
    return {row.name: row.finding for row in comparison.series}


def moved(first: ScanScenario, values: Mapping[str, Any]) -> dict[str, Mapping[str, float]]:
    """Change some keys of a scan; return key -> what it moves alone, and "" -> all together."""
    second = with_values(first, values)
    changed = changes(first.resolved(), second.resolved(), (first, second))
    split = attribute(first, second, changed)
    assert [row.fault for row in split.shares] == [""] * len(values)
    return {"": split.total, **{row.key: row.moved for row in split.shares}}


def test_a_change_is_found_in_its_channel_alone(tmp_path: Path) -> None:
    """One channel's gain moves its pin and its codes; the channel beside it stays, bit by bit."""
    first = scan_of([level(1.0), level(2.0)], chain=AMPLIFIER)
    found = compared(tmp_path, first, with_values(first, {"channel[c1].chain[1].gain": 1.001}))
    assert [change.key for change in found.changed] == ["channel[c1].chain[amplifier].gain"]
    told = findings(found)
    assert {name for name in told if told[name] != "same"} == {"c1: pin", "c1: codes"}
    assert found.alarms == ("c1: pin: differs", "c1: codes: differs")


def test_attribution_names_channel_and_key() -> None:
    """Two gains move each its own channel by gain times level, in LSB, and nothing else."""
    first = scan_of([level(1.0), level(2.0)], chain=AMPLIFIER)
    found = moved(first, {"channel[c0].chain[1].gain": 1.01, "channel[c1].chain[1].gain": 0.98})
    one, other = (found[f"channel[{name}].chain[amplifier].gain"] for name in ("c0", "c1"))
    assert one["c0: pin, mean"] == pytest.approx(0.01 / LSB, rel=1e-9)
    assert other["c1: pin, mean"] == pytest.approx(-0.04 / LSB, rel=1e-9)
    assert one["c1: pin, mean"] == other["c0: pin, mean"] == 0.0
    assert found[""]["c0: pin, mean"] == pytest.approx(0.01 / LSB, rel=1e-9)


def test_attribution_tells_of_the_whole_scan_as_well() -> None:
    """A shared stage that is slower moves the crosstalk, as two reports of the scans say."""
    first = scan_of([level(1.0), level(2.0)], scan=SHARED)
    key = "scan.chain[shared].capacitance"
    found = moved(first, {key: "20 nF"})[key]
    before, after = (
        {row.name: row.value for row in scan_report(scan).results()}
        for scan in (first, with_values(first, {key: "20 nF"}))
    )
    name = "crosstalk from c1 into c0"
    assert found[name] > 1.0
    assert found[name] == pytest.approx(float(after[name] or 0.0) - float(before[name] or 0.0))


def test_noise_of_a_channel_is_judged_over_seeds(tmp_path: Path) -> None:
    """One run each cannot tell; eight seeds see half as much noise again, and no change else."""
    check = '[[check]]\nkind = "noise"\nbasis = "run"\nat_most = "99 LSB"\nchannel = "c1"'
    first = scan_of([level(1.0), level(2.0)], adc='input_noise = "0.4 mV"', more=check)
    for noise, finding in (("0.6 mV", "differs"), ("0.4 mV", "within noise")):
        second = with_values(first, {"adc.input_noise": noise, "seed": 2})
        one, other = (tmp_path / f"{noise}{which}" for which in "ab")
        record_run(ScanSimulation(first), one)
        record_run(ScanSimulation(second), other)
        with open_record(one) as before, open_record(other) as after:
            found = compare_runs(before, after)
        asked = next(row for row in found.results if row.name == "c1: noise")
        assert asked.finding == "not judged"
        results = over_seeds(first, second, found.results, 8, 1e-3)
        judged = next(row for row in results if row.name == "c1: noise")
        assert judged.finding == finding
        assert judged.shift is not None
        expected = {"0.6 mV": 0.2e-3 / LSB, "0.4 mV": 0.0}[noise]
        assert judged.shift.mean == pytest.approx(expected, abs=0.2)


def test_a_random_stimulus_moves_the_channels_behind_the_same_stage(tmp_path: Path) -> None:
    """With another seed the burst of one channel, seen through a shared stage, is no difference."""
    slow = SHARED.replace("1e-8", "1e-7")
    first = scan_of([sine(50.0), BURST], scan=slow, duration=0.1)
    found = compared(tmp_path, first, first.model_copy(update={"seed": 5}))
    assert findings(found)["c0: pin"] == "within noise"  # it did move
    assert not found.differs


def test_all_channels_together_have_the_false_alarms_of_one_run(tmp_path: Path) -> None:
    """A shift in one of eight channels must be larger to be told from noise than in one alone."""
    first = scan_of([level(0.5)] * 8, adc='input_noise = "0.4 mV"')
    with (
        opened(tmp_path, "a.h5", first) as one,
        opened(tmp_path, "b.h5", first.model_copy(update={"seed": 9})) as other,
    ):
        whole = {row.name: row for row in compare_scans(one, other).series}
        alone = compare_records(one.channels["c3"], other.channels["c3"]).series
    codes = next(row for row in alone if row.name == "codes")
    assert whole["c3: codes"].visible > 1.1 * codes.visible


def test_channels_that_come_and_go_are_drawn_too(tmp_path: Path) -> None:
    """A row for each channel of either scan; of one that is gone, its pin and what is missing."""
    first = scan_of([level(1.0), sine(50.0), sine(70.0)])
    second = with_values(first, {"channel[c2].name": "other"})
    with opened(tmp_path, "a.h5", first) as one, opened(tmp_path, "b.h5", second) as other:
        found = compare_runs(one, other)
        figure = comparison_figure(found, one, other)
    assert findings(found)["c2: pin"] == "removed"
    assert findings(found)["other: pin"] == "added"
    rows = [figure.axes[3 * row : 3 * row + 3] for row in range(4)]
    titles = [panels[0].get_title(loc="right") for panels in rows]
    assert titles == ["c0", "c1", "c2", "other"]
    assert [len(panels[0].lines) for panels in rows] == [2, 2, 1, 1]
    assert [len(panels[1].texts) for panels in rows] == [0, 0, 1, 1]
    assert rows[2][1].texts[0].get_text() == "the channel is in one scan alone"
    legend = rows[0][0].get_legend()
    assert legend is not None
    assert [text.get_text() for text in legend.get_texts()] == ["a.h5", "b.h5"]


def test_a_scan_and_a_run_are_not_compared(tmp_path: Path) -> None:
    """The message names the file that is a scan, whichever of the two it is."""
    one = Scenario.model_validate(
        {
            "stimulus": {"kind": "step", "before": 1.0, "after": 1.0},
            "adc": {"rate": "1 kHz", "bits": 12, "high": 3.3},
            "simulation": {"duration": "10 ms"},
        }
    )
    record_run(Simulation(one), tmp_path / "one.h5")
    with (
        opened(tmp_path, "scan.h5", scan_of([level(1.0)])) as scan,
        open_record(tmp_path / "one.h5") as run,
    ):
        for pair in ((scan, run), (run, scan)):
            with pytest.raises(InputError, match=r"scan\.h5 is a scan and the other is none"):
                compare_runs(*pair)


NIGHT = """
format = 1
[[channel]]
name = "oil"
[channel.stimulus]
kind = "step"
before = "1 V"
after = "1 V"
[[channel.chain]]
kind = "gain"
gain = 1
[[channel.chain]]
kind = "rc-lowpass"
resistance = { value = "1 kohm", tolerance = "1 %" }
capacitance = "1 nF"
[[channel]]
name = "water"
[channel.stimulus]
kind = "step"
before = "2 V"
after = "2 V"
[adc]
rate = "20 kHz"
bits = 16
low = "-4 V"
high = "4 V"
[simulation]
duration = "1 ms"
[[check]]
kind = "headroom"
at_least = "1 V"
"""


def night(directory: Path, name: str, gain: str, keep: str = "nothing", seed: int = 1) -> SetTable:
    """Replay a few draws of a scan, and return their table."""
    (directory / name).mkdir()
    text = NIGHT.replace("gain = 1\n", f"gain = {gain}\n")
    (directory / name / "scan.toml").write_text(text, encoding="utf-8")
    rules = f'base = "scan.toml"\nseed = {seed}\nkeep = "{keep}"\n[draws]\ncount = 2\n'
    (directory / name / "set.toml").write_text(rules, encoding="utf-8")
    replay_set(directory / name / "set.toml", directory / f"{name} done", on="in-process")
    return open_set(directory / f"{name} done")


def test_nights_of_scans_are_attributed(tmp_path: Path) -> None:
    """The scan that both nights vary is run with each change alone, as a single chain is."""
    tables = night(tmp_path, "one", "1"), night(tmp_path, "two", "1.01")
    split = attribute_sets(*tables, compare_sets(*tables))
    (share,) = split.shares
    assert share.moved["oil: pin, mean"] == pytest.approx(0.01 / LSB, rel=1e-9)
    assert share.moved["oil: headroom"] == pytest.approx(-0.01, rel=1e-6)
    assert share.moved["water: pin, mean"] == 0.0


def test_records_of_nights_of_scans_are_compared_channel_by_channel(tmp_path: Path) -> None:
    """Pins and codes of each channel have a row; what changed in one does not show in the other."""
    first = night(tmp_path, "first", "1", "all")
    found = compare_sets(first, night(tmp_path, "second", "1.01", "all"))
    rows = {row.name: row for row in found.columns}
    assert found.records == 2
    assert rows["oil: pin"].mean == pytest.approx(0.01 / LSB, rel=1e-9)
    assert rows["oil: pin"].finding == rows["oil: codes"].finding == "differs"
    assert rows["water: pin"].finding == rows["water: codes"].finding == "same"
    reseeded = compare_sets(first, night(tmp_path, "third", "1", "all", seed=2))
    assert not reseeded.differs, reseeded.alarms
    assert {row.name for row in reseeded.columns} == set(rows)
