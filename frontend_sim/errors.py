"""The tree of errors that a user can meet.

    FrontendSimError
    ├── InputError            what was given is wrong: exit status 2
    │   ├── QuantityError     a value or its unit cannot be read
    │   ├── ScenarioError     a key, a table or a combination of keys of a scenario, from a file or
    │   │                     from Python
    │   ├── ModelError        parts that give no usable circuit (unstable, improper, ...)
    │   ├── RecordingError    a recorded signal that cannot be read as asked
    │   ├── RecordError       an HDF5 record that cannot be read or is not one
    │   └── MeasureError      a question that the samples at hand cannot answer
    ├── OutputError           a result cannot be written where it was asked for: exit status 2
    └── Interrupted           the user stopped the run: exit status 130

Errors of other libraries are mapped to these at the border where they arise. A message says what
was given, where, the limit, and what to do.
"""

from __future__ import annotations

from dataclasses import dataclass
from difflib import get_close_matches
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterable


class FrontendSimError(Exception):
    """Root of every error that this package raises on purpose."""


class InputError(FrontendSimError, ValueError):
    """Something that the user gave is wrong."""


class QuantityError(InputError):
    """A value or its unit cannot be read."""


@dataclass(frozen=True)
class Problem:
    """One thing that is wrong in a file: where it stands and what to do about it."""

    text: str
    key: str = ""
    line: int | None = None

    def __str__(self) -> str:
        """Write ``line 12: chain[1].resistance: text``, leaving out what is not known."""
        where = [f"line {self.line}"] if self.line is not None else []
        where += [self.key] if self.key else []
        return ": ".join([*where, self.text])


class ScenarioError(InputError):
    """One or more keys of a scenario are wrong; ``problems`` lists them in the file's order."""

    def __init__(self, problems: Iterable[Problem] | str, source: str = "") -> None:
        """Join the problems to one message, headed by the name of the file if there is one."""
        self.problems = (Problem(problems),) if isinstance(problems, str) else tuple(problems)
        self.source = source
        head = f"{source}: " if source else ""
        if len(self.problems) == 1:
            message = f"{head}{self.problems[0]}"
        else:
            rows = "\n".join(f"  {problem}" for problem in self.problems)
            message = f"{head}{len(self.problems)} problems\n{rows}"
        super().__init__(message)


class ModelError(InputError):
    """The parts give no usable circuit."""


class RecordingError(InputError):
    """A recorded signal cannot be read as asked."""


class RecordError(InputError):
    """An HDF5 record cannot be read, or is not one."""


class MeasureError(InputError):
    """The samples at hand cannot answer what was asked of them; the message says what could."""


class OutputError(FrontendSimError, OSError):
    """A result cannot be written where it was asked for."""


class Interrupted(FrontendSimError):  # noqa: N818 - not a fault, the user's own wish
    """The user stopped the run; nothing half written is left."""


def nearest(given: str, known: Iterable[str]) -> str:
    """Return ``"; did you mean 'x'?"`` for the nearest of ``known``, or what is known instead."""
    names = sorted(known)
    close = get_close_matches(given, names, n=1, cutoff=0.6)
    if close:
        return f"; did you mean {close[0]!r}?"
    return f"; known are {', '.join(names)}" if names else ""


def shortened(path: object, most: int = 120) -> str:
    """Return a path for a message: of a very long one the start and the end."""
    text = str(path)
    half = (most - 3) // 2
    return text if len(text) <= most else f"{text[:half]}...{text[-half:]}"
