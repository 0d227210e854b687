"""Which of the known names was probably meant."""

from __future__ import annotations

from collections.abc import Iterable
from difflib import get_close_matches


def closest(given: str, known: Iterable[str]) -> str | None:
    """Return the known name that is most like what was given, or None if none is.

    Case, and whether words are joined by ``-`` or ``_``, do not count. A name that begins with
    what was given (``res``), or is part of it (``corner_frequency``), is like it as well.
    """
    names = {_folded(name): name for name in known}
    folded = _folded(given)
    if folded in names:
        return names[folded]
    close = get_close_matches(folded, names, n=1, cutoff=0.6)
    if close:
        return names[close[0]]
    beginning = [name for name in names if folded and name.startswith(folded)]
    if len(beginning) == 1:
        return names[beginning[0]]
    inside = [name for name in names if len(name) > 3 and name in folded]
    return names[max(inside, key=len)] if inside else None


def _folded(name: str) -> str:
    return name.strip().casefold().replace("-", "_").replace(" ", "_")
