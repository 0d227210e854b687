"""Stages behind a multiplexer settle from one channel to the next."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.typing import NDArray
from scanned import FULL, LOW_PASS, SHARED, crosstalk_by_runs, level, scan_of, sine
from scipy.integrate import solve_ivp

from frontend_sim.measure.scan import crosstalk
from frontend_sim.simulation import simulate

Real = NDArray[np.float64]


@pytest.mark.parametrize("jitter", ["", "aperture_jitter = 1e-7"], ids=["even", "jittered"])
@pytest.mark.parametrize("slot", ["", "slot = 130e-6"], ids=["tight", "spare"])
def test_shared_stages_against_an_ode(slot: str, jitter: str) -> None:
    """Two channels and one amplifier, whose input jumps: a tight solver, switch by switch."""
    scan = scan_of(
        [sine(200), sine(330, phase=1.0)],
        scan=f"dwell = 2\ndiscard = 1\nsettle = 5e-6\n{slot}\n{SHARED}",
        chain=LOW_PASS,
        adc=jitter,
        duration=4e-3,
    )
    run = simulate(scan, discarded=True)
    rhythm = scan.rhythm
    times = np.sort(np.concatenate([run.channels[name].time for name in scan.names]))
    w, phase = 2 * np.pi * np.array([200.0, 330.0]), np.array([0.0, 1.0])
    state, now = np.array([np.sin(0.0), np.sin(1.0), np.sin(0.0)]), 0.0
    expected: list[float] = []
    visits = times.reshape(-1, 2) if len(times) % 2 == 0 else times[:-1].reshape(-1, 2)
    for visit, looks in enumerate(visits):
        end = looks[-1]
        if slot:
            end = max(-rhythm.lead + (visit + 1) * rhythm.slot, end)

        def slope(t: float, x: Real, i: int = visit % 2) -> Real:
            u = np.sin(w * t + phase)
            return np.array([*((u - x[:2]) / 1e-4), (x[i] - x[2]) / 1e-5])

        for until in (*looks, end):
            if until > now:
                found = solve_ivp(slope, (now, until), state, "DOP853", rtol=1e-12, atol=1e-13)
                state, now = found.y[:, -1], until
            expected.append(state[2])
        expected.pop()
    pins = {
        time: pin
        for name in scan.names
        for time, pin in zip(run.channels[name].time, run.channels[name].pin, strict=True)
    }
    asked = np.array([pins[time] for time in visits.ravel()])
    np.testing.assert_allclose(asked, expected, rtol=0, atol=1e-9 * FULL)


def test_offsets_settle_through_shared_stages_too() -> None:
    """Offsets of the channels' own amplifiers jump at the switch, those of a shared one do not."""
    own = '[[channel.chain]]\nkind = "noninverting-amplifier"\ngain = 2\noffset_voltage = 1e-3'
    shared = (
        '[[scan.chain]]\nkind = "noninverting-amplifier"\ngain = 3\ngain_bandwidth = 60e3\n'
        "offset_voltage = 2e-3"
    )
    scan = scan_of([level(0.0), level(0.4)], scan=shared, chain=own, duration=5e-3)
    run = simulate(scan)
    # Levels before the shared stage, plus its own offset; each slot is 2 pi 20 kHz · 50 us long.
    a, b = 0.0 + 2e-3, 0.8 + 2e-3
    left = np.exp(-2 * np.pi * 20e3 * 50e-6)
    for name, own_level, other in [("c0", a, b), ("c1", b, a)]:
        expected = 3 * (own_level + 2e-3) + 3 * (other - own_level) * left / (1 + left)
        np.testing.assert_allclose(run.channels[name].pin[-1], expected, rtol=0, atol=1e-9 * FULL)


def test_a_transport_delay_before_the_switch_only_delays() -> None:
    """The channel arrives later, and the shared stage settles from the switch on as before."""
    delay = '[[channel.chain]]\nkind = "transport-delay"\ndelay = 1e-3'
    late = simulate(scan_of([sine(50), level(1)], scan=SHARED, chain=delay, duration=10e-3))
    early = simulate(scan_of([sine(50), level(1)], scan=SHARED, duration=10e-3))
    behind = late.channels["c0"].time >= 1e-3
    count = int(np.count_nonzero(behind))
    np.testing.assert_allclose(
        # The first few remember what the other delay had them start on.
        late.channels["c0"].pin[-count + 5 :],
        early.channels["c0"].pin[5:count],
        rtol=0,
        atol=1e-9 * FULL,
    )


def test_the_fixed_point_is_where_long_runs_end() -> None:
    """Crosstalk in LSB from two runs that differ by one level, shared stage and three channels."""
    slow = SHARED.replace("1e-8", "2e-8")
    lines = f'order = ["c0", "c2", "c1", "c2"]\nsettle = 3e-6\n{slow}'
    found = crosstalk(scan_of([level(0.0)] * 3, scan=lines, duration=10e-3)).matrix
    expected = crosstalk_by_runs("pin", lines)
    assert np.min(np.max(np.abs(expected), axis=0)) > 1.0  # there is something to see
    apart = ~np.eye(3, dtype=bool)
    np.testing.assert_allclose(found[apart], expected[apart], rtol=1e-9, atol=1e-6 * 2**16)


@pytest.mark.parametrize(
    ("scan", "adc"),
    [
        ("settle = 4e-6", "first = 3e-3\nrate_error = 0.003\naperture_delay = 2e-6"),
        ("slot = 190e-6\ndwell = 3", "[adc.averaging]\ncount = 4\nshift = 2\ninterval = 3e-6"),
        ('order = ["c0", "c1", "c1", "c2"]', "first = 1e-5"),
        ("dwell = 2\nslot = 150e-6", "[adc.averaging]\ncount = 2\nshift = 1"),
    ],
)
def test_columns_and_rows_of_instants_agree(
    scan: str, adc: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Stepping every column as an even row gives what going from instant to instant gives."""
    if "interval" in adc:
        scan = scan.replace("dwell = 3", "dwell = 1")
    made = scan_of(
        [sine(90), sine(70, phase=2), level(1)], scan=f"{scan}\n{SHARED}", chain=LOW_PASS, adc=adc
    )
    columns = simulate(made)
    monkeypatch.setattr("frontend_sim.simulation.shared_pins.MOST_COLUMNS", 0)
    rows = simulate(made)
    for name in made.names:
        one, two = columns.channels[name], rows.channels[name]
        np.testing.assert_array_equal(one.time, two.time)
        np.testing.assert_allclose(one.pin, two.pin, rtol=0, atol=1e-11 * FULL)
