"""The columns of the table of a set: what each of them holds, and of which parameter or result."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

Role = Literal["run", "parameter", "value", "margin", "limit", "verdict"]

RUN_COLUMNS = (
    "name", "base", "verdict", "error", "advice", "record", "digest", "outcome", "seed", "seconds",
)  # fmt: skip
"""What every run has, whatever the set varies.

``name`` of the run, stable from night to night; ``base`` scenario that it varies; ``verdict``:
"holds", "fails", "none" where nothing is checked, "error" where the run gave no result; ``error``:
why not; ``advice`` of the first check that fails; ``record``: name of its record, from the
directory of the set, "" where none is kept; ``digest`` of its scenario; ``outcome``: digest of all
that it gave, conversions and results; ``seed`` of the run; ``seconds`` that it took.
"""

RUN_NUMBERS = {"seed": "<i8", "seconds": "<f8"}
"""The columns of these that hold numbers."""


@dataclass(frozen=True)
class Column:
    """One column of the table of a set.

    Parameters
    ----------
    name : of the column
    role : "run" for those of ``RUN_COLUMNS``; "parameter" for a key that the set varies; "value"
        of a measure or check, and a check's "margin", "limit" and "verdict"
    of : the key of a parameter, the name of a measure or check, else ""
    unit : in SI for a parameter; "" for text
    bound : of a check, "at most" or "at least"
    number : whether it holds numbers (NaN where there is none), else text
    """

    name: str
    role: Role
    of: str = ""
    unit: str = ""
    bound: str = ""
    number: bool = True


def run_columns() -> tuple[Column, ...]:
    """Return the columns that every set has."""
    return tuple(Column(name, "run", number=name in RUN_NUMBERS) for name in RUN_COLUMNS)
