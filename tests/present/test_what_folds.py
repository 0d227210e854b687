"""What folds, margins and noise: tables, summaries and panels."""

from __future__ import annotations

import io
import json
from pathlib import Path
from typing import Any

import pytest
from checked import FILTER, STEP, made

import frontend_sim as fe
from frontend_sim.cli.command import main
from frontend_sim.measure.aliasing import aliasing_of
from frontend_sim.measure.checks import checks_before_run, evaluate_checks
from frontend_sim.measure.result import Result
from frontend_sim.present import run_figure, run_summary, run_tables
from frontend_sim.present.aliasing_table import aliasing_summary, aliasing_table
from frontend_sim.present.drawing import new_figure
from frontend_sim.present.error_panel import error_views
from frontend_sim.present.inspection_plot import inspection_figure
from frontend_sim.present.margin_panel import draw_margins, relative_margin, verdicts_of
from frontend_sim.present.spectrum_panel import spectrum_view

ROOT = Path(__file__).resolve().parents[2] / "scenarios"
TONES = {
    "kind": "tones",
    "tone": [{"amplitude": 1, "frequency": 400}, {"amplitude": "50 mV", "frequency": "47.3 kHz"}],
    "offset": "1.6 V",
}


def text_of(renderables: Any) -> str:
    """Return what the terminal shows."""
    from rich.console import Console

    console = Console(file=io.StringIO(), width=100)
    for each in renderables:
        console.print(each)
    found: str = console.file.getvalue()  # type: ignore[attr-defined]  # a StringIO, see above
    return found


def test_the_table_names_source_and_place() -> None:
    """Frequency, where it lands, and the alias error of the run at its foot."""
    run = fe.simulate(made(stimulus=TONES))
    shown = text_of(run_tables(run))
    for part in ("tones, tone 2", "47.30 kHz", "7.300 kHz", "50.00 mV", "alias error of the run"):
        assert part in shown
    summary = run_summary(run)["aliasing"]
    (row,) = summary["aliases"]
    assert (row["source"], row["lands"]) == ("tones, tone 2", pytest.approx(7300.0))
    assert summary["error"]["peak"] > 0.0
    json.dumps(summary, allow_nan=False)


def test_no_table_where_nothing_has_a_level() -> None:
    """A step has edges, which have no level; a sine below half the rate has nothing."""
    assert aliasing_table(aliasing_of(made(stimulus=STEP))) is None
    slow = {"kind": "sine", "amplitude": 1, "frequency": 50}
    assert aliasing_table(aliasing_of(made(stimulus=slow))) is None
    step = aliasing_summary(aliasing_of(made(stimulus=STEP)))
    json.dumps(step, allow_nan=False)  # a band without end is null


def test_weaker_ones_are_counted() -> None:
    """The table shows ten rows and says how many it leaves out."""
    train = {"kind": "pulse", "high": 1, "width": "3 us", "period": "31 us"}
    table = aliasing_table(aliasing_of(made(stimulus=train)))
    assert table is not None
    assert table.row_count == 10
    assert "40 weaker ones are not shown" in str(table.caption)


def test_the_plot_of_a_run_names_aliases_and_margins(tmp_path: Path) -> None:
    """A record's plot has a panel of what folds and one of its checks; a step's has no spectrum."""
    scenario = made({"kind": "alias-error", "at_most": "3 LSB"}, {"kind": "clipping"},
                    stimulus=TONES)  # fmt: skip
    fe.save_record(fe.simulate(scenario), tmp_path / "run.h5")
    with fe.open_record(tmp_path / "run.h5") as record:
        axes = run_figure(record).axes
    titles = [each.get_title(loc="left") for each in axes]
    assert "What folds, and where it lands" in titles
    assert "Checks: 1 of 2 fail" in titles
    spectrum = axes[titles.index("What folds, and where it lands")]
    legend = spectrum.get_legend()
    assert legend is not None
    assert "tones, tone 2: 47.30 kHz" in legend.get_texts()[0].get_text()
    plain = run_figure(fe.simulate(made(stimulus=STEP)))
    assert all("folds" not in each.get_title(loc="left") for each in plain.axes)


def test_the_plot_of_a_run_has_the_parts_of_the_total_error() -> None:
    """A bar of rms and one of peak for each part that can be seen and for the total, and the limit.

    A converter 1 % off at 2 V: the gain is 20 mV on average, 24.8 LSB; what can only fail at the
    run has no panel.
    """
    level = {"kind": "step", "before": "2 V", "after": "2 V"}
    checks = [
        {"kind": "total-error", "at_most": "30 LSB"},
        {"kind": "total-error", "at_most": "1 LSB", "after": "19.99 ms", "name": "too late"},
    ]
    run = fe.simulate(made(*checks, stimulus=level, adc={"gain_error": "1 %"}))
    (view,) = error_views(run)
    gain = next(bar for bar in view.bars if bar[0].startswith("gain"))
    assert gain[1:] == pytest.approx((0.02 / 3.3 * 4096,) * 2, rel=1e-9)
    assert view.bars[-1][0].startswith("total")
    assert view.limit == pytest.approx(30.0)
    titles = {each.get_title(loc="left"): each for each in run_figure(run).axes}
    panel = titles["total-error: its parts (limit of the peak: 30.0 LSB, out of view)"]
    assert len(panel.patches) == 2 * len(view.bars)
    close = made({**checks[0], "at_most": "20 LSB"}, stimulus=level, adc={"gain_error": "1 %"})
    axes = run_figure(fe.simulate(close)).axes[-1]
    assert "out of view" not in axes.get_title(loc="left")
    assert [line.get_xdata()[0] for line in axes.lines] == pytest.approx([20.0])


def test_a_few_codes_have_no_spectrum() -> None:
    """Sixteen codes at the least; and where nothing folds there is no panel."""
    few = made(stimulus=TONES, simulation={"duration": "0.4 ms"})
    assert spectrum_view(fe.simulate(few)) is None
    slow = {"kind": "sine", "amplitude": 1, "frequency": 50}
    assert spectrum_view(fe.simulate(made(stimulus=slow))) is None


def test_the_worst_margin_comes_first() -> None:
    """As a share of the limit, cut at one; what cannot be told is as bad as can be."""
    rows = [
        Result("fine", 1.0, "V", 2.0, 1.0, "holds"),
        Result("mere number", 1.0),
        Result("broken", 9.0, "V", 2.0, -7.0, "fails"),
        Result("untold", None, verdict="fails"),
        Result("on it", 0.0, "1", 0.0, 0.0, "holds"),
        Result("no limit", 1.0, "dB", 0.0, 3.0, "holds"),
    ]
    assert [row.name for row in verdicts_of(rows)] == [
        "broken", "untold", "on it", "fine", "no limit",
    ]  # fmt: skip
    assert [relative_margin(row) for row in rows] == [0.5, -1.0, -1.0, -1.0, 0.0, 1.0]


def test_the_panel_of_many_checks_counts_all_of_them() -> None:
    """Of 40 checks 30 are drawn; how many fail is told of all, and that not all are shown."""
    fails = [Result(f"broken {n}", 2.0, "V", 1.0, -1.0, "fails") for n in range(35)]
    rows = verdicts_of(
        [*(Result(f"fine {n}", 1.0, "V", 2.0, 1.0, "holds") for n in range(5)), *fails]
    )
    axes = new_figure(6.0, 9.0).subplots()
    draw_margins(axes, rows)
    assert len(axes.patches) == 30
    told = "Checks: 35 of 40 fail, the 30 with the least margin are shown"
    assert axes.get_title(loc="left") == told


def test_the_plot_of_an_inspection_has_the_noise_budget() -> None:
    """A bar for each source and one for their sum."""
    scenario = fe.load_scenario(ROOT / "checks" / "noise.toml")
    inspection = fe.inspect_scenario(scenario)
    assert inspection.noise is not None
    axes = inspection_figure(inspection).axes[-1]
    assert axes.get_title(loc="left") == "Noise budget"
    assert len(axes.texts) == len(inspection.noise.rows) + 1


def test_checks_before_the_run() -> None:
    """Those on the chain, on the budget and on instants; they agree with those of a run."""
    checks = [
        {"kind": "corner", "at_least": "1 kHz"},
        {"kind": "noise", "at_most": "1 LSB"},
        {"kind": "noise", "name": "in the codes", "at_most": "1 LSB", "basis": "run"},
        {"kind": "rise-time", "at_most": "1 ms"},
        {"kind": "clipping"},
        {"kind": "grid-error", "at_most": "1 LSB"},
    ]
    scenario = made(*checks)
    before = checks_before_run(scenario)
    assert [row.name for row in before] == ["corner", "noise", "rise-time"]
    after = {row.name: row.value for row in evaluate_checks(fe.simulate(scenario))}
    for row in before:
        assert row.value == after[row.name]


@pytest.mark.parametrize(("limit", "status"), [("1 kHz", 0), ("10 kHz", 1)])
def test_inspect_shows_verdicts(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], limit: str, status: int
) -> None:
    """The exit status is that of the checks that need no run."""
    scenario = made({"kind": "corner", "at_least": limit}, chain=[FILTER], stimulus=TONES)
    file = tmp_path / "corner.toml"
    file.write_text(fe.scenario_text(scenario), encoding="utf-8")
    assert main(["inspect", str(file)]) == status
    shown = capsys.readouterr().out
    assert "What folds at half the rate, 10.00 kHz" in shown
    assert ("verdict: holds" in shown) == (status == 0)
    assert main(["inspect", str(file), "--json"]) == status
    told = json.loads(capsys.readouterr().out)
    assert [row["name"] for row in told["checks"]] == ["corner"]
    assert told["aliasing"]["aliases"][0]["source"] == "tones, tone 2"
