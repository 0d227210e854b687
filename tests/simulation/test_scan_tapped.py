"""A sampling capacitor behind shared stages, which it loads."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.typing import NDArray
from scanned import FULL, SHARED, crosstalk_by_runs, held_looks, level, sampled, scan_of, sine
from scipy.linalg import expm

from frontend_sim.measure.scan import crosstalk
from frontend_sim.simulation import simulate

Real = NDArray[np.float64]


@pytest.mark.parametrize("jitter", ["", "aperture_jitter = 1e-8\n"], ids=["even", "jittered"])
def test_one_capacitor_behind_shared_stages_against_the_whole_circuit(jitter: str) -> None:
    """Sources, multiplexer, a loaded shared low pass, pin and capacitor, by SciPy's expm."""
    rs, cp, rsw, cs, taken = 2e3, 1e-9, 500.0, 2e-11, 8e-6
    scan = scan_of(
        [sine(200), sine(330, phase=1.0)],
        scan=f"dwell = 2\ndiscard = 1\nslot = 140e-6\n{SHARED}",
        adc=jitter + sampled(rs, cp, rsw, cs, taken),
        duration=5e-3,
        more='initial = "rest"',
    )
    looks = held_looks(simulate(scan, discarded=True))
    # Node of the low pass, pin, capacitor, then sine and cosine of the sources.
    r, c = 1e3, 1e-8

    def circuit(channel: int, closed: bool) -> Real:
        a = np.zeros((7, 7))
        a[0, 0], a[0, 1] = -1 / (r * c) - 1 / (rs * c), 1 / (rs * c)
        a[0, 3 + 2 * channel] = 1 / (r * c)
        a[1, 0], a[1, 1] = 1 / (rs * cp), -1 / (rs * cp)
        if closed:
            a[1, 1] -= 1 / (rsw * cp)
            a[1, 2] = 1 / (rsw * cp)
            a[2, 1], a[2, 2] = 1 / (rsw * cs), -1 / (rsw * cs)
        for place, frequency in ((3, 200.0), (5, 330.0)):
            a[place, place + 1], a[place + 1, place] = 2 * np.pi * np.array([frequency, -frequency])
        return a

    state, now, connected = np.array([0, 0, 0, 0, 1, np.sin(1.0), np.cos(1.0)]), 0.0, 0
    expected, rhythm = [], scan.rhythm
    for number, (time, i, _) in enumerate(looks):
        switch = now
        if number and number % 2 == 0:  # spare time before the switch
            switch = max(number // 2 * rhythm.slot - rhythm.lead, now)
        state = expm(circuit(connected, False) * (switch - now)) @ state
        connected = i
        closing = max(time - taken, switch)
        state = expm(circuit(i, False) * (closing - switch)) @ state
        state = expm(circuit(i, True) * (time - closing)) @ state
        expected.append(state[2])
        now = time
    found = np.array([held for *_, held in looks])
    np.testing.assert_allclose(found[1:], expected[1:], rtol=0, atol=1e-9 * FULL)


def test_capacitor_behind_shared_stages_reaches_its_fixed_point() -> None:
    """Aggressor to victim from two long runs that differ by one level."""
    adc = sampled(2e3, 1e-9, 500.0, 5e-11, 8e-6)
    lines = 'order = ["c0", "c2", "c1", "c2"]\n' + SHARED
    found = crosstalk(scan_of([level(0.0)] * 3, scan=lines, adc=adc, duration=10e-3))
    assert found.ways == ("shared stages", "sampling capacitor")
    expected = crosstalk_by_runs("held", lines, adc)
    assert np.min(np.max(np.abs(expected), axis=0)) > 1.0  # there is something to see
    apart = ~np.eye(3, dtype=bool)
    np.testing.assert_allclose(found.matrix[apart], expected[apart], rtol=1e-9, atol=1e-6 * 2**16)
