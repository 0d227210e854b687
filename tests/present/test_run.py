"""Plots, tables and summaries of runs."""

from __future__ import annotations

import io
import json
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from frontend_sim.present import plot_run, run_figure, run_summary, run_table, run_tables
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import simulate
from frontend_sim.simulation.run import Run

FILTER = {
    "kind": "rc-lowpass", "resistance": "10 kohm", "capacitance": "4.7 nF", "name": "input $filter",
}  # fmt: skip


def run(title: str = "Invented", high: float = 3.3, **simulation: Any) -> Run:
    """Run a step from 0 to 4 V through a low pass."""
    return simulate(
        Scenario.model_validate(
            {
                "title": title,
                "stimulus": {"kind": "step", "before": 0.0, "after": 4.0, "at": "0.3 ms"},
                "chain": [FILTER],
                "adc": {"rate": "20 kHz", "bits": 12, "high": high},
                "simulation": {"duration": "2 ms"} | simulation,
            }
        )
    )


def texts(figure: Any) -> str:
    """Return all text of a figure, legends and labels included."""
    from matplotlib.text import Text

    return "\n".join(text.get_text() for text in figure.findobj(Text))


def printed(tables: Any) -> str:
    """Return tables as the terminal shows them."""
    from rich.console import Console

    stream = io.StringIO()
    console = Console(file=stream, width=100, highlight=False)
    for table in tables:
        console.print(table)
    return stream.getvalue()


@pytest.mark.parametrize("duration", ["2 ms", "30 ms"])
def test_what_the_sampling_capacitor_held_is_drawn_beside_the_codes(duration: str) -> None:
    """Dots of a few conversions and lines of many: the lag of the capacitor, in LSB."""
    network = {
        "switch_resistance": "10 kohm", "sampling_capacitance": "20 pF", "acquisition_time": "1 us",
    }  # fmt: skip
    plain = run(duration=duration)
    scenario = plain.scenario.model_dump(exclude_unset=True)
    scenario["adc"] = {**scenario["adc"], "input": network, "high": 5.0}
    held = simulate(Scenario.model_validate(scenario))
    panel = run_figure(held).axes[1]
    curves = {str(line.get_label()): line.get_ydata() for line in panel.lines}
    lag = (held.held - held.pin) / held.scenario.adc.lsb
    drawn = np.asarray(curves["held by the sampling capacitor"])
    np.testing.assert_allclose(drawn, lag, rtol=1e-12)
    # Codes lie on what was held, within rounding; the lag is much larger than that.
    assert float(np.max(np.abs(np.asarray(curves["codes"]) - drawn))) <= 0.5 + 1e-6
    assert float(np.max(np.abs(lag))) > 5.0
    assert "sampling capacitor" not in texts(run_figure(plain))


def test_the_plot_shows_pin_codes_limits_and_overrange() -> None:
    """Axes have names with units, the limits of the range and what is beyond are drawn in."""
    figure = run_figure(run(waveform_rate="100 kHz"))
    shown = texts(figure)
    for text in (
        "Invented", "40 conversions at 20.0 kHz, 12 bits, 0 V to 3.30 V, 32 beyond the range",
        "codes read back", "pin, exact", "ADC range 0 V to 3.30 V", "beyond the range",
        "voltage [V]", "code [counts]", "[LSB]", "time [ms]", "waveforms [V]", "stimulus",
        r"input \$filter",
    ):  # fmt: skip
        assert text in shown, text
    levels = {
        float(line.get_ydata()[0]) for line in figure.axes[0].lines if len(line.get_xdata()) == 2
    }
    assert levels >= {0.0, 3.3}
    marks = next(line for line in figure.axes[0].lines if line.get_marker() == "x")
    assert len(marks.get_xdata()) == 32


def test_a_small_signal_is_not_flattened_by_the_limits() -> None:
    """Where the signal is small beside the range, the range is told instead of drawn."""
    figure = run_figure(run(high=1000.0))
    assert "ADC range 0 V to 1.00 kV, out of view" in texts(figure)
    assert figure.axes[0].get_ylim()[1] < 0.01


def test_a_peak_in_a_long_run_is_drawn(tmp_path: Path) -> None:
    """One clipped conversion in half a million shows in the lines and as a mark."""
    short = run()
    count = 500_000
    pin = np.zeros(count)
    pin[123_456] = 4.0
    long = Run(
        short.scenario, np.arange(count) / 20e3, pin, (pin * 1000).astype(np.int64),
        np.minimum(pin, 3.3), pin > 3.3, np.empty(0), {},
    )  # fmt: skip
    figure = run_figure(long)
    lines = [line for line in figure.axes[0].lines if len(line.get_xdata()) > 2]
    assert all(len(line.get_xdata()) <= 6000 for line in lines)
    assert max(float(np.max(line.get_ydata())) for line in lines) == 4.0
    plot_run(long, tmp_path / "long.svg")
    assert (tmp_path / "long.svg").stat().st_size < 1_000_000


@pytest.mark.parametrize("title", ["", "$x^2$ and _under_ \\ 100 %", "a" * 200, "№ 7 🙂"])
def test_any_title_can_be_drawn(tmp_path: Path, title: str) -> None:
    """A title is text, never a formula."""
    import warnings

    with warnings.catch_warnings():
        # The font has no picture for every letter; a box stands for it.
        warnings.filterwarnings("ignore", message="Glyph")
        plot_run(run(title), tmp_path / "plot.png")
    assert (tmp_path / "plot.png").stat().st_size > 10_000


def test_a_run_without_conversions(tmp_path: Path) -> None:
    """Nothing to show is shown as nothing, not as an error."""
    empty = np.empty(0)
    nothing = Run(
        run().scenario, empty, empty, empty.astype(np.int64), empty, empty.astype(bool), empty, {}
    )
    plot_run(nothing, tmp_path / "plot.png")
    summary = run_summary(nothing)
    assert (summary["conversions"], summary["pin"], summary["difference_rms"]) == (0, None, None)
    assert "0 at 20.0 kHz" in printed(run_tables(nothing))


def test_summary_counts_what_the_arrays_hold() -> None:
    """The numbers are those of the arrays; JSON can carry them."""
    finished = run()
    summary = run_summary(finished)
    assert json.loads(json.dumps(summary, allow_nan=False)) == summary
    assert summary["conversions"] == 40
    assert summary["overrange"] == 32
    assert summary["codes"]["highest"] == 4095
    assert summary["pin"]["highest"] == finished.pin.max()
    inside = ~finished.overrange
    error = (finished.voltage - finished.pin)[inside] / finished.scenario.adc.lsb
    assert summary["difference_rms"] == pytest.approx(float(np.sqrt(np.mean(error**2))), rel=1e-15)
    assert summary["difference_largest"] <= 0.5


def test_tables() -> None:
    """The table tells conversions, range, extremes and what was clipped; rich markup is no code."""
    shown = printed([run_table(run(title="pump [bold]7[/bold]"))])
    for text in (
        "pump [bold]7[/bold]",
        "40 at 20.0 kHz",
        "LSB 805.7 uV",
        "32 (80.0 %)",
        "0 to 4095",
    ):
        assert text in shown, text


def test_a_grid_is_told() -> None:
    """The summary of a run with a discrete model tells how good it was."""
    coarse = run(discretization="bilinear", grid_rate="100 kHz")
    summary = run_summary(coarse)
    assert summary["grid"]["method"] == "bilinear"
    assert "bilinear at 100.0 kHz" in printed(run_tables(coarse))


def pin_line(finished: Run) -> Any:
    """Return the line of the pin in the plot of a run."""
    axes = run_figure(finished).axes[0]
    return next(line for line in axes.lines if line.get_label() == "pin, exact")


def test_a_few_conversions_are_never_joined_by_straight_lines() -> None:
    """Between them the pin is shown as it was, or not at all."""
    dots = pin_line(run())
    assert (dots.get_linestyle(), dots.get_marker()) == ("None", ".")
    coarse = pin_line(run(waveform_rate="10 kHz"))
    assert coarse.get_linestyle() == "None"
    finished = run(waveform_rate="1 MHz")
    line = pin_line(finished)
    np.testing.assert_array_equal(line.get_ydata(), finished.waveform[r"input $filter"])
    assert line.get_linestyle() == "-"


def test_points_of_a_waveform_panel_have_lines_of_their_own() -> None:
    """Curves on one another are told apart by more than colour."""
    lines = run_figure(run(waveform_rate="100 kHz")).axes[2].lines
    assert [line.is_dashed() for line in lines] == [False, True]
