"""A scenario with other values at some of its keys."""

from __future__ import annotations

import os
from collections.abc import Mapping
from pathlib import Path as FilePath
from typing import Any, TypeVar

from pydantic import ValidationError

from frontend_sim.errors import ScenarioError
from frontend_sim.quantities import Part
from frontend_sim.scenario.explain import explain
from frontend_sim.scenario.key import Found, find
from frontend_sim.scenario.rules import Path
from frontend_sim.values import Value, validated

AnyScenario = TypeVar("AnyScenario", bound=Value)


def with_values(
    scenario: AnyScenario,
    values: Mapping[str, Any],
    directory: str | os.PathLike[str] | None = None,
) -> AnyScenario:
    """Return a scenario with other values at some keys, validated as one read from a file.

    All values change at once, so that they need to fit together at the end only. The result has
    no ``source``.

    Parameters
    ----------
    scenario : stays as it is
    values : key, see ``frontend_sim.scenario.key`` -> text with a unit, a number in SI, or what
        else a file may have there; a whole number may be text as well. A bare number or text for
        a part keeps its tolerance, drift and series; None takes a key out, so that it has its
        default
    directory : what paths of files in the values are relative to; left out, the folder of the
        process

    Raises
    ------
    ScenarioError
        If a key is none, or the values do not make a scenario; the messages name the keys.
    """
    if not values:
        return scenario
    found = [(find(scenario, key), value) for key, value in values.items()]
    changes: dict[Path, Any] = {}
    for place, value in found:
        path, item = _placed(scenario, place, value)
        if path in changes and isinstance(changes[path], dict) and isinstance(item, dict):
            changed = place.path[-1]
            item = {**changes[path], changed: item[changed]} if path != place.path else item
        changes[path] = item
    context = {"directory": FilePath(directory or ".")}
    try:
        return validated(type(scenario), _rebuilt(scenario, changes), context)
    except ValidationError as error:
        data = as_tables(_rebuilt(scenario, changes))
        raise ScenarioError(explain(error.errors(include_url=False), data, {})) from None


def _placed(scenario: Value, place: Found, value: Any) -> tuple[Path, Any]:
    """Return where a value goes, and what goes there: the whole table of a part with a spread."""
    last = place.path[-1]
    if last in ("value", "tolerance", "drift"):
        above = _at(scenario, place.path[:-1])
        if isinstance(above, Part):
            return place.path[:-1], {**above.plain(), last: value}
    old = place.value
    if place.dimension is None and isinstance(value, str) and type(old) in (int, float):
        return place.path, _number(value, type(old))
    plain = isinstance(value, str | int | float) and not isinstance(value, Part)
    if isinstance(old, Part) and plain and (old.tolerance or old.drift or old.series):
        return place.path, {**old.plain(), "value": value}
    return place.path, value


def _number(text: str, kind: type[int | float]) -> int | float | str:
    """Return the number that a text is, or the text, for a key that takes a bare number."""
    try:
        return kind(text)
    except ValueError:
        return text


def _at(value: Any, path: Path) -> Any:
    for step in path:
        value = value[step] if isinstance(step, int) else getattr(value, step)
    return value


def _rebuilt(value: Any, changes: Mapping[Path, Any]) -> Any:
    """Return a value as the tables of a file along the changed paths, as it is elsewhere."""
    if () in changes:
        return changes[()]
    if not changes:
        return value
    inner: dict[str | int, dict[Path, Any]] = {}
    for path, item in changes.items():
        inner.setdefault(path[0], {})[path[1:]] = item
    if isinstance(value, tuple):
        return [_rebuilt(item, inner.get(place, {})) for place, item in enumerate(value)]
    given = {key: getattr(value, key) for key in _given(value)}
    for key, below in inner.items():
        given[str(key)] = _rebuilt(getattr(value, str(key)), below)
    return {key: item for key, item in given.items() if item is not None}


def _given(value: Value) -> list[str]:
    """Return the keys that were given, and the kind; in the order of the model.

    What no file has but a value was made with (the rhythm of a channel) is among them.
    """
    return [
        key
        for key in type(value).model_fields
        if (key in value.model_fields_set or key == "kind") and key != "source"
    ]


def as_tables(value: Any) -> Any:
    """Return values as the tables of a file, for messages."""
    if isinstance(value, Value):
        return {key: as_tables(getattr(value, key)) for key in _given(value)}
    if isinstance(value, Mapping):
        return {key: as_tables(item) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return [as_tables(item) for item in value]
    return value
