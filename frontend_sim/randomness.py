"""Random numbers that depend on the seed and the position alone, never on how time is cut."""

from __future__ import annotations

import hashlib
from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

TILE = 16384
"""Numbers drawn from one generator; tile k of a stream holds positions k·TILE to (k+1)·TILE."""


def stream(seed: int, *names: str | int) -> tuple[int, ...]:
    """Return the key of one named stream of random numbers under a seed.

    Two streams with different names are independent; a stream does not change when others are
    added.
    """
    label = "\x1f".join(str(name) for name in names).encode()
    return (seed, int.from_bytes(hashlib.sha256(label).digest()[:8], "big"))


def normal(key: tuple[int, ...], start: int, stop: int) -> NDArray[np.float64]:
    """Return standard normal numbers at positions ``start`` to ``stop`` of a stream.

    Every tile of the stream has a generator of its own (Philox, Salmon et al. 2011, "Parallel
    random numbers: as easy as 1, 2, 3"), so any cut of the positions gives the same numbers.

    Returns an array of shape (stop - start,) [1].
    """
    return _row(key, start, stop, lambda generator: generator.standard_normal(TILE))


def uniform(key: tuple[int, ...], start: int, stop: int) -> NDArray[np.float64]:
    """Return numbers spread evenly over [0, 1) at positions ``start`` to ``stop`` of a stream.

    They are drawn as ``normal`` draws its own; give a stream a name for one of the two only.

    Returns an array of shape (stop - start,) [1].
    """
    return _row(key, start, stop, lambda generator: generator.random(TILE))


def _row(
    key: tuple[int, ...],
    start: int,
    stop: int,
    draw: Callable[[np.random.Generator], NDArray[np.float64]],
) -> NDArray[np.float64]:
    if stop <= start:
        return np.empty(0)
    first, last = start // TILE, (stop - 1) // TILE
    tiles = [draw(_generator(key, tile)) for tile in range(first, last + 1)]
    drawn = tiles[0] if len(tiles) == 1 else np.concatenate(tiles)
    return drawn[start - first * TILE : stop - first * TILE]


def _generator(key: tuple[int, ...], tile: int) -> np.random.Generator:
    # A seed sequence fills short keys up with zeros; the length tells (1, 2) from (1, 2, 0).
    seeds = np.random.SeedSequence((*key, len(key)), spawn_key=(tile % 2**32, tile // 2**32))
    return np.random.Generator(np.random.Philox(seeds))
