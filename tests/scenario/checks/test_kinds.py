"""Kinds of checks: the lists of them are equal, and every wrong table is told."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from scenario_samples import BASE, MARK, marked_line

from frontend_sim.errors import ScenarioError
from frontend_sim.measure.checks import EVALUATIONS
from frontend_sim.scenario import check_scenario, parse_scenario
from frontend_sim.scenario.checks import CHECKS
from frontend_sim.scenario.checks.rules import labels

ROOT = Path(__file__).resolve().parents[3]


def test_the_lists_of_kinds_are_equal() -> None:
    """Values, evaluations, example scenarios and the reference know the same kinds."""
    kinds = list(CHECKS)
    assert list(EVALUATIONS) == kinds
    assert {file.stem for file in (ROOT / "scenarios" / "checks").glob("*.toml")} == set(kinds)
    page = (ROOT / "docs" / "checks.md").read_text(encoding="utf-8")
    assert re.findall(r"^### `(.+)`$", page, re.M) == kinds


def test_every_kind_is_one_file() -> None:
    """A kind stands in the file of its name, among the values."""
    for kind, value in CHECKS.items():
        assert value.__module__.rsplit(".", 1)[1] == kind.replace("-", "_")


def check(text: str) -> str:
    """Return a right scenario with one check, given without its header."""
    return f"{BASE}\n[[check]]\n{text}\n"


WRONG = {
    "unknown kind": (check(f'kind = "setling" {MARK}'), "kind", "did you mean 'settling'?"),
    "no kind": (check("within = 1").replace("[[check]]", f"[[check]] {MARK}"), "kind is missing"),
    "a stage": (check(f'kind = "gain" {MARK}'), "it is a kind of [[chain]]"),
    "missing limit": (
        check('kind = "settling"\nbefore = "1 ms"').replace("[[check]]", f"[[check]] {MARK}"),
        "check[1].within (settling)",
        'missing; add for instance within = "0.5 LSB"',
    ),
    "no limit at all": (
        check(f'kind = "level" \nat = "1 ms"').replace("[[check]]", f"[[check]] {MARK}"),  # noqa: F541 - reads as the others do
        "check[1] (level)",
        "no limit; give at_least, at_most or both",
    ),
    "reversed limits": (
        check(f'kind = "level"\nat = 0\nat_least = 2 {MARK}\nat_most = 1'),
        "at_least 2 V lies above at_most 1 V",
    ),
    "wrong unit": (
        check(f'kind = "settling"\nwithin = "3 s" {MARK}\nbefore = "1 ms"'),
        "a unit of time",
        '"0.5 LSB", "1 mV" or "0.1 %"',
    ),
    "no unit": (
        check(f'kind = "settling"\nwithin = 0.5 {MARK}\nbefore = "1 ms"'),
        "given 0.5, which could be in V, in LSB or a share",
    ),
    "zero band": (
        check(f'kind = "settling"\nwithin = "0 LSB" {MARK}\nbefore = "1 ms"'),
        "must be above 0",
    ),
    "unit of the wrong kind": (
        check(f'kind = "sinad"\nat_least = "60 %" {MARK}'),
        "check[1].at_least (sinad)",
        "a level in dB",
    ),
    "before beyond the end": (
        check(f'kind = "settling"\nwithin = "1 LSB"\nbefore = "1 s" {MARK}'),
        "before leads to t = 1 s, but the run ends at 250 ms",
        "lengthen simulation.duration",
    ),
    "after and before beyond the end": (
        check(
            f'kind = "settling"\nwithin = "1 LSB"\nbefore = "100 ms" {MARK}\nafter = "200 ms"',
        ),
        "before leads to t = 300 ms",
    ),
    "an instant beyond the end": (
        check(f'kind = "level"\nat = "1 s" {MARK}\nat_most = 1'),
        "at leads to t = 1 s",
    ),
    "after beyond the end": (
        check(f'kind = "clipping"\nafter = "1 s" {MARK}'),
        "after leads to t = 1 s",
    ),
    "droop in the wrong order": (
        check(f'kind = "droop"\nstart = "2 ms"\nstop = "1 ms" {MARK}\nat_most = "1 %"'),
        "stop 0.001 s must lie behind start 0.002 s",
    ),
    "unknown point": (
        check(f'kind = "overshoot"\nat_most = "1 %"\npoint = "imput filter" {MARK}'),
        "the chain has no point 'imput filter'",
        "did you mean 'input filter'?",
    ),
    "a name twice": (
        check(f'kind = "clipping"\nname = "a"\n[[check]]\nkind = "headroom"\nat_least = "1 mV"\n'
              f'name = "a" {MARK}'),
        "the name 'a' is taken",
    ),
    "the name of another kind": (
        check(f'kind = "clipping"\n[[check]]\nkind = "headroom"\nat_least = "1 mV"\n'
              f'name = "clipping" {MARK}'),
        "the name 'clipping' is taken",
    ),
    "band and frequency": (
        check(f'kind = "alias-attenuation"\nat_least = 1\nband = 10\nfrequency = 1e6 {MARK}'),
        "give band or frequency, not both",
    ),
    "a frequency that does not fold": (
        check(f'kind = "alias-attenuation"\nat_least = 1\nfrequency = "50 Hz" {MARK}'),
        "does not fold",
        'kind = "rejection"',
    ),
    "a band that folds": (
        check(f'kind = "alias-attenuation"\nat_least = 1\nband = "15 kHz" {MARK}'),
        "lies above half the conversion rate, 10 kHz",
    ),
    "unknown key": (
        check(f'kind = "clipping"\nwithin = "1 LSB" {MARK}'),
        "unknown key here; it belongs in [[check]] of kind \"settling\"",
        "known here are after, at_most, channel, kind, name",
    ),
    "no fraction": (check(f'kind = "clipping"\nat_most = "120 %" {MARK}'), "must be at most 1"),
    "single brackets": (
        f'{BASE}\n[check] {MARK}\nkind = "clipping"\n',
        "write [[check]] with double brackets",
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", WRONG)
def test_a_wrong_check_is_told(name: str) -> None:
    """One message with the key, the line, what was given and what to do."""
    text, *parts = WRONG[name]
    with pytest.raises(ScenarioError) as caught:
        check_scenario(parse_scenario(text))
    (problem,) = caught.value.problems
    assert problem.line == marked_line(text)
    for part in parts:
        assert part in str(problem), str(problem)


def test_a_point_that_is_no_voltage_is_told() -> None:
    """Limits are voltages, so a temperature cannot be held against one."""
    start, end = BASE.index("[[chain]]"), BASE.index("[adc]")
    text = (
        BASE[:start].replace('after = "1 V"', 'before = "20 degC"\nafter = "30 degC"')
        + '[[chain]]\nkind = "rtd"\nexcitation_voltage = "2.5 V"\nseries_resistance = "2.2 kohm"\n'
        + BASE[end:]
        + f'\n[[check]]\nkind = "level"\nat = 0\nat_most = 1\npoint = "stimulus" {MARK}\n'
    )
    with pytest.raises(ScenarioError, match="the point 'stimulus' is measured in K") as caught:
        parse_scenario(text)
    assert caught.value.problems[0].line == marked_line(text)


def test_unnamed_checks_are_numbered_by_kind() -> None:
    """A kind alone needs no number; several of it count, named ones left out."""
    kinds = ['"clipping"', '"level"\nat = 0\nat_most = 1', '"level"\nat = 1e-3\nat_most = 1']
    named = '"level"\nname = "mine"\nat = 0\nat_most = 1'
    text = BASE + "".join(f"\n[[check]]\nkind = {kind}\n" for kind in [*kinds, named])
    assert labels(parse_scenario(text).check) == ("clipping", "level 1", "level 2", "mine")


def test_a_recording_that_ends_early_is_told(tmp_path: Path) -> None:
    """Where the recording gives the duration, instants of checks must lie within it."""
    (tmp_path / "r.csv").write_text("t,v\n" + "".join(f"{k / 1000},1\n" for k in range(100)))
    recording = 'kind = "recording"\nfile = "r.csv"\ntime = "t"\ncolumn = "v"'
    text = BASE.replace('kind = "step"\nafter = "1 V"', recording)
    text = text.replace('duration = "250 ms"\n', "")
    text += f'\n[[check]]\nkind = "level"\nat = "1 s" {MARK}\nat_most = 1\n'
    with pytest.raises(ScenarioError, match="at leads to t = 1 s, but the run ends at") as caught:
        check_scenario(parse_scenario(text, tmp_path))
    assert caught.value.problems[0].line == marked_line(text)
