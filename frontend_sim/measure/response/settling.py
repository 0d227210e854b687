"""How long a step response takes until it stays within a band around its end."""

from __future__ import annotations

from dataclasses import dataclass

from frontend_sim.measure.response.decay import Decay
from frontend_sim.measure.response.excursions import last_exit


@dataclass(frozen=True)
class Settling:
    """One band around the end, and when the response leaves it for the last time.

    Parameters
    ----------
    label : the band as an engineer writes it: "1 %", "0.1 %", "0.5 LSB"
    band : half its width, of the response to a unit step [1]
    time : from the step at the stimulus, delay included; None where there is no end [s]
    """

    label: str
    band: float
    time: float | None


def settling_time(decay: Decay | None, band: float, delay: float = 0.0) -> float:
    """Return when |y(t) - y(end)| exceeds a band for the last time, plus the delay [s].

    This is the last exit, not the first entry: an underdamped response enters its band several
    times. Relative accuracy 1e-9 of the time or better, found by bisection on the exact response;
    that nothing follows is known from the bound of ``Decay``.

    Parameters
    ----------
    decay : None for a chain without states, which is settled at once
    band : half the width, of the response to a unit step [1]
    """
    return delay + (last_exit(decay, band) if decay is not None else 0.0)
