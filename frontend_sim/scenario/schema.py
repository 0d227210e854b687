"""The JSON Schema of the scenario file, for editors."""

from __future__ import annotations

import inspect
from collections.abc import Iterator
from typing import Any

from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.scan_scenario import ScanScenario

Schema = dict[str, Any]

_OF_SCANS = ("channel", "scan")
"""Tables that a file has instead of [stimulus] and [[chain]]."""

DIALECT = "https://json-schema.org/draft/2020-12/schema"


def json_schema() -> dict[str, Any]:
    """Return the JSON Schema (draft 2020-12) of the scenario file.

    Every key has a ``description``, every number a ``unit`` (``"1"`` where it has none); numbers
    that are read with a unit may be text or a bare number in SI, and have a ``quantity``.
    """
    schema: Schema = Scenario.model_json_schema(by_alias=False, mode="validation")
    scan: Schema = ScanScenario.model_json_schema(by_alias=False, mode="validation")
    schema["properties"] |= {name: scan["properties"][name] for name in _OF_SCANS}
    schema["$defs"] |= scan["$defs"]
    schema["required"] = ["adc"]
    del schema["properties"]["source"]
    for part in _parts(schema):
        _drop_null(part)
        part.pop("discriminator", None)
    for part in _parts(schema):
        for name, value in part.get("properties", {}).items():
            _complete(name, value, part)
    for name, definition in schema["$defs"].items():
        definition["title"] = definition["properties"].get("kind", {}).get("const", name)
    schema.pop("description", None)
    schema["oneOf"] = [
        {"required": ["stimulus"], "not": _any_of(*_OF_SCANS)},
        {"required": ["channel"], "not": _any_of("stimulus", "chain")},
    ]
    head = {
        "$schema": DIALECT,
        "title": "Scenario of frontend-sim",
        "description": _paragraph(Scenario),
    }
    return {**head, **{key: value for key, value in schema.items() if key != "title"}}


def _any_of(*names: str) -> Schema:
    return {"anyOf": [{"required": [name]} for name in names]}


def _parts(schema: Any) -> Iterator[Schema]:
    """Return a schema and all schemas inside it."""
    if isinstance(schema, dict):
        yield schema
        for value in schema.values():
            yield from _parts(value)
    elif isinstance(schema, list):
        for value in schema:
            yield from _parts(value)


def _drop_null(part: Schema) -> None:
    """Take null out: TOML has none, a key is left out instead."""
    choices = part.get("anyOf")
    if not isinstance(choices, list) or {"type": "null"} not in choices:
        return
    left = [choice for choice in choices if choice != {"type": "null"}]
    if part.get("default", 0) is None:
        del part["default"]
    if len(left) > 1:
        part["anyOf"] = left
        return
    del part["anyOf"]
    for key, value in left[0].items():
        part.setdefault(key, value)


def _complete(name: str, value: Schema, table: Schema) -> None:
    """Give a key what pydantic leaves out: the kind as a constant, required as a rule, a unit."""
    value.pop("title", None)
    if name == "kind":
        value["description"] = str(table.get("description", "")).split("\n")[0]
        if not value.pop("optional", False):
            value.pop("default", None)
            table["required"] = ["kind", *table.get("required", [])]
    if isinstance(value.get("default"), dict):
        del value["default"]
    if "auto" in value.get("examples", ()) and "pattern" in value:
        value["pattern"] = f"^auto$|{value['pattern']}"
    numbers = [part for part in _parts(value) if part.get("type") in ("integer", "number")]
    if numbers and "unit" not in value:
        value["unit"] = "1"
    if value.get("unit", "1") != "1":  # an editor shows the description only
        value["description"] = f"{value['description']} [{value['unit']}]"


def _paragraph(model: type) -> str:
    return inspect.cleandoc(model.__doc__ or "").split("\n\n")[0].replace("\n", " ")
