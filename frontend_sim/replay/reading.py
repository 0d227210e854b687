"""A set file, a directory, or a pattern of scenarios becomes a set that can be run."""

from __future__ import annotations

import os
import tomllib
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from frontend_sim.archive.provenance import versions
from frontend_sim.errors import InputError, Problem, ScenarioError, nearest
from frontend_sim.quantities import shown
from frontend_sim.quantities.counting import counted
from frontend_sim.replay.points import axes_of, matching, refuse_many, unlike_names
from frontend_sim.replay.runs import Base, PreparedSet
from frontend_sim.replay.set_model import AROUND_FAILURES, Keep, RunSet
from frontend_sim.replay.spread import CornerSpread, DrawSpread, Spread
from frontend_sim.scenario import load_scenario
from frontend_sim.scenario.content import read_text
from frontend_sim.scenario.key import find
from frontend_sim.scenario.locate import line_of, lines_of
from frontend_sim.scenario.set_marks import looks_like_a_set
from frontend_sim.scenario.syntax import syntax_problem
from frontend_sim.scenario.vary import with_values
from frontend_sim.values import validated

OF_THE_NUMBERS = ("frontend-sim", "numpy", "scipy", "numba")
"""What the last bit of a result may depend on: with other versions, all is run again."""

AnyPath = str | os.PathLike[str]


def read_set(
    source: AnyPath | Sequence[AnyPath], keep: Keep | None = None, around: float | None = None
) -> PreparedSet:
    """Read a set and make it ready; nothing is run.

    Parameters
    ----------
    source : a set file, a scenario, a directory of scenarios, a pattern, or several scenarios
    keep : what is kept of the runs, instead of what the set file says
    around : how long before and behind a failure [s], instead of what the set file says

    Raises
    ------
    ScenarioError
        If a set is wrong: a key to vary is unknown, a pattern finds nothing, it has more than
        ``MOST_RUNS`` runs, it names itself; or around has nothing to stand around.
    """
    given = [source] if isinstance(source, str | os.PathLike) else list(source)
    if len(given) == 1:
        prepared = _read_one(Path(given[0]))
    else:
        prepared = _of_files([Path(each).absolute() for each in given], " ".join(map(str, given)))
    told = {name: version for name, version in versions().items() if name in OF_THE_NUMBERS}
    kept = keep or prepared.keep
    if around is not None and kept != AROUND_FAILURES:
        raise ScenarioError(
            f"around means nothing with keep = {kept!r}; keep {AROUND_FAILURES!r}, or leave it out"
        )
    width = (prepared.around if around is None else around) if kept == AROUND_FAILURES else None
    return _checked(replace(prepared, versions=told, keep=kept, around=width))


def _read_one(place: Path) -> PreparedSet:
    if place.is_dir():
        files = matching("*.toml", place)
        if not files:
            raise ScenarioError(f"{place} holds no scenario; files of scenarios end in .toml")
        return _of_files(files, str(place))
    if not place.exists() and any(sign in str(place) for sign in "*?["):
        files = matching(str(place), Path.cwd())
        if not files:
            raise ScenarioError(f"{str(place)!r} matches no file; check the pattern")
        return _of_files(files, str(place))
    if looks_like_a_set(_content(place)):
        return _of_set_file(place, ())
    return _of_files([place.absolute()], str(place), one=True)


def _of_files(files: Sequence[Path], source: str, one: bool = False) -> PreparedSet:
    """Return a set of scenarios as they are."""
    bases = _bases(files, one)
    return PreparedSet(source, "", None, "failures", "", Path.cwd(), bases)


def _bases(files: Sequence[Path], one: bool = False) -> tuple[Base, ...]:
    """Return scenarios; one that cannot be read becomes a run that fails, unless it is the only."""
    found = []
    for name, file in zip(unlike_names(files), files, strict=True):
        called = "" if one else name
        try:
            if not one and looks_like_a_set(_content(file)):
                raise ScenarioError(f"{file} is a set, not a scenario; replay it on its own")
            found.append(Base(called, file, load_scenario(file)))
        except InputError as error:
            if one:
                raise
            found.append(Base(called, file, None, str(error)))
    if all(base.scenario is None for base in found):
        given = counted(len(found), "scenario")
        raise ScenarioError(f"of {given} none can be run\n{found[0].error}")
    return tuple(found)


def _content(file: Path) -> dict[str, Any]:
    text = read_text(file)
    try:
        return tomllib.loads(text)
    except (ValueError, RecursionError) as error:
        raise ScenarioError([syntax_problem(text, ValueError(str(error)))], str(file)) from None


def _of_set_file(file: Path, above: tuple[Path, ...]) -> PreparedSet:
    """Read a set file, and the sets that it stands on."""
    here = file.resolve()
    if here in above:
        loop = " -> ".join(str(each) for each in (*above[above.index(here) :], here))
        raise ScenarioError(
            f"sets stand on each other in a circle: {loop}; name a scenario as base"
        )
    data = _content(file)
    model = parse_set(data, read_text(file), str(file))
    try:
        inner = _stands_on(model, file, (*above, here))
        return _varied(model, inner, file)
    except InputError as error:
        if isinstance(error, ScenarioError) and error.source:
            raise
        raise ScenarioError(str(error), str(file)) from error


def parse_set(data: dict[str, Any], text: str, name: str) -> RunSet:
    """Return the values of a set file.

    Raises
    ------
    ScenarioError
        If a key is unknown or has a value that it cannot have; it tells key and line.
    """
    try:
        return validated(RunSet, data)
    except ValidationError as error:
        lines = lines_of(text, data)
        problems = [_problem(each, lines) for each in error.errors(include_url=False)]
        # Of the types that a value was tried as, one tells enough.
        told = {problem.key: problem for problem in reversed(problems)}
        raise ScenarioError(list(told.values())[::-1], name) from None


def _problem(error: Any, lines: dict[tuple[str | int, ...], int]) -> Problem:
    path = tuple(error["loc"])
    while path and path not in lines and error["type"] != "missing" and len(path) > 1:
        path = path[:-1]  # the type that was tried
    key = "".join(f"[{step + 1}]" if isinstance(step, int) else f".{step}" for step in path)
    text = _told(error)
    if error["type"] == "extra_forbidden":
        text = f"unknown key{nearest(str(path[-1]), _known(path[:-1]))}"
    elif error["type"] == "missing":
        text = "missing"
    return Problem(text, key.removeprefix("."), line_of(path, lines))


WORDS = {
    "literal_error": "expected {expected}",
    "int_type": "expected a whole number",
    "string_type": "expected text in quotes",
    "greater_than_equal": "at least {ge} is needed",
    "less_than_equal": "at most {le} is possible",
    "less_than": "less than {lt} is needed",
    "finite_number": "a number must be finite",
    "too_short": "give at least {min_length}",
    "string_too_short": "write something, or leave the key out",
    "string_too_long": "at most {max_length} characters are read",
    "tuple_type": "expected a list, [...]",
    "model_type": "expected a table",
}
"""Pydantic's word for what is wrong -> what to tell after what was given."""


def _told(error: Any) -> str:
    """Return what is wrong with a value, in the user's words."""
    words = WORDS.get(error["type"])
    if words is None:
        return str(error["msg"]).removeprefix("Value error, ")
    given = "an empty list" if error["input"] in ([], ()) else shown(error["input"])
    return f"given {given}; {words.format(**error.get('ctx', {}))}"


def _known(path: tuple[str | int, ...]) -> list[str]:
    model: Any = RunSet
    for step in path:
        if isinstance(step, str):
            annotation = model.model_fields[step].annotation
            inner = [annotation, *getattr(annotation, "__args__", ())]
            model = next(kind for kind in inner if hasattr(kind, "model_fields"))
    return [field.alias or name for name, field in model.model_fields.items()]


def _stands_on(model: RunSet, file: Path, above: tuple[Path, ...]) -> PreparedSet:
    directory = file.parent.absolute()
    if model.base is not None:
        base = directory / model.base
        if base.is_file() and looks_like_a_set(_content(base)):
            return _of_set_file(base, above)
        return _of_files([base], str(file), one=True)
    pattern = str(model.scenarios)
    place = directory / pattern
    files = matching("*.toml", place) if place.is_dir() else matching(pattern, directory)
    files = [each for each in files if each.resolve() not in above]
    if not files:
        raise ScenarioError(
            f"scenarios: {pattern!r} matches no file in {directory}; check the pattern, it is "
            "relative to the set file"
        )
    return _of_files(files, str(file))


def _varied(model: RunSet, inner: PreparedSet, file: Path) -> PreparedSet:
    """Return a set with the axes and spreads of a set file around those that it stands on."""
    directory = file.parent.absolute()
    # What this set does not say, the one that it stands on may have said.
    own = model.model_fields_set
    seed = model.seed if "seed" in own or inner.seed is None else inner.seed
    bases = []
    for base in inner.bases:
        if base.scenario is None:
            bases.append(base)
            continue
        axes = axes_of(model.vary, base.scenario, directory)
        _refuse_twice(base, model)
        spreads: list[Spread] = list(base.spreads)
        if model.corners is not None:
            spreads.append(CornerSpread.of(model.corners, base.scenario))
        if model.draws is not None:
            spreads.append(DrawSpread.of(model.draws, base.scenario, seed, directory))
        bases.append(replace(base, axes=(*base.axes, *axes), spreads=tuple(spreads)))
    keys = {
        each.key
        for each in model.vary
        for base in bases
        if base.scenario is not None and isinstance(find(base.scenario, each.key).value, Path)
    }
    return PreparedSet(
        source=str(file),
        title=model.title or inner.title,
        seed=seed,
        keep=model.keep if "keep" in own else inner.keep,
        around=model.around if "keep" in own else inner.around,
        text=read_text(file),
        directory=directory,
        bases=tuple(bases),
        file_keys=inner.file_keys | keys,
    )


def _refuse_twice(base: Base, model: RunSet) -> None:
    """Refuse what a set varies that it has from the set that it stands on."""
    assert base.scenario is not None
    inner = {find(base.scenario, key).path for axis in base.axes for key in axis[0].values}
    for place, each in enumerate(model.vary):
        if find(base.scenario, each.key).path in inner:
            raise ScenarioError(
                f"vary[{place + 1}]: {each.key} is varied by the set that this one stands on"
            )
    if base.spreads and (model.corners is not None or model.draws is not None):
        raise ScenarioError("corners and draws stand in one set of those that stand on each other")


def _checked(prepared: PreparedSet) -> PreparedSet:
    """Refuse what no night could run."""
    factors = [
        " x ".join(
            [*(str(len(axis)) for axis in base.axes)]
            + ([str(sum(each.count for each in base.spreads))] if base.spreads else [])
        )
        for base in prepared.bases[:3]
    ]
    refuse_many(prepared.count, "; ".join(filter(None, factors)), prepared.source)
    for base in prepared.bases:
        if base.scenario is not None and base.axes:
            _refuse_unfit(base, prepared)
    return prepared


MOST_TRIED = 1000
"""Points of one key that are tried before the night."""


def _refuse_unfit(base: Base, prepared: PreparedSet) -> None:
    """Refuse values that fit neither the scenario nor the first values of the other keys."""
    assert base.scenario is not None
    firsts: dict[str, Any] = {}
    for axis in base.axes:
        firsts |= axis[0].values
    for axis in base.axes:
        tried = axis if len(axis) <= MOST_TRIED else (axis[0], axis[-1])
        for point in tried:
            try:
                with_values(base.scenario, point.values, prepared.directory)
            except InputError as error:
                try:
                    with_values(base.scenario, {**firsts, **point.values}, prepared.directory)
                except InputError:
                    raise ScenarioError(f"{point.label}: {error}", prepared.source) from error
