"""Writes the tables of keys in ``scenario.md`` from the models; run it after adding a key or kind.

python docs/scenario_tables.py
"""

from __future__ import annotations

import inspect
from pathlib import Path
from typing import Any

from pydantic.fields import FieldInfo

from frontend_sim.quantities import ReadsLevel, as_text, mark_of, shown
from frontend_sim.scenario.expectation import expected
from frontend_sim.scenario.scan_scenario import ScanScenario
from frontend_sim.scenario.tables import Table, is_array, keys, members, tables
from frontend_sim.values import Value, may_be_left_out

PAGE = Path(__file__).with_name("scenario.md")
BEGIN = "<!-- keys: written by scenario_tables.py, do not edit -->"
END = "<!-- end of keys -->"


def page(text: str) -> str:
    """Return the page with the part between its marks written anew."""
    before, rest = text.split(BEGIN)
    _, after = rest.split(END)
    return f"{before}{BEGIN}\n\n{reference()}\n{END}{after}"


def reference() -> str:
    """Return the headings, explanations and keys of every table of a scenario file."""
    parts: list[str] = []
    above: tuple[str, ...] = ("nothing",)
    for table in tables():
        if len(table.path) < 2 and table.path != above:
            parts.append(_heading(table))
        if table.kind:
            parts.append(f'### kind = "{table.kind}"\n')
        elif len(table.path) > 1:
            parts.append(f"#### {table.header}\n")
        above = table.path[:1]
        if table.path:
            parts.append(f"{inspect.getdoc(table.model)}\n")
        parts.append(_keys_of(table.model))
    return "\n".join(parts)


def _heading(table: Table) -> str:
    if not table.path:
        return "## Top of the file\n"
    field = _field_of(table)
    text = field.description or ""
    if (inspect.getdoc(table.model) or "").lower().startswith(text):
        return f"## {table.header}\n"  # the explanation follows
    return f"## {table.header}\n\n{text[:1].upper()}{text[1:]}.\n"


def _field_of(table: Table) -> FieldInfo:
    name = table.path[0]
    return {**keys(ScanScenario), **keys(tables()[0].model)}[name]


def _keys_of(model: type[Value]) -> str:
    rows = ["| key | unit | default | meaning |", "|---|---|---|---|"]
    rows += [_row(name, field) for name, field in _ordered(model)]
    return "\n".join(rows) + "\n"


def _ordered(model: type[Value]) -> list[tuple[str, FieldInfo]]:
    return sorted(keys(model).items(), key=lambda item: item[0] != "kind")


def _row(name: str, field: FieldInfo) -> str:
    cells = (f"`{name}`", _unit(field), _default(name, field), _meaning(name, field))
    return f"| {' | '.join(cell.replace('|', chr(92) + '|') for cell in cells)} |"


def _unit(field: FieldInfo) -> str:
    mark = mark_of(field.annotation, field.metadata)
    extra = field.json_schema_extra
    if mark is not None:
        return f"{mark.dimension.unit or '1'}{' ±' if mark.spread else ''}"
    return str(extra.get("unit", "")) if isinstance(extra, dict) else ""


def _default(name: str, field: FieldInfo) -> str:
    if (name == "kind" and not may_be_left_out(field)) or field.is_required():
        return "required"
    value: Any = field.get_default()
    if value is None or isinstance(value, Value) or value in ((), ""):
        return "left out"
    mark = mark_of(field.annotation, field.metadata)
    if isinstance(mark, ReadsLevel):
        return "0" if value == 0.0 else str(value)
    if mark is not None:
        return as_text(value, mark.dimension)
    return f"`{shown(value)}`"


def _meaning(name: str, field: FieldInfo) -> str:
    if name == "kind":
        return f"`{shown(field.default)}`"
    text = field.description or ""
    if members(field.annotation):
        return f"{text}; {'tables' if is_array(field.annotation) else 'a table'}, see below"
    if mark_of(field.annotation, field.metadata) is None:
        text += f" ({expected(field.annotation, field.metadata)})"
    return text


if __name__ == "__main__":
    PAGE.write_text(page(PAGE.read_text(encoding="utf-8")), encoding="utf-8")
