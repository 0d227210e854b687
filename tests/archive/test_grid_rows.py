"""The report on a grid as rows of a record."""

from __future__ import annotations

from dataclasses import replace

import pytest

from frontend_sim.archive.grid import grid_of, grid_results
from frontend_sim.simulation.run import GridReport

MODEL = GridReport("bilinear", 1e6, 0.01, 0.02, 0.005, -0.03)
LIMITERS = GridReport("exact", 1e6, 0.01, 0.02, 0.005, 0.0)


@pytest.mark.parametrize("report", [MODEL, LIMITERS, replace(LIMITERS, estimate=None)])
def test_rows_read_back(report):
    """What was stored is found again, for a discrete model and for the grid of limiters."""
    assert vars(grid_of(grid_results(report))) == vars(report)


def test_limiters_are_called_so():
    """No warping, and no error of a model, where only limits are looked at on a grid."""
    names = [row.name for row in grid_results(LIMITERS)]
    assert all("limits" in name for name in names)


def test_rows_of_the_first_program():
    """Its records call limiters' grids as if they were models, and are still read."""
    old = [replace(row, method="exact") for row in grid_results(replace(MODEL, warping=0.0))]
    assert vars(grid_of(old)) == vars(LIMITERS)
