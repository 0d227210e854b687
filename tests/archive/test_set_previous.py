"""The night before is kept, as long as it was complete and gave something else."""

from __future__ import annotations

from pathlib import Path

from nights import BASE, DRAWS, made_set

from frontend_sim.archive.set_previous import keep_previous, previous_of
from frontend_sim.archive.set_table import open_set
from frontend_sim.comparison import compare_sets
from frontend_sim.replay import replay_set


def test_the_night_before_is_kept_beside(tmp_path: Path) -> None:
    """A changed set leaves the table of the night before; the same again leaves it alone."""
    night = tmp_path / "night"
    file = made_set(tmp_path, DRAWS.format(8))
    replay_set(file, night, on="in-process")
    first = open_set(night)
    assert previous_of(night) is None
    replay_set(file, night, on="in-process")
    assert previous_of(night) is None
    made_set(tmp_path, DRAWS.format(8), scenario=BASE.replace("4.7 nF", "4.8 nF"))
    replay_set(file, night, on="in-process")
    before = previous_of(night / "set.h5")
    assert before is not None
    assert open_set(before).digest == first.digest != open_set(night).digest
    found = compare_sets(open_set(before), open_set(night))
    assert [change.key for change in found.changed] == ["chain[input filter].capacitance"]
    replay_set(file, night, on="in-process")
    assert open_set(before).digest == first.digest


def test_what_is_no_table_is_left_alone(tmp_path: Path) -> None:
    """Without a table, or with a damaged one, nothing is kept and nothing fails."""
    keep_previous(tmp_path / "set.h5", "digest")
    (tmp_path / "set.h5").write_bytes(b"no HDF5")
    keep_previous(tmp_path / "set.h5", "digest")
    assert [path.name for path in tmp_path.iterdir()] == ["set.h5"]
