"""What a key expects, in plain words and as an example."""

from __future__ import annotations

from collections.abc import Iterable
from pathlib import Path
from types import NoneType, UnionType
from typing import Annotated, Any, Literal, Union, get_args, get_origin

from pydantic import BeforeValidator
from pydantic.fields import FieldInfo
from pydantic_core import PydanticUndefined

from frontend_sim.quantities import dimension_of, shown
from frontend_sim.scenario.tables import is_array, keys, kind_in, kinds, members

_PLAIN = {
    bool: "true or false",
    float: "a number",
    str: "text in quotes",
    Path: "the name of a file, in quotes",
}

_OPEN = (PydanticUndefined, Any)
"""What a validator may say of its input without saying anything."""


def expected(annotation: Any, metadata: Iterable[Any] = ()) -> str:
    """Return what a value of this annotation may be: ``a whole number from 4 to 32``."""
    marks = [mark for given in metadata for mark in (getattr(given, "metadata", None) or [given])]
    if get_origin(annotation) is Annotated:
        inner, *more = get_args(annotation)
        return expected(inner, [*more, *marks])
    dimension = dimension_of(annotation, marks)
    if dimension is not None and not is_array(annotation):
        return dimension.expected
    for mark in marks:
        if isinstance(mark, BeforeValidator) and mark.json_schema_input_type not in _OPEN:
            return expected(mark.json_schema_input_type)
    if members(annotation):
        return "an array of tables" if is_array(annotation) else "a table"
    origin = get_origin(annotation)
    if origin is Literal:
        values = [shown(value) for value in get_args(annotation)]
        return values[0] if len(values) == 1 else f"one of {', '.join(values)}"
    if origin in (Union, UnionType):
        inner_kinds = [kind for kind in get_args(annotation) if kind is not NoneType]
        return " or ".join(dict.fromkeys(expected(kind, marks) for kind in inner_kinds))
    if origin is tuple:
        return _array(annotation)
    if annotation is int:
        return f"a whole number{_limits(marks)}"
    return _PLAIN.get(annotation, "another value")


def _array(annotation: Any) -> str:
    inner = get_args(annotation)
    if len(inner) == 2 and inner[1] is Ellipsis:
        return f"an array, each item {expected(inner[0])}"
    return f"an array of {len(inner)} items, each {expected(inner[0])}"


def _limits(marks: Iterable[Any]) -> str:
    found = {name: getattr(mark, name) for mark in marks for name in ("ge", "gt", "le", "lt")
             if getattr(mark, name, None) is not None}  # fmt: skip
    least = found.get("ge", found["gt"] + 1 if "gt" in found else None)
    most = found.get("le", found["lt"] - 1 if "lt" in found else None)
    if least is not None and most is not None:
        return f" from {least} to {most}"
    if least is not None:
        return f" of at least {least}"
    return f" of at most {most}" if most is not None else ""


def example(name: str, field: FieldInfo) -> str:
    """Return a line that gives a key a value, ``resistance = "10 kohm"``, or ""."""
    extra = field.json_schema_extra
    given = field.examples or (extra.get("examples") if isinstance(extra, dict) else None)
    if isinstance(given, list) and given:
        return f"{name} = {shown(given[0])}"
    if is_array(field.annotation):
        return ""
    dimension = dimension_of(field.annotation, field.metadata)
    if dimension is not None:
        return f"{name} = {dimension.first_example}"
    if get_origin(field.annotation) is Literal:
        return f"{name} = {shown(get_args(field.annotation)[0])}"
    return f'{name} = "..."' if field.annotation in (str, Path) else ""


def outline(annotation: Any) -> str:
    """Return what a missing table needs: its kind, or its required keys with examples.

    Where a table may leave its kind out, these are the keys of the kind that it then has.
    """
    models = members(annotation)
    by_kind, usual = kinds(models), kind_in(models, None)
    if len(by_kind) > 1 and usual is None:
        return f"a kind, one of {', '.join(map(shown, by_kind))}, and the keys of that kind"
    model = models[0] if usual is None else by_kind[usual]
    needed = [
        example(name, field) or f"{name} ({expected(field.annotation, field.metadata)})"
        for name, field in keys(model).items()
        if field.is_required()
    ]
    return ", ".join(needed) if needed else "no key of its own"
