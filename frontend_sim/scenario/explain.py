"""What is wrong with a scenario, in the user's words: one problem for each fault."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any, get_args

from pydantic_core.core_schema import ErrorType

from frontend_sim.errors import Problem
from frontend_sim.scenario.fault import Fault, problem
from frontend_sim.scenario.rules import Path
from frontend_sim.scenario.tellers import TELLERS, meant, wrong_kind, wrong_value

_OF_PYDANTIC = frozenset([*get_args(ErrorType), "path_type"])
"""Pydantic's own words for what is wrong."""

MOST_PROBLEMS = 25
"""More problems than this are counted, not listed."""


def explain(
    errors: Sequence[Mapping[str, Any]], data: dict[str, Any], lines: Mapping[Path, int]
) -> tuple[Problem, ...]:
    """Return the problems behind pydantic's error details, in the order of the file.

    Parameters
    ----------
    errors : as ``ValidationError.errors()`` returns them
    data : the file's content
    lines : path -> line, see ``locate``
    """
    faults = [Fault.of(error, data) for error in errors]
    newer = [fault for fault in faults if fault.path == ("format",)]
    if newer and isinstance(data["format"], int) and data["format"] > 1:
        faults = newer
    unknown = [fault for fault in faults if fault.type == "extra_forbidden"]
    misspelt = {(*fault.path[:-1], meant(fault)) for fault in unknown}
    told: dict[Path, Problem] = {}
    for fault in faults:
        if _is_echo(fault) or (fault.type == "missing" and fault.path in misspelt):
            continue
        path, text = _told(fault)
        if path not in told or fault.branch:
            told[path] = problem(path, text, data, lines)
    ordered = sorted(told.values(), key=lambda found: found.line or 0)
    more = len(ordered) - MOST_PROBLEMS
    if more > 0:
        return (*ordered[:MOST_PROBLEMS], Problem(f"and {more} more problems"))
    return tuple(ordered)


def _told(fault: Fault) -> tuple[Path, str]:
    if fault.branch:
        return fault.path, wrong_value(fault)
    if fault.type.startswith("union_tag"):
        return (*fault.path, "kind") if "kind" in fault.given else fault.path, wrong_kind(fault)
    if fault.type not in _OF_PYDANTIC:  # our own error, whose message is complete
        return fault.path, fault.message
    return fault.path, TELLERS.get(fault.type, wrong_value)(fault)


def _is_echo(fault: Fault) -> bool:
    """Return whether an array is only called too short since one of its items is wrong."""
    least = fault.context.get("min_length", 0)
    return fault.type == "too_short" and isinstance(fault.given, list) and len(fault.given) >= least
