"""Which runs of a night are draws, which are corners, and which belong together."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Self

import numpy as np
from numpy.typing import NDArray

Flags = NDArray[np.bool_]
Real = NDArray[np.float64]

NOMINAL = "corner nominal"


@dataclass(frozen=True, eq=False)
class Population:
    """The runs of a night by their kind; shapes (R,).

    Parameters
    ----------
    drawn : whether a run is a random draw: of these alone a share is a yield
    corner : whether it is a corner of the tolerances; the nominal circuit is none
    group : what of the name stands before draw or corner: runs of one group differ in those alone
    """

    drawn: Flags
    corner: Flags
    group: NDArray[np.str_]

    @classmethod
    def of(cls, names: Sequence[str]) -> Self:
        """Tell by the names of runs, such as ``rate=10 kHz,draw 0012`` and ``corner 0-1``."""
        last = [name.rpartition(",") for name in names]
        kinds = [kind for _, _, kind in last]
        drawn = np.array([kind.startswith("draw ") for kind in kinds], np.bool_)
        corner = np.array(
            [kind.startswith("corner ") and kind != NOMINAL for kind in kinds], np.bool_
        )
        varied = [kind.startswith(("draw ", "corner ")) for kind in kinds]
        groups = [
            before if inside else name
            for name, (before, _, _), inside in zip(names, last, varied, strict=True)
        ]
        return cls(drawn, corner, np.array(groups, dtype=np.str_))

    def sample(self, among: Flags, held: Flags, margin: Real) -> tuple[str, Flags]:
        """Return the draws that are a sample: those of the group of which the fewest hold.

        What groups differ in was chosen, and draw n has the same parts in each of them, so that
        the draws of several groups are no sample of anything.

        Parameters
        ----------
        among : runs that count, shape (R,)
        held : whether a run holds, shape (R,)
        margin : decides between groups of which as many hold: the smallest is the worse, shape (R,)

        Returns
        -------
        name of the group, "" where there is but one; whether a run is one of its draws, shape (R,)
        """
        drawn: Flags = among & self.drawn
        names, place = np.unique(self.group[drawn], return_inverse=True)
        if len(names) < 2:
            return "", drawn
        share = np.bincount(place, weights=held[drawn]) / np.bincount(place)
        least = np.full(len(names), np.inf)
        np.fmin.at(least, place, margin[drawn])
        worst = int(np.lexsort((least, share))[0])
        chosen = drawn.copy()
        chosen[drawn] = place == worst
        return str(names[worst]), chosen

    def within_corners(self, group: str, parameters: Mapping[str, Real]) -> Flags:
        """Return the runs of a group whose parameters all lie within those of its corners.

        Parameters
        ----------
        parameters : key -> number in each run, shape (R,); NaN is the nominal value
        """
        mine: Flags = self.group == group
        corners = mine & self.corner
        inside: Flags = mine & ~self.corner
        for values in parameters.values():
            known = values[corners & ~np.isnan(values)]
            if len(known):
                low, high = np.min(known), np.max(known)
                inside &= np.isnan(values) | ((values >= low) & (values <= high))
            else:
                inside &= np.isnan(values)
        return inside
