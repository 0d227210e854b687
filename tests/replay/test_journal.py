"""The journal: what was written whole is read, whatever else is in the file."""

from __future__ import annotations

import errno
import json
import os
from pathlib import Path
from tempfile import TemporaryDirectory

import pytest
from hypothesis import given
from hypothesis import strategies as st
from nights import BASE, DRAWS, made_set

from frontend_sim.archive import target
from frontend_sim.archive.set_table import open_set
from frontend_sim.errors import OutputError
from frontend_sim.replay import replay_set, store
from frontend_sim.replay.journal import Journal
from frontend_sim.replay.store import Store

ENTRIES = [{"name": f"run {k}", "text": "ü" * k, "number": k / 3.0} for k in range(6)]


def written(path: Path) -> list[int]:
    """Write the entries, and return where each of them stands."""
    journal = Journal(path)
    places = [journal.append(entry) for entry in ENTRIES]
    journal.close()
    return places


@given(st.integers(0, 10_000))
def test_a_torn_journal_loses_its_last_entry_at_the_most(cut: int) -> None:
    """Cut off anywhere, every entry before the cut is read, and one may go on behind it."""
    with TemporaryDirectory() as folder:
        path = Path(folder, "journal")
        places = written(path)
        content = path.read_bytes()
        cut %= len(content) + 1
        path.write_bytes(content[:cut])
        ends = [*places[1:], len(content)]
        # An entry is whole if all of it is there but the end of its line.
        whole = [entry for entry, end in zip(ENTRIES, ends, strict=True) if end - 1 <= cut]
        journal = Journal(path)
        place = journal.append({"name": "more"})
        assert [entry for _, entry in journal.entries()] == [*whole, {"name": "more"}]
        assert journal.at(place) == {"name": "more"}
        journal.close()


@given(st.integers(0, 10_000), st.integers(1, 255))
def test_a_changed_byte_costs_what_it_hits(position: int, change: int) -> None:
    """An entry with a wrong byte is passed over; at most the next one goes with it."""
    with TemporaryDirectory() as folder:
        path = Path(folder, "journal")
        written(path)
        content = bytearray(path.read_bytes())
        content[position % len(content)] ^= change
        path.write_bytes(content)
        journal = Journal(path)
        found = [entry for _, entry in journal.entries()]
        journal.close()
        assert len(found) >= len(ENTRIES) - 2
        assert all(entry in ENTRIES for entry in found)


def test_a_journal_does_not_grow_for_ever(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A set that changes night after night leaves the last entry of each run, and its first day."""
    monkeypatch.setattr(store, "MOST_STALE", 10)
    journal, lines = tmp_path / "night" / "night.journal", []
    for night in range(9):
        text = BASE.replace('"4.7 nF"', f'"4.{night} nF"')
        done = replay_set(
            made_set(tmp_path, DRAWS.format(4), scenario=text), tmp_path / "night", on="in-process"
        )
        assert (done.ran, done.complete) == (4, True)
        lines.append(journal.read_bytes().count(b"\n"))
    assert max(lines) < 1 + 4 + (10 + 2 * 4) + 2 * 4
    assert open_set(tmp_path / "night").created == done.table().created
    created = json.loads(journal.read_bytes().partition(b" ")[2].partition(b"\n")[0])["created"]
    assert created == done.table().created.isoformat()
    again = replay_set(tmp_path / "set.toml", tmp_path / "night", on="in-process")
    assert (again.ran, again.kept, again.digest) == (0, 4, done.digest)


@pytest.mark.parametrize("fails", [False, True])
def test_a_journal_that_is_reduced_keeps_what_it_shall(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, fails: bool
) -> None:
    """Nothing else is in it then, and it goes on; where the disk is full, all is as it was."""
    path = tmp_path / "journal"
    places = written(path)
    before = path.read_bytes()
    journal = Journal(path)
    if fails:

        def full(*_: object) -> None:
            raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))

        monkeypatch.setattr(target, "_to_disk", full)
        with pytest.raises(OutputError, match="cannot be written: No space left"):
            journal.reduce(places[1::2])
        assert path.read_bytes() == before
    else:
        journal.reduce(places[1::2])
    kept = ENTRIES if fails else ENTRIES[1::2]
    place = journal.append({"name": "more"})
    assert [entry for _, entry in journal.entries()] == [*kept, {"name": "more"}]
    assert journal.at(place) == {"name": "more"}
    journal.close()
    assert [each.name for each in tmp_path.iterdir()] == ["journal"]


def test_a_directory_with_something_else_is_refused(tmp_path: Path) -> None:
    """A night never goes among files of others."""
    (tmp_path / "thesis.txt").write_text("dear")
    with pytest.raises(OutputError, match="holds something else"):
        Store(tmp_path)
    assert [file.name for file in tmp_path.iterdir()] == ["thesis.txt"]


def test_two_calls_never_work_in_one_directory(tmp_path: Path) -> None:
    """The second one is refused while the first goes on, and let in at its end."""
    with Store(tmp_path / "night"), pytest.raises(OutputError, match="another call"):
        Store(tmp_path / "night")
    Store(tmp_path / "night").close()
