"""A measured number, and the verdict of a check on it."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Literal

Verdict = Literal["none", "holds", "fails"]

Bound = Literal["", "at most", "at least"]


@dataclass(frozen=True)
class Result:
    """One row of ``/measure``, or of ``/check`` where it has a verdict.

    Parameters
    ----------
    name : what was measured
    value : in ``unit``; None where there is none, which no check passes
    unit : of value, limit and margin; "1" for a plain number or a share
    limit : what the value is held against; None for a mere measure
    margin : how far the value stays on the right side of the limit, below zero where it fails
    verdict : "holds" or "fails"; "none" for a mere measure
    method : how the value was found, with its reference; of a check without a value, why not
    bound : whether the limit is the highest or the lowest value allowed; "" for a mere measure
    advice : of a check that fails, what to change first
    """

    name: str
    value: float | None
    unit: str = "1"
    limit: float | None = None
    margin: float | None = None
    verdict: Verdict = "none"
    method: str = ""
    bound: Bound = ""
    advice: str = ""


def verdict_of(results: Iterable[Result]) -> Verdict:
    """Return "fails" if one check fails, "holds" if all hold, "none" if there is no check."""
    found = {result.verdict for result in results}
    if "fails" in found:
        return "fails"
    return "holds" if "holds" in found else "none"
