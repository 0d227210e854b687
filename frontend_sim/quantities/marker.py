"""The marker that makes a pydantic field read quantities."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Annotated, Any, get_args

from pydantic import (
    GetJsonSchemaHandler,
    PlainSerializer,
    ValidatorFunctionWrapHandler,
    WrapValidator,
)
from pydantic_core import CoreSchema, PydanticCustomError

from frontend_sim.errors import QuantityError
from frontend_sim.quantities.dimension import Bounds, Dimension
from frontend_sim.quantities.level import Level, Sense, parse_level, signal_dimension
from frontend_sim.quantities.part import Part
from frontend_sim.quantities.reading import parse, shown
from frontend_sim.quantities.schema import limits_of, quantity_schema, table_schema
from frontend_sim.quantities.spread import SpreadError, parse_part
from frontend_sim.quantities.writing import as_text

if TYPE_CHECKING:
    from pydantic.json_schema import JsonSchemaValue


@dataclass(frozen=True)
class Reads:
    """Pydantic marker: read the quantity, check its bounds, and describe it in the JSON Schema.

    None never reaches the marker where a field is optional; where it is not, None is refused.

    Parameters
    ----------
    dimension, bounds : what is expected, and in which interval
    spread : True for the value of a part, which may be a table with tolerance and drift and is
        then kept as a ``Part``
    """

    dimension: Dimension
    bounds: Bounds
    spread: bool = False

    def read(self, value: object) -> float:
        """Return the value in SI; raises pydantic's own kind of error, with our message."""
        try:
            number = self._parsed(value)
        except SpreadError as error:
            raise _fault(str(error), error.key) from None
        except QuantityError as error:
            raise _fault(str(error)) from None
        complaint = self.bounds.complaint(float(number), self.dimension.unit)
        if complaint is not None:
            given, key = (value["value"], "value") if isinstance(value, Mapping) else (value, "")
            raise _fault(f"given {shown(given)}; {self.dimension.noun} here {complaint}", key)
        return number

    def _parsed(self, value: object) -> float:
        if self.spread:
            return parse_part(value, self.dimension)
        number = parse(value, self.dimension)
        if isinstance(value, Part) or isinstance(number, Part):
            raise QuantityError(f"given {shown(value)}; a spread has no meaning here")
        return number

    def _read_and_keep(self, value: object, handler: ValidatorFunctionWrapHandler) -> float:
        """Let the plain number be checked, and keep what was read with it."""
        kept = self.read(value)
        number: float = handler(float(kept))
        return number if type(kept) is float else kept

    def plain(self, value: float) -> float | str | dict[str, float | str]:
        """Return a value as data for JSON."""
        return value.plain() if isinstance(value, Part) else float(value)

    def __get_pydantic_core_schema__(self, source: Any, handler: Any) -> CoreSchema:
        """Put the reading in front of the field's own check."""
        marks = (WrapValidator(self._read_and_keep), PlainSerializer(self.plain))
        inner: CoreSchema = handler(Annotated[source, *marks])
        return inner

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> JsonSchemaValue:
        """Return text or a number, with unit, examples, and the bounds of a bare number."""
        inner: JsonSchemaValue = handler(
            schema
        )  # holds what Field(ge=...) adds, under pydantic's or JSON's name
        result = quantity_schema(self.dimension, limits_of(self.bounds, inner))
        if type(self) is not Reads:
            del result["pattern"]  # of levels and limits, other keys decide on the unit
        if self.spread:
            result["type"].append("object")
            result.update(table_schema(result))
        return result


@dataclass(frozen=True)
class ReadsLevel(Reads):
    """Pydantic marker for a value of the signal, whose unit the scenario checks later.

    Parameters
    ----------
    sense : whether it is a value, a difference or a slope
    with_unit : True where the value itself tells the unit of the signal; it is then stored with it
    """

    sense: Sense = "value"
    with_unit: bool = False

    def _parsed(self, value: object) -> float:
        return parse_level(value, self.sense)

    def plain(self, value: float) -> float | str | dict[str, float | str]:
        """Return a value as data for JSON: in SI, with its unit where it is needed."""
        if self.with_unit and isinstance(value, Level) and value.unit:
            return as_text(value, signal_dimension(value.unit, self.sense))
        return float(value)


def _fault(reason: str, key: str = "") -> PydanticCustomError:
    return PydanticCustomError(
        "quantity", "{reason}", {"reason": reason, "path": [key] if key else []}
    )


def mark_of(annotation: Any, metadata: Iterable[Any] = ()) -> Reads | None:
    """Return the marker that reads a field, or None if none does.

    Parameters
    ----------
    annotation, metadata : ``FieldInfo.annotation`` and ``FieldInfo.metadata``
    """
    inside = (mark_of(inner) for inner in get_args(annotation) if not isinstance(inner, Reads))
    marks = [*metadata, *get_args(annotation)]
    own = (mark for mark in marks if isinstance(mark, Reads))
    return next(own, None) or next((mark for mark in inside if mark is not None), None)


def dimension_of(annotation: Any, metadata: Iterable[Any] = ()) -> Dimension | None:
    """Return the dimension that a field's annotation reads, or None if it reads none.

    Parameters
    ----------
    annotation, metadata : ``FieldInfo.annotation`` and ``FieldInfo.metadata``
    """
    mark = mark_of(annotation, metadata)
    return None if mark is None else mark.dimension
