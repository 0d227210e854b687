"""What sensors have in common whose output is a curve of the physical quantity."""

from __future__ import annotations

import math
from abc import abstractmethod
from typing import Self

import numpy as np
from pydantic import model_validator

from frontend_sim.analog.block import Block, Real, gain_block
from frontend_sim.analog.limits import StaticMap
from frontend_sim.analog.stages.base import Stage
from frontend_sim.errors import ModelError


class CurvedSensor(Stage):
    """A sensor without memory, y = f(u).

    A run takes the curve itself, at every point of its grid. ``inspect`` and the noise budget take
    the tangent at the operating point, which is what ``blocks()`` returns.
    """

    @abstractmethod
    def curve(self, signal: Real) -> Real:
        """Return f(u) for physical quantities in SI, NaN beyond the range of the sensor."""

    @abstractmethod
    def slope(self) -> float:
        """Return df/du at the operating point; NaN if that is beyond the range."""

    @abstractmethod
    def span(self) -> str:
        """Return the range of the sensor in words, ``temperatures from -200 degC to 850 degC``."""

    def check(self) -> None:
        """Raise ValueError if keys contradict each other."""

    @model_validator(mode="after")
    def _keys_agree(self) -> Self:
        self.check()
        if not math.isfinite(self.slope()):
            raise ValueError(f"the operating point is beyond {self.span()}")
        return self

    def blocks(self) -> tuple[Block, ...]:
        """Return the tangent at the operating point."""
        return (gain_block(self.slope()),)

    def limiter(self) -> StaticMap:
        """Return the curve, which stands for the tangent."""
        return StaticMap(range(1), self.slope(), self.output)

    def output(self, signal: Real) -> Real:
        """Return f(u) for physical quantities in SI.

        Raises
        ------
        ModelError
            If one is beyond the range of the sensor.
        """
        values = self.curve(np.asarray(signal, dtype=np.float64))
        beyond = ~np.isfinite(values)
        if np.any(beyond):
            first = float(np.asarray(signal)[beyond].flat[0])
            name = self.name or str(getattr(self, "kind", "sensor"))
            raise ModelError(
                f"{name!r} gets {self.shown(first)}, beyond {self.span()}; check the stimulus and "
                "its unit"
            )
        return values

    def shown(self, signal: float) -> str:
        """Return a physical quantity as messages have it."""
        return f"{signal:g}"
