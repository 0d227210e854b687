"""The base of every frozen value that a scenario is made of, and its closed tables of kinds."""

from __future__ import annotations

from typing import Any, ClassVar, get_args

from pydantic import BaseModel, ConfigDict
from pydantic.fields import FieldInfo


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
