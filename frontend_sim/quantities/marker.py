"""The marker that makes a pydantic field read quantities."""

from __future__ import annotations

import math
import re
from collections.abc import Iterable
from dataclasses import dataclass
from typing import TYPE_CHECKING, Annotated, Any, get_args

from pydantic import BeforeValidator, GetJsonSchemaHandler
from pydantic_core import CoreSchema, PydanticCustomError

from frontend_sim.errors import QuantityError
from frontend_sim.quantities.dimension import Bounds, Dimension
from frontend_sim.quantities.reading import parse, shown

if TYPE_CHECKING:
    from pydantic.json_schema import JsonSchemaValue


@dataclass(frozen=True)
class Reads:
    """Pydantic marker: read the quantity, check its bounds, and describe it in the JSON Schema.

    None never reaches the marker where a field is optional; where it is not, None is refused.
    """

    dimension: Dimension
    bounds: Bounds

    def read(self, value: object) -> float:
        """Return the value in SI; raises pydantic's own kind of error, with our message."""
        try:
            number = parse(value, self.dimension)
        except QuantityError as error:
            raise PydanticCustomError("quantity", "{reason}", {"reason": str(error)}) from None
        complaint = self.bounds.complaint(number, self.dimension.unit)
        if complaint is not None:
            reason = f"given {shown(value)}; {self.dimension.noun} here {complaint}"
            raise PydanticCustomError("quantity", "{reason}", {"reason": reason})
        return number

    def __get_pydantic_core_schema__(self, source: Any, handler: Any) -> CoreSchema:
        """Put the reading in front of the field's own check."""
        inner: CoreSchema = handler(Annotated[source, BeforeValidator(self.read)])
        return inner

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> JsonSchemaValue:
        """Return text or a number, with unit, examples, and the bounds of a bare number."""
        inner: JsonSchemaValue = handler(
            schema
        )  # holds what Field(ge=...) adds, under pydantic's or JSON's name
        bounds = {
            "exclusiveMinimum": ("gt", self.bounds.above),
            "minimum": ("ge", self.bounds.least),
            "exclusiveMaximum": ("lt", self.bounds.below),
            "maximum": ("le", self.bounds.most),
        }
        limits = {
            key: float(next((inner[k] for k in (key, name) if k in inner), limit))
            for key, (name, limit) in bounds.items()
        }
        result: JsonSchemaValue = {
            "type": ["string", "number"],
            "unit": self.dimension.unit or "1",
            "quantity": self.dimension.name,
            "examples": re.findall(r'"([^"]+)"', self.dimension.example),
            **{key: limit for key, limit in limits.items() if math.isfinite(limit)},
        }
        return result


def dimension_of(annotation: Any, metadata: Iterable[Any] = ()) -> Dimension | None:
    """Return the dimension that a field's annotation reads, or None if it reads none.

    Parameters
    ----------
    annotation, metadata : ``FieldInfo.annotation`` and ``FieldInfo.metadata``
    """
    for mark in metadata:
        if isinstance(mark, Reads):
            return mark.dimension
    for inner in get_args(annotation):
        if isinstance(inner, Reads):
            return inner.dimension
        if (found := dimension_of(inner)) is not None:
            return found
    return None
