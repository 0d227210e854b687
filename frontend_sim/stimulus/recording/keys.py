"""What the keys of a recording take: files, columns, units."""

from __future__ import annotations

import os
from importlib.util import find_spec
from pathlib import Path
from typing import Annotated

from pydantic import AfterValidator, BeforeValidator, Field, ValidationInfo
from pydantic_core import PydanticCustomError

from frontend_sim.errors import QuantityError
from frontend_sim.quantities import TIME, parse_level
from frontend_sim.stimulus.recording.units import factor_of


def _installed(name: str) -> str:
    """Refuse a package that is not installed; it is looked up, never imported."""
    if not name.isidentifier() or _folder_of(name) is None:
        raise PydanticCustomError(
            "package",
            "no package {name} is installed; install it, or leave out package and give the path "
            "of a file",
            {"name": repr(name)},
        )
    return name


def _folder_of(package: str) -> Path | None:
    spec = find_spec(package)
    folders = list(spec.submodule_search_locations or []) if spec is not None else []
    return Path(folders[0]) if folders else None


def _absolute(value: Path, info: ValidationInfo) -> Path:
    """Make a path absolute, from the folder of the package or else of the scenario."""
    folder = (info.context or {}).get("directory")
    package = info.data.get("package")
    if package is not None:
        folder = _folder_of(package)
    return Path(os.path.abspath(Path(folder, value) if folder is not None else value))


def _column(value: object) -> object:
    if isinstance(value, str) and value.strip():
        return value.strip()
    if isinstance(value, int) and not isinstance(value, bool) and value >= 1:
        return value
    raise PydanticCustomError(
        "column",
        "given {given}; expected a name, or a number counted from 1",
        {"given": repr(value)},
    )


def _unit_of_time(unit: str) -> str:
    try:
        factor_of(unit, TIME)
    except QuantityError as error:
        raise PydanticCustomError("unit", "{reason}", {"reason": str(error)}) from None
    return unit


def _unit_of_a_signal(unit: str) -> str:
    """Refuse what is the unit of no signal; the scenario knows which unit it must be."""
    try:
        parse_level(f"1 {unit}", "difference")
    except QuantityError:
        reason = f"given {unit!r}, which is not a unit of a signal; expected for instance mV"
        raise PydanticCustomError("unit", "{reason}", {"reason": reason}) from None
    return unit


Package = Annotated[str, AfterValidator(_installed)]
"""Name of a Python package that is installed."""

FilePath = Annotated[Path, AfterValidator(_absolute)]
"""A file, relative to the package before it or else to the scenario."""

Column = Annotated[int | str, BeforeValidator(_column, json_schema_input_type=int | str)]
"""Name or number of a column, from 1."""

Name = Annotated[str, Field(min_length=1)]
"""A name that is not empty."""

TimeUnit = Annotated[Name, AfterValidator(_unit_of_time)]
SignalUnit = Annotated[Name, AfterValidator(_unit_of_a_signal)]
