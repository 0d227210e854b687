"""Which values of a scenario changed, told by their keys."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from contextlib import suppress
from dataclasses import dataclass
from typing import Any

from frontend_sim.errors import InputError
from frontend_sim.scenario.key import find
from frontend_sim.scenario.walk import item_name
from frontend_sim.values import Value

TOLD_APART = ("title", "seed", "format")
"""Keys whose change is no change of what is simulated, or is told by itself."""

_PART = frozenset(["value", "tolerance", "drift", "series"])


@dataclass(frozen=True)
class Change:
    """A key whose value differs.

    Parameters
    ----------
    key : as ``frontend_sim.scenario.key`` has it; a whole table where its kind changed, and a whole
        array where its items are others
    first, second : as text with units; "" where the key is not there
    value : what the second has, as data that ``with_values`` takes
    """

    key: str
    first: str
    second: str
    value: Any

    @property
    def ratio(self) -> float | None:
        """Second over first, where both are numbers."""
        try:
            first, second = float(self.first.split()[0]), float(self.second.split()[0])
        except (ValueError, IndexError):
            return None
        return second / first if first else None


@dataclass(frozen=True)
class _Named:
    """An item of an array as ``item_name`` looks at it."""

    name: str


def changes(
    first: Mapping[str, Any],
    second: Mapping[str, Any],
    scenarios: tuple[Value | None, Value | None] = (None, None),
    files: tuple[Mapping[str, str], Mapping[str, str]] = ({}, {}),
) -> tuple[Change, ...]:
    """Return every key whose value differs, in the order of the scenario.

    Items of arrays are matched by name, those without by their place.

    Parameters
    ----------
    first, second : as ``Scenario.resolved`` gives them
    scenarios : the same as values, for text with units
    files : name of a file -> its SHA-256; files of equal content are equal
    """
    wrote = _Writer(scenarios)
    found = _differences(_by_content(first, files[0]), _by_content(second, files[1]), "")
    return tuple(
        Change(key, wrote.text(0, key, one), wrote.text(1, key, other), _plain(other))
        for key, one, other in found
        if key not in TOLD_APART
    )


class _Content(str):
    """The name of a file, equal to any other of the same content."""

    __slots__ = ("digest",)
    digest: str

    def __eq__(self, other: object) -> bool:
        if isinstance(other, _Content):
            return self.digest == other.digest
        return str.__eq__(self, other) is True

    def __ne__(self, other: object) -> bool:
        return not self == other

    def __hash__(self) -> int:
        return str.__hash__(self)


def _by_content(value: Any, digests: Mapping[str, str]) -> Any:
    if isinstance(value, Mapping):
        return {key: _by_content(item, digests) for key, item in value.items()}
    if isinstance(value, list):
        return [_by_content(item, digests) for item in value]
    if isinstance(value, str) and value in digests:
        named = _Content(value)
        named.digest = digests[value]
        return named
    return value


def _plain(value: Any) -> Any:
    """Return a value without what is not there, as a file would have it."""
    if isinstance(value, Mapping):
        return {key: _plain(item) for key, item in value.items() if item is not None}
    if isinstance(value, list):
        return [_plain(item) for item in value]
    return str(value) if isinstance(value, _Content) else value


def _differences(one: Any, other: Any, key: str) -> Iterator[tuple[str, Any, Any]]:
    if isinstance(one, Mapping) and isinstance(other, Mapping) and _same_kind(one, other):
        for name in dict.fromkeys((*one, *other)):
            below = f"{key}.{name}" if key else name
            yield from _differences(one.get(name), other.get(name), below)
    elif _is_array(one) and _is_array(other) and _labels(one) == _labels(other):
        for label, inner, outer in zip(_labels(one), one, other, strict=True):
            yield from _differences(inner, outer, f"{key}[{label}]")
    elif one != other:
        yield key, one, other


def _same_kind(one: Mapping[str, Any], other: Mapping[str, Any]) -> bool:
    if one.keys() <= _PART and other.keys() <= _PART:
        # Tolerance and drift of a part go with its value: it is one part or another.
        return False
    return bool(one.get("kind") == other.get("kind"))


def _is_array(value: Any) -> bool:
    return isinstance(value, list) and all(isinstance(item, Mapping) for item in value)


def _labels(items: Sequence[Mapping[str, Any]]) -> list[str]:
    return [item_name(_Named(item.get("name", "")), place) for place, item in enumerate(items)]


class _Writer:
    """Writes values with their units where the scenario can be built, as data where it cannot."""

    def __init__(self, scenarios: tuple[Value | None, Value | None]) -> None:
        self._scenarios = scenarios

    def text(self, which: int, key: str, value: Any) -> str:
        if value is None:
            return ""
        if isinstance(value, Mapping) and not value.keys() <= _PART:
            return f"{value.get('kind', 'table')}"
        if isinstance(value, list):
            return ", ".join(self.text(which, "", item) for item in value) or "none"
        scenario = self._scenarios[which]
        text = str(value) if not isinstance(value, Mapping) else str(value["value"])
        if scenario is not None and key:
            with suppress(InputError):  # a key that this version does not have is told as data
                text = find(scenario, key).text()
        if isinstance(value, _Content):
            return f"{value.rsplit('/', 1)[-1]} ({value.digest[:8]})"
        if isinstance(value, Mapping):
            spread = []
            if "tolerance" in value:
                spread.append(f"tolerance {100.0 * value['tolerance']:.4g} %")
            if "drift" in value:
                spread.append(f"drift {1e6 * value['drift']:.4g} ppm/K")
            return ", ".join([text, *spread])
        return text
