"""Whether the values of a stimulus are given in units of the signal that the first stage takes."""

from __future__ import annotations

from collections.abc import Iterator
from typing import NamedTuple

from frontend_sim.errors import QuantityError
from frontend_sim.quantities import ReadsLevel, level_in, mark_of
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
    for name, field in type(value).model_fields.items():
        item = getattr(value, name)
        mark = mark_of(field.annotation, field.metadata)
        if isinstance(mark, ReadsLevel) and item is not None:
            try:
                level_in(item, signal, mark.sense)
            except QuantityError as error:
                yield LevelFault((name,), str(error))
        for position, inner in enumerate(item if isinstance(item, tuple) else ()):
            if isinstance(inner, Value):
                for path, text in level_faults(inner, signal):
                    yield LevelFault((name, position, *path), text)


def absolute_keys(value: Value) -> tuple[list[str], list[str]]:
    """Return the keys of values of the signal, not of differences: those not zero, and the rest.

    Whether a key was given or left out does not count: plain data for JSON have all of them.
    """
    marks = {
        name: mark_of(field.annotation, field.metadata)
        for name, field in type(value).model_fields.items()
    }
    keys = [
        name
        for name, mark in marks.items()
        if isinstance(mark, ReadsLevel) and mark.sense == "value"
    ]
    given = [key for key in keys if getattr(value, key) != 0.0]
    return given, [key for key in keys if key not in given]
