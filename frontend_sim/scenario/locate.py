"""The lines of a TOML file on which its keys stand; the standard library's reader tells none.

The text has been read as TOML before, so this scanner only follows the structure. Where its keys
are not the keys that were read, it gives no lines at all rather than a wrong one.
"""

from __future__ import annotations

import re
import tomllib
from bisect import bisect_right
from collections.abc import Iterator, Mapping
from typing import Any

from frontend_sim.scenario.rules import Path

_BLANK = re.compile(r"(?:[ \t\r\n]|#[^\n]*)*")
_SPACE = re.compile(r"[ \t]*")
_BARE = re.compile(r"[A-Za-z0-9_-]+")
_STRING = re.compile(
    r'"""(?:[^\\]|\\.)*?"{3,5}' r"|'''.*?'{3,5}" r'|"(?:[^"\\\n]|\\.)*"' r"|'[^'\n]*'", re.S
)
_SCALAR = re.compile(r"[^,\[\]{}\n#]+")


class _LostError(Exception):
    """The scanner met something that it does not know."""


class _Scanner:
    """Follows the text once, and notes at which offset each path first stands."""

    def __init__(self, text: str) -> None:
        self.text = text
        self.at = 0
        self.found: dict[Path, int] = {}
        self._arrays: dict[Path, int] = {}

    def file(self) -> None:
        """Follow the whole file."""
        table: Path = ()
        while self._peek():
            if self._take("[["):
                table = self._header(array=True)
            elif self._take("["):
                table = self._header(array=False)
            else:
                self._pair(table)

    def _peek(self) -> str:
        self.at = self._end(_BLANK)
        return self.text[self.at : self.at + 1]

    def _end(self, pattern: re.Pattern[str]) -> int:
        match = pattern.match(self.text, self.at)
        if match is None:
            raise _LostError
        return match.end()

    def _take(self, token: str) -> bool:
        if not self.text.startswith(token, self.at):
            return False
        self.at += len(token)
        return True

    def _need(self, token: str) -> None:
        if not self._take(token):
            raise _LostError

    def _note(self, path: Path, offset: int) -> None:
        for length in range(1, len(path) + 1):
            self.found.setdefault(path[:length], offset)

    def _header(self, array: bool) -> Path:
        offset = self.at
        names = self._keys()
        self._need("]]" if array else "]")
        path: Path = ()
        for name in names[:-1] if array else names:
            path = (*path, name)
            if path in self._arrays:
                path = (*path, self._arrays[path] - 1)
        if array:
            path = (*path, names[-1])
            count = self._arrays.get(path, 0)
            self._arrays[path] = count + 1
            path = (*path, count)
        self._note(path, offset)
        return path

    def _keys(self) -> list[str]:
        names = []
        while True:
            self.at = self._end(_SPACE)
            quoted = self.text[self.at : self.at + 1] in ("'", '"')
            end = self._end(_STRING if quoted else _BARE)
            word = self.text[self.at : end]
            names.append(tomllib.loads(f"word = {word}")["word"] if quoted else word)
            self.at = end
            self.at = self._end(_SPACE)
            if not self._take("."):
                return names

    def _pair(self, table: Path) -> None:
        offset = self.at
        path = (*table, *self._keys())
        self._note(path, offset)
        self._need("=")
        self._value(path)

    def _value(self, path: Path) -> None:
        self.at = self._end(_SPACE)
        opening = self.text[self.at : self.at + 1]
        if opening == "[":
            self._array(path)
        elif opening == "{":
            self._inline_table(path)
        else:
            self.at = self._end(_STRING if opening in ("'", '"') else _SCALAR)

    def _array(self, path: Path) -> None:
        self._need("[")
        position = 0
        while self._peek() != "]":
            self._note((*path, position), self.at)
            self._value((*path, position))
            position += 1
            self._peek()
            self._take(",")
        self._need("]")

    def _inline_table(self, path: Path) -> None:
        self._need("{")
        while self._peek() != "}":
            self._pair(path)
            self._peek()
            self._take(",")
        self._need("}")


def lines_of(text: str, data: dict[str, Any]) -> dict[Path, int]:
    """Return the line, from 1, on which every key and every item of an array stands.

    Parameters
    ----------
    text : TOML
    data : what the text was read as

    Returns
    -------
    Path -> line, ``("chain", 1, "resistance") -> 12``; nothing where the text could not be
    followed.
    """
    scanner = _Scanner(text)
    try:
        scanner.file()
    except (_LostError, RecursionError, tomllib.TOMLDecodeError):
        return {}
    if set(scanner.found) != set(_paths(data)):
        return {}
    breaks = [position for position, character in enumerate(text) if character == "\n"]
    return {path: bisect_right(breaks, at - 1) + 1 for path, at in scanner.found.items()}


def _paths(data: Any, above: Path = ()) -> Iterator[Path]:
    items = data.items() if isinstance(data, dict) else enumerate(data)
    for key, value in items:
        path = (*above, key)
        yield path
        if isinstance(value, (dict, list)):
            yield from _paths(value, path)


def line_of(path: Path, lines: Mapping[Path, int]) -> int | None:
    """Return the line of a path or, for what is missing, of the table that it is missing from."""
    for length in range(len(path), 0, -1):
        if path[:length] in lines:
            return lines[path[:length]]
    return None
