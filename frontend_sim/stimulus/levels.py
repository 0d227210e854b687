"""Whether the values of a stimulus are given in units of the signal that the first stage takes."""

from __future__ import annotations

from collections.abc import Iterator
from functools import cache
from typing import NamedTuple

from frontend_sim.errors import QuantityError
from frontend_sim.quantities import ReadsLevel, Sense, level_in, mark_of
from frontend_sim.values import Value


class LevelFault(NamedTuple):
    """One value that cannot be one of the signal: its keys and positions, and what is wrong."""

    path: tuple[str | int, ...]
    text: str


def level_faults(value: Value, signal: str) -> Iterator[LevelFault]:
    """Return the levels of a value, and of the values in it, that are no levels of a signal.

    Parameters
    ----------
    signal : SI unit of the signal
    """
    for path, level, sense in _levels(value):
        try:
            level_in(level, signal, sense)
        except QuantityError as error:
            yield LevelFault(path, str(error))


def written_level(value: Value) -> str:
    """Return the text of a level as it was given, "" without one; not that of a mere difference,
    if there is another.
    """
    texts = {"value": "", "difference": "", "slope": ""}
    for _, level, sense in _levels(value):
        texts[sense] = texts[sense] or getattr(level, "given", "")
    return texts["value"] or texts["difference"]


def _levels(value: Value) -> Iterator[tuple[tuple[str | int, ...], float, Sense]]:
    """Return the levels of a value, and of the values in it, with their keys and positions."""
    senses = _senses(type(value))
    for name in type(value).model_fields:
        item = getattr(value, name)
        if name in senses and item is not None:
            yield (name,), item, senses[name]
        for position, inner in enumerate(item if isinstance(item, tuple) else ()):
            if isinstance(inner, Value):
                for path, level, sense in _levels(inner):
                    yield (name, position, *path), level, sense


@cache
def _senses(kind: type[Value]) -> dict[str, Sense]:
    """Return the keys of a kind that hold levels, and what each level is."""
    marks = {
        name: mark_of(field.annotation, field.metadata) for name, field in kind.model_fields.items()
    }
    return {name: mark.sense for name, mark in marks.items() if isinstance(mark, ReadsLevel)}


def absolute_keys(value: Value) -> tuple[list[str], list[str]]:
    """Return the keys of values of the signal, not of differences: those not zero, and the rest.

    Whether a key was given or left out does not count: plain data for JSON have all of them.
    """
    keys = [name for name, sense in _senses(type(value)).items() if sense == "value"]
    given = [key for key in keys if getattr(value, key) != 0.0]
    return given, [key for key in keys if key not in given]
