"""A record is run again from itself."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace
from pathlib import Path
from typing import Any, overload

from frontend_sim.archive.provenance import PROGRAM, versions
from frontend_sim.archive.reading import reading
from frontend_sim.archive.rebuild import places, rebuild, rebuild_scan
from frontend_sim.archive.record import Record
from frontend_sim.archive.scan_record import ScanRecord
from frontend_sim.archive.stored import Stored
from frontend_sim.errors import RecordError
from frontend_sim.scenario.digest import sha256_of
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.scan_scenario import ScanScenario
from frontend_sim.simulation.run import Run
from frontend_sim.simulation.scan import ScanRun

_OF_THE_NUMBERS = (PROGRAM, "numpy", "scipy", "numba")
"""What the last bit of a result may depend on."""


@overload
def rerun_scenario(record: Record) -> Scenario: ...


@overload
def rerun_scenario(record: ScanRecord) -> ScanScenario: ...


@overload
def rerun_scenario(record: Record | ScanRecord) -> Scenario | ScanScenario: ...


def rerun_scenario(record: Record | ScanRecord) -> Scenario | ScanScenario:
    """Build the scenario of a record again, with the very files that it was run on.

    A file is looked for at the path it had, beside the record, and where it was as seen from the
    record; the first with the stored SHA-256 is taken.

    Raises
    ------
    RecordError
        If a file is missing or all that is found has another content.
    """
    with reading(record.path, "its scenario"):
        resolved = record.resolved
        files = {entry["name"]: _same_file(entry, record.path) for entry in resolved["files"]}
        make = rebuild_scan if isinstance(record, ScanRecord) else rebuild
        return make(resolved["scenario"], files, record.source, record.path)


@overload
def rerun(record: Record, progress: Callable[[float], None] | None = None) -> Run: ...


@overload
def rerun(record: ScanRecord, progress: Callable[[float], None] | None = None) -> ScanRun: ...


def rerun(
    record: Record | ScanRecord, progress: Callable[[float], None] | None = None
) -> Run | ScanRun:
    """Run the scenario of a record again; with the same versions the codes are identical.

    Where versions differ from those of the record, the notes of the run say so.

    Raises
    ------
    RecordError
        See ``rerun_scenario``.
    InputError
        If the scenario cannot be run.
    """
    from frontend_sim.simulation import simulate

    run: Run | ScanRun = simulate(rerun_scenario(record), progress)
    return replace(run, notes=run.notes + version_changes(record))


def version_changes(record: Stored) -> tuple[str, ...]:
    """Return one note for each library, or this program, that is of another version now."""
    now = versions()
    with reading(record.path, "its versions"):
        then = dict(record.resolved["versions"])
    return tuple(
        f"run again with {name} {now[name]}, recorded with {then.get(name, 'none')}: single codes "
        "may differ where a value lies on an edge between two"
        for name in _OF_THE_NUMBERS
        if now[name] != then.get(name)
    )


def _same_file(entry: Mapping[str, Any], record: Path) -> Path:
    """Return where the file lies now whose content the record was run on."""
    candidates = places(entry, record)
    digests = {path: _digest(path) for path in candidates if path.is_file()}
    for path, digest in digests.items():
        if digest == entry["sha256"]:
            return path
    if not digests:
        looked = ", ".join(map(str, candidates))
        raise RecordError(
            f"{record}: its recording {entry['name']} is missing (looked for {looked}); put the "
            f"file with SHA-256 {entry['sha256']} beside the record"
        )
    path, digest = next(iter(digests.items()))
    raise RecordError(
        f"{record}: its recording {path} has changed since: SHA-256 then {entry['sha256']}, now "
        f"{digest}; restore the file, or run the scenario anew to make another record"
    )


def _digest(path: Path) -> str:
    try:
        return sha256_of(path)
    except OSError as error:
        raise RecordError(f"{path} cannot be read: {error.strerror or error}") from error
