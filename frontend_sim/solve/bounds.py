"""How the key and the bounds that a user gives are read."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from pydantic import TypeAdapter, ValidationError
from pydantic.fields import FieldInfo

from frontend_sim.errors import QuantityError
from frontend_sim.quantities import Dimension, Limit, Part, as_text, mark_of, parse, shown
from frontend_sim.quantities.dimension import FRACTION
from frontend_sim.quantities.limit import parse_limit
from frontend_sim.quantities.writing import as_share
from frontend_sim.scenario.key import find, number_at, read_number
from frontend_sim.scenario.scan_scenario import AnyScenario
from frontend_sim.scenario.walk import key_text
from frontend_sim.solve.domain import (
    Continuous,
    Domain,
    Scale,
    preferred_numbers,
    usual_scale,
    whole_numbers,
)

OF_TOLERANCE = ".tolerance"
"""End of the key of a part's tolerance."""


@dataclass(frozen=True)
class VariedKey:
    """What a key is: its value now, and how others are read."""

    key: str
    dimension: Dimension | None
    now: float | None
    whole: bool = False
    limit: bool = False
    part: Part | None = None
    tolerance: bool = False


def tolerance_key(scenario: AnyScenario, key: str) -> VariedKey | None:
    """Return the tolerance of a part, also of one that has none yet; else None."""
    if not key.strip().endswith(OF_TOLERANCE):
        return None
    above = find(scenario, key.strip().removesuffix(OF_TOLERANCE))
    field = _field(scenario, above.path)
    mark = mark_of(field.annotation, field.metadata) if field is not None else None
    if mark is None or not mark.spread or not isinstance(above.value, float):
        return None
    value = above.value
    part = value if isinstance(value, Part) else Part(value)
    name = key_text(scenario, above.path) + OF_TOLERANCE
    return VariedKey(name, FRACTION, part.tolerance, part=part, tolerance=True)


def value_key(scenario: AnyScenario, key: str) -> VariedKey:
    """Return what a key is that holds a number. Raises ScenarioError if it is none."""
    found = find(scenario, key)
    if found.value is not None or found.dimension is None:
        number_at(scenario, key)  # refuses what is no number
    value, name = found.value, key_text(scenario, found.path[:-1])
    last = found.path[-1]
    name = f"{name}.{last}" if isinstance(last, str) and name else key_text(scenario, found.path)
    now = None if value is None else float(value)
    return VariedKey(
        name,
        found.dimension,
        now,
        whole=type(value) is int,
        limit=isinstance(value, Limit),
        part=value if isinstance(value, Part) else None,
    )


def read_bound(scenario: AnyScenario, whose: VariedKey, given: object) -> float:
    """Return a bound in SI, a ``Limit`` where the key is one.

    Raises
    ------
    InputError
        If it is no quantity of the key's dimension, or no whole number where one is asked for.
    """
    try:
        if whose.limit:
            return parse_limit(given)
    except QuantityError as error:
        raise QuantityError(f"{whose.key}: {error}") from None
    if whose.tolerance:
        return _read_share(whose, given)
    number = read_number(scenario, whose.key, given)
    if whose.whole and number != int(number):
        raise QuantityError(f"{whose.key}: given {shown(given)}; it takes whole numbers only")
    return number


def _read_share(whose: VariedKey, given: object) -> float:
    try:
        return float(parse(given, FRACTION))
    except QuantityError as error:
        raise QuantityError(f"{whose.key}: {error}") from None


def refuse_disorder(whose: VariedKey, low: float, high: float) -> None:
    """Refuse bounds that are equal, reversed, or in two units. Raises QuantityError."""
    units = [end.unit for end in (low, high) if isinstance(end, Limit)]
    if len(set(units)) > 1:
        raise QuantityError(
            f"{whose.key}: one bound is in {units[0]}, the other in {units[1]}; give both in one "
            "unit"
        )
    if low == high:
        raise QuantityError(f"{whose.key}: both bounds are {_text(whose, low)}; give two of them")
    if low > high:
        raise QuantityError(
            f"{whose.key}: the bounds are reversed, {_text(whose, low)} lies above "
            f"{_text(whose, high)}; exchange them"
        )


def _text(whose: VariedKey, value: float) -> str:
    if isinstance(value, Limit):
        return value.text()
    if whose.dimension is not None and whose.dimension.unit:
        return as_text(value, whose.dimension)
    return as_share(value) if whose.tolerance else f"{value:g}"


def refuse_beyond(scenario: AnyScenario, whose: VariedKey, end: float) -> None:
    """Refuse a bound that the key can never have; what it does to other keys comes out later."""
    if whose.tolerance:
        if not 0.0 <= end < 1.0:
            raise QuantityError(f"{whose.key}: a tolerance must be at least 0 % and below 100 %")
        return
    field = _field(scenario, find(scenario, whose.key).path)
    if field is None:
        return
    value: object = int(end) if whose.whole else end
    try:
        TypeAdapter(field.rebuild_annotation()).validate_python(value)
    except ValidationError as error:
        told = error.errors(include_url=False)[0]
        text = told["msg"]
        if told["type"] not in ("quantity", "rule"):
            text = f"given {_text(whose, end)}; {text[:1].lower()}{text[1:]}"
        raise QuantityError(f"{whose.key}: {text}") from None


def _field(scenario: AnyScenario, path: tuple[str | int, ...]) -> FieldInfo | None:
    """Return the field at the end of a path; None for an item of an array of numbers."""
    here: Any = scenario
    for step in path[:-1]:
        here = here[step] if isinstance(step, int) else getattr(here, step)
    last = path[-1]
    fields = getattr(type(here), "model_fields", {})
    found: FieldInfo | None = fields.get(last) if isinstance(last, str) else None
    return found


def domain_between(
    whose: VariedKey,
    low: float,
    high: float,
    series: str | None,
    scale: Scale | None,
    tolerance: float,
) -> Domain:
    """Return the values between two bounds; parameters and errors are those of ``varied``."""
    if whose.whole:
        if series:
            raise QuantityError(f"{whose.key} is a whole number, which no series has; take it out")
        try:
            return whole_numbers(low, high)
        except QuantityError as error:
            raise QuantityError(f"{whose.key}: {error}") from None
    own = "" if whose.part is None or whose.tolerance else whose.part.series
    if series or own:
        return _preferred(whose, low, high, series or own)
    chosen = scale or usual_scale(low, high)
    if chosen == "log" and not low > 0.0:
        raise QuantityError(
            f"{whose.key}: a logarithmic scale needs bounds above 0; raise the lower one, or take "
            "a linear scale"
        )
    return Continuous(float(low), float(high), tolerance, chosen)


def _preferred(whose: VariedKey, low: float, high: float, series: str) -> Domain:
    if not low > 0.0:
        raise QuantityError(f"{whose.key}: preferred numbers are above 0; raise the lower bound")
    found = preferred_numbers(low, high, series)
    if len(found.values) < 2:
        raise QuantityError(
            f"{whose.key}: fewer than two members of {series} lie from {_text(whose, low)} to "
            f"{_text(whose, high)}; widen the bounds, or take a finer series"
        )
    return found
