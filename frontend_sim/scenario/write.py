"""A scenario that was made in Python becomes a file that others can read, change and run."""

from __future__ import annotations

import os
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import tomli_w

from frontend_sim.quantities import as_text, dimension_of
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.tables import is_array, keys
from frontend_sim.values import Value

_ALWAYS = ("format", "kind")
"""Keys that are written though they have their default."""


def scenario_text(scenario: Scenario, directory: str | os.PathLike[str] | None = None) -> str:
    """Return a scenario as the text of a TOML file, which reads back as an equal scenario.

    Quantities have their units, and just as many digits as give back the same number; keys that
    have their default are left out. The text is made from the values: for the text that a scenario
    was read from, with its comments, take ``scenario.source``.

    Parameters
    ----------
    directory : where the file will stand; paths of files below it are written relative to it
    """
    base = None if directory is None else Path(directory).resolve()
    return "\n".join(_lines(_table(scenario, base), ()))


def _table(value: Value, base: Path | None) -> dict[str, Any]:
    """Return a value as a table: its kind first, then what differs from the default."""
    written: dict[str, Any] = {}
    fields = keys(type(value))
    for name in sorted(fields, key=lambda key: key not in _ALWAYS):
        field, item = fields[name], getattr(value, name)
        if item is None or (name not in _ALWAYS and item == field.get_default()):
            continue
        dimension = dimension_of(field.annotation, field.metadata)
        if dimension is not None and dimension.unit and not is_array(field.annotation):
            written[name] = as_text(item, dimension)
        else:
            written[name] = _plain(item, base)
    return written


def _plain(item: Any, base: Path | None) -> Any:
    if isinstance(item, Value):
        return _table(item, base)
    if isinstance(item, tuple):
        return [_plain(part, base) for part in item]
    if isinstance(item, Path):
        inside = base is not None and item.resolve().is_relative_to(base)
        return (item.resolve().relative_to(base) if base and inside else item).as_posix()
    return item


def _lines(table: dict[str, Any], path: tuple[str, ...]) -> Iterator[str]:
    """Return the lines of a table: its own keys, then the tables in it, each under its header."""
    own = {key: value for key, value in table.items() if not _is_table(value)}
    if own:
        yield tomli_w.dumps(own)
    for key, value in table.items():
        if not _is_table(value):
            continue
        name = ".".join((*path, key))
        for inner in value if isinstance(value, list) else [value]:
            yield f"[[{name}]]" if isinstance(value, list) else f"[{name}]"
            yield from _lines(inner, (*path, key))


def _is_table(value: Any) -> bool:
    return isinstance(value, dict) or (
        isinstance(value, list) and value != [] and all(isinstance(item, dict) for item in value)
    )
