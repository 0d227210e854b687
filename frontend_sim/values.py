"""The base of every frozen value that a scenario is made of, and its closed tables of kinds."""

from __future__ import annotations

import json
from collections.abc import Callable, Mapping
from contextlib import suppress
from typing import Any, ClassVar, Self, TypeVar, get_args

from pydantic import BaseModel, ConfigDict, JsonValue, ValidationError
from pydantic.fields import FieldInfo

from frontend_sim.errors import Problem, ScenarioError, nearest
from frontend_sim.quantities import shown

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

    def __init__(self, /, **given: Any) -> None:
        """Make a value from its parameters.

        Raises
        ------
        ScenarioError
            If one is wrong, missing or unknown; ``problems`` lists which, and what it may be.
        """
        try:
            super().__init__(**given)
        except ValidationError as error:
            raise type(self)._refusal(error, given) from None

    # Pydantic goes on to make values inside of others by itself, and so knows the path of a fault.
    __init__.__pydantic_base_init__ = True  # type: ignore[attr-defined]  # as on its own __init__

    @classmethod
    def model_validate(cls, obj: Any, **options: Any) -> Self:
        """Make a value from plain data, for instance the tables of a file.

        Raises
        ------
        ScenarioError
            As the constructor does.
        """
        return cls._made(super().model_validate, obj, options)

    @classmethod
    def model_validate_json(cls, json_data: str | bytes | bytearray, **options: Any) -> Self:
        """Make a value from JSON. Raises ScenarioError as the constructor does."""
        return cls._made(super().model_validate_json, json_data, options)

    @classmethod
    def model_validate_strings(cls, obj: Any, **options: Any) -> Self:
        """Make a value from plain data that is all text. Raises as the constructor does."""
        return cls._made(super().model_validate_strings, obj, options)

    @classmethod
    def _made(cls, make: Callable[..., Self], given: Any, options: dict[str, Any]) -> Self:
        try:
            return make(given, **options)
        except ValidationError as error:
            if isinstance(given, (str, bytes, bytearray)):
                with suppress(ValueError):
                    given = json.loads(given)
            raise cls._refusal(error, given) from None

    def __setattr__(self, name: str, value: Any) -> None:
        """Refuse to change a value.

        Raises
        ------
        ScenarioError
            Always, but for what the value keeps for itself.
        """
        try:
            super().__setattr__(name, value)
        except ValidationError:
            raise self._frozen(name) from None

    def __delattr__(self, name: str) -> None:
        """Refuse to change a value. Raises ScenarioError."""
        try:
            super().__delattr__(name)
        except ValidationError:
            raise self._frozen(name) from None

    def _frozen(self, name: str) -> ScenarioError:
        reason = "a value is frozen; make another one with what is to be different"
        return ScenarioError((Problem(reason, name),), type(self).__name__)

    @classmethod
    def _refusal(cls, error: ValidationError, given: Any) -> ScenarioError:
        return ScenarioError(cls._problems(error, given), cls.__name__)

    @classmethod
    def _problems(cls, error: ValidationError, given: Any) -> tuple[Problem, ...]:
        """Return what is wrong with what was given, in our own words."""
        return tuple(
            Problem(_told(detail, cls), _key_of(detail))
            for detail in error.errors(include_url=False)
        )


AnyValue = TypeVar("AnyValue", bound=Value)


def validated(kind: type[AnyValue], data: Any, context: Any = None) -> AnyValue:
    """Make a value from plain data, for a reader that tells faults in words of its own.

    Raises
    ------
    pydantic.ValidationError
        If a parameter is wrong, missing or unknown.
    """
    made: AnyValue = kind.__pydantic_validator__.validate_python(data, context=context)
    return made


def _key_of(detail: Mapping[str, Any]) -> str:
    """Return where a fault is: ``parts[2].sine.amplitude``, counted from 1."""
    path = (*detail["loc"], *detail.get("ctx", {}).get("path", ()))
    steps = (f"[{step + 1}]" if isinstance(step, int) else f".{step}" for step in path)
    return "".join(steps).removeprefix(".")


def _told(detail: Mapping[str, Any], kind: type[Value]) -> str:
    """Return what is wrong, from one of pydantic's error details."""
    context, message = detail.get("ctx", {}), str(detail["msg"])
    if "reason" in context:  # our own error, whose message is complete
        return str(context["reason"])
    if detail["type"] == "json_invalid":
        return f"this is no JSON: {context['error']}"
    if "error" in context:
        return str(context["error"])
    path, fields = detail["loc"], kind.model_fields
    if detail["type"] == "extra_forbidden":
        return f"unknown here{nearest(str(path[-1]), fields) if len(path) == 1 else ''}"
    if detail["type"] == "missing":
        known = fields.get(str(path[-1])) if len(path) == 1 else None
        return f"missing ({known.description})" if known else "missing"
    wanted = message.replace("Input should be", "must be")
    return f"given {shown(detail['input'])}; {wanted[:1].lower()}{wanted[1:]}"


def table(union: Any) -> dict[str, Any]:
    """Return the kind table of a union of values: kind -> class, in the union's order."""
    members = get_args(union)
    if members and isinstance(members[-1], FieldInfo):
        members = get_args(members[0])
    return {member.model_fields["kind"].default: member for member in members}


def may_be_left_out(field: FieldInfo) -> bool:
    """Return whether a field is the kind of a table that need not tell it."""
    return field.json_schema_extra == OPTIONAL_KIND
