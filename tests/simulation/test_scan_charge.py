"""One sampling capacitor carries charge from channel to channel."""

from __future__ import annotations

import numpy as np
import pytest
from scanned import FULL, held_looks, level, sampled, scan_of, sine
from scipy.linalg import expm

from frontend_sim.simulation import simulate


def test_charge_memory_reaches_its_fixed_point() -> None:
    """0.0103991 of the difference is left (charge sharing, computed), after a long run as well."""
    adc = sampled(1e6, 1e-8, 1.0, 1e-11, 1e-9)
    settled = scan_of([level(0.0), level(1.0)], rate=2e3, adc=adc, duration=0.2)
    run = simulate(settled)
    share = 1e-11 / (1e-11 + 1e-8)
    memory = share / (1 - (1 - share) * np.exp(-1e-3 / 1e-2))
    assert memory == pytest.approx(0.0103991, abs=5e-8)
    held = {name: float(run.channels[name].held[-1]) for name in settled.names}
    assert held["c0"] / held["c1"] == pytest.approx(memory, abs=1e-6)
    at_rest = scan_of(
        [level(0.0), level(1.0)], rate=2e3, adc=adc, duration=0.5, more='initial = "rest"'
    )
    for name in held:
        long = simulate(at_rest).channels[name].held[-1]
        assert long == pytest.approx(held[name], abs=0.01 * settled.adc.lsb)


def test_one_capacitor_goes_round_against_the_whole_circuit() -> None:
    """Sources, pins and the capacitor as one linear circuit with switches, by SciPy's expm."""
    rs, cp, rsw, cs, taken = 2e4, 2e-9, 500.0, 2e-11, 8e-6
    scan = scan_of(
        [sine(200), sine(330, phase=1.0), level(-2.0)],
        scan='order = ["c0", "c1", "c0", "c2"]\ndwell = 2\ndiscard = 1\nslot = 140e-6',
        adc=sampled(rs, cp, rsw, cs, taken),
        duration=5e-3,
        more='initial = "rest"',
    )
    looks = held_looks(simulate(scan, discarded=True))
    # Pins 0 to 2, the capacitor, then sine and cosine of two sources and a constant.
    open_ = np.zeros((9, 9))
    for i, source in enumerate((4, 6, 8)):
        open_[i, i], open_[i, source] = -1 / (rs * cp), (1.0, 1.0, -2.0)[i] / (rs * cp)
    for i, frequency in ((4, 200.0), (6, 330.0)):
        open_[i, i + 1], open_[i + 1, i] = 2 * np.pi * frequency, -2 * np.pi * frequency
    state, now = np.array([0, 0, 0, 0, 0, 1, np.sin(1.0), np.cos(1.0), 1.0]), 0.0
    expected = []
    for time, i, _ in looks:
        closed = open_.copy()
        closed[i, i] -= 1 / (rsw * cp)
        closed[i, 3] += 1 / (rsw * cp)
        closed[3, i], closed[3, 3] = 1 / (rsw * cs), -1 / (rsw * cs)
        closing = max(time - taken, now)  # the first look is at the start of the run
        state = expm(open_ * (closing - now)) @ state
        state = expm(closed * (time - closing)) @ state
        expected.append(state[3])
        now = time
    found = np.array([held for *_, held in looks])
    np.testing.assert_allclose(found[1:], expected[1:], rtol=0, atol=1e-9 * FULL)
