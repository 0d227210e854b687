"""The points of an axis of a set: values of keys that change together, and their names."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from frontend_sim.errors import ScenarioError
from frontend_sim.quantities import as_text
from frontend_sim.quantities.counting import counted
from frontend_sim.replay.set_model import MOST_RUNS, Vary
from frontend_sim.scenario import AnyScenario
from frontend_sim.scenario.key import find, read_number
from frontend_sim.scenario.vary import with_values

DIGITS = 6
"""Significant digits of a number in a name, where these tell all values apart."""


@dataclass(frozen=True)
class Point:
    """Values of one or more keys, and their part of a run's name."""

    label: str
    values: Mapping[str, Any]


Axis = tuple[Point, ...]


def axes_of(vary: Sequence[Vary], scenario: AnyScenario, directory: Path) -> tuple[Axis, ...]:
    """Return the axes of a set: one for each key, or for each word in ``together``.

    Parameters
    ----------
    scenario : that the keys are looked up in
    directory : what patterns of files are relative to

    Raises
    ------
    ScenarioError
        If a key is unknown, a value cannot be read, a pattern finds nothing, or keys that change
        together have different numbers of values.
    """
    _refuse_double(vary, scenario)
    names = _short_names(vary)
    given = [
        _given(each, f"vary[{place + 1}]", scenario, directory) for place, each in enumerate(vary)
    ]
    # Before any value gets a name, which takes its time.
    sizes: dict[object, int] = {}
    for place, each in enumerate(vary):
        sizes[each.together or place] = len(given[place])
    refuse_many(math.prod(sizes.values()), " x ".join(map(str, sizes.values())))
    rows: dict[object, list[tuple[Vary, str, list[tuple[str, Any]]]]] = {}
    for place, each in enumerate(vary):
        found = _named(each, given[place], scenario, directory)
        rows.setdefault(each.together or place, []).append((each, names[place], found))
    return tuple(_axis(group) for group in rows.values())


def refuse_many(count: int, factors: str, source: str = "") -> None:
    """Refuse more runs than a night may have.

    Parameters
    ----------
    count : how many runs there are
    factors : what the count is the product of

    Raises
    ------
    ScenarioError
        If they are more than ``MOST_RUNS``.
    """
    if count > MOST_RUNS:
        raise ScenarioError(
            f"the set has {counted(count, 'run')} ({factors}), the limit is {MOST_RUNS:,}; vary "
            "fewer keys, give them fewer values, change keys together, name fewer parts in "
            "corners, or take random draws",
            source,
        )


def _refuse_double(vary: Sequence[Vary], scenario: AnyScenario) -> None:
    paths: dict[Any, str] = {}
    for each in vary:
        path = find(scenario, each.key).path
        if path in paths:
            raise ScenarioError(
                f"{each.key} is varied twice, also as {paths[path]}; list all its values in one"
            )
        paths[path] = each.key


def _axis(group: list[tuple[Vary, str, list[tuple[str, Any]]]]) -> Axis:
    counts = {len(found) for _, _, found in group}
    if len(counts) > 1:
        told = ", ".join(f"{each.key} has {len(found)}" for each, _, found in group)
        raise ScenarioError(
            f"keys that change together = {group[0][0].together!r} need as many values as each "
            f"other: {told}"
        )
    return tuple(
        Point(
            ",".join(
                f"{name}={label}" for (_, name, _), (label, _) in zip(group, row, strict=True)
            ),
            {each.key: value for (each, _, _), (_, value) in zip(group, row, strict=True)},
        )
        for row in zip(*(found for _, _, found in group), strict=True)
    )


def _short_names(vary: Sequence[Vary]) -> list[str]:
    """Return the last step of each key, or the whole key where two would be called the same."""
    short = [each.name or each.key.rpartition(".")[2] for each in vary]
    return [
        name if each.name or short.count(name) == 1 else each.key
        for name, each in zip(short, vary, strict=True)
    ]


def _given(vary: Vary, where: str, scenario: AnyScenario, directory: Path) -> list[Any]:
    """Return the values of one key as they were given; of a pattern, its files."""
    if vary.glob is not None:
        return _files(vary, where, directory)
    return _range(vary, where, scenario) if vary.values is None else list(vary.values)


def _named(
    vary: Vary, given: list[Any], scenario: AnyScenario, directory: Path
) -> list[tuple[str, Any]]:
    """Return label and value of each point of one key."""
    if vary.glob is not None:
        names = unlike_names(given)
        return [(name, str(file)) for name, file in zip(names, given, strict=True)]
    found = find(scenario, vary.key)
    if found.dimension is not None and vary.values is not None:
        given = [_in_si(scenario, vary.key, value) for value in given]
    if isinstance(found.value, Path):
        given = [str(_placed(Path(str(value)), scenario, directory)) for value in given]
        return [(Path(value).stem, value) for value in given]
    return list(zip(_labels(vary.key, scenario, given), given, strict=True))


def _in_si(scenario: AnyScenario, key: str, value: Any) -> Any:
    """Return a quantity as a number in SI; a word that the key also takes stays as it is."""
    try:
        return read_number(scenario, key, value)
    except ScenarioError:
        if not isinstance(value, str) or any(sign.isdigit() for sign in value):
            raise
        with_values(scenario, {key: value})
        return value


def _placed(file: Path, scenario: AnyScenario, directory: Path) -> Path:
    """Return a file as seen from the set; one of an installed package stays as it is."""
    stimulus = getattr(scenario, "stimulus", None)
    packaged = getattr(stimulus, "package", None) is not None
    return file if packaged else (directory / file).absolute()


def _files(vary: Vary, where: str, directory: Path) -> list[Path]:
    files = matching(str(vary.glob), directory)
    if not files:
        raise ScenarioError(
            f"{where}.glob: {vary.glob!r} matches no file in {directory}; check the pattern, it is "
            "relative to the set file"
        )
    return files


def matching(pattern: str, directory: Path) -> list[Path]:
    """Return the files that a pattern finds, sorted by name; it may be absolute."""
    given = Path(pattern)
    root = Path(given.anchor) if given.is_absolute() else directory
    inside = str(given.relative_to(given.anchor)) if given.is_absolute() else pattern
    try:
        return sorted(file.absolute() for file in root.glob(inside) if file.is_file())
    except (ValueError, NotImplementedError, IndexError) as error:  # as pathlib refuses, by case
        raise ScenarioError(f"{pattern!r} is no pattern of files: {error}") from None


def unlike_names(files: Sequence[Path]) -> list[str]:
    """Return a name for each file: without folder and suffix where that tells them apart.

    Raises
    ------
    ScenarioError
        If a file is given twice.
    """
    double, times = Counter(files).most_common(1)[0] if files else (Path(), 0)
    if times > 1:
        raise ScenarioError(f"{double} is given {times} times; every run must differ from others")
    for name in (
        lambda file: file.stem,
        lambda file: file.name,
        lambda file: f"{file.parent.name}_{file.name}",
    ):
        names = [name(file) for file in files]
        if len(set(names)) == len(names):
            return names
    return [str(file) for file in files]


def _range(vary: Vary, where: str, scenario: AnyScenario) -> list[float | int]:
    points = vary.points or 2
    if points > MOST_RUNS:
        raise ScenarioError(
            f"{where}.points: {points:,} are too many; a set has up to {MOST_RUNS:,} runs"
        )
    start, stop = (read_number(scenario, vary.key, end) for end in (vary.start, vary.stop))
    if start == stop:
        raise ScenarioError(f"{where}: from and to are the same; give values = [...] instead")
    if vary.spacing == "linear":
        row = np.linspace(start, stop, points)
    else:
        if start <= 0.0 or stop <= 0.0:
            raise ScenarioError(f"{where}: logarithmic spacing needs from and to above 0")
        row = np.geomspace(start, stop, points)
    if type(find(scenario, vary.key).value) is int:
        whole = [round(number) for number in row.tolist()]
        return list(dict.fromkeys(whole))
    return list(row.tolist())


def _labels(key: str, scenario: AnyScenario, given: Sequence[Any]) -> list[str]:
    dimension = find(scenario, key).dimension
    for digits in (DIGITS, None):
        labels = []
        for value in given:
            if dimension is None or isinstance(value, str):
                number = isinstance(value, float) and digits
                text = f"{value:.{DIGITS}g}" if number else str(value)
            else:
                text = as_text(value, dimension, digits)
            labels.append(text.replace(" ", ""))
        if len(set(labels)) == len(labels):
            return labels
    double = Counter(labels).most_common(1)[0][0]
    raise ScenarioError(f"{key}: {double} is listed twice; every run must differ from the others")


def count_of(axes: Sequence[Axis]) -> int:
    """Return how many combinations axes have."""
    total = 1
    for axis in axes:
        total *= len(axis)
    return total


def combinations(axes: Sequence[Axis]) -> Iterator[tuple[str, dict[str, Any]]]:
    """Return label and values of every combination, the last axis the fastest."""
    if not axes:
        yield "", {}
        return
    for label, values in combinations(axes[:-1]):
        for point in axes[-1]:
            joined = f"{label},{point.label}" if label else point.label
            yield joined, {**values, **point.values}
