"""A set is run: one call from Python, as from the shell."""

from __future__ import annotations

import os
import time
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path

from frontend_sim.archive.set_table import SetTable, open_set
from frontend_sim.errors import OutputError
from frontend_sim.replay.adaptive import Tightness, blocks, until_of
from frontend_sim.replay.executors import Executor, executor
from frontend_sim.replay.night import Night, Report
from frontend_sim.replay.reading import read_set
from frontend_sim.replay.set_model import Keep
from frontend_sim.replay.store import Store
from frontend_sim.replay.table import Count, Tally, done_runs, write_table
from frontend_sim.replay.work import CannotGoOn

AnyPath = str | os.PathLike[str]


@dataclass(frozen=True)
class Replayed:
    """What a call of ``replay_set`` did.

    Parameters
    ----------
    directory : that it worked in
    tally : what became of the runs of the set
    ran, kept : runs that this call did, and that it found done
    seconds : that it took
    left : runs that it has not come to; None where it was stopped before it knew
    stopped : why it ended before its end, "" where it did not
    interrupted : whether the user stopped it
    tabled : whether the table of the set was written
    """

    directory: Path
    tally: Tally
    ran: int
    kept: int
    seconds: float
    left: int | None = 0
    stopped: str = ""
    interrupted: bool = False
    tabled: bool = True

    @property
    def complete(self) -> bool:
        """Whether every run of the set gave a result."""
        return self.tally.complete and not self.stopped

    @property
    def digest(self) -> str:
        """Digest of all scenarios and outcomes; the same for the same set, however it was run."""
        return self.tally.digest

    def table(self) -> SetTable:
        """Read the table of the set."""
        return open_set(self.directory)


def default_directory(source: AnyPath | Sequence[AnyPath]) -> Path:
    """Return where a set is replayed into if nothing is said: its name and ``_runs``, here."""
    place = Path(source if isinstance(source, str | os.PathLike) else source[0]).resolve()
    # A pattern is called by its own letters, "night/*.toml" by those of its folder.
    names = (
        "".join(sign for sign in name if sign not in "*?[]!")
        for name in (place.stem, place.parent.name)
    )
    return Path(f"{next(filter(None, names), 'set')}_runs")


def replay_set(
    source: AnyPath | Sequence[AnyPath],
    directory: AnyPath | None = None,
    *,
    workers: int | None = None,
    on: str = "processes",
    scheduler: str | None = None,
    keep: Keep | None = None,
    around: float | None = None,
    report: Report | None = None,
) -> Replayed:
    """Run a set, or what is left of it, and write its table.

    What was done before and has not changed is kept; a call that is stopped, by whatever, is
    taken up by the next one. In a script, call it under ``if __name__ == "__main__":``, as worker
    processes import the script.

    Parameters
    ----------
    source : a set file, a scenario, a directory of scenarios, a pattern, or several scenarios
    directory : where journal, records and table go; left out, see ``default_directory``
    workers : how many; left out, one for each core
    on : the executor, "processes", "in-process" or "dask"
    scheduler : address of a Dask scheduler; left out, a cluster on this machine
    keep : of which runs records are kept, instead of what the set says
    around : how long before and behind a failure [s], where what lies around failures is kept
    report : called with the ``Progress`` of the night

    Raises
    ------
    InputError
        If the set is wrong; nothing is run then.
    OutputError
        If nothing can be written to the directory. A disk that is full later, or a cluster that
        goes away, does not raise: ``stopped`` tells it.

    After Ctrl-C it returns as well, ``interrupted``: the table has what was done. A second one, or
    one while the table is written, raises KeyboardInterrupt; the next call writes it.
    """
    begun = time.monotonic()
    prepared = read_set(source, keep, around)
    place = Path(directory) if directory is not None else default_directory(source)
    with _ended(executor(on, workers, scheduler)) as hands, Store(place) as store:
        night, until = Night(store, hands, report), until_of(prepared)
        tightness = None if until is None else Tightness(until)
        asked, stopped, interrupted = None, "", False
        try:
            for whole, new in blocks(prepared):
                night.look(new)
                asked = whole
                night.run()
                if tightness is not None and tightness.reached_with(done_runs(new, store)):
                    break
        except (OutputError, CannotGoOn) as error:
            stopped = str(error)
        except KeyboardInterrupt:
            stopped, interrupted = "it was interrupted", True
        hands.close(now=bool(stopped))
        if asked is None:  # the table that is there may still be right
            found, fault = Count().tally(prepared.count), ""
        else:
            found, fault = write_table(asked, store, ended=not stopped)
        known = asked is not None and not (stopped and until)
        return Replayed(
            place, found, night.done, night.kept, time.monotonic() - begun,
            night.left if known else None, stopped or fault, interrupted,
            tabled=asked is not None and not fault,
        )  # fmt: skip


@contextmanager
def _ended(hands: Executor) -> Iterator[Executor]:
    """End the workers at once if something unforeseen happens."""
    try:
        yield hands
    except BaseException:
        hands.close(now=True)
        raise
