"""What tells a file of a set of runs from a scenario."""

from __future__ import annotations

from typing import Any

MARKS = ("base", "scenarios", "vary", "corners", "draws", "keep")
"""Keys of a set file that no scenario has."""


def looks_like_a_set(data: dict[str, Any]) -> bool:
    """Return whether the content of a TOML file is a set rather than a scenario."""
    return not {"stimulus", "channel"} & data.keys() and any(mark in data for mark in MARKS)
