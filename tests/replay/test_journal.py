"""The journal: what was written whole is read, whatever else is in the file."""

from __future__ import annotations

from pathlib import Path
from tempfile import TemporaryDirectory

import pytest
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.errors import OutputError
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
