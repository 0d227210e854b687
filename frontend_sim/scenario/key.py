"""A value of a scenario has an address: ``chain[input filter].capacitance``.

Steps are keys; an item of an array is named, or told by its place from 1: ``chain[2].gain``.
``frontend_sim.scenario.vary`` makes a scenario with other values at such keys.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

from frontend_sim.errors import QuantityError, ScenarioError
from frontend_sim.quantities import RATIO, Dimension, Limit, as_text, parse, shown
from frontend_sim.scenario.rules import Path
from frontend_sim.scenario.tables import keys
from frontend_sim.scenario.walk import Walk, item_name, steps_of
from frontend_sim.values import Value

_NOT_VARIED = frozenset(["format", "seed"])


@dataclass(frozen=True)
class Found:
    """What a key leads to.

    Parameters
    ----------
    path : keys and positions, from 0, from the top of the scenario
    value : what stands there, in SI; None where the key is known and has no value
    dimension : what is measured, None where the value is no quantity
    """

    path: Path
    value: Any
    dimension: Dimension | None

    def text(self) -> str:
        """Return the value as a file has it, with its unit."""
        return text_of(self.value, self.dimension)


def find(scenario: Value, key: str) -> Found:
    """Return what a key of a scenario leads to.

    Parameters
    ----------
    scenario : or any other value; keys start at it
    key : ``adc.rate``, ``chain[2].resistance``, ``chain[input filter].resistance.tolerance``

    Raises
    ------
    ScenarioError
        If the key is none, or nothing stands there; it names the nearest key.
    """
    walk = Walk(scenario, key)
    for step in list(steps_of(key)):
        walk.enter(step)
    return Found(walk.path, walk.here, walk.dimension())


def value_at(scenario: Value, key: str) -> Any:
    """Return what stands at a key, in SI; raises as ``find`` does."""
    return find(scenario, key).value


def dimension_at(scenario: Value, key: str) -> Dimension | None:
    """Return what is measured at a key, or None; raises as ``find`` does."""
    return find(scenario, key).dimension


def number_at(scenario: Value, key: str) -> float:
    """Return the number at a key, in SI.

    Raises
    ------
    ScenarioError
        If the key is none, or what stands there is no number.
    """
    found = find(scenario, key)
    if isinstance(found.value, bool) or not isinstance(found.value, int | float):
        told = "nothing" if found.value is None else shown(found.value)
        raise ScenarioError(
            f"{key} has no number, it has {told}; keys with numbers are for instance "
            f"{', '.join(numeric_keys(scenario)[:8])}"
        )
    return found.value


def read_number(scenario: Value, key: str, value: object) -> float:
    """Return a value that a user gives for a key, text with a unit or a number, in SI.

    Raises
    ------
    ScenarioError
        If the key is none, or the value is no quantity of its dimension.
    """
    dimension = dimension_at(scenario, key) or RATIO
    try:
        return float(parse(value, dimension))
    except QuantityError as error:
        raise ScenarioError(f"{key}: {error}") from None


def text_of(value: Any, dimension: Dimension | None) -> str:
    """Return a value as a file has it: a quantity with its unit, all else as it is."""
    if isinstance(value, Limit):
        return value.text()
    number = isinstance(value, int | float) and not isinstance(value, bool)
    if number and dimension is not None and dimension.unit:
        return as_text(float(value), dimension)
    return repr(float(value)) if isinstance(value, float) else str(value)


def numeric_keys(scenario: Value) -> tuple[str, ...]:
    """Return every key that holds a number, in the order of the file; ``seed`` is none of them."""
    return tuple(text for text, number in _numbers(scenario, "") if number is not None)


def _numbers(value: Any, above: str) -> Iterator[tuple[str, float | None]]:
    if isinstance(value, Value):
        for name in keys(type(value)):
            if name not in _NOT_VARIED:
                yield from _numbers(getattr(value, name), f"{above}.{name}" if above else name)
    elif isinstance(value, tuple):
        for position, item in enumerate(value):
            yield from _numbers(item, f"{above}[{item_name(item, position)}]")
    elif isinstance(value, int | float) and not isinstance(value, bool):
        yield above, value
