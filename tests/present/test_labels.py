"""Labels that do not cover each other, lines that lead over no gap, numbers of things in words."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.present.drawing import new_figure
from frontend_sim.present.result_table import result_tables
from frontend_sim.present.run_panels import Conversions, draw_codes, draw_difference
from frontend_sim.present.step_panels import LABEL_HEIGHT, spread_out
from frontend_sim.quantities.counting import counted
from frontend_sim.scenario.model import Scenario


@given(st.lists(st.floats(0.0, 1.0), min_size=1, max_size=5))
def test_labels_keep_their_order_and_their_room(heights):
    """Neighbours are at least one label apart, and those with room enough stay where they are."""
    placed = spread_out(heights)
    order = np.argsort(heights, kind="stable")
    assert np.all(np.diff(np.array(placed)[order]) >= LABEL_HEIGHT * (1.0 - 1e-9))
    assert np.mean(placed) == pytest.approx(np.mean(heights), abs=1e-9)


def test_labels_with_room_stay():
    """Nothing moves where nothing is too near."""
    assert spread_out([0.9, 0.1, 0.5]) == pytest.approx([0.9, 0.1, 0.5])


def test_no_line_leads_over_conversions_that_are_left_out():
    """Between the last conversion within the range and the next one there is a gap in the line."""
    from matplotlib.figure import Figure

    adc = Scenario.model_validate(
        {
            "stimulus": {"kind": "step", "after": 1.0},
            "adc": {"rate": "1 kHz", "bits": 12, "high": "3 V"},
            "simulation": {"duration": "1 s"},
        }
    ).adc
    time = np.arange(1000.0)
    over = (time >= 300.0) & (time < 400.0)
    axes = Figure().subplots()
    draw_difference(axes, Conversions(adc, time, np.zeros(1000), np.full(1000, 1e-4), over))
    line = axes.lines[0]
    assert np.count_nonzero(np.isnan(line.get_ydata())) == 1
    assert np.flatnonzero(np.isnan(line.get_ydata())) == [300]


def test_numbers_of_axes_are_written_out():
    """A signal of 0.1 mV about 0.8 V has 0.8 V on its axis, and 20970 on that of the codes."""
    from matplotlib.backends.backend_agg import FigureCanvasAgg

    adc = Scenario.model_validate(
        {
            "stimulus": {"kind": "step", "after": 1.0},
            "adc": {"rate": "1 kHz", "bits": 16, "high": "2.5 V"},
            "simulation": {"duration": "1 s"},
        }
    ).adc
    time = np.arange(500.0)
    pin = 0.8 + 5e-5 * np.sin(0.1 * time)
    figure = new_figure(6.0, 4.0)
    axes = figure.subplots()
    draw_codes(axes, Conversions(adc, time, pin, pin, np.zeros(500, np.bool_)))
    FigureCanvasAgg(figure).draw()
    for panel, far in ((axes, 0.7), (axes.child_axes[0], 20_000.0)):
        assert panel.yaxis.get_offset_text().get_text() == ""
        ticks = [text.get_text() for text in panel.yaxis.get_ticklabels()]
        assert all(float(tick) > far for tick in ticks if tick)


def test_one_check_is_no_checks():
    """Singular and plural, in verdicts too."""
    assert (counted(1, "check"), counted(2, "check")) == ("1 check", "2 checks")
    row = {
        "name": "headroom", "value": 1.0, "unit": "V", "limit": 0.5, "margin": 0.5,
        "verdict": "holds", "method": "", "bound": "at least", "advice": "",
    }  # fmt: skip
    assert str(result_tables([row])[-1]) == "verdict: holds, the only check"
    assert str(result_tables([row | {"verdict": "fails"}])[-1]) == "verdict: fails, the only check"
