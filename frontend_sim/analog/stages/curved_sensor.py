"""What sensors have in common whose output is a curve of the physical quantity."""

from __future__ import annotations

from abc import abstractmethod
from typing import ClassVar, Self

import numpy as np
from pydantic import model_validator

from frontend_sim.analog.block import Block, Real, gain_block
from frontend_sim.analog.limits import Limiter
from frontend_sim.analog.limits.sensor_curve import SensorCurve
from frontend_sim.analog.stages.base import Stage
from frontend_sim.errors import ModelError
from frontend_sim.quantities import REFERENCE_TEMPERATURE


class CurvedSensor(Stage):
    """A sensor without memory, y = f(u) for u in a range.

    A run takes the curve itself, at every point of its grid. ``inspect`` and the noise budget take
    the tangent at the operating point, which is what ``blocks()`` returns. Just beyond an end of
    the range the curve goes on as its tangent there, or as its last value if ``stops``.
    """

    stops: ClassVar[bool] = False
    margin: ClassVar[float] = 0.02
    """Share of the range by which the input may leave it; further out is an error."""

    @abstractmethod
    def curve(self, signal: Real) -> Real:
        """Return f(u) for physical quantities within the range, in SI."""

    @abstractmethod
    def derivative(self, signal: Real) -> Real:
        """Return df/du for physical quantities within the range, in SI."""

    @abstractmethod
    def ends(self) -> tuple[float, float]:
        """Return the lowest and the highest quantity of the range."""

    @abstractmethod
    def operating_point(self) -> float:
        """Return the quantity at which the tangent is taken."""

    @abstractmethod
    def shown(self, signal: float) -> str:
        """Return a physical quantity as messages have it."""

    def check(self) -> None:
        """Raise ValueError if keys contradict each other."""

    @model_validator(mode="after")
    def _keys_agree(self) -> Self:
        self.check()
        low, high = self.ends()
        if not low <= self.operating_point() <= high:
            raise ValueError(
                f"the operating point, {self.shown(self.operating_point())}, is beyond "
                f"{self.span()}"
            )
        return self

    def span(self) -> str:
        """Return the range in words."""
        low, high = self.ends()
        return f"the sensor's range, {self.shown(low)} to {self.shown(high)}"

    def slope(self) -> float:
        """Return df/du at the operating point."""
        return float(self.derivative(np.array(self.operating_point())))

    def blocks(self) -> tuple[Block, ...]:
        """Return the tangent at the operating point."""
        return (gain_block(self.slope()),)

    def limiter(self, temperature: float = REFERENCE_TEMPERATURE) -> Limiter:
        """Return the curve, which stands for the tangent."""
        return SensorCurve(range(1), self.slope(), self.output, *self.ends())

    def inside(self, signal: Real) -> Real:
        """Return physical quantities, cut off at the ends of the range.

        Raises
        ------
        ModelError
            If one is far beyond the range.
        """
        low, high = self.ends()
        signal = np.asarray(signal, dtype=np.float64)
        margin = self.margin * (high - low)
        beyond = ~((signal >= low - margin) & (signal <= high + margin))
        if np.any(beyond):
            name = self.name or str(getattr(self, "kind", "sensor"))
            raise ModelError(
                f"{name!r} gets {self.shown(float(signal[beyond].flat[0]))}, far beyond "
                f"{self.span()}; check the stimulus and its unit"
            )
        return np.clip(signal, low, high)

    def output(self, signal: Real) -> Real:
        """Return f(u) for physical quantities in SI; raises ModelError as ``inside`` does."""
        inside = self.inside(signal)
        values = self.curve(inside)
        over = np.asarray(signal) - inside
        if self.stops or not np.any(over):
            return values
        return values + self.derivative(inside) * over
