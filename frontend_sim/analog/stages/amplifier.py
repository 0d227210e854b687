"""The closed loop around an amplifier of one pole."""

from __future__ import annotations

import math

from frontend_sim.analog.block import Block, first_order, gain_block


def closed_loop(gain: float, noise_gain: float, gain_bandwidth: float | None) -> tuple[Block, ...]:
    """Return a closed loop of gain G and noise gain N around an amplifier A(s) = 2 pi f_u / s:

        H(s) = G / (1 + s N / (2 pi f_u)).

    Parameters
    ----------
    gain : closed-loop gain G at low frequency [1]
    noise_gain : N = 1 + R_feedback / R_input, the reciprocal of the feedback factor [1]
    gain_bandwidth : f_u, the frequency where the open loop's gain is one [Hz]; None is ideal

    Source: feedback theory with a single-pole amplifier; common practice.
    """
    if gain_bandwidth is None:
        return (gain_block(gain),)
    rate = 2.0 * math.pi * gain_bandwidth / noise_gain
    return (first_order(-rate, (0.0, gain * rate)),)
