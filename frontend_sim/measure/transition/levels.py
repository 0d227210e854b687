"""Where a transition starts and where it ends, and the record it is read from."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Self

from numpy.typing import ArrayLike

from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import Real, finite, increasing, samples


@dataclass(frozen=True, eq=False)
class Transition:
    """Samples of a signal that goes from one level to another.

    Nothing is known between two samples, and no measure on a transition pretends otherwise.

    Parameters
    ----------
    times : increasing, shape (N,) [s]
    values : shape (N,) [V]
    initial, final : the two levels [V]
    """

    times: Real
    values: Real
    initial: float
    final: float

    @classmethod
    def of(
        cls,
        times: ArrayLike,
        values: ArrayLike,
        initial: float | None = None,
        final: float | None = None,
    ) -> Self:
        """Take samples, and the levels where they are known.

        Parameters
        ----------
        initial, final : left out, the first and the last sample; give them where the samples are
            noisy or the record ends before the signal does

        Raises
        ------
        MeasureError
            If instants and samples do not match, or the two levels are equal.
        """
        row = samples(values, 2)
        first = float(row[0]) if initial is None else finite(initial, "the initial level")
        last = float(row[-1]) if final is None else finite(final, "the final level")
        if not abs(last - first) > 0.0:
            raise MeasureError(
                f"the signal starts and ends at {first:g}; a transition needs two levels, give "
                "initial and final"
            )
        return cls(increasing(times, len(row)), row, first, last)

    @property
    def height(self) -> float:
        """The final less the initial level, with its sign [V]."""
        return self.final - self.initial

    @property
    def progress(self) -> Real:
        """The way done, 0 at the initial and 1 at the final level, shape (N,) [1]."""
        return (self.values - self.initial) / self.height
