"""Plots and tables of inspections."""

from __future__ import annotations

import io
import math
import xml.etree.ElementTree as ElementTree
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from rich.console import Console

from frontend_sim.archive import open_record, record_run
from frontend_sim.measure.response import Inspection, inspect_scenario
from frontend_sim.present import inspection_figure, inspection_tables, plot_inspection, run_tables
from frontend_sim.present.frequency_view import FrequencyView, phase_of
from frontend_sim.present.step_view import StepView
from frontend_sim.scenario import Scenario, parse_scenario
from frontend_sim.scenario.told_unit import told_unit
from frontend_sim.simulation import Simulation

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


BRIDGE = {
    "stimulus": {"kind": "step", "after": 0.5e5},
    "chain": [
        {
            "kind": "resistive-bridge",
            "sensitivity": "2 mV/V",
            "full_scale": "10 bar",
            "excitation": "5 V",
            "resistance": "350 ohm",
        },
        {"kind": "rc-lowpass", "resistance": "1 kohm", "capacitance": "10 nF"},
        {"kind": "gain", "gain": 200.0},
    ],
    "adc": {"rate": "1 kHz", "bits": 12, "high": 2.0, "input_noise": "1 mV"},
    "simulation": {"duration": "10 ms"},
}
"""Invented: 10 mV at 10 bar, 200 times, are 0.2 V per bar."""


@pytest.mark.parametrize(
    ("after", "one", "step", "gain", "noise"),
    [
        (0.5e5, "1 bar", "10.00 bar", "200.0 mV/bar", 5e-3),  # the bridge alone has a unit
        ("500 mbar", "1 bar", "10.00 bar", "200.0 mV/bar", 5e-3),
        ("50 kPa", "1 Pa", "1.000 MPa", "2.000 uV/Pa", 500.0),
    ],
)
def test_the_stimulus_is_told_in_the_unit_of_the_file(
    after: object, one: str, step: str, gain: str, noise: float
) -> None:
    """Steps, levels, gain, LSB and noise; JSON has the same numbers, and all of them in SI too."""
    scenario = Scenario.model_validate({**BRIDGE, "stimulus": {"kind": "step", "after": after}})
    found = inspect_scenario(scenario)
    text = " ".join(printed(found).split())
    for part in (f"for a step of {one} ", f"12 bits, step of {step} ", f"largest gain | {gain} "):
        assert part in text.replace("│", "|"), part
    assert f"pin reaches 2.00 V at a stimulus of | {step}" in text.replace("│", "|")
    plain = found.as_dict()
    size = plain["referred"]["unit"]["size"]
    assert plain["unit"] == "Pa"
    assert plain["time"]["full_scale_step"] == pytest.approx(1e6)
    assert plain["referred"]["full_scale_step"] == pytest.approx(1e6 / size)
    assert plain["referred"]["at_high"] == pytest.approx(plain["level"]["at_high"] / size)
    assert plain["referred"]["lsb"] == pytest.approx(1e6 / size / 4096.0)
    # The converter's 1 mV over 0.2 V per bar; bridge and filter, 0.15 mV of the pin, add 1 %.
    assert plain["referred"]["noise"] == pytest.approx(noise, rel=0.02)


def test_curves_are_for_one_unit_of_the_file() -> None:
    """0.2 V per bar: where the step ends, and the level at low frequencies; in Pa it was 2e-6."""
    found = inspect_scenario(Scenario.model_validate(BRIDGE))
    assert StepView.of(found).value[-1] == pytest.approx(0.2, rel=1e-4)
    # A decade and more below the corner: 20 log 0.2 less nothing.
    assert FrequencyView.of(found).magnitude[0] == pytest.approx(20.0 * math.log10(0.2), abs=0.01)
    shown = texts(inspection_figure(found))
    for part in ("end 0.2000", "unit step [V/bar]", "dB re 1 V/bar", "for a step of 10.0 bar"):
        assert part in shown, part


SENSORS = {
    "g": """kind = "accelerometer"
sensitivity = "100 mV/g"
natural_frequency = "2 kHz"
quality_factor = 1""",
    # Its full scale keeps a unit in the record, Pa.
    "bar": '''kind = "resistive-bridge"
sensitivity = "2 mV/V"
full_scale = "10 bar"
excitation = "5 V"''',
}


@pytest.mark.parametrize("unit", SENSORS)
def test_a_record_tells_the_unit_of_its_file(tmp_path: Path, unit: str) -> None:
    """Its values are in SI, and its file as written has the unit that a run is told in."""
    text = f"""
format = 1
[stimulus]
kind = "step"
after = "2 {unit}"
[[chain]]
{SENSORS[unit]}
[adc]
rate = "1 kHz"
bits = 12
high = "2 V"
[simulation]
duration = "10 ms"
"""
    record_run(Simulation(parse_scenario(text)), tmp_path / "run.h5")
    console = Console(file=io.StringIO(), width=100)
    with open_record(tmp_path / "run.h5") as record:
        assert told_unit(record.scenario).name == unit
        console.print(*run_tables(record))
    assert f"2.0000 {unit}" in console.file.getvalue()


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
