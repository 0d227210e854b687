"""One sampling capacitor between many inputs: the core alone, without scenario and stimulus."""

from __future__ import annotations

import math

import numpy as np
import pytest

from frontend_sim.analog.port import OutputImpedance, Port
from frontend_sim.simulation.switched_memory import SwitchedMemory, Visits
from frontend_sim.simulation.switched_network import SwitchedNetwork
from frontend_sim.simulation.switched_period import (
    Period,
    constant_visits,
    memory_matrix,
    settled_state,
    settled_voltages,
)

SAMPLING, OUTSIDE, SOURCE = 10e-12, 10e-9, 1e6
"""Capacitances and the source's resistance of the published value."""
VISIT = 1e-3
"""From one visit of the victim to the next [s]."""
SWITCH = 1.0
"""So fast that the acquisition below is charge sharing, to 1e-7 of it [ohm]."""


def _network(resistance: float, capacitance: float) -> SwitchedNetwork:
    port = Port.of(OutputImpedance(), resistance, capacitance)
    return SwitchedNetwork.of(port, SWITCH, SAMPLING)


def _pair() -> tuple[SwitchedMemory, Period]:
    """Return a stiff aggressor and the victim, visited in turn."""
    networks = [_network(1.0, 0.0), _network(SOURCE, OUTSIDE)]
    memory = SwitchedMemory.of(networks, 1e-9, (1.0, 0.0, 0.0), 2.0 * VISIT, (VISIT,))
    return memory, Period(np.array([0, 1]), np.array([0.0, 0.5 * VISIT]), VISIT)


def _published() -> float:
    """Charge sharing, a/(1 - (1 - a) e^(-T/t)); computed, 0.0103991 at the printed precision."""
    a, t = SAMPLING / (SAMPLING + OUTSIDE), SOURCE * OUTSIDE
    return a / (1.0 - (1.0 - a) * math.exp(-VISIT / t))


LSB = 1.0 / 65536.0
"""Of a difference of one volt at 16 bits; the tests allow a hundredth of it."""


def test_the_fixed_point_is_the_published_scan_memory() -> None:
    """The victim takes 0.0103991 of the difference to the aggressor, to 0.01 LSB."""
    memory, period = _pair()
    matrix = memory_matrix(memory, period)
    assert _published() == pytest.approx(0.0103991, abs=5e-8)
    assert matrix[1, 0] == pytest.approx(_published(), abs=0.01 * LSB)
    np.testing.assert_allclose(matrix.sum(axis=1), 1.0, rtol=0, atol=1e-12)


def test_a_long_run_reaches_it_too() -> None:
    """After 400 visits from rest the same number is there, to 0.01 LSB."""
    memory, period = _pair()
    count = 400
    channel = np.tile(period.channel, count)
    instants = (np.arange(count)[:, None] * VISIT + period.instants).ravel()
    visits = constant_visits(memory, channel, instants, np.array([1.0, 0.0]))
    start = memory.state(0.0, np.array([-VISIT, -0.5 * VISIT]))
    _, held, _ = memory.advance(start, visits)
    assert held[-1] == pytest.approx(_published(), abs=0.01 * LSB)
    assert held[1] == pytest.approx(SAMPLING / (SAMPLING + OUTSIDE), rel=1e-6)


def _sixteen() -> tuple[SwitchedMemory, Period]:
    networks = [_network(10.0**k * 100.0, 10.0 ** -(k + 9)) for k in (0, 1, 2, 3) for _ in range(4)]
    slot = 20e-6
    period = Period(np.array([*range(15, -1, -1), 3]), np.arange(1, 18) * slot, 17 * slot)
    memory = SwitchedMemory.of(networks, 3e-6, (0.9, 0.0, 0.1), 2.0 * period.length)
    return memory, period


def test_the_fixed_point_is_one() -> None:
    """A period from the fixed point leads back to it, for a scan of 16 channels."""
    memory, period = _sixteen()
    levels = np.linspace(-1.0, 2.0, 16)
    state = settled_state(memory, period, levels)
    visits = constant_visits(memory, period.channel, period.instants, levels)
    after, held, _ = memory.advance(state, visits)
    np.testing.assert_allclose(after.q, state.q, rtol=0, atol=1e-12)
    assert after.held == pytest.approx(state.held, abs=1e-12)
    np.testing.assert_allclose(after.last - state.last, period.length, rtol=1e-12)
    np.testing.assert_allclose(held, memory_matrix(memory, period) @ levels, atol=1e-12)


def test_channels_alike_see_nothing_of_the_memory() -> None:
    """Where all inputs rest at one voltage, each visit holds it."""
    memory, period = _sixteen()
    held = settled_voltages(memory, period, np.full(16, 1.7))
    np.testing.assert_allclose(held, 1.7, rtol=1e-12)


def test_known_intervals_and_cuts_change_nothing() -> None:
    """Tabulated steps agree with the known one to 1e-14; cuts do not change a bit."""
    memory, period = _sixteen()
    known = SwitchedMemory.of(
        memory.networks, 3e-6, memory.starts, memory.longest, (period.length, 4 * 20e-6)
    )
    channel = np.tile(period.channel, 40)
    instants = (np.arange(40)[:, None] * period.length + period.instants).ravel()
    visits = constant_visits(memory, channel, instants, np.linspace(-1.0, 1.0, 16))
    start = memory.state(0.3, np.full(16, -1e-6))
    _, held, _ = memory.advance(start, visits)
    _, quick, _ = known.advance(start, visits)
    np.testing.assert_allclose(quick, held, rtol=0, atol=1e-14)
    state, parts = start, []
    for part in (slice(0, 7), slice(7, 8), slice(8, 333), slice(333, 680)):
        piece = Visits(
            visits.channel[part],
            visits.instants[part],
            visits.ended[part],
            visits.begun[part],
            visits.pin[part],
        )
        state, more, _ = memory.advance(state, piece)
        parts.append(more)
    assert np.array_equal(np.concatenate(parts), held)
