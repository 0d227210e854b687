"""The physical quantity that arrives at the sensor, at the instants of the conversions."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Self

import numpy as np

from frontend_sim.analog.chain import compose
from frontend_sim.converter import AnyAdc
from frontend_sim.simulation.kernels import Real
from frontend_sim.simulation.linear import Axis, Linear, States
from frontend_sim.stimulus.drive import Drive, PiecewiseDrive, UniformDrive


@dataclass(frozen=True, eq=False)
class Arriving:
    """The stimulus itself as a function of time.

    Parameters
    ----------
    model : a chain without stages, for the drives that linear generators make
    pointwise : drives of points, which are looked up
    """

    model: Linear
    pointwise: tuple[UniformDrive, ...]

    @classmethod
    def of(cls, drives: Sequence[Drive], adc: AnyAdc, look_axis: Axis) -> Self:
        """Prepare the drives.

        Parameters
        ----------
        look_axis : of the converter's looks; it is that of the codes where each look makes one
        """
        axis = look_axis
        if adc.last_look(0) != 0 or adc.last_look(1) != 1:
            period = 1.0 / adc.true_rate
            axis = Axis(period, adc.code_instant(0) + adc.latest + 2.0 * period)
        return cls.along(drives, axis)

    @classmethod
    def along(cls, drives: Sequence[Drive], axis: Axis) -> Self:
        """Prepare the drives for instants of codes on an axis."""
        made = [drive for drive in drives if isinstance(drive, PiecewiseDrive)]
        pointwise = tuple(drive for drive in drives if not isinstance(drive, PiecewiseDrive))
        return cls(Linear.of(compose(()), made, [0], "settled", axis), pointwise)

    def start(self) -> States:
        """Return the state at t = 0."""
        return self.model.start()

    def advance(self, states: States, number: int, instants: Real) -> tuple[States, Real]:
        """Return the state and the stimulus at the instants of codes, shape (K,) [SI unit].

        Parameters
        ----------
        number : of the first code;  instants : shape (K,) [s]
        """
        if len(instants) == 0:
            return states, np.empty(0)
        states, (values,) = self.model.advance(states, number, instants)
        for drive in self.pointwise:
            values = values + drive.values(instants)
        return states, values
