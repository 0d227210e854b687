"""A scenario that was made in Python becomes a file that others can read, change and run."""

from __future__ import annotations

import os
from collections.abc import Iterator
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

import tomli_w
from pydantic.fields import FieldInfo

from frontend_sim.quantities import (
    Dimension,
    Level,
    Limit,
    Part,
    ReadsLevel,
    as_text,
    mark_of,
    part_table,
    signal_dimension,
)
from frontend_sim.scenario.scan_scenario import AnyScenario
from frontend_sim.scenario.signal import PIN
from frontend_sim.scenario.tables import is_array, keys
from frontend_sim.values import Value, may_be_left_out

_ALWAYS = ("format", "kind")
"""Keys that are written though they have their default."""


def scenario_text(scenario: AnyScenario, directory: str | os.PathLike[str] | None = None) -> str:
    """Return a scenario as the text of a TOML file, which reads back as an equal scenario.

    Quantities have their units, and just as many digits as give back the same number; keys that
    have their default are left out. The text is made from the values: for the text that a scenario
    was read from, with its comments, take ``scenario.source``.

    Parameters
    ----------
    directory : where the file will stand; paths of files below it are written relative to it
    """
    base = None if directory is None else Path(directory).resolve()
    return "\n".join(_lines(_table(scenario, _Writing(base, PIN)), ()))


@dataclass(frozen=True)
class _Writing:
    """What all tables of a file have in common: the folder it is for, the unit of its stimulus."""

    base: Path | None
    signal: str


class _Inline(dict[str, Any]):
    """A table that is written on one line, as the value of a key."""


def _table(value: Value, writing: _Writing) -> dict[str, Any]:
    """Return a value as a table: its kind first, then what differs from the default."""
    # Scenarios and channels know in which unit their levels are.
    writing = replace(writing, signal=getattr(value, "stimulus_unit", writing.signal))
    written: dict[str, Any] = {}
    fields = keys(type(value))
    for name in sorted(fields, key=lambda key: key not in _ALWAYS):
        field, item = fields[name], getattr(value, name)
        always = name in _ALWAYS and not may_be_left_out(field)
        if item is None or (not always and item == field.get_default()):
            continue
        dimension = _dimension(field, item, writing)
        if dimension is not None and isinstance(item, Part):
            written[name] = _Inline(part_table(item, dimension))
        elif isinstance(item, Limit):
            written[name] = item.text()
        elif dimension is not None and dimension.unit and not is_array(field.annotation):
            written[name] = as_text(item, dimension)
        else:
            written[name] = _plain(item, writing)
    return written


def _dimension(field: FieldInfo, item: Any, writing: _Writing) -> Dimension | None:
    """Return the dimension of a key; that of a signal is the stimulus's, or the value's own."""
    mark = mark_of(field.annotation, field.metadata)
    if not isinstance(mark, ReadsLevel):
        return None if mark is None else mark.dimension
    own = item.unit if mark.with_unit and isinstance(item, Level) else None
    return signal_dimension(writing.signal if own is None else own, mark.sense)


def _plain(item: Any, writing: _Writing) -> Any:
    base = writing.base
    if isinstance(item, Value):
        return _table(item, writing)
    if isinstance(item, tuple):
        return [_plain(part, writing) for part in item]
    if isinstance(item, Path):
        inside = base is not None and item.resolve().is_relative_to(base)
        return (item.resolve().relative_to(base) if base and inside else item).as_posix()
    return item


def _lines(table: dict[str, Any], path: tuple[str, ...]) -> Iterator[str]:
    """Return the lines of a table: its own keys, then the tables in it, each under its header."""
    own = {key: value for key, value in table.items() if not _is_table(value)}
    if own:
        yield "".join(_pair(key, value) for key, value in own.items())
    for key, value in table.items():
        if not _is_table(value):
            continue
        name = ".".join((*path, key))
        for inner in value if isinstance(value, list) else [value]:
            yield f"[[{name}]]" if isinstance(value, list) else f"[{name}]"
            yield from _lines(inner, (*path, key))


def _pair(key: str, value: Any) -> str:
    if not isinstance(value, _Inline):
        return tomli_w.dumps({key: value})
    pairs = ", ".join(tomli_w.dumps({name: item}).strip() for name, item in value.items())
    return f"{key} = {{ {pairs} }}\n"


def _is_table(value: Any) -> bool:
    if isinstance(value, _Inline):
        return False
    return isinstance(value, dict) or (
        isinstance(value, list) and value != [] and all(isinstance(item, dict) for item in value)
    )
