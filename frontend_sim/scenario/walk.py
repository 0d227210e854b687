"""The way from the top of a scenario to a value, step by step, and the names of its items."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator, Sequence
from typing import Any

from pydantic.fields import FieldInfo

from frontend_sim.errors import ScenarioError
from frontend_sim.quantities import (
    RATIO,
    Dimension,
    Limit,
    Part,
    ReadsLevel,
    mark_of,
    shown,
    signal_dimension,
)
from frontend_sim.quantities.dimension import DRIFT, FRACTION
from frontend_sim.scenario.closest import closest
from frontend_sim.scenario.rules import Path
from frontend_sim.scenario.tables import keys
from frontend_sim.values import Value

_STEP = re.compile(r"\.?([A-Za-z0-9_-]+)|\[\s*([^\[\]]+?)\s*\]")
_OF_PART = {"value": RATIO, "tolerance": FRACTION, "drift": DRIFT}
"""What a part's table holds besides; the dimension of its value is that of its key."""


def item_name(item: object, position: int) -> str:
    """Return how an item of an array is addressed: by its name, else by its place from 1."""
    name = getattr(item, "name", "")
    usable = isinstance(name, str) and name and not re.search(r"[\[\]]|^\s*\d+\s*$", name)
    return name if usable else str(position + 1)


def key_text(scenario: Value, path: Sequence[str | int]) -> str:
    """Return the key of a path, items called by their names where they have one."""
    text, here = "", scenario
    for step in path:
        if isinstance(step, int):
            here = here[step]  # type: ignore[index] # a step of this kind stands behind an array
            text += f"[{item_name(here, step)}]"
        else:
            here = getattr(here, step)
            text += f".{step}" if text else step
    return text


def steps_of(key: str) -> Iterator[str | tuple[str]]:
    """Return the steps of a key: names of keys, and, in a tuple, what stands in brackets."""
    at = 0
    text = key.strip()
    while at < len(text):
        match = _STEP.match(text, at)
        if match is None or (at == 0 and text.startswith((".", "["))):
            raise ScenarioError(
                f"{shown(key)} is no key; write it for instance as adc.rate, chain[2].resistance, "
                "or chain[input filter].resistance"
            )
        name, item = match.groups()
        yield name if name is not None else (item,)
        at = match.end()
    if not text:
        raise ScenarioError("a key is empty; write it for instance as chain[2].resistance")


class Walk:
    """On the way from the top of a scenario to a value.

    Attributes
    ----------
    path : keys and positions so far;  here : what stands there
    """

    def __init__(self, scenario: Value, key: str) -> None:
        """Begin at the top; ``key`` is the whole of it, for messages."""
        self.path: Path = ()
        self.here: Any = scenario
        self._scenario, self._key = scenario, key
        self._field: FieldInfo | None = None
        self._signal = "V"
        self._of_part: str | None = None

    def enter(self, step: str | tuple[str]) -> None:
        """Go one step, see ``steps_of``. Raises ScenarioError where there is nothing."""
        if isinstance(step, tuple):
            self._enter_item(step[0])
        elif isinstance(self.here, Value):
            self._enter_key(step)
        elif isinstance(self.here, Part) and step in _OF_PART:
            self.here = getattr(self.here, "nominal" if step == "value" else step)
            self.path = (*self.path, step)
            self._of_part = step
        elif self.here is None:
            raise self._lost(f"{self._so_far()} is not there in this scenario; give it there first")
        else:
            raise self._lost(f"{self._so_far()} has no keys inside")

    def dimension(self) -> Dimension | None:
        """Return what is measured here, None where it is no quantity."""
        if self._of_part is not None and self._of_part != "value":
            return _OF_PART[self._of_part]
        if self._field is None or isinstance(self.here, Value | Limit):
            return None
        mark = mark_of(self._field.annotation, self._field.metadata)
        if isinstance(mark, ReadsLevel):
            return signal_dimension(self._signal, mark.sense)
        return None if mark is None else mark.dimension

    def _enter_key(self, name: str) -> None:
        self._signal = getattr(self.here, "stimulus_unit", self._signal)
        known = keys(type(self.here))
        if name not in known:
            hint = _hint(name, known)
            raise self._lost(f"{self._so_far() or 'a scenario'} has no key {name!r}{hint}")
        self._field = known[name]
        self.here = getattr(self.here, name)
        self.path = (*self.path, name)

    def _enter_item(self, given: str) -> None:
        if not isinstance(self.here, tuple):
            raise self._lost(f"{self._so_far() or 'a scenario'} is no array")
        names = [item_name(item, position) for position, item in enumerate(self.here)]
        if given in names:
            position = names.index(given)
        elif given.isascii() and given.isdigit() and 0 < int(given) <= len(names):
            position = int(given) - 1
        else:
            raise self._lost(self._no_item(given, names))
        self.here = self.here[position]
        self.path = (*self.path, position)

    def _no_item(self, given: str, names: list[str]) -> str:
        if not names:
            return f"{self._so_far()} is empty"
        if given.isdigit():
            return f"{self._so_far()} has no item {given}, it has {len(names)}, counted from 1"
        return f"{self._so_far()} has no item named {given!r}{_hint(given, names)}"

    def _so_far(self) -> str:
        return key_text(self._scenario, self.path)

    def _lost(self, text: str) -> ScenarioError:
        return ScenarioError(f"{shown(self._key)}: {text}")


def _hint(given: str, known: Iterable[str]) -> str:
    close = closest(given, known)
    return f"; did you mean {close!r}?" if close else f"; known are {', '.join(known)}"
