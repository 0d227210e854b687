"""Compile inner loops, and keep the result on disk where there is a place for it."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, TypeVar

from numba import njit

Loop = TypeVar("Loop", bound=Callable[..., Any])


def compiled(**options: Any) -> Callable[[Loop], Loop]:
    """Return a decorator that compiles a function, with numba's options.

    The machine code is cached beside the source or in the user's cache folder; where neither can
    be written, as in a read-only installation without a home, it is compiled in every process.
    """

    def wrap(loop: Loop) -> Loop:
        try:
            kept: Loop = njit(cache=True, **options)(loop)
        except RuntimeError:  # numba finds no folder to cache in
            kept = njit(**options)(loop)
        return kept

    return wrap
