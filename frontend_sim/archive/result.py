"""A measured number, and the verdict of a check on it."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Literal

Verdict = Literal["none", "holds", "fails"]


@dataclass(frozen=True)
class Result:
    """One row of ``/measure``, or of ``/check`` where it has a verdict.

    Parameters
    ----------
    name : what was measured
    value : in ``unit``; None where there is none
    unit : of value, limit and margin; "1" for a plain number
    limit : what the value is held against; None for a mere measure
    margin : how far the value stays on the right side of the limit, below zero where it fails
    verdict : "holds" or "fails"; "none" for a mere measure
    method : how the value was found
    """

    name: str
    value: float | None
    unit: str = "1"
    limit: float | None = None
    margin: float | None = None
    verdict: Verdict = "none"
    method: str = ""


def verdict_of(results: Iterable[Result]) -> Verdict:
    """Return "fails" if one check fails, "holds" if all hold, "none" if there is no check."""
    found = {result.verdict for result in results}
    if "fails" in found:
        return "fails"
    return "holds" if "holds" in found else "none"
