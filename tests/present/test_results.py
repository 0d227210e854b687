"""Verdicts in tables and plots."""

from __future__ import annotations

import io
import math
from typing import Any

import pytest
from checked import made

from frontend_sim.measure.result import Result
from frontend_sim.present import run_figure
from frontend_sim.present.result_table import quantity, result_tables
from frontend_sim.present.settling_panel import settling_views
from frontend_sim.simulation import simulate


def printed(*results: Result) -> str:
    """Return results as the terminal shows them."""
    from rich.console import Console

    stream = io.StringIO()
    console = Console(file=stream, width=100, highlight=False)
    for table in result_tables([vars(row) for row in results]):
        console.print(table)
    return stream.getvalue()


HOLDS = Result("wait", 1e-3, "s", 2e-3, 1e-3, "holds", "exact", "at most")
FAILS = Result("bits", 9.5, "bit", 10.0, -0.5, "fails", "budget", "at least", "lower the noise")
SHARE = Result("clipped", 0.25, "1", 0.0, -0.25, "fails", "flags", "at most", "less gain")
UNKNOWN = Result("tone", None, verdict="fails", method="cannot be told: no tone")


def test_checks_show_value_limit_margin_and_verdict() -> None:
    """With the sign of the limit, shares in percent, and what is not there as none."""
    text = printed(HOLDS, FAILS, SHARE, UNKNOWN)
    for part in (
        "1.000 ms", "≤ 2.000 ms", "9.500 bit", "≥ 10.00 bit", "-0.5000 bit", "25.00 %", "≤ 0 %",
        "none", "holds", "fails",
    ):  # fmt: skip
        assert part in text, part


def test_each_failing_check_has_its_sentence() -> None:
    """The advice, or the reason where there is no value, and at last the whole verdict."""
    text = printed(HOLDS, FAILS, UNKNOWN)
    assert "bits fails: lower the noise" in text
    assert "tone fails: cannot be told: no tone" in text
    assert "wait fails" not in text
    assert text.rstrip().endswith("verdict: fails, 2 of 3 checks")
    assert printed(HOLDS).rstrip().endswith("verdict: holds, the only check")


def test_names_stand_for_themselves() -> None:
    """Brackets that look like a style, or like its end, are shown as they are."""
    odd = Result("[red]x[/] [/]", 1.0, "V", 2.0, 1.0, "holds", "[b] how", "at most")
    beside = Result("[red]x[/] [/]: final", 1.0, "V", method="of [filter]")
    text = printed(odd, beside)
    assert text.count("[red]x[/] [/]") == 2
    assert "of [filter]" in text


def test_measures_stand_apart() -> None:
    """A measure without a verdict is in a table of its own, and makes no verdict."""
    text = printed(Result("grid rate", 1e6, "Hz", method="bilinear"))
    assert "Measures" in text
    assert "1.000 MHz" in text
    assert "verdict" not in text
    assert printed() == ""


@pytest.mark.parametrize(
    ("value", "unit", "text"),
    [
        (None, "V", ""),
        (8.0, "conversions", "8 conversions"),
        (0.5, "LSB", "0.5000 LSB"),
        (math.inf, "Hz", "infinite"),
        (3.0, "1", "3.000"),
    ],
)
def test_quantities(value: float | None, unit: str, text: str) -> None:
    """Counts are whole, other numbers have four digits."""
    assert quantity(value, unit) == text


SETTLING: dict[str, Any] = {"kind": "settling", "within": "0.5 LSB", "before": "300 us"}


def texts(figure: Any) -> str:
    """Return all text of a figure."""
    from matplotlib.text import Text

    return "\n".join(text.get_text() for text in figure.findobj(Text))


def test_the_panel_marks_band_last_exit_and_granted_time() -> None:
    """The distance in LSB on a logarithmic axis, exact and at the conversions."""
    figure = run_figure(simulate(made(SETTLING)))
    panel = figure.axes[-1]
    assert panel.get_yscale() == "log"
    shown = texts(figure)
    for text in (
        "settling: fails", "band ± 0.500 LSB", "granted 300 us", "last exit 367.4 us",
        "conversions", "distance from\nthe end [LSB]", "time after the event at 1.000 ms",
    ):  # fmt: skip
        assert text in shown, text


def test_the_panel_shows_what_the_check_measured() -> None:
    """At the last exit the curve crosses the band: tau decades below the step of 1241 LSB."""
    (view,) = settling_views(simulate(made(SETTLING)))
    assert view.found is not None
    assert view.band == 0.5
    before = view.exact_time < view.found.seconds
    assert view.exact_distance[before].min() >= 0.5 - 1e-9
    assert view.exact_distance[~before].max() <= 0.5 + 1e-9
    assert view.distance[0] == pytest.approx(4096 / 3.3, rel=1e-9)


def test_a_run_without_settling_checks_has_no_panel() -> None:
    """Plots of other runs are as they were; a check that cannot be told says why in its panel."""
    plain, other = made(), made({"kind": "clipping"})
    assert len(run_figure(simulate(plain)).axes) == len(run_figure(simulate(other)).axes)
    ramp = {"kind": "ramp", "slope": "1 V/s"}
    figure = run_figure(simulate(made(SETTLING, stimulus=ramp)))
    assert "cannot be told" in texts(figure)


@pytest.mark.parametrize(
    ("value", "unit", "text"),
    [(447.0, "counts", "447 counts"), (0.0, "codes", "0 codes"), (1e6, "ticks", "1000000 ticks"),
     (2.5, "conversions", "2.500 conversions"), (-1.0, "conversions", "-1 conversion"),
     (1.0, "codes", "1 code"), (math.inf, "conversions", "infinite conversions")],
)  # fmt: skip
def test_what_is_counted_is_whole(value: float, unit: str, text: str) -> None:
    """Whole numbers have no decimals; a mean of them has."""
    assert quantity(value, unit) == text
