"""The tables and keys of a scenario file, as the models of its values know them."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache
from typing import Annotated, Any, get_args, get_origin

from pydantic.fields import FieldInfo

from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.rules import Path
from frontend_sim.scenario.scan_scenario import ScanScenario
from frontend_sim.values import Value, may_be_left_out


@dataclass(frozen=True)
class Table:
    """One kind of table that a file may hold.

    Parameters
    ----------
    path : its keys, ``("stimulus", "tone")``; empty for the top of the file
    repeated : True where the file may hold several, ``[[chain]]``
    kind : its kind, empty where it has none
    model : what it becomes
    """

    path: tuple[str, ...]
    repeated: bool
    kind: str
    model: type[Value]

    @property
    def header(self) -> str:
        """The table's header as a file has it; empty for the top of the file."""
        name = ".".join(self.path)
        if not name:
            return ""
        return f"[[{name}]]" if self.repeated else f"[{name}]"

    @property
    def place(self) -> str:
        """Where the table's keys stand, for messages."""
        if not self.path:
            return "at the top of the file, before the first [table]"
        return f'in {self.header} of kind "{self.kind}"' if self.kind else f"in {self.header}"


def keys(model: type[Value]) -> dict[str, FieldInfo]:
    """Return the keys of a table: its fields without those that no file gives."""
    return {name: field for name, field in model.model_fields.items() if not field.exclude}


def members(annotation: Any) -> tuple[type[Value], ...]:
    """Return the models that a value of this annotation may become, arrays looked through."""
    if isinstance(annotation, type) and issubclass(annotation, Value):
        return (annotation,)
    if get_origin(annotation) is Annotated:
        return members(get_args(annotation)[0])
    found: list[type[Value]] = []
    for inner in get_args(annotation):
        found.extend(members(inner))
    return tuple(found)


def kinds(models: tuple[type[Value], ...]) -> dict[str, type[Value]]:
    """Return kind -> model for models that are told apart by ``kind``; else nothing."""
    if not all("kind" in model.model_fields for model in models):
        return {}
    return {str(model.model_fields["kind"].default): model for model in models}


def kind_in(models: tuple[type[Value], ...], table: Any) -> str | None:
    """Return the kind that a table tells, or the one that a table without any has, else None."""
    if isinstance(table, dict) and "kind" in table:
        return table["kind"] if isinstance(table["kind"], str) else None
    known = kinds(models).items()
    return next((kind for kind, model in known if may_be_left_out(keys(model)["kind"])), None)


def is_array(annotation: Any) -> bool:
    """Return whether a value of this annotation is an array."""
    if get_origin(annotation) is Annotated:
        return is_array(get_args(annotation)[0])
    if get_origin(annotation) is tuple:
        return True
    return any(is_array(inner) for inner in get_args(annotation))


@cache
def tables() -> tuple[Table, ...]:
    """Return every table that a scenario file may hold, in the order of the path of the signal."""
    return (
        Table((), False, "", Scenario),
        *_tables_in(Scenario, (), frozenset()),
        Table(("channel",), True, "", members(ScanScenario.model_fields["channel"].annotation)[0]),
        Table(("scan",), False, "", members(ScanScenario.model_fields["scan"].annotation)[0]),
    )


def root(data: Any) -> type[Value]:
    """Return what a file's content becomes: a scenario of one channel, or a scan of several."""
    scans = isinstance(data, dict) and not {"channel", "scan"}.isdisjoint(data)
    return ScanScenario if scans else Scenario


def _tables_in(
    model: type[Value], path: tuple[str, ...], above: frozenset[type[Value]]
) -> Iterator[Table]:
    for name, field in keys(model).items():
        models = members(field.annotation)
        for kind, member in (kinds(models) or dict.fromkeys([""], None)).items():
            for found in (member,) if member else models:
                if found in above:
                    continue
                here = (*path, name)
                yield Table(here, is_array(field.annotation), kind, found)
                yield from _tables_in(found, here, above | set(models))


def homes(key: str) -> list[Table]:
    """Return the tables that know a key."""
    return [table for table in tables() if key in keys(table.model)]


@dataclass(frozen=True)
class Spot:
    """What stands, or should stand, at a path: its field and annotation, and the table around it.

    All are None where the path leads nowhere that the models know.
    """

    annotation: Any = None
    field: FieldInfo | None = None
    table: type[Value] | None = None


def spot(path: Path, data: Any) -> Spot:
    """Follow a path through the models; ``data`` tells the kinds on the way."""
    here = Spot(annotation=root(data))
    for step in path:
        if isinstance(step, int):
            here = Spot(_element(here.annotation), here.field, here.table)
            data = data[step] if isinstance(data, list) and step < len(data) else None
            continue
        model = model_at(here.annotation, data)
        field = keys(model).get(step) if model else None
        here = Spot(field.annotation if field else None, field, model)
        data = data.get(step) if isinstance(data, dict) else None
    return here


def model_at(annotation: Any, data: Any) -> type[Value] | None:
    """Return the model of a table, by its kind where there are several."""
    models = members(annotation)
    if len(models) == 1:
        return models[0]
    kind = kind_in(models, data) if models else None
    return None if kind is None else kinds(models).get(kind)


def _element(annotation: Any) -> Any:
    if get_origin(annotation) is tuple:
        return get_args(annotation)[0]
    for inner in get_args(annotation):
        if (found := _element(inner)) is not None:
            return found
    return None
