"""The example sets, run and pinned."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from frontend_sim.archive import open_record
from frontend_sim.replay import read_set, replay_set

ROOT = Path(__file__).resolve().parents[2] / "scenarios" / "sets"

PINNED = {
    "filter_of_a_lot": (40, {"holds": 38, "fails": 2}),
    "heat_and_tolerance": (9, {"holds": 6, "fails": 3}),
}
"""Set -> its runs, and their verdicts."""


@pytest.mark.parametrize("name", PINNED)
def test_an_example_set_gives_its_verdicts(name: str, tmp_path: Path) -> None:
    """Number of runs and of each verdict."""
    count, verdicts = PINNED[name]
    done = replay_set(ROOT / f"{name}.toml", tmp_path / "night", on="in-process")
    assert done.complete
    assert (done.tally.planned, done.tally.counts) == (count, verdicts)


def test_every_example_set_is_pinned() -> None:
    """No set stands in the folder without a number here, and all of them can be read."""
    files = sorted(ROOT.glob("*.toml"))
    assert [file.stem for file in files] == sorted(PINNED)
    for file in files:
        assert read_set(file).count > 1


def test_of_two_limits_each_run_has_the_nearer_one_on_its_side(tmp_path: Path) -> None:
    """A corner below 300 Hz breaks the limit "at least", one above 420 Hz the limit "at most"."""
    done = replay_set(ROOT / "heat_and_tolerance.toml", tmp_path / "night", on="in-process")
    (check,) = done.table().checks
    assert {float(limit) for limit in check.limit} == {300.0, 420.0}
    sides = {300.0: "at least", 420.0: "at most"}
    found = [check.bound_in(run) for run in range(len(check.limit))]
    assert found == [sides[float(limit)] for limit in check.limit]


def test_the_corners_of_a_filter_bound_its_time_constant(tmp_path: Path) -> None:
    """The pin of each corner is that of its own time constant, by the closed form."""
    done = replay_set(ROOT / "heat_and_tolerance.toml", tmp_path / "night", on="in-process")
    table = done.table()
    resistance, capacitance, kelvin = (
        np.asarray(table.parameters[key])
        for key in (
            "chain[anti-alias filter].resistance",
            "chain[anti-alias filter].capacitance",
            "environment.temperature",
        )
    )
    warmer = kelvin - 298.15
    constant = resistance * (1.0 + 1e-4 * warmer) * capacitance * (1.0 - 1.7e-3 * warmer)
    assert len(table.names) == 9
    for name, tau in zip(table.names[1:], constant[1:], strict=True):
        path = table.record_path(name)
        assert path is not None
        with open_record(path) as record:
            since = np.maximum(record.time - 1e-3, 0.0)
            expected = 2.0 * -np.expm1(-since / tau)
            # The wider of the project's bound and the closed form's own rounding.
            np.testing.assert_allclose(record.pin, expected, rtol=0.0, atol=2e-9)
