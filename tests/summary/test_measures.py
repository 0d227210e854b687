"""What a night says of measures that are no checks."""

from __future__ import annotations

import json
from dataclasses import replace

import numpy as np
import pytest
from matplotlib.patches import Rectangle
from nights import BASE, made_set

from frontend_sim.archive.set_table import SetTable, open_set
from frontend_sim.present.measure_figure import MOST_PANELS, measure_figure
from frontend_sim.present.night_table import night_data
from frontend_sim.present.page.night_spread import MOST_MEASURES, measure_section
from frontend_sim.replay import replay_set
from frontend_sim.summary import NightSummary, summarize

SETTLING = """
[[check]]
kind = "settling"
within = "0.5 LSB"
before = "2 ms"
"""

CAPACITOR = "chain[input filter].capacitance"


@pytest.fixture(scope="module")
def table(tmp_path_factory: pytest.TempPathFactory) -> SetTable:
    """A night whose draws move how many conversions are to be discarded, not the final value."""
    folder = tmp_path_factory.mktemp("measures")
    rules = 'seed = 5\nkeep = "nothing"\n[draws]\ncount = 60\n'
    file = made_set(folder, rules, scenario=BASE.replace("20 kHz", "200 kHz") + SETTLING)
    replay_set(file, folder / "night", on="in-process")
    return open_set(folder / "night")


@pytest.fixture(scope="module")
def summary(table: SetTable) -> NightSummary:
    """What it says."""
    return summarize(table)


def test_a_measure_has_percentiles_extremes_and_a_cause(
    table: SetTable, summary: NightSummary
) -> None:
    """The wait in conversions follows the capacitor, whose tolerance is the widest."""
    found = {measure.name: measure for measure in summary.measures}
    assert set(found) == set(table.measures)
    wait = found["settling: conversions to discard"]
    values = table.measures[wait.name]
    assert (wait.unit, wait.runs, wait.group) == ("conversions", 60, "")
    assert values[wait.lowest] == values.min()
    assert values[wait.highest] == values.max()
    assert values.min() < values.max()
    for each, share in zip(wait.percentiles, (0.05, 0.5, 0.95), strict=True):
        assert each.low <= np.quantile(values, share) <= each.high
    assert wait.cause is not None
    assert wait.cause.parameter == CAPACITOR
    assert wait.cause.coefficient > 0.9
    still = found["settling: final value"]
    assert not still.spreads
    assert still.causes == ()


def test_the_page_shows_what_spreads_and_counts_the_rest(summary: NightSummary) -> None:
    """Folded, a row and a histogram for each measure that moves, with the runs at the ends."""
    section = measure_section(summary)
    assert section is not None
    assert section.folded
    (table,) = section.tables
    moving = [measure for measure in summary.measures if measure.spreads]
    assert [row[0].text for row in table.rows] == [measure.name for measure in moving]
    row = table.rows[0]
    assert row[1].text.endswith(summary.table.names[moving[0].lowest])
    assert row[-1].text.startswith(CAPACITOR)
    still = len(summary.measures) - len(moving)
    assert still > 0
    assert f"{still} measure" in table.note
    drawn = [axes for axes in measure_figure(summary, moving).axes if axes.patches]
    assert len(drawn) == len(moving)
    bars = [patch for patch in drawn[0].patches if isinstance(patch, Rectangle)]
    assert sum(bar.get_height() for bar in bars) == 60


def test_many_measures_do_not_make_the_page_longer(summary: NightSummary) -> None:
    """So many rows, and so many histograms, however many there are."""
    wait = next(measure for measure in summary.measures if measure.spreads)
    many = tuple(replace(wait, name=f"measure {k}") for k in range(MOST_MEASURES + 5))
    section = measure_section(replace(summary, measures=many))
    assert section is not None
    assert len(section.tables[0].rows) == MOST_MEASURES
    assert "5 more stand in the table of the set." in section.tables[0].note
    panels = [axes for axes in measure_figure(summary, many).axes if axes.patches]
    assert len(panels) == MOST_PANELS


def test_measures_that_stand_still_make_no_section(summary: NightSummary) -> None:
    """Nothing to unfold where there is nothing to see."""
    still = tuple(measure for measure in summary.measures if not measure.spreads)
    assert still
    assert measure_section(replace(summary, measures=still)) is None


def test_programs_get_them_too(summary: NightSummary) -> None:
    """As plain data, intervals included."""
    told = json.loads(json.dumps(night_data(summary), allow_nan=False))
    wait = next(row for row in told["measures"] if row["name"].endswith("to discard"))
    assert wait["lowest"]["run"].startswith("draw ")
    assert len(wait["percentiles"]) == 3
    assert wait["percentiles"][1]["low"] is not None
    assert wait["causes"][0]["parameter"] == CAPACITOR
