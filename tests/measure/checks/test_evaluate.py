"""All checks together: examples, what cannot be told, and the ways to ask."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from checked import made, verdicts

import frontend_sim as fe
from frontend_sim.errors import MeasureError, ModelError, ScenarioError
from frontend_sim.measure.checks import EVALUATIONS, Evaluation, Keeper
from frontend_sim.measure.checks import table as tables
from frontend_sim.measure.checks.answer import Answer, nearer
from frontend_sim.measure.result import verdict_of
from frontend_sim.scenario.checks import CHECKS

ROOT = Path(__file__).resolve().parents[3] / "scenarios" / "checks"

# Values of the checks of each example, in its own unit, to 1e-6.
PINNED: dict[str, tuple[float, ...]] = {
    "acquisition": (0.3088343, 0.007375105, 0.0),
    "alias-attenuation": (
        128.4045,
        181.426,
    ),
    "clipping": (0.0,),
    "corner": (4000.0,),
    "droop": (0.02084354,),
    "effective-bits": (11.94964,),
    "grid-error": (0.01642845,),
    "headroom": (0.1501296,),
    "level": (2.968154,),
    "mains-level": (0.0006362852,),
    "noise-free-bits": (13.60945,),
    "noise": (0.7944779,),
    "overshoot": (0.0808397,),
    "rejection": (49.17141,),
    "settling": (0.000187223,),
    "sfdr": (89.74901,),
    "sinad": (73.43778,),
    "snr": (73.4163,),
    "thd": (-97.55549,),
    "alias-error": (1.562773,),
    "total-error": (0.008316349,),
    "dnl": (0.1123815,),
    "inl": (0.7614363,),
    "recovery": (0.00075,),
    "latency": (0.000531,),
    "delay": (0.0001646772,),
    "rise-time": (0.0002197225,),
    "undershoot": (0.2990381,),
}


@pytest.mark.parametrize("kind", CHECKS)
def test_every_example_holds_with_its_pinned_value(kind: str) -> None:
    """The example of each kind holds, by its own kind of check, and its number is known."""
    scenario = fe.load_scenario(ROOT / f"{kind}.toml")
    assert {check.kind for check in scenario.check} == {kind}
    rows = [row for row in fe.evaluate_checks(fe.simulate(scenario)) if row.verdict != "none"]
    assert verdict_of(rows) == "holds"
    assert [row.value for row in rows] == pytest.approx(list(PINNED[kind]), rel=1e-6)
    assert all(row.method and not row.advice for row in rows)


def test_every_way_to_ask_gives_the_same(tmp_path: Path) -> None:
    """A run, a simulation, a record and a record that is run again agree in every number."""
    scenario = fe.load_scenario(ROOT / "settling.toml")
    run = fe.simulate(scenario)
    found = fe.evaluate_checks(run)
    assert fe.evaluate_checks(fe.Simulation(scenario)) == found
    path = fe.save_record(run, tmp_path / "saved.h5")
    streamed = fe.record_run(fe.Simulation(scenario), tmp_path / "streamed.h5")
    for each in (path, streamed):
        with fe.open_record(each) as record:
            assert record.verdict == "holds"
            assert sorted(record.results, key=str) == sorted(found, key=str)
            assert fe.evaluate_checks(record) == found
            assert fe.evaluate_checks(fe.rerun(record)) == found


def test_a_failing_check_makes_a_failing_record(tmp_path: Path) -> None:
    """Verdict and advice come back from the record."""
    scenario = made({"kind": "settling", "within": "0.5 LSB", "before": "100 us"})
    with fe.open_record(fe.save_record(fe.simulate(scenario), tmp_path / "r.h5")) as record:
        assert record.verdict == "fails"
        row = next(row for row in record.results if row.verdict == "fails")
    assert (row.name, row.bound, row.limit) == ("settling", "at most", 100e-6)
    assert row.advice.startswith("lengthen the wait to ")


def test_checks_of_a_scenario_that_was_made_in_python_read_back() -> None:
    """Text with limits in every unit gives the same checks again."""
    scenario = made(
        {"kind": "settling", "within": "0.1 %", "before": 1e-3, "name": "quick"},
        {"kind": "headroom", "at_least": "3 LSB"},
        {"kind": "noise", "at_most": "1 mV", "basis": "run"},
        {"kind": "thd", "at_most": -80.0},
        {"kind": "effective-bits", "at_least": 10.5},
    )
    again = fe.parse_scenario(fe.scenario_text(scenario))
    assert again.check == scenario.check
    assert again.digest() == scenario.digest()


@pytest.mark.parametrize("error", [MeasureError, ModelError])
def test_what_the_run_cannot_answer_fails_with_its_reason(
    error: type[Exception], monkeypatch: pytest.MonkeyPatch
) -> None:
    """Any error of a measure makes a verdict, and never a gap; the other checks go on."""

    def refuses(check: Any, subject: Any) -> Answer:
        raise error("no answer here")

    monkeypatch.setitem(tables.EVALUATIONS, "level", Evaluation(refuses))
    level, clipping = verdicts(
        {"kind": "level", "at": 0, "at_most": 1}, {"kind": "clipping", "at_most": "1 %"}
    )
    assert (level.verdict, level.value) == ("fails", None)
    assert level.method == "cannot be told: no answer here"
    assert clipping.verdict == "holds"


def test_no_number_is_no_pass() -> None:
    """Not a number holds no limit, on either side; a value on its limit holds."""
    for bound in ("at most", "at least"):
        (row,) = Answer(math.nan, "V", 1.0, bound, "").results("x")  # type: ignore[arg-type]  # looped over
        assert row.verdict == "fails"
        (row,) = Answer(1.0, "V", 1.0, bound, "").results("x")  # type: ignore[arg-type]  # looped over
        assert (row.verdict, row.margin) == ("holds", 0.0)


@pytest.mark.parametrize(
    ("value", "limit", "verdict"),
    [(0.0, 1.0, "fails"), (1.2, 1.0, "holds"), (2.9, 3.0, "holds"), (9.0, 3.0, "fails")],
)
def test_the_nearer_of_two_limits(value: float, limit: float, verdict: str) -> None:
    """Between 1 and 3 the nearer limit is told, beyond them the broken one."""
    (row,) = nearer(value, 1.0, 3.0, "V", "", str).results("x")
    assert (row.limit, row.verdict) == (limit, verdict)


def test_impossible_checks_are_told_at_once() -> None:
    """All of them, each with its place in the file."""
    overshoot = {"kind": "overshoot", "at_most": "1 %"}
    mains = {"kind": "mains-level", "at_most": "1 mV", "frequency": "9.99 kHz"}
    sine = {"kind": "sine", "amplitude": 1, "frequency": 50}
    scenario = made(overshoot, {"kind": "clipping"}, mains, stimulus=sine)
    with pytest.raises(ScenarioError) as caught:
        fe.evaluate_checks(fe.Simulation(scenario))
    assert [problem.key for problem in caught.value.problems] == ["check[1]", "check[3]"]


def test_a_record_is_not_begun_where_a_check_is_impossible(tmp_path: Path) -> None:
    """Nothing is simulated and nothing is left behind."""
    sine = {"kind": "sine", "amplitude": 1, "frequency": 50}
    scenario = made({"kind": "overshoot", "at_most": "1 %"}, stimulus=sine)
    with pytest.raises(ScenarioError):
        fe.record_run(fe.Simulation(scenario), tmp_path / "r.h5")
    assert list(tmp_path.iterdir()) == []


def test_only_what_is_asked_for_is_kept() -> None:
    """Without checks nothing of a run stays in memory; a check keeps the columns that it reads."""
    block = fe.simulate(made())
    for checks, kept in (
        ((), ()),
        (({"kind": "corner", "at_least": 1},), ()),
        (({"kind": "headroom", "at_least": "1 mV"},), ("time", "pin")),
    ):
        keeper = Keeper(made(*checks))
        for _ in range(2):
            keeper.add(block)  # type: ignore[arg-type]  # has the arrays of a block
        finished = keeper.finished(None)
        for name in ("time", "pin", "voltage", "overrange"):
            wanted = 2 * len(block.time) if name in kept else 0
            assert len(getattr(finished, name)) == wanted


def test_the_columns_of_each_kind_are_enough() -> None:
    """From the arrays that its kind says it reads, every example is judged as from the run."""
    for kind in CHECKS:
        scenario = fe.load_scenario(ROOT / f"{kind}.toml")
        streamed = fe.evaluate_checks(fe.Simulation(scenario))
        assert streamed == fe.evaluate_checks(fe.simulate(scenario)), kind


def test_blocks_do_not_show(tmp_path: Path) -> None:
    """Verdicts do not depend on how time is cut."""
    scenario = made(
        {"kind": "settling", "within": "1 LSB", "before": "10 ms"},
        {"kind": "noise", "basis": "run", "at_most": "1 LSB"},
        adc={"rate": "10 MHz"},
    )
    small, large = (fe.Simulation(scenario, block) for block in (16384, 262144))
    assert fe.evaluate_checks(small) == fe.evaluate_checks(large)


def test_evaluations_are_whole() -> None:
    """Every row of the table has a function and names arrays of a run."""
    names = {"time", "pin", "held", "codes", "voltage", "overrange"}
    for kind, row in EVALUATIONS.items():
        assert callable(row.measure), kind
        assert set(row.columns) <= names
    assert np.all([kind in CHECKS for kind in EVALUATIONS])
