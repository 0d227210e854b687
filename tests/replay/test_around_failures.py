"""Records that keep what lies around failures: of which run, how much, and how they are read."""

from __future__ import annotations

import hashlib
import json
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from nights import made_set
from scanned import level, scan_of, sine

from frontend_sim.archive import Record, ScanRecord, open_record, rerun, room, save_record
from frontend_sim.comparison import RecordComparison, compare_records, compare_runs
from frontend_sim.errors import MeasureError, RecordError, ScenarioError
from frontend_sim.measure.checks import evaluate_checks
from frontend_sim.measure.error import total_error
from frontend_sim.present.page import record_page, scan_page
from frontend_sim.present.run_plot import run_figure
from frontend_sim.replay import Replayed, read_set, replay_set
from frontend_sim.scenario.write import scenario_text

CLIPS = """
format = 1
title = "Invented: a sine whose tops are beyond the range"

[stimulus]
kind = "sine"
amplitude = "1.6 V"
offset = "1.65 V"
frequency = "20 Hz"

[[chain]]
kind = "gain"
name = "amplifier"
gain = { value = 1.02, tolerance = "0.5 %" }

[adc]
rate = "10 kHz"
bits = 12
high = "3.3 V"
input_noise = "1 mV"

[simulation]
duration = "200 ms"
waveform_rate = "40 kHz"

[[check]]
kind = "headroom"
at_least = "10 mV"
"""

AROUND = 2.03e-3
"""No whole number of conversions, so that none lies on an end [s]."""
SET = 'seed = 5\nkeep = "around-failures"\naround = "2.03 ms"\n[draws]\ncount = 3\n'


@pytest.fixture(scope="module")
def nights(tmp_path_factory: pytest.TempPathFactory) -> tuple[Replayed, Replayed]:
    """A set of which every run fails: what lies around it is kept, and all."""
    folder = tmp_path_factory.mktemp("around")
    file = made_set(folder, SET, scenario=CLIPS)
    part = replay_set(file, folder / "part", on="in-process")
    return part, replay_set(file, folder / "whole", on="in-process", keep="all")


def record(night: Replayed, run: str = "draw 0001") -> Record:
    """Open the record of a run."""
    path = night.table().record_path(run)
    assert path is not None
    found = open_record(path)
    assert isinstance(found, Record)
    return found


def test_the_part_is_that_of_the_whole(nights: tuple[Replayed, Replayed]) -> None:
    """Conversions and waveform bit for bit, none else, and results that are those of the whole."""
    assert nights[0].digest == nights[1].digest
    with record(nights[0]) as part, record(nights[1]) as whole:
        part.verify()
        assert (part.format_version, whole.format_version) == (3, 1)
        assert whole.stretches is None
        assert part.stretches is not None
        assert part.whole_count == whole.count == whole.whole_count == 2000
        limit = 10e-3
        fails = (whole.pin > 3.3 - limit) | (whole.pin < limit)
        near = np.array([np.any(np.abs(whole.time[fails] - t) <= AROUND) for t in whole.time])
        assert np.array_equal(part.numbers, np.flatnonzero(near))
        assert 0 < part.count < whole.count
        for name in ("time", "pin", "codes", "voltage", "overrange"):
            assert np.array_equal(getattr(part, name), getattr(whole, name)[near])
        seen = part.stretches.hold(whole.waveform_time)
        assert np.array_equal(part.waveform_time, whole.waveform_time[seen])
        assert list(part.waveform) == list(whole.waveform)
        for point, values in whole.waveform.items():
            assert np.array_equal(part.waveform[point], values[seen])
        assert (part.results, part.notes, part.verdict) == (whole.results, whole.notes, "fails")
        assert part.resolved == whole.resolved
        assert np.array_equal(rerun(part).codes, whole.codes)


@pytest.mark.parametrize(
    ("clock", "around", "count"),
    [("", "3.7 ms", 37), ("", "", 100), ("rate_error = -0.001", "", 100)],
)
def test_a_window_of_whole_conversions_has_both_ends(
    tmp_path: Path, clock: str, around: str, count: int
) -> None:
    """Before and behind a failure lie as many conversions as were asked for, by their numbers.

    Left out, it is 100 of the converter's true intervals, be its clock right or slow.
    """
    window = f'around = "{around}"' if around else ""
    scenario = CLIPS.replace("bits = 12", f"bits = 12\n{clock}")
    rules = f'keep = "around-failures"\n{window}\n[draws]\ncount = 1\n'
    file = made_set(tmp_path, rules, scenario=scenario)
    with record(replay_set(file, tmp_path / "night", on="in-process")) as part:
        pin = rerun(part).pin
        fails = np.flatnonzero((pin > 3.3 - 10e-3) | (pin < 10e-3))
        far = np.min(np.abs(np.arange(len(pin))[:, np.newaxis] - fails), axis=1)
        assert part.numbers.tolist() == np.flatnonzero(far <= count).tolist()


@pytest.mark.parametrize("keep", ["around-failures", "failures", "nothing"])
def test_a_run_beyond_the_memory_is_refused(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, keep: Any
) -> None:
    """2000 conversions of at least 33 bytes do not fit into 50 kB, and where none is kept they may.

    Room for the memory of the machine is no lasting fault: the next call tries again.
    """
    monkeypatch.setattr(room, "memory_bytes", lambda: 50_000)
    file = made_set(tmp_path, "[draws]\ncount = 1\n", scenario=CLIPS)
    night = replay_set(file, tmp_path / "night", on="in-process", keep=keep)
    if keep == "nothing":
        assert night.table().verdicts.tolist() == ["fails"]
        return
    (told,) = night.table().texts("error").tolist()
    assert "until its verdict the run takes" in told
    assert "this machine has 50 kB" in told
    monkeypatch.undo()
    again = replay_set(file, tmp_path / "night", on="in-process", keep=keep)
    assert (again.ran, again.table().verdicts.tolist()) == (1, ["fails"])


def test_what_needs_the_whole_run_refuses_a_part(
    nights: tuple[Replayed, Replayed], tmp_path: Path
) -> None:
    """Nobody takes a part for a run: it is no run, has no verdict of its own, and no sums."""
    with record(nights[0]) as part:
        with pytest.raises(RecordError, match=r"keeps \d+ of 2,000 conversions, .* rerun"):
            part.run()
        for ask in (evaluate_checks, total_error):
            with pytest.raises(MeasureError, match=r"needs a whole run, .* rerun\(record\)"):
                ask(part)
        with pytest.raises(RecordError, match="read its arrays"):
            save_record(part.run(), tmp_path / "again.h5")


def test_without_a_window_it_is_a_hundred_conversions(
    nights: tuple[Replayed, Replayed], tmp_path: Path
) -> None:
    """The set says nothing else; another window makes another record."""
    file = made_set(tmp_path, SET.replace('around = "2.03 ms"\n', ""), scenario=CLIPS)
    night = replay_set(file, tmp_path / "night", on="in-process")
    with record(night) as wide, record(nights[0]) as narrow:
        assert wide.stretches is not None
        assert wide.stretches.around == pytest.approx(100 / 10e3)
        assert wide.count > narrow.count
    again = replay_set(file, tmp_path / "night", on="in-process", around=AROUND)
    assert (again.ran, again.kept) == (3, 0)
    with record(again) as one, record(nights[0]) as other:
        assert np.array_equal(one.numbers, other.numbers)
    assert replay_set(file, tmp_path / "night", on="in-process", around=AROUND).kept == 3


@pytest.mark.parametrize(
    ("moved", "around"), [('aperture_jitter = "2 us"', "1 h"), ('aperture_delay = "150 us"', "0 s")]
)
def test_conversions_beyond_the_ends_of_the_run_are_kept(
    tmp_path: Path, moved: str, around: str
) -> None:
    """Jitter moves the first conversion before the beginning, a delay the last one over the end."""
    always = CLIPS.replace('"1.6 V"', '"0.1 V"').replace('"1.65 V"', '"3.6 V"')
    always = always.replace("[adc]", f"[adc]\n{moved}")
    rules = f'keep = "around-failures"\naround = "{around}"\n[draws]\ncount = 4\n'
    file = made_set(tmp_path, rules, scenario=always)
    night, beyond = replay_set(file, tmp_path / "night", on="in-process"), False
    for number in range(1, 5):
        with record(night, f"draw {number:04d}") as part:
            assert part.count == part.whole_count > 0
            beyond |= bool(part.time[0] < 0.0 or part.time[-1] > 0.2)
    assert beyond  # the test can see what it is about


def test_a_stretch_ends_with_its_run(tmp_path: Path) -> None:
    """What is kept around a failure near an end is no longer than the run."""
    rules = 'keep = "around-failures"\naround = "1 h"\n[draws]\ncount = 1\n'
    file = made_set(tmp_path, rules, scenario=CLIPS)
    with record(replay_set(file, tmp_path / "night", on="in-process")) as part:
        assert part.stretches is not None
        assert part.stretches.spans.tolist() == [[0.0, 0.2]]


def test_a_failure_without_a_place_keeps_the_verdict_alone(tmp_path: Path) -> None:
    """A budget of noise is none of this or that conversion; a run that holds keeps no record."""
    noise = 'kind = "noise"\nat_most = "{}"\nbasis = "budget"\n'
    fails = CLIPS.replace('kind = "headroom"\nat_least = "10 mV"\n', noise.format("0.1 mV"))
    night = replay_set(made_set(tmp_path, SET, scenario=fails), tmp_path / "a", on="in-process")
    with record(night) as empty:
        empty.verify()
        assert (empty.count, empty.whole_count, empty.verdict) == (0, 2000, "fails")
        assert len(empty.waveform_time) == 0
        assert len(run_figure(empty).axes) > 2
        told = record_page(empty)
    (signal,) = (section for section in told.sections if section.name == "signal")
    assert "keeps none of 2,000 conversions" in signal.text[0]
    holds = fails.replace("0.1 mV", "1 V")
    night = replay_set(made_set(tmp_path, SET, scenario=holds), tmp_path / "b", on="in-process")
    assert night.table().record_path("draw 0001") is None


def compared(one: Replayed, other: Replayed) -> RecordComparison:
    """Compare the first draws of two nights."""
    with record(one) as first, record(other) as second:
        return compare_records(first, second)


def test_a_part_is_compared_where_both_have_conversions(
    nights: tuple[Replayed, Replayed],
) -> None:
    """By the number in the whole run; what differs there is found, and notes tell the part."""
    for pair in (nights, nights[::-1]):
        found = compared(*pair)
        assert not found.differs
        pin = next(row for row in found.series if row.name == "pin")
        assert 0 < pin.count < 2000
        assert f"{pin.count} that both keep" in pin.told
        assert any("of 2,000 conversions, around what failed" in note for note in found.notes)


def test_a_change_is_found_in_a_part(nights: tuple[Replayed, Replayed], tmp_path: Path) -> None:
    """The offset of the stimulus, by one LSB: the pins differ by its gain, wherever both are."""
    moved = CLIPS.replace("1.65 V", f"{1.65 + 3.3 / 4096:.9f} V")
    file = made_set(tmp_path, SET, scenario=moved)
    other = replay_set(file, tmp_path / "night", on="in-process")
    found = compared(nights[0], other)
    pin = next(row for row in found.series if row.name == "pin")
    assert pin.finding == "differs"
    assert pin.peak == pytest.approx(1.02, rel=6e-3)


def test_other_seeds_are_not_judged_on_a_part(
    nights: tuple[Replayed, Replayed], tmp_path: Path
) -> None:
    """What is kept was chosen by what failed, so noise in it is no sample; the pin is exact."""
    exact = CLIPS.replace(', tolerance = "0.5 %"', "")
    text = SET.replace("[draws]\ncount = 3\n", '[[vary]]\nkey = "adc.bits"\nvalues = [12]\n')
    records = []
    for seed in (5, 6):
        file = made_set(tmp_path, text.replace("5", str(seed), 1), scenario=exact)
        night = replay_set(file, tmp_path / f"night {seed}", on="in-process")
        path = night.table().record_path("bits=12")
        assert path is not None
        records.append(path)
    with open_record(records[0]) as one, open_record(records[1]) as other:
        found = {row.name: row for row in compare_runs(one, other).series}
    assert found["pin"].finding == "same"
    assert found["codes"].finding == found["noise"].finding == "not judged"
    assert "chance is no measure" in found["codes"].told


def test_parts_without_a_common_conversion_are_no_difference(
    nights: tuple[Replayed, Replayed], tmp_path: Path
) -> None:
    """Tops beyond the range in one, bottoms in the other: verdicts tell it, signals cannot."""
    low = CLIPS.replace("1.65 V", "1.55 V").replace("gain = { value = 1.02", "gain = { value = 1.0")
    night = replay_set(made_set(tmp_path, SET, scenario=low), tmp_path / "night", on="in-process")
    found = {row.name: row for row in compared(nights[0], night).series}
    assert found["pin"].finding == "not judged"
    assert "no conversion in common" in found["pin"].told


def test_no_line_leads_over_what_is_not_kept(nights: tuple[Replayed, Replayed]) -> None:
    """The plot has a break for each gap; its title and the page say how much is kept."""
    with record(nights[0]) as part:
        figure, page, count = run_figure(part), record_page(part), part.count
        assert part.stretches is not None
        gaps = len(part.stretches.spans) - 1
    assert gaps == 3
    lines = [line for line in figure.axes[0].lines if line.get_label() == "codes read back"]
    assert [np.count_nonzero(np.isnan(line.get_ydata())) for line in lines] == [gaps]
    at, codes = np.asarray(lines[0].get_xdata()), np.asarray(lines[0].get_ydata())
    ends = np.flatnonzero(np.isnan(codes))  # a step is held up to the next point, of which
    assert np.array_equal(at[ends], at[ends - 1])  # the one of a gap must not be behind it
    assert figure.get_suptitle().count(f"{count} of 2,000 conversions, around failures") == 1
    assert ("kept around failures", f"{count}") in page.facts
    (signal,) = (section for section in page.sections if section.name == "signal")
    assert f"keeps {count} of 2,000 conversions, in 4 stretches: 2.03 ms before" in signal.text[0]


def test_all_channels_of_a_scan_keep_the_same_stretches(tmp_path: Path) -> None:
    """One channel fails; the other, which may have done it, is kept beside it."""
    check = '[[check]]\nkind = "level"\nchannel = "c0"\nat = "7 ms"\nat_most = "-9 V"\n'
    scan = scan_of([sine(50), level(1.5)], more=f"waveform_rate = 1e4\n{check}")
    file = made_set(tmp_path, SET.split("[draws]")[0].replace("seed = 5\n", ""),
                    scenario=scenario_text(scan))  # fmt: skip
    night = replay_set(file, tmp_path / "night", on="in-process")
    path = night.table().record_path(night.table().names[0])
    assert path is not None
    with open_record(path) as found:
        assert isinstance(found, ScanRecord)
        found.verify()
        assert found.format_version == 4
        for channel in found.channels.values():
            assert channel.stretches is not None
            assert channel.stretches.spans.tolist() == pytest.approx(
                np.array([[7e-3 - AROUND, 7e-3 + AROUND]])
            )
            assert 0 < channel.count < channel.whole_count
            assert np.all(np.abs(channel.time - 7e-3) <= AROUND + 1e-12)
        assert "around" not in scan_page(found).summary
        with pytest.raises(RecordError, match="make no run"):
            found.run()


@pytest.mark.parametrize(
    ("text", "keys", "message"),
    [
        ('around = "2 ms"\n', {}, "around means nothing without keep"),
        ('keep = "all"\naround = "2 ms"\n', {}, "around means nothing without keep"),
        ('keep = "around-failures"\naround = "-2 ms"\n', {}, "at least 0 s|not be negative|0 s"),
        ('keep = "all"\n', {"around": 1e-3}, "around means nothing with keep = 'all'"),
    ],
)
def test_a_window_around_nothing_is_refused(
    tmp_path: Path, text: str, keys: dict[str, Any], message: str
) -> None:
    """In the set file, and beside it."""
    file = made_set(tmp_path, text, scenario=CLIPS)
    with pytest.raises(ScenarioError, match=message):
        read_set(file, **keys)


def test_old_words_have_the_recipes_that_they_had(tmp_path: Path) -> None:
    """A new key makes no old night run again: what is kept counts as it did."""
    file = made_set(tmp_path, SET, scenario=CLIPS)
    whole, part = read_set(file, "all"), read_set(file, "around-failures", 1e-3)
    (run, *_), (other, *_) = (list(each.runs()) for each in (whole, part))
    assert whole.around is None
    assert run.recipe != other.recipe
    base = whole.bases[0].scenario
    assert base is not None
    plain = {key: value.plain() for key, value in run.values.items()}
    told = [base.digest(), plain, run.seed, "all", dict(whole.versions)]
    text = json.dumps(told, sort_keys=True, separators=(",", ":"))
    assert run.recipe == hashlib.sha256(text.encode()).hexdigest()
