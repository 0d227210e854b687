"""Up to which frequency the loop around an amplifier still has gain to spare."""

from __future__ import annotations

import math


def loop_bandwidth(
    gain_bandwidth: float, noise_gain: float, rise: float = 0.0, fall: float = 0.0
) -> float:
    """Return the frequency f at which the gain f_u / f of an amplifier meets the noise gain,

        |N(f)| = f_u / f,    N(s) = N_0 (1 + s rise) / (1 + s fall).

    Below it the feedback rules, above it the amplifier. Without rise and fall that is f_u / N_0,
    the -3 dB corner of the closed loop. Source: feedback theory, common practice.

    Parameters
    ----------
    gain_bandwidth : f_u [Hz];  noise_gain : N_0, above 0 [1]
    rise, fall : time constants of the zero and of the pole of N [s]
    """
    # In x = f²: N_0² x (1 + a x) = f_u² (1 + b x).
    a, b = (2.0 * math.pi * rise) ** 2, (2.0 * math.pi * fall) ** 2
    square, linear = noise_gain**2, noise_gain**2 - gain_bandwidth**2 * b
    root = math.hypot(linear, 2.0 * math.sqrt(square * a) * gain_bandwidth)
    if linear > 0.0:
        x = 2.0 * gain_bandwidth**2 / (linear + root)
    elif a > 0.0:
        x = 0.5 * (root - linear) / (square * a)
    else:
        return math.inf
    return math.sqrt(x)


def feedback_times(
    feedback: float, ground: float, across: float | None, to_ground: float | None = None
) -> tuple[float, float]:
    """Return rise and fall [s] of the noise gain of a resistive divider with capacitors,

        rise = (R_f || R_g) (C_f + C_g),    fall = R_f C_f.

    Parameters
    ----------
    feedback, ground : R_f from the output to the inverting input, R_g from there to ground, which
        may be infinite [ohm]
    across, to_ground : C_f across R_f, C_g across R_g; None for none [F]
    """
    c_f, c_g = across or 0.0, to_ground or 0.0
    parallel = feedback if math.isinf(ground) else feedback * ground / (feedback + ground)
    return parallel * (c_f + c_g), feedback * c_f
