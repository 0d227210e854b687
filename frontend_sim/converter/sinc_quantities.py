"""What a sinc^K converter does, in the numbers that people choose it by."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Self

from frontend_sim.converter.sinc_filter import SincFilter
from frontend_sim.errors import InputError

DEPTHS = (40.0, 60.0, 80.0, 100.0, 120.0)
"""Attenuations for which the width of a notch is told [dB]."""


@dataclass(frozen=True)
class NotchWidth:
    """How wide the notch at the data rate is.

    Parameters
    ----------
    attenuation : that the filter has at least, from ``low`` to ``high`` [dB]
    low, high : edges [Hz]
    """

    attenuation: float
    low: float
    high: float

    @property
    def width(self) -> float:
        """From edge to edge [Hz]."""
        return self.high - self.low


@dataclass(frozen=True)
class SincQuantities:
    """Response and timing of a sinc^K converter.

    Parameters
    ----------
    data_rate : codes per second; in restarted conversion as often as one can be started [Hz]
    corner : frequency of 3.01 dB [Hz]
    first_notch : the notches lie at all multiples of it but those of the modulator rate [Hz]
    notch_widths : of the first notch, one for each depth that its lobes stay above
    noise_bandwidth : [Hz]
    group_delay : from the signal to the middle of a code's samples [s]
    latency : from a restart, or a change right after a code, to the first valid code [s]
    latency_unsynchronized : from a change at any instant to the first valid code, at most [s]
    first_valid : number, from 1, of the first valid code after a restart
    first_valid_after_change : number, from 1, of the first valid code after a change of the pin
        (another channel, a step) at any instant, without a restart
    steps : share of a step in the values after a restart
    register_growth : bits that the filter's running sums need beyond those of the input
    """

    data_rate: float
    corner: float
    first_notch: float
    notch_widths: tuple[NotchWidth, ...]
    noise_bandwidth: float
    group_delay: float
    latency: float
    latency_unsynchronized: float
    first_valid: int
    first_valid_after_change: int
    steps: tuple[float, ...]
    register_growth: int

    @classmethod
    def of(cls, sinc: SincFilter, continuous: bool = True) -> Self:
        """Work the numbers out.

        Restarted, the codes that are not valid are not given: the first one is, and a change in the
        middle of one spoils that one alone.
        """
        data_rate = sinc.data_rate if continuous else sinc.data_rate / sinc.order
        valid = sinc.order if continuous else 1
        return cls(
            data_rate,
            sinc.corner,
            sinc.notch(),
            _widths(sinc),
            sinc.noise_bandwidth,
            sinc.group_delay,
            sinc.settling_time,
            (valid + 1) / data_rate,
            valid,
            valid + 1,
            tuple(float(share) for share in sinc.step()),
            sinc.register_growth,
        )


def _widths(sinc: SincFilter) -> tuple[NotchWidth, ...]:
    found = []
    for depth in DEPTHS:
        try:
            found.append(NotchWidth(depth, *sinc.notch_edges(depth)))
        except InputError:  # the lobes beside the notch are that far down already
            continue
    return tuple(found)
