"""One wrong key of a scenario: pydantic's findings, brought into the file's own terms."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from frontend_sim.errors import Problem
from frontend_sim.quantities import shown
from frontend_sim.scenario.locate import line_of
from frontend_sim.scenario.rules import Path
from frontend_sim.scenario.tables import (
    Spot,
    is_array,
    kind_in,
    kinds,
    members,
    model_at,
    root,
    spot,
)

MISSING = object()
"""What is given where nothing stands."""


@dataclass(frozen=True, eq=False)
class Fault:
    """One thing that the models refused.

    Parameters
    ----------
    type : pydantic's word for what is wrong
    path : of the key in the file
    data : the file's content
    given : what stands there, ``MISSING`` if nothing does
    spot : what the models expect there
    message : pydantic's sentence
    context : pydantic's details
    branch : True where one of several possible types of a value was tried
    """

    type: str
    path: Path
    data: Any
    given: Any
    spot: Spot
    message: str
    context: Mapping[str, Any]
    branch: bool

    @classmethod
    def of(cls, error: Mapping[str, Any], data: Any) -> Fault:
        """Make a fault from one of pydantic's error details."""
        context = error.get("ctx") or {}
        path, branch = _path_in_file([*error["loc"], *context.get("path", ())], data)
        given, message = value_at(path, data), error.get("msg", "")
        return cls(error["type"], path, data, given, spot(path, data), message, context, branch)

    @property
    def above(self) -> dict[str, Any]:
        """The table that the key stands in."""
        table = value_at(self.path[:-1], self.data)
        return table if isinstance(table, dict) else {}


def _path_in_file(location: Sequence[str | int], data: Any) -> tuple[Path, bool]:
    """Drop from pydantic's location what is no key: kinds, and the types that were tried."""
    path: Path = ()
    annotation: Any = root(data)
    branch, here = False, data
    for step in location:
        if _has_kinds(annotation) and step == kind_in(members(annotation), here):
            annotation = model_at(annotation, here)
            continue
        known = spot((*path, step), data)
        present = value_at((*path, step), data)
        if known.annotation is None and present is MISSING:
            branch = True
            continue
        path, annotation, here = (*path, step), known.annotation, present
    return path, branch


def _has_kinds(annotation: Any) -> bool:
    return len(kinds(members(annotation))) > 1 and not is_array(annotation)


def value_at(path: Path, data: Any) -> Any:
    """Return what stands at a path, or ``MISSING``."""
    for step in path:
        in_array = isinstance(data, (list, tuple)) and isinstance(step, int) and step < len(data)
        if not in_array and not (isinstance(data, dict) and step in data):
            return MISSING
        data = data[step]
    return data


def problem(path: Path, text: str, data: Any, lines: Mapping[Path, int]) -> Problem:
    """Return a problem with its key in the user's notation and its line.

    Where a rule of a whole table is broken, the line is that of the first key of the table that
    the text names.
    """
    table = value_at(path, data)
    named = _first_named(text, table) if isinstance(table, dict) else None
    place = path if named is None else (*path, named)
    return Problem(text, key_of(path, data), line_of(place, lines))


def _first_named(text: str, table: Mapping[str, Any]) -> str | None:
    """Return the first key of a table that a text names, in the singular or the plural."""
    for word in re.findall(r"[\w-]+", text):
        for key in (word, f"{word}s", word.removesuffix("s")):
            if key in table and key not in ("kind", "name"):
                return key
    return None


def key_of(path: Path, data: Any) -> str:
    """Return a path as ``chain[2].resistance (rc-lowpass "input filter")``, counted from 1."""
    text = ""
    label = ""
    for length, step in enumerate(path, start=1):
        if isinstance(step, int):
            text += f"[{step + 1}]"
            label = _label(value_at(path[:length], data)) or label
        else:
            plain = re.fullmatch(r"[A-Za-z0-9_-]+", step)
            text += f"{'.' if text else ''}{step if plain else shown(step)}"
    return f"{text} ({label})" if label else text


def _label(table: Any) -> str:
    if not isinstance(table, dict):
        return ""
    kind, name = table.get("kind"), table.get("name")
    told = [kind[:40]] if isinstance(kind, str) and kind.isprintable() else []
    told += [shown(name)] if isinstance(name, str) and name else []
    return " ".join(told)
