"""The scenario of a record, built again from its resolved values."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any, TypeVar

from pydantic import ValidationError

from frontend_sim.errors import RecordError
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.scan_scenario import ScanScenario
from frontend_sim.values import Value, validated

AnyValue = TypeVar("AnyValue", bound=Value)


def places(entry: Mapping[str, Any], record: Path) -> tuple[Path, ...]:
    """Return where a file of the stimulus may be, the likeliest first, each place once.

    That is the path it had, beside the record, and where it was as seen from the record.

    Parameters
    ----------
    entry : of ``files`` in ``/resolved``
    record : path of the record
    """
    stored, directory = Path(entry["path"]), record.absolute().parent
    found = (stored, directory / stored.name, (directory / entry["from_record"]).resolve())
    return tuple(dict.fromkeys(found))


def first_there(entry: Mapping[str, Any], record: Path) -> Path:
    """Return the first of the places where a file is, or the path it had."""
    return next((place for place in places(entry, record) if place.is_file()), Path(entry["path"]))


def rebuild(
    values: dict[str, Any], files: Mapping[str, Path], source: str, record: Path
) -> Scenario:
    """Build a scenario of one channel from its resolved values.

    Parameters
    ----------
    values : as ``Scenario.resolved`` returned them
    files : name of a file in these values -> where it is now
    source : the scenario as written, "" where a program made it
    record : named in messages

    Raises
    ------
    RecordError
        If the values are no scenario for this version of the program.
    InputError
        If a file of the stimulus cannot be read.
    """
    return _rebuilt(Scenario, ("stimulus", "adc"), values, files, record).model_copy(
        update={"source": source}
    )


def rebuild_scan(
    values: dict[str, Any], files: Mapping[str, Path], source: str, record: Path
) -> ScanScenario:
    """Build the scenario of a scan from its resolved values, see ``rebuild``."""
    found = _rebuilt(ScanScenario, ("channel", "adc"), values, files, record)
    return found.model_copy(update={"source": source})


def _rebuilt(
    model: type[AnyValue],
    keys: tuple[str, ...],
    values: dict[str, Any],
    files: Mapping[str, Path],
    record: Path,
) -> AnyValue:
    """Return a value from its resolved form, with files renamed under some of its keys."""
    names = {name: str(path) for name, path in files.items()}
    moved = {**values, **{key: _renamed(values[key], names) for key in keys}}
    try:
        return validated(model, moved)
    except ValidationError as error:
        first = error.errors()[0]
        key = ".".join(map(str, first["loc"]))
        raise RecordError(
            f"{record}: its scenario cannot be built again, {key}: {first['msg']}; it comes from "
            "another version of frontend-sim, or was changed"
        ) from error


def _renamed(value: Any, names: Mapping[str, str]) -> Any:
    if isinstance(value, dict):
        return {key: _renamed(item, names) for key, item in value.items()}
    if isinstance(value, list):
        return [_renamed(item, names) for item in value]
    return names.get(value, value) if isinstance(value, str) else value
