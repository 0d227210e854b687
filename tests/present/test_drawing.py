"""What all figures share: scales of axes, and text that is shown as it stands."""

from __future__ import annotations

import numpy as np
import pytest

from frontend_sim.present.drawing import axis_scale, draw_grid, legend_text, literal, new_figure
from frontend_sim.present.settling_panel import SettlingView, draw_settling


@pytest.mark.parametrize(
    ("unit", "values", "expected"),
    [
        ("", [0.2], (100.0, "%")),
        ("1", [0.2], (100.0, "%")),
        ("V", [2e-3, -5e-3], (1e3, "mV")),
        ("V", [np.nan, 2e-6, np.inf], (1e6, "uV")),
        ("V", [np.nan], (1.0, "V")),
        ("Hz", [4.7e3], (1e-3, "kHz")),
        ("dB", [2e-3], (1.0, "dB")),
    ],
)
def test_axes_of_checks_have_prefixes(
    unit: str, values: list[float], expected: tuple[float, str]
) -> None:
    """The largest finite value picks the prefix, where the unit takes one; shares are percent."""
    assert axis_scale(unit, np.array(values)) == expected


def test_names_are_no_formulas() -> None:
    """A dollar sign is drawn, and a leading underscore does not take a name out of the legend."""
    figure = new_figure(2.0, 2.0)
    axes = figure.subplots()
    axes.set_title(literal("$5 and $x$"))
    axes.plot([0, 1], [0, 1], label=legend_text("_costs $x$"))
    assert axes.title.get_text() == r"\$5 and \$x\$"
    assert [text.get_text() for text in axes.legend().get_texts()] == [r" _costs \$x\$"]
    figure.draw_without_rendering()


def test_what_cannot_be_told_is_shown_as_it_stands() -> None:
    """The name of a check and the reason are escaped once, not twice."""
    axes = new_figure(4.0, 3.0).subplots()
    none = np.empty(0)
    view = SettlingView("$5", 1e-3, None, "no $ here", none, none, none, none, 0.0)
    draw_settling(axes, view)
    assert axes.texts[0].get_text() == "\\$5: cannot be told\nno \\$ here"


def test_the_grid_lies_behind() -> None:
    """Along one axis or both, below all that is drawn."""
    both, one = new_figure(4.0, 2.0).subplots(1, 2)
    draw_grid(both)
    draw_grid(one, axis="x")
    assert (both.get_axisbelow(), one.get_axisbelow()) == (True, True)
    shown = [[line.get_visible() for line in axes.get_ygridlines()] for axes in (both, one)]
    assert all(shown[0])
    assert not any(shown[1])
