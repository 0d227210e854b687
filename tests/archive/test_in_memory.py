"""A record that is made in memory: the bytes of its file, and what happens where memory ends."""

from __future__ import annotations

import tempfile
from collections.abc import Iterable
from datetime import UTC, datetime
from io import BytesIO
from pathlib import Path
from typing import Any

import pytest
from archived import made_run, scenario
from nights import DRAWS, made_set

from frontend_sim.archive import open_record, writer
from frontend_sim.archive.provenance import document
from frontend_sim.archive.save import _Finished
from frontend_sim.archive.writer import Writer
from frontend_sim.replay import replay_set, subject


class Stopped(datetime):
    """A clock that stands still."""

    @classmethod
    def now(cls, tz: Any = None) -> Stopped:
        """Return always the same."""
        return cls(2026, 1, 1, tzinfo=UTC)


@pytest.mark.parametrize("count", [0, 3, 5000])
def test_memory_has_the_bytes_of_the_file(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, count: int
) -> None:
    """Bit by bit, whatever the length, so that nobody can tell where a record was made."""
    monkeypatch.setattr(writer, "datetime", Stopped)
    run, memory = made_run(scenario(), count, ("stimulus",)), BytesIO()
    resolved = document(run.scenario, (), tmp_path)
    places: Iterable[Path | BytesIO] = (tmp_path / "r.h5", memory)
    for place in places:
        with Writer(place, "a record", run.scenario, resolved) as made:
            for block in _Finished(run).blocks():
                made.append(block)
            made.finish(("a note",), ())
    assert memory.getvalue() == (tmp_path / "r.h5").read_bytes()
    with open_record(tmp_path / "r.h5") as record:
        record.verify()
        assert record.whole_count == count


class Full(BytesIO):
    """Memory that ends after some bytes."""

    def write(self, data: Any, /) -> int:
        """Write, or find that there is no room."""
        if self.tell() + len(data) > 20_000:
            raise MemoryError
        return super().write(data)


def test_memory_that_ends_is_told_and_tried_again(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """HDF5 gets no error, which would end the process; the run tells it, and is tried again."""
    file = made_set(tmp_path, DRAWS.format(2).replace("nothing", "all"))
    with monkeypatch.context() as patched:
        patched.setattr(subject, "BytesIO", Full)
        done = replay_set(file, tmp_path / "night", on="in-process")
    told = set(done.table().texts("error").tolist())
    assert told == {"the run does not fit into memory; shorten it, or keep fewer points"}
    again = replay_set(file, tmp_path / "night", on="in-process")
    assert (again.ran, again.complete) == (2, True)


def test_a_worker_needs_no_temporary_folder(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """None is there at all, and all records are made."""
    monkeypatch.setattr(tempfile, "tempdir", str(tmp_path / "nowhere"))
    file = made_set(tmp_path, DRAWS.format(2).replace("nothing", "all"))
    done = replay_set(file, tmp_path / "night", on="in-process")
    assert done.complete
    assert done.table().record_path("draw 0001") is not None
