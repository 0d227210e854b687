"""The base of every frozen value that a scenario is made of, and its closed tables of kinds."""

from __future__ import annotations

from typing import Any, ClassVar, get_args

from pydantic import BaseModel, ConfigDict, JsonValue
from pydantic.fields import FieldInfo

OPTIONAL_KIND: dict[str, JsonValue] = {"optional": True}
"""``json_schema_extra`` of the kind that a table without one has; there is at most one in a union.
"""


class Value(BaseModel):
    """A frozen value: parameters in SI units, physics as pure functions, no state.

    Unknown keys are refused, and lists become tuples, so that a value can be hashed and compared.
    """

    model_config: ClassVar[ConfigDict] = ConfigDict(
        frozen=True,
        extra="forbid",
        allow_inf_nan=False,
        validate_default=True,
        str_strip_whitespace=True,
        ser_json_inf_nan="constants",
    )


def table(union: Any) -> dict[str, Any]:
    """Return the kind table of a union of values: kind -> class, in the union's order."""
    members = get_args(union)
    if members and isinstance(members[-1], FieldInfo):
        members = get_args(members[0])
    return {member.model_fields["kind"].default: member for member in members}


def may_be_left_out(field: FieldInfo) -> bool:
    """Return whether a field is the kind of a table that need not tell it."""
    return field.json_schema_extra == OPTIONAL_KIND
