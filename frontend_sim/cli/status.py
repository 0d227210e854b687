"""The exit statuses of ``frontend-sim``, the same for every command."""

from __future__ import annotations

HOLDS = 0
"""All is right: checks hold, nothing differs, a value passes."""

FAILS = 1
"""A check fails, something differs, no value passes."""

WRONG_INPUT = 2

INCOMPLETE = 3
"""A run of a set gave no result."""

INTERRUPTED = 130
