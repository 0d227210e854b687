"""The parts of a scenario with their spread, and the circuit at its temperature."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, TypeVar

from pydantic import ValidationError

from frontend_sim.errors import ModelError
from frontend_sim.quantities import (
    REFERENCE_TEMPERATURE,
    TEMPERATURE,
    Part,
    as_text,
    dimension_of,
)
from frontend_sim.scenario.rules import Path
from frontend_sim.values import Value, validated

if TYPE_CHECKING:
    from frontend_sim.analog.stages.base import Stage

AnyValue = TypeVar("AnyValue", bound=Value)


@dataclass(frozen=True)
class SpreadPart:
    """A part whose value spreads.

    Parameters
    ----------
    path : keys and positions from the top of the scenario, ``("chain", 0, "resistance")``
    part : its nominal value, tolerance, drift and series
    """

    path: Path
    part: Part

    @property
    def name(self) -> str:
        """The path as messages have it, ``chain[1].resistance``."""
        text = "".join(
            f"[{step + 1}]" if isinstance(step, int) else f".{step}" for step in self.path
        )
        return text.removeprefix(".")

    @property
    def nominal(self) -> float:
        """Nominal value, in SI."""
        return self.part.nominal

    @property
    def tolerance(self) -> float:
        """Largest deviation to either side, as a share of the nominal value."""
        return self.part.tolerance

    @property
    def drift(self) -> float:
        """Relative change with temperature [1/K]."""
        return self.part.drift

    @property
    def corners(self) -> tuple[float, float]:
        """Smallest and largest value within the tolerance, at 25 degC, in SI."""
        return self.part.lowest, self.part.highest


def spread_parts(value: Value) -> tuple[SpreadPart, ...]:
    """Return every part with a tolerance or a drift, in the order of the keys.

    Parameters
    ----------
    value : a scenario, or any value inside one; paths start at it
    """
    return tuple(
        SpreadPart(path, part) for path, part in _parts(value, ()) if part.tolerance or part.drift
    )


def _parts(value: Value, above: Path) -> Iterator[tuple[Path, Part]]:
    for name in type(value).model_fields:
        item = getattr(value, name)
        if isinstance(item, Part):
            yield (*above, name), item
        elif isinstance(item, Value):
            yield from _parts(item, (*above, name))
        elif isinstance(item, tuple):
            for position, inner in enumerate(item):
                if isinstance(inner, Value):
                    yield from _parts(inner, (*above, name, position))


def stages_at(stages: Sequence[Stage], temperature: float) -> tuple[Stage, ...]:
    """Return stages whose parts have the values that drift gives them at a temperature [K].

    Raises
    ------
    ModelError
        If a drift takes a part to a value that it cannot have.
    """
    return tuple(
        moved(stage, temperature, stage.label(position))
        for position, stage in enumerate(stages, start=1)
    )


def moved(value: AnyValue, temperature: float, name: str) -> AnyValue:
    """Return a value whose parts have drifted to a temperature [K]; the same one where none does.

    Parameters
    ----------
    name : what it is called in messages

    Raises
    ------
    ModelError
        If a drift takes a part to a value that it cannot have.
    """
    if temperature == REFERENCE_TEMPERATURE:
        return value
    changes = {
        key: after
        for key in type(value).model_fields
        if (after := _moved_item(value, key, temperature, name)) is not getattr(value, key)
    }
    if not changes:
        return value
    given = {key: getattr(value, key) for key in value.model_fields_set}
    try:
        return validated(type(value), {**given, **changes})
    except ValidationError as error:
        told = error.errors(include_url=False)[0]["msg"].removeprefix("Value error, ")
        where = as_text(temperature, TEMPERATURE, 6)
        raise ModelError(f"{name!r} drifts out of its limits at {where}: {told}") from None


def _moved_item(value: Value, key: str, temperature: float, name: str) -> object:
    item = getattr(value, key)
    if isinstance(item, Part) and item.drift:
        return _drifted(value, key, item, temperature, name)
    if isinstance(item, Value):
        return moved(item, temperature, name)
    if isinstance(item, tuple) and any(isinstance(inner, Value) for inner in item):
        after = tuple(
            moved(inner, temperature, name) if isinstance(inner, Value) else inner for inner in item
        )
        return after if any(a is not b for a, b in zip(after, item, strict=True)) else item
    return item


def _drifted(value: Value, key: str, part: Part, temperature: float, name: str) -> Part:
    after = part.at(temperature)
    if after * part.nominal <= 0.0 and part.nominal != 0.0:
        field = type(value).model_fields[key]
        dimension = dimension_of(field.annotation, field.metadata)
        shown = as_text(after, dimension, 4) if dimension else f"{after:g}"
        raise ModelError(
            f"the drift of {key} of {name!r}, {part.drift * 1e6:g} ppm/K, takes it to {shown} at "
            f"{as_text(temperature, TEMPERATURE, 6)}; lower the drift, or take a temperature "
            "nearer to 25 degC"
        )
    return Part(after, part.tolerance)
