"""What the JSON Schema says of quantities."""

from __future__ import annotations

import math
import re
from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from frontend_sim.quantities.dimension import DRIFT, FRACTION, Bounds, Dimension
from frontend_sim.quantities.pattern import pattern
from frontend_sim.quantities.preferred import SERIES

if TYPE_CHECKING:
    from pydantic.json_schema import JsonSchemaValue


def limits_of(bounds: Bounds, given: Mapping[str, Any]) -> dict[str, float]:
    """Return the limits of a bare number in the schema's words.

    Parameters
    ----------
    given : limits of the field itself, under pydantic's names or the schema's; they come first
    """
    named = {
        "exclusiveMinimum": ("gt", bounds.above),
        "minimum": ("ge", bounds.least),
        "exclusiveMaximum": ("lt", bounds.below),
        "maximum": ("le", bounds.most),
    }
    limits = {
        key: float(next((given[k] for k in (key, name) if k in given), limit))
        for key, (name, limit) in named.items()
    }
    return {key: limit for key, limit in limits.items() if math.isfinite(limit)}


def quantity_schema(dimension: Dimension, limits: Mapping[str, float]) -> JsonSchemaValue:
    """Return the schema of text with a unit or a bare number."""
    return {
        "type": ["string", "number"],
        "pattern": pattern(dimension),
        "unit": dimension.unit or "1",
        "quantity": dimension.name,
        "examples": re.findall(r'"([^"]+)"', dimension.example),
        **limits,
    }


def table_schema(value: JsonSchemaValue) -> JsonSchemaValue:
    """Return what a part's table adds to the schema of its value."""
    limits = {"minimum": 0.0, "exclusiveMaximum": 1.0}
    inner = {key: item for key, item in value.items() if key not in ("default", "description")}
    properties = {
        "value": {**inner, "type": ["string", "number"], "description": "nominal value"},
        "tolerance": {
            **quantity_schema(FRACTION, limits),
            "description": "largest deviation from the nominal value, to either side, as a share",
        },
        "drift": {
            **quantity_schema(DRIFT, {}),
            "description": "relative change with temperature, from 25 degC on",
        },
        "series": {
            "enum": list(SERIES),
            "description": "series of preferred numbers (IEC 60063) that the value must be from",
        },
    }
    return {"properties": properties, "required": ["value"], "additionalProperties": False}
