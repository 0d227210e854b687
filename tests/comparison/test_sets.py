"""Two nights, run by run."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from compared import LSB, night

from frontend_sim.archive.set_table import SetTable, open_set
from frontend_sim.comparison import (
    ColumnDifference,
    SetComparison,
    attribute_sets,
    compare_sets,
    parse_tolerances,
)
from frontend_sim.comparison.columns import column_difference, flips
from frontend_sim.errors import InputError
from frontend_sim.replay import replay_set

RULES = 'seed = {seed}\nkeep = "{keep}"\n[draws]\ncount = {count}\n'
SHIFTED = f"{0.1 + 0.1 * 1e3 * LSB:.9f} mV"
"""An offset 0.1 LSB above that of the first night."""


def rules(seed: int = 3, count: int = 20, keep: str = "nothing") -> str:
    """Return the rules of a set of draws."""
    return RULES.format(seed=seed, count=count, keep=keep)


def column(comparison: SetComparison, name: str) -> ColumnDifference:
    """Return the row of one check or signal."""
    return next(row for row in comparison.columns if row.name == name)


@pytest.fixture(scope="module")
def first(tmp_path_factory: pytest.TempPathFactory) -> SetTable:
    """The night that the others are compared with; its records are kept."""
    return night(tmp_path_factory.mktemp("first"), "first", rules(keep="all"))


def test_the_same_night_twice_is_the_same(first: SetTable, tmp_path: Path) -> None:
    """Nothing differs, in no run."""
    found = compare_sets(first, night(tmp_path, "again", rules(keep="all")))
    assert not found.differs
    assert (found.matched, found.reseeded, found.records) == (20, 0, 20)
    assert {row.finding for row in found.columns} == {"same"}


def test_a_part_that_moved_by_a_tenth_of_an_lsb_is_named(first: SetTable, tmp_path: Path) -> None:
    """Two nights with other seeds and one other offset: 0.1 LSB is found, and the key is told."""
    second = night(tmp_path, "second", rules(seed=4, keep="all"), offset=SHIFTED)
    found = compare_sets(first, second)
    assert [change.key for change in found.changed] == ["chain[buffer].offset_voltage"]
    assert found.reseeded == 20
    codes = column(found, "codes")
    assert codes.finding == "differs"
    assert codes.shift is not None
    assert abs(codes.mean - 0.1) < 4.0 * codes.shift.error
    assert codes.shift.error < 0.02
    split = attribute_sets(first, second, found)
    assert split.shares[0].moved["pin, mean"] == pytest.approx(0.1, abs=1e-6)


def test_other_draws_are_no_other_pin(first: SetTable, tmp_path: Path) -> None:
    """Another seed draws other parts, so that pins differ run by run, and nothing is an alarm."""
    found = compare_sets(first, night(tmp_path, "second", rules(seed=4, keep="all")))
    assert not found.differs, found.alarms
    pin = column(found, "pin")
    assert pin.finding == "within noise"
    assert pin.shift is not None
    assert abs(pin.peak) > 1e-3


def test_the_runs_of_one_draw_count_once() -> None:
    """A grid repeats each draw; 60 pairs of 10 draws are not 60 circuits, and raise no alarm."""
    draws = np.array([f"draw {number:04d}" for _ in range(6) for number in range(10)])
    alarms = {True: 0, False: 0}
    for seed in range(200):
        one, other = np.random.default_rng(seed).normal(size=(2, 10))
        pair = np.tile(one, 6), np.tile(other, 6)
        verdicts = tuple(np.where(values > 0.0, "holds", "fails") for values in pair)
        for known in alarms:
            given = draws if known else None
            row = column_difference(
                "corner", "Hz", *pair, (verdicts[0], verdicts[1]), None, False, 0.0, 1e-3, given
            )
            alarms[known] += row.finding == "differs"
            assert row.worse == np.count_nonzero((one > 0.0) & (other <= 0.0)) * 6
    assert alarms[True] <= 2
    assert alarms[False] > 20  # the test can see what it is about


@pytest.mark.slow
def test_seeds_alone_give_no_alarm_in_200_comparisons(tmp_path: Path) -> None:
    """Of 200 comparisons of nights of 12 draws, records kept, at most two find something."""
    nights = [night(tmp_path, f"night {seed}", rules(seed, 12, "all")) for seed in range(21)]
    pairs = [(a, b) for a in range(21) for b in range(a)][:200]
    alarms = [
        found.alarms for a, b in pairs if (found := compare_sets(nights[a], nights[b])).differs
    ]
    assert len(alarms) <= 2, alarms


def test_equal_seeds_are_compared_exactly(first: SetTable, tmp_path: Path) -> None:
    """With the seeds of the first night the shift needs no error, and a tolerance lets it pass."""
    second = night(tmp_path, "second", rules(keep="all"), offset=SHIFTED)
    found = compare_sets(first, second)
    pin = column(found, "pin")
    assert pin.exact
    assert (pin.mean, pin.finding) == (pytest.approx(0.1, abs=1e-6), "differs")
    assert column(found, "corner").finding == "same"
    passed = compare_sets(first, second, parse_tolerances(["0.5 LSB", "noise=20 %"]))
    assert not passed.differs


def test_rounding_of_a_pin_is_no_difference(first: SetTable, tmp_path: Path) -> None:
    """Pins of nights are the same to a billionth of the range, as those of two records are."""
    for change, finding in (("1e-12", "same"), ("1e-8", "differs")):
        offset = f"{0.1 + 1e3 * float(change) * 3.3:.13f} mV"
        found = compare_sets(first, night(tmp_path, change, rules(keep="all"), offset=offset))
        pin = column(found, "pin")
        assert pin.finding == finding
        moved = 0.0 if finding == "same" else float(change) * 4096.0
        assert (pin.mean, pin.peak) == pytest.approx((moved, moved), rel=1e-2)


def test_verdicts_that_flip_count(first: SetTable, tmp_path: Path) -> None:
    """A higher limit makes runs fail that held before; their number is that of the margins."""
    second = night(tmp_path, "second", rules(), corner="3.4 kHz")
    found = compare_sets(first, second)
    corner = column(found, "corner")
    values = first.checks[0].value
    expected = int(np.count_nonzero((values >= 3.3e3) & (values < 3.4e3)))
    assert expected > 0
    assert (corner.worse, corner.better, corner.finding) == (expected, 0, "differs")
    assert corner.told == f"now fails in {expected} runs"
    assert corner.margin == pytest.approx(-100.0)
    assert found.alarms[0].startswith("all checks: ")


def test_runs_that_come_and_go(first: SetTable, tmp_path: Path) -> None:
    """Fewer draws are told by name and count; more are told and do not."""
    fewer = night(tmp_path, "fewer", rules(count=18))
    gone = compare_sets(first, fewer)
    assert gone.removed == ("draw 0019", "draw 0020")
    assert gone.alarms == ("gone: 2 runs",)
    more = compare_sets(fewer, first)
    assert (more.added, more.differs) == (("draw 0019", "draw 0020"), False)


def test_nights_without_a_common_run_are_refused(first: SetTable, tmp_path: Path) -> None:
    """Names are what runs are matched by; without one nothing is compared."""
    other = night(tmp_path, "other", '[[vary]]\nkey = "adc.bits"\nvalues = [10, 12]\n')
    with pytest.raises(InputError, match="no run of the same name"):
        compare_sets(first, other)
    with pytest.raises(InputError, match="did you mean 'corner'"):
        compare_sets(first, first, parse_tolerances(["cornr=1 %"]))


def test_a_lost_value_counts() -> None:
    """A run whose check has no value any more differs, whatever the others do."""
    one, other = np.array([1.0, 2.0, 3.0]), np.array([1.0, np.nan, 3.0])
    found = column_difference("snr", "dB", one, other, None, None, True, 0.0, 1e-3)
    assert (found.finding, found.told) == ("differs", "no value any more in 1 run")
    endless = np.array([np.inf, 2.0, 3.0])
    same = column_difference("snr", "dB", endless, endless, None, None, True, 0.0, 1e-3)
    assert (same.finding, same.runs) == ("same", 3)


def test_a_run_that_breaks_counts() -> None:
    """A run that gave a result and gives none now is no matter of chance."""
    before = np.array(["holds", "holds"])
    found = flips("all checks", (before, np.array(["holds", "error"])), False, 1e-3)
    assert (found.finding, found.told) == ("differs", "no result any more from 1 run")


def test_another_content_of_a_recording_is_told(tmp_path: Path) -> None:
    """No value differs, yet the digests do: the file under the same name has another content."""
    text = """
format = 1
[stimulus]
kind = "recording"
file = "pump.csv"
column = 1
rate = "10 kHz"
[adc]
rate = "1 kHz"
bits = 12
high = "3.3 V"
"""
    folder = tmp_path / "files"
    folder.mkdir()
    (folder / "a.toml").write_text(text, encoding="utf-8")
    (folder / "set.toml").write_text('base = "a.toml"\n', encoding="utf-8")
    tables = []
    for level in (1.0, 1.1):
        rows = "".join(f"{level}\n" for _ in range(200))
        (folder / "pump.csv").write_text(rows, encoding="utf-8")
        replay_set(folder / "set.toml", tmp_path / str(level), on="in-process")
        tables.append(open_set(tmp_path / str(level)))
    found = compare_sets(*tables)
    assert found.changed == ()
    assert any("has another content" in note for note in found.notes)
