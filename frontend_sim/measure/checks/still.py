"""What codes that stand still do not tell."""

from __future__ import annotations

import numpy as np

from frontend_sim.measure.checks.subject import Subject


def standing(subject: Subject, after: float) -> str:
    """Return what a method must say of codes that are all the same from an instant on [s], else "".

    Nothing moves in them, which is true of the codes, and no measure of what the pin does.
    """
    if np.ptp(subject.voltage[subject.first_after(after) :]) > 0.0:
        return ""
    return "; the codes stand still, and what moves none of them does not show"
