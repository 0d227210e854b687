"""Pairs of values: every tile is the verdict of its own run."""

from __future__ import annotations

import json
import math

import pytest
from checked import STEP, made

from frontend_sim.errors import InputError
from frontend_sim.present import map_figure, map_tables
from frontend_sim.solve import Mapper, PassMap, pass_map, varied

FULL = {**STEP, "after": "3.3 V"}
SCENARIO = made({"kind": "settling", "within": "0.5 LSB", "before": "300 us"}, stimulus=FULL)
R, C = "chain[1].resistance", "chain[1].capacitance"


def mapper() -> Mapper:
    """Return a map of resistor and capacitor, nothing run yet."""
    first, second = varied(SCENARIO, R, "1k", "100k"), varied(SCENARIO, C, "1n", "100n")
    return Mapper(SCENARIO, first, second, points=6)


def test_tiles_are_the_closed_form() -> None:
    """A pair passes where R C ln 2^13 is within the granted time."""
    made_ = mapper()
    assert made_.most_runs == 36
    found = made_.run()
    assert (found.complete, found.tried, found.runs) == (True, 36, 36)
    for row, capacitance in enumerate(found.rows):
        for column, resistance in enumerate(found.columns):
            cell = found.cells[row][column]
            assert cell is not None
            expected = resistance * capacitance * math.log(2.0**13) <= 300e-6
            assert cell.passes == expected
    lowest = found.ranges(0)[0]
    assert lowest[0] == 1e3
    assert found.stoppers(len(found.rows) - 1) == ("settling",)
    values = json.loads(json.dumps(found.as_dict(), allow_nan=False))
    assert values["passes"][0][0] is True


def test_an_interrupted_map_tells_what_is_known() -> None:
    """What was tried stays; the rest is unknown, in table and plot too."""
    made_ = mapper()

    def stop(share: float) -> None:
        if share > 0.4:
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        made_.run(stop)
    found = made_.found()
    assert (found.complete, found.tried) == (False, 15)
    assert found.as_dict()["passes"][5][5] is None
    assert len(map_tables(found)) == 2
    assert map_figure(found).axes


def test_what_makes_no_map() -> None:
    """The same key twice, or too many pairs."""
    key = varied(SCENARIO, R, "1k", "100k")
    with pytest.raises(InputError, match="given twice"):
        pass_map(SCENARIO, key, key)
    other = varied(SCENARIO, C, "1n", "100n")
    with pytest.raises(InputError, match="from 2 to 100 points"):
        pass_map(SCENARIO, key, other, points=101)


def test_ranges_of_a_row_may_be_several() -> None:
    """What passes in a row need not hang together: a band of corners between two others."""
    band = made({"kind": "corner", "at_least": "1 kHz", "at_most": "10 kHz"})
    found: PassMap = pass_map(
        band, varied(band, R, "1k", "1M"), varied(band, "adc.bits", 8, 10), points=7
    )
    for row in range(3):
        ((low, high),) = found.ranges(row)
        assert 1e4 / 2 < low <= high < 1e5
