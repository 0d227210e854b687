"""What a night says."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from compared import night
from nights import BASE, made_set

from frontend_sim.archive.set_table import CheckColumn, SetTable, open_set
from frontend_sim.measure.statistics import pass_rate
from frontend_sim.present.night_table import night_data, shown
from frontend_sim.present.page import night_page, render
from frontend_sim.replay import replay_set
from frontend_sim.summary import NightSummary, Population, summarize
from frontend_sim.summary.check_summary import summarize_check

DRAWS = 'seed = 5\nkeep = "nothing"\n[corners]\n[draws]\ncount = 60\n'


@pytest.fixture(scope="module")
def table(tmp_path_factory: pytest.TempPathFactory) -> SetTable:
    """A night of corners and draws."""
    return night(tmp_path_factory.mktemp("night"), "night", DRAWS)


@pytest.fixture(scope="module")
def summary(table: SetTable) -> NightSummary:
    """What it says."""
    return summarize(table)


def test_runs_are_told_by_their_names() -> None:
    """Draws and corners are found behind whatever is varied besides; the nominal is no corner."""
    names = ["corner nominal", "corner 0-1", "draw 0001", "rate=1kHz,draw 0002", "rate=2kHz"]
    found = Population.of(names)
    assert found.corner.tolist() == [False, True, False, False, False]
    assert found.drawn.tolist() == [False, False, True, True, False]
    assert found.group.tolist() == ["", "", "", "rate=1kHz", "rate=2kHz"]


def test_the_yield_counts_draws_alone(table: SetTable, summary: NightSummary) -> None:
    """Corners are no sample: the yield is that of the 60 draws, with its interval."""
    drawn = np.array([name.startswith("draw") for name in table.names])
    held = int(np.count_nonzero(table.verdicts[drawn] == "holds"))
    assert summary.rate == pass_rate(held, 60)
    assert summary.runs == 65  # four corners of two parts, the nominal circuit, 60 draws
    assert summary.counts["holds"] + summary.counts["fails"] == 65
    assert summary.status == 1


def test_the_worst_case_is_at_least_every_draw(summary: NightSummary) -> None:
    """No run has a smaller margin than the one that is reported, for every check."""
    for check in summary.checks:
        assert check.column.margin[check.worst] == np.nanmin(check.column.margin)
    corner = next(check for check in summary.checks if check.name == "corner")
    # Lowest with both parts at their highest values.
    assert summary.table.names[corner.worst] == "corner 1-1"
    assert summary.parameters_of(corner.worst) == {
        "chain[input filter].resistance": pytest.approx(10.1e3),
        "chain[input filter].capacitance": pytest.approx(4.935e-9),
    }


def test_the_cause_is_the_part_with_the_wide_tolerance(summary: NightSummary) -> None:
    """A 5 % capacitor explains the corner more than a 1 % resistor, and the noise nothing."""
    checks = {check.name: check for check in summary.checks}
    cause = checks["corner"].cause
    assert cause is not None
    assert cause.parameter == "chain[input filter].capacitance"
    assert cause.coefficient < -0.9
    assert checks["noise"].cause is None


def test_limits_need_59_draws(table: SetTable, summary: NightSummary, tmp_path: Path) -> None:
    """60 draws give the limit of Wilks, 20 do not, and the number needed is told."""
    corner = next(check for check in summary.checks if check.name == "corner")
    drawn = np.array([name.startswith("draw") for name in table.names])
    assert corner.limits is not None
    assert corner.limits.low == corner.column.value[drawn].min()
    few = summarize(night(tmp_path, "few", DRAWS.replace("60", "20")))
    assert next(check for check in few.checks if check.name == "corner").limits is None
    assert any("20 draws are too few" in text and "59 do" in text for text in few.warnings)


@pytest.mark.parametrize(("draws", "enough"), [(92, False), (93, True)])
def test_limits_to_both_sides_need_93_draws(draws: int, enough: bool, tmp_path: Path) -> None:
    """Runs that lie nearer to either of two limits are told both, by Wilks: smallest and largest.

    The level is 2 V (1 - exp(-0.1 / 0.047)) = 1.762 V, between two limits around 1.76 V.
    """
    limits = 'at_least = "1.66 V"\nat_most = "1.86 V"'
    rules = f'seed = 5\nkeep = "nothing"\n[draws]\ncount = {draws}\n'
    scenario = BASE.replace('at_least = "1.76 V"', limits)
    replay_set(made_set(tmp_path, rules, scenario=scenario), tmp_path / "n", on="in-process")
    found = summarize(open_set(tmp_path / "n"))
    (check,) = found.checks
    assert (check.side, check.draws_needed) == ("both", 93)
    told = render(night_page(found))
    if not enough:
        assert check.limits is None
        assert "needs 93 draws" in told
        return
    values = check.column.value
    assert check.limits is not None
    assert (check.limits.low, check.limits.high) == (values.min(), values.max())
    assert f"{shown(values.min(), check)} to {shown(values.max(), check)}" in told


def test_the_yield_of_several_groups_is_that_of_the_worst(tmp_path: Path) -> None:
    """What was chosen is no sample: 20 draws at each of two resistors are not 40 draws."""
    vary = '[[vary]]\nkey = "chain[input filter].resistance"\nvalues = ["10 kohm", "10.1 kohm"]\n'
    rules = f'seed = 5\nkeep = "nothing"\n{vary}[draws]\ncount = 20\n'
    found = summarize(night(tmp_path, "groups", rules))
    worst = "resistance=10.1kohm"
    mine = np.array([name.startswith(worst) for name in found.table.names])
    held = int(np.count_nonzero(found.table.verdicts[mine] == "holds"))
    others = int(np.count_nonzero(found.table.verdicts[~mine] == "holds"))
    assert held < others
    assert found.group == worst
    assert found.rate == pass_rate(held, 20)
    corner = next(check for check in found.checks if check.name == "corner")
    assert corner.group == worst
    assert corner.percentiles[1].value == np.median(corner.column.value[mine])
    assert corner.limits is None
    assert found.warnings == (
        "corner, noise: 20 draws are too few for a limit that holds 95 % with 95 % confidence; "
        "59 do",
    )
    assert "may lie too low" in render(night_page(found))
    told = night_data(found)
    assert (told["yield_group"], told["checks"][0]["group"]) == (worst, worst)


def test_groups_that_hold_as_often_are_told_by_their_margins(tmp_path: Path) -> None:
    """Where every draw of two resistors holds, the yield is told of the group of least margin."""
    scenario = BASE.replace("1.76 V", "1.5 V")
    vary = '[[vary]]\nkey = "chain[input filter].resistance"\nvalues = ["10 kohm", "9.9 kohm"]\n'
    for values in (vary, vary.replace('"10 kohm", "9.9 kohm"', '"9.9 kohm", "10 kohm"')):
        rules = f'keep = "nothing"\n{values}[draws]\ncount = 5\n'
        replay_set(made_set(tmp_path, rules, scenario=scenario), tmp_path / "n", on="in-process")
        found = summarize(open_set(tmp_path / "n"))
        assert found.counts["fails"] == 0
        assert found.group == found.checks[0].group == "resistance=10kohm"


def test_what_was_chosen_has_no_confidence(tmp_path: Path) -> None:
    """The percentiles of a grid have no interval, and no draws are asked for."""
    rules = 'keep = "nothing"\n[[vary]]\nkey = "adc.bits"\nvalues = [10, 11, 12, 13, 14]\n'
    found = summarize(night(tmp_path, "grid", rules))
    check = night_data(found)["checks"][0]
    assert check["draws_needed"] is None
    assert {each["confidence"] for each in check["percentiles"]} == {None}
    assert {each["low"] for each in check["percentiles"]} == {None}
    told = render(night_page(found))
    assert "needs 59 draws" not in told
    assert "95/95 limit" not in told


def test_monotone_responses_give_no_warning(summary: NightSummary) -> None:
    """The corner frequency falls with both parts, so its corners bound it."""
    assert summary.warnings == ()


TURNING = """
format = 1
title = "Invented: a notch that the mains may miss"

[stimulus]
kind = "sine"
amplitude = "1 V"
frequency = "1 kHz"
offset = "1.5 V"

[[chain]]
kind = "twin-t-notch"
name = "notch"
resistance_1 = "10 kohm"
shunt_resistance = { value = "5 kohm", tolerance = "10 %" }
resistance_2 = "10 kohm"
capacitance_1 = "15.915 nF"
capacitance_2 = "15.915 nF"
shunt_capacitance = "31.83 nF"

[adc]
rate = "20 kHz"
bits = 12
high = "3.3 V"

[simulation]
duration = "20 ms"

[[check]]
kind = "rejection"
frequency = "1 kHz"
at_least = "10 dB"
"""


def test_corners_that_do_not_bound_are_told(tmp_path: Path) -> None:
    """The attenuation of a notch is largest between the ends of a tolerance: a warning says so."""
    (tmp_path / "notch.toml").write_text(TURNING, encoding="utf-8")
    rules = 'base = "notch.toml"\nkeep = "nothing"\n[corners]\n'
    (tmp_path / "set.toml").write_text(rules, encoding="utf-8")
    replay_set(tmp_path / "set.toml", tmp_path / "night", on="in-process")
    found = summarize(open_set(tmp_path / "night"))
    assert len(found.warnings) == 1
    assert "is not monotone" in found.warnings[0]
    assert "corners do not bound it" in found.warnings[0]


def test_a_run_without_a_result_makes_a_night_incomplete(tmp_path: Path) -> None:
    """A scenario that cannot be read has an error in its row, and the night has status 3."""
    folder = tmp_path / "scenarios"
    folder.mkdir()
    (folder / "right.toml").write_text(TURNING, encoding="utf-8")
    (folder / "wrong.toml").write_text(TURNING.replace("12", "99"), encoding="utf-8")
    replay_set(folder, tmp_path / "night", on="in-process")
    found = summarize(open_set(tmp_path / "night"))
    assert found.status == 3
    assert [name for name, _ in found.errors] == ["wrong"]
    assert found.rate is None
    assert any("no result from 1 of 2 runs" in text for text in found.warnings)
    assert night_page(found).verdict == "Incomplete: 1 run without a result, 0 missing"
    (folder / "right.toml").write_text(TURNING.replace("10 dB", "900 dB"), encoding="utf-8")
    replay_set(folder, tmp_path / "night", on="in-process")
    failed = night_page(summarize(open_set(tmp_path / "night")))
    assert failed.verdict == "Fails in 1 of 2 runs; incomplete"
    # Without a set file scenarios have their own seeds.
    assert "that of its scenario" in render(failed)
    assert "seed of the set" not in render(failed)


def test_rounding_has_no_cause(tmp_path: Path) -> None:
    """A check that is the same in every run but for rounding follows no parameter."""
    file = tmp_path / "set.toml"
    check = '\n[[check]]\nkind = "level"\nat = "4 ms"\nat_least = "1.9 V"\n'
    made_set(tmp_path, 'keep = "nothing"\n[draws]\ncount = 30\n', scenario=BASE + check)
    replay_set(file, tmp_path / "night", on="in-process")
    found = {check.name: check for check in summarize(open_set(tmp_path / "night")).checks}
    assert found["level 1"].cause is not None  # early, it follows the filter
    assert found["level 2"].causes == ()


def test_a_run_without_a_value_counts_as_the_worst() -> None:
    """Of 60 draws 30 cannot be told and fail: the median is beyond all, and so is the limit."""
    value = np.where(np.arange(60) % 2, np.nan, 1.0)
    verdict = np.where(np.isnan(value), "fails", "holds")
    margin = np.where(np.isnan(value), np.nan, 0.5)
    for bound, worst in (("at most", np.inf), ("at least", -np.inf)):
        limit = value + (0.5 if bound == "at most" else -0.5)
        column = CheckColumn("level", "V", bound, value, limit, margin, verdict)
        population = Population.of([f"draw {number:04d}" for number in range(1, 61)])
        found = summarize_check(column, population, {}, False)
        assert found is not None
        assert found.limits is not None
        ends = [each.value for each in found.percentiles]
        if bound == "at most":
            assert (ends[0], ends[2], found.limits.high) == (1.0, worst, worst)
        else:
            assert (ends[0], ends[2], found.limits.low) == (worst, 1.0, worst)
