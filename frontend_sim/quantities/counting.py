"""Words that agree with their number."""

from __future__ import annotations


def counted(count: int, noun: str, several: str = "") -> str:
    """Return a number of things, ``"1 check"``, ``"1,024 checks"``.

    Parameters
    ----------
    noun : of one of them, with a verb where one follows: ``"run has"``
    several : of any other number; left out, the noun with an s
    """
    return f"{count:,} {noun}" if count == 1 else f"{count:,} {several or f'{noun}s'}"


def share_of(count: int, total: int, noun: str) -> str:
    """Return how many of some things, ``"3 of 9 runs"``, ``"all 9 runs"``, ``"the only run"``."""
    if count == total:
        return f"the only {noun}" if total == 1 else f"all {counted(total, noun)}"
    return f"{count:,} of {counted(total, noun)}"
