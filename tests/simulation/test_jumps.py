"""Which events of a stimulus are jumps or bends, and which a smooth signal merely passes."""

from __future__ import annotations

import numpy as np
import pytest

from frontend_sim.simulation.jumps import jump_times
from frontend_sim.stimulus import Chirp, Pulse
from frontend_sim.stimulus.drive import Lines

END = 0.2


def sweep(phase: float) -> Chirp:
    """Return a sweep of 0.1 s from 50 ms on, made of some ten thousand pieces."""
    return Chirp(
        amplitude=1.0, start_frequency=100.0, stop_frequency=40e3, length=0.1, at=0.05, phase=phase
    )


@pytest.mark.parametrize("offset", [0.0, 1.0])
def test_the_joints_of_a_sweep_are_no_jumps(offset: float) -> None:
    """It begins with a bend and ends with a jump; between those its pieces fit each other.

    A signal of 40 kHz changes by 3e-9 of itself while the clock at 0.15 s counts 64 roundings.
    """
    (drive,) = sweep(0.0).model_copy(update={"offset": offset}).drives((1,))
    assert len(drive.events(0.0, END)) > 20_000  # type: ignore[union-attr]  # no points here
    bends = jump_times([drive], 0.0, END, 0.0, bends=True)
    np.testing.assert_allclose(bends, [0.05, 0.15], rtol=1e-12)


def test_a_sweep_that_begins_at_its_peak_jumps() -> None:
    """A quarter of a turn on, the beginning is a jump as well."""
    (drive,) = sweep(0.5 * np.pi).drives((1,))
    assert jump_times([drive], 0.0, END, 0.0)[0] == 0.05


def test_small_jumps_on_steep_lines_are_found() -> None:
    """1 uV on a line of 1 kV/s, and edges of 1 ps as bends."""
    line = Lines.of(0.0, [0.0, 0.1], [0.0, 100.0 + 1e-6], [1e3, 1e3])
    np.testing.assert_array_equal(jump_times([line], 0.0, END, 0.0), [0.1])
    (edge,) = Pulse(high=1.0, width=1e-3, at=0.1, rise=1e-12, fall=1e-12).drives((1,))
    assert len(jump_times([edge], 0.0, END, 0.0)) == 0
    assert len(jump_times([edge], 0.0, END, 0.0, bends=True)) == 4
