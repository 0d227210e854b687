"""How a result was computed, and what it must not be taken for."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from datetime import UTC, datetime
from importlib.metadata import PackageNotFoundError, version
from typing import Any

from frontend_sim.present.page.content import Cell, PageTable, Section

CAUTIONS = (
    "These numbers are those of a model: it holds for the parts, the signals and the limits that "
    "the scenario names, and says nothing of those it leaves out. Layout, interference, supply "
    "noise and parts outside their data sheets are not in it.",
    "Where a wrong reading can hurt someone (mains voltage, medical devices, safety functions), "
    "the page is no substitute for measurement on the real circuit, for the standards and local "
    "codes that apply, or for the judgement of a licensed engineer. Work on mains voltage belongs "
    "to those whom local codes allow it; a device for patients needs the approval that its "
    "country asks for.",
)


def caution_section() -> Section:
    """Return the usual cautions."""
    return Section("cautions", "What this page is not", CAUTIONS)


def origin_section(
    facts: Iterable[tuple[str, str]],
    versions: Mapping[str, str],
    files: Iterable[Mapping[str, Any]] = (),
    notes: Iterable[str] = (),
    listings: Iterable[tuple[str, str]] = (),
) -> Section:
    """Return how the numbers came about.

    Parameters
    ----------
    facts : name and value: seeds, digests, settings
    versions : of the program and its libraries
    files : entries of ``files`` of a record
    notes : what was decided during the run
    listings : name and text of set and scenarios, as written
    """
    tables = [
        PageTable("Settings", ("what", "value"), tuple((Cell(a), Cell(b)) for a, b in facts)),
        PageTable(
            "Versions", ("part", "version"), tuple((Cell(a), Cell(b)) for a, b in versions.items())
        ),
    ]
    rows = tuple((Cell(str(entry["name"])), Cell(str(entry["sha256"]))) for entry in files)
    if rows:
        tables.append(PageTable("Files that were read", ("file", "SHA-256"), rows))
    told = tuple((Cell(note),) for note in notes)
    if told:
        tables.append(PageTable("Decided on the way", ("note",), told))
    written = tuple((name, text.strip()) for name, text in listings if text.strip())
    heading = "How it was computed"
    return Section("origin", heading, (), tuple(tables), listings=written, folded=True)


def made() -> str:
    """Return the line at the foot of a page: which program made it, and when."""
    try:
        program = version("frontend-sim")
    except PackageNotFoundError:
        program = "unknown"
    now = datetime.now(UTC).isoformat(sep=" ", timespec="minutes").removesuffix("+00:00")
    return f"frontend-sim {program}, page made {now} UTC"
