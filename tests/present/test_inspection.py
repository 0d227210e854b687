"""Plots and tables of inspections."""

from __future__ import annotations

import io
import math
import xml.etree.ElementTree as ElementTree
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from frontend_sim.measure.response import Inspection, inspect_scenario
from frontend_sim.present import inspection_figure, inspection_tables, plot_inspection
from frontend_sim.present.frequency_view import FrequencyView, phase_of
from frontend_sim.present.step_view import StepView
from frontend_sim.scenario.model import Scenario

LOW = {"kind": "rc-lowpass", "resistance": "10 kohm", "capacitance": "4.7 nF"}
HIGH = {"kind": "rc-highpass", "resistance": "10 kohm", "capacitance": "4.7 uF"}
CHAINS: dict[str, list[dict[str, Any]]] = {
    "low pass": [LOW],
    "high pass": [HIGH],
    "band pass": [
        {
            "kind": "butterworth", "order": 2, "response": "band-pass", "lower_corner": 100,
            "upper_corner": 3000,
        }
    ],
    "underdamped": [{"kind": "second-order", "corner": 1500, "quality_factor": 3}],
    "gain": [{"kind": "gain", "gain": -2}],
    "delay": [LOW, {"kind": "transport-delay", "delay": "200 us"}],
    "delay alone": [{"kind": "transport-delay", "delay": "200 us"}],
    "nothing": [],
    "silent": [{"kind": "gain", "gain": 0}, LOW],
    "integrator": [{"kind": "poles-zeros", "poles": [0.0], "gain": 100}],
    "oscillator": [{"kind": "poles-zeros", "poles": [[0, 1e3], [0, -1e3]], "gain": 1e6}],
    "notch": [{"kind": "second-order", "corner": 50, "quality_factor": 9, "response": "notch"}],
    "rings long": [{"kind": "second-order", "corner": 1e6, "quality_factor": 1e5}],
    "rates far apart": [{"kind": "poles-zeros", "poles": [-1e6, -1e-3], "gain": 1e3}],
}  # fmt: skip


def inspected(name: str, **simulation: Any) -> Inspection:
    """Inspect one of the chains."""
    return inspect_scenario(
        Scenario.model_validate(
            {
                "title": f"Invented: {name}, $5",
                "stimulus": {"kind": "step", "before": 0.0, "after": 1.0},
                "chain": CHAINS[name],
                "adc": {"rate": "20 kHz", "bits": 12, "high": "3.3 V"},
                "simulation": simulation,
            }
        )
    )


def texts(figure: Any) -> str:
    """Return all text of a figure, legends and labels included."""
    from matplotlib.text import Text

    return "\n".join(text.get_text() for text in figure.findobj(Text))


@pytest.mark.parametrize("name", CHAINS)
def test_every_chain_can_be_drawn(tmp_path: Path, name: str) -> None:
    """Whatever the chain, there is a plot, and no warning is raised on the way."""
    path = plot_inspection(inspected(name), tmp_path / "plot.png")
    assert path.stat().st_size > 20_000


def test_a_long_ring_makes_no_huge_picture(tmp_path: Path) -> None:
    """A hundred thousand periods are reduced to what the columns of pixels can show."""
    path = plot_inspection(inspected("rings long"), tmp_path / "plot.svg")
    assert ElementTree.parse(path).getroot().tag.endswith("svg")
    assert path.stat().st_size < 1_000_000


def test_the_plot_tells_what_is_to_be_seen() -> None:
    """Titles, units, corners, half the rate and the rate, bands and models are named."""
    shown = texts(inspection_figure(inspected("underdamped", grid_rate="40 kHz")))
    for text in (
        "Invented: underdamped", "magnitude [dB]", "phase [deg]", "group delay [us]",
        "frequency [Hz]", "response to a unit step [V/V]", "time after the step [ms]",
        "distance from the end [V/V]", "half the rate 10.0 kHz", "rate 20.0 kHz",
        "−3 dB 1.177 kHz", "−3 dB 1.692 kHz", "bilinear at 40.0 kHz", "zoh at 40.0 kHz",
        "overshoot 58.80 %", "1 %\nafter 2.79 ms", "0.5 LSB\nafter 5.51 ms", "end ± 1 %",
    ):  # fmt: skip
        assert text in shown, text


def test_the_step_panel_shows_the_exact_response() -> None:
    """The curve is y(t) of the chain, from before the step to after half an LSB."""
    view = StepView.of(inspected("underdamped"))
    after = view.time > 0.0
    expected = view.inspection.response.values(view.time[after])
    np.testing.assert_allclose(view.value[after], expected, rtol=0.0, atol=1e-13)
    assert view.time[-1] > max(settling.time for settling in view.inspection.time.settlings)
    assert np.max(view.value) == pytest.approx(view.inspection.time.shape.peak, rel=1e-3)


def test_the_phase_is_not_wrapped() -> None:
    """Three low passes turn the phase to -270 degrees, smoothly; a negative gain starts at 180."""
    roots = inspect_scenario(
        Scenario.model_validate(
            {
                "stimulus": {"kind": "step", "before": 0.0, "after": 1.0},
                "chain": [LOW, LOW, LOW, {"kind": "gain", "gain": -1}],
                "adc": {"rate": "20 kHz", "bits": 12, "high": "3.3 V"},
            }
        )
    ).response.roots
    frequency = np.geomspace(1e-3, 1e9, 500)
    turn = np.arctan(2.0 * np.pi * frequency * 4.7e-5)
    np.testing.assert_allclose(
        phase_of(roots, frequency), 180.0 - 3.0 * np.degrees(turn), atol=1e-9
    )


def test_models_lie_near_the_exact_curves() -> None:
    """Far below the grid rate all models coincide with the exact magnitude and phase."""
    view = FrequencyView.of(inspected("band pass", grid_rate="1 MHz"))
    assert [curve.method for curve in view.models] == ["zoh", "foh", "bilinear"]
    for curve in view.models:
        low = curve.frequency < 500.0
        np.testing.assert_allclose(curve.magnitude[low], view.magnitude[: low.sum()], atol=1e-4)
        np.testing.assert_allclose(curve.phase[low], view.phase[: low.sum()], atol=0.1)


def printed(inspection: Inspection) -> str:
    """Return the tables as the terminal shows them."""
    from rich.console import Console

    stream = io.StringIO()
    console = Console(file=stream, width=100, highlight=False)
    for table in inspection_tables(inspection):
        console.print(table)
    return stream.getvalue()


@pytest.mark.parametrize("name", CHAINS)
def test_every_chain_has_tables(name: str) -> None:
    """No chain breaks the tables, and none of them says nan."""
    shown = printed(inspected(name))
    assert "Step response" in shown
    assert "nan" not in shown
    assert max(len(line) for line in shown.splitlines()) <= 100


def test_numbers_of_the_tables() -> None:
    """Closed forms of a 47 us low pass, to the digits shown."""
    shown = printed(inspected("low pass"))
    tau = 47e-6
    for text in (
        "first-order", "after 216.4 us", "after 324.7 us", "after 423.5 us", "47.00 us",
        f"{1e-3 / (2.0 * math.pi * tau):.3f} kHz", "9.88 dB below the largest gain",
        f"{0.25e-3 / tau:.3f} kHz", "step of 3.300 V", "-8.096 %",
        "grid at 20.00 kHz, the conversion rate",
    ):  # fmt: skip
        assert text in shown, text


def test_the_high_pass_says_what_its_times_refer_to() -> None:
    """A response that ends at zero is judged by its largest excursion."""
    assert "stays within 1 % of the largest excursion" in printed(inspected("high pass"))


def test_what_never_ends_says_so() -> None:
    """Drift and ringing for ever are told in words."""
    assert "drifts without bound" in printed(inspected("integrator"))
    assert "rings for ever" in printed(inspected("oscillator"))


def test_no_group_delay_where_the_gain_has_no_largest_value() -> None:
    """Beside a pole on the axis there is no frequency whose group delay could be told."""
    assert "group delay where the gain is largest" in printed(inspected("band pass"))
    assert "group delay where the gain is largest" not in printed(inspected("oscillator"))
