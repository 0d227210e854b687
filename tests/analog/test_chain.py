"""The composed chain: its response, its states at rest, and what other libraries make of it."""

from __future__ import annotations

from typing import Any

import control
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.analog.chain import Chain, chain_of
from frontend_sim.analog.stages import (
    Butterworth,
    Gain,
    InvertingAmplifier,
    PolesZeros,
    RcHighpass,
    RcLowpass,
    SecondOrder,
    TransportDelay,
)
from frontend_sim.analog.stages.base import Stage
from frontend_sim.errors import ModelError

F = np.logspace(-2, 6, 41)

STAGES: list[Stage] = [
    RcLowpass(resistance=10e3, capacitance=4.7e-9),
    SecondOrder(corner=2e3, quality_factor=1.7, response="band-pass", gain=3.0),
    RcHighpass(resistance=1e5, capacitance=1e-6),
    InvertingAmplifier(gain=-2.0, gain_bandwidth=1e6),
    Butterworth(order=3, corner=4e3),
    PolesZeros(poles=(-900.0, -900.0), zeros=(-50.0,), gain=900.0),
]


def _by_state_space(chain: Chain, f: Any, point: int = -1) -> Any:
    s = 2j * np.pi * np.asarray(f)
    system = s[:, None, None] * np.eye(chain.order) - chain.a
    x = np.linalg.solve(system, np.broadcast_to(chain.b[:, None], (len(s), chain.order, 1)))
    return x[..., 0] @ chain.c[point] + chain.d[point]


def test_matrices_and_response_are_one_model() -> None:
    """c (s - a)^-1 b + d of the composed matrices is the product of the stages' responses.

    Over eight decades, to 1e-9 of the value or 1e-12 of the largest gain: far below the corner of
    a high pass its two ways cancel in the state space, not in the product.
    """
    chain = chain_of(STAGES)
    found = chain.response(F)
    alone = np.prod([chain_of([stage]).response(F) for stage in STAGES], axis=0)
    np.testing.assert_allclose(found, alone, rtol=1e-13)
    atol = 1e-12 * np.max(np.abs(found))
    np.testing.assert_allclose(_by_state_space(chain, F), found, rtol=1e-9, atol=atol)


def test_every_point_is_the_chain_up_to_there() -> None:
    """Row i of the outputs is the chain of the first i stages; point 0 is the stimulus."""
    chain = chain_of(STAGES)
    assert chain.points[0] == "stimulus"
    assert chain.points[1:] == tuple(f"{i} {s.kind}" for i, s in enumerate(STAGES, 1))  # type: ignore[attr-defined]  # every kind has one
    np.testing.assert_array_equal(_by_state_space(chain, F, 0), 1.0)
    for point in range(1, len(STAGES)):
        part = chain_of(STAGES[:point]).response(F)
        atol = 1e-12 * np.max(np.abs(part))
        np.testing.assert_allclose(_by_state_space(chain, F, point), part, rtol=1e-9, atol=atol)


def test_the_matrix_is_block_lower_triangular() -> None:
    """No stage acts back on one before it, and the poles stand on the diagonal blocks."""
    chain = chain_of(STAGES)
    at = 0
    for part in chain.sections:
        for block in part.blocks:
            stop = at + block.order
            np.testing.assert_array_equal(chain.a[at:stop, stop:], 0.0)
            np.testing.assert_array_equal(chain.a[at:stop, at:stop], block.a)
            at = stop
    assert at == chain.order == len(chain.poles)


def test_control_gets_the_same_system() -> None:
    """``control.StateSpace`` and ``control.TransferFunction`` respond as the chain does."""
    chain = chain_of(STAGES[:4])
    f = np.logspace(0, 5, 31)
    true = chain.response(f)
    for system in (chain.state_space(), chain.transfer_function()):
        found = system(2j * np.pi * f)
        np.testing.assert_allclose(found, true, rtol=1e-9, atol=1e-12)
    assert isinstance(chain.state_space(), control.StateSpace)
    poles = np.sort_complex(chain.transfer_function().poles())
    np.testing.assert_allclose(poles, np.sort_complex(chain.poles), rtol=1e-9)


@pytest.mark.parametrize("stages", [[], [Gain(gain=-2.5)], [Gain(gain=0.0)]])
def test_chains_without_states_reach_control(stages: list[Stage]) -> None:
    """An empty chain, a gain, and a gain of nothing."""
    chain = chain_of(stages)
    gain = stages[0].gain if stages else 1.0  # type: ignore[attr-defined]  # a Gain
    assert chain.order == 0
    np.testing.assert_array_equal(chain.response(F), gain)
    for system in (chain.state_space(), chain.transfer_function()):
        assert system(1j) == gain
    assert len(chain.settled(2.0)) == 0


def test_zeros_at_the_origin_survive_the_expansion() -> None:
    """A fourth-order high pass expanded for control still blocks zero frequency exactly."""
    chain = chain_of([Butterworth(order=4, corner=50.0, response="high-pass")])
    numerator = chain.transfer_function().num[0][0]
    np.testing.assert_array_equal(numerator, [1.0, 0.0, 0.0, 0.0, 0.0])


@given(level=st.floats(-100.0, 100.0).map(lambda value: round(value, 9)))
@settings(max_examples=25, deadline=None)
def test_settled_states_stay(level: float) -> None:
    """At rest nothing moves: a x + b u = 0, and the pin has the gain at zero frequency."""
    chain = chain_of([STAGES[0], Butterworth(order=4, corner=3e3), *STAGES[4:]])
    x = chain.settled(level)
    rates = np.abs(chain.a) @ np.abs(x) + np.abs(chain.b * level)
    assert np.all(np.abs(chain.a @ x + chain.b * level) <= 1e-13 * rates)
    pin = chain.c[-1] @ x + chain.d[-1] * level
    true = chain.response(np.zeros(1))[0].real * level
    assert pin == pytest.approx(true, rel=1e-12, abs=1e-14 * abs(level))


INTEGRATOR = PolesZeros(poles=(0.0,), gain=50.0)


def test_an_integrator_that_would_have_drifted_is_refused() -> None:
    """A pole at the origin has no settled state but on zero; the message says what to do."""
    chain = chain_of([STAGES[0], INTEGRATOR])
    with pytest.raises(ModelError, match=r"'2 poles-zeros'.*drifted away.*initial = \"rest\""):
        chain.settled(0.1)
    np.testing.assert_array_equal(chain.settled(0.0), 0.0)


@given(
    level=st.floats(-10.0, 10.0),
    resistance=st.floats(1.0, 1e6),
    capacitance=st.floats(1e-12, 1e-3),
    order=st.integers(1, 6),
)
@settings(deadline=None)
def test_an_integrator_behind_a_high_pass_rests(
    level: float, resistance: float, capacitance: float, order: int
) -> None:
    """What a high pass lets through of a settled value is exactly nothing, not a rounding."""
    rc = RcHighpass(resistance=resistance, capacitance=capacitance)
    filtered = Butterworth(order=order, corner=1.0 / resistance, response="high-pass")
    for stage in (rc, filtered):
        x = chain_of([stage, INTEGRATOR]).settled(level)
        assert x[-1] == 0.0


def test_a_delay_commutes_and_turns_the_phase() -> None:
    """exp(-s T) of the sum of the delays, wherever in the chain they stand."""
    delay = TransportDelay(delay=12.5e-6)
    chain = chain_of([delay, *STAGES[:2], delay])
    np.testing.assert_array_equal(chain.delay, [0.0, 12.5e-6, 12.5e-6, 12.5e-6, 25e-6])
    true = chain_of(STAGES[:2]).response(F) * np.exp(-2j * np.pi * F * 25e-6)
    np.testing.assert_allclose(chain.response(F), true, rtol=1e-12)
    np.testing.assert_allclose(
        chain.without_delay().response(F), chain_of(STAGES[:2]).response(F), rtol=1e-14
    )


def test_a_delay_has_no_state_space() -> None:
    """A delay is not dropped silently on the way to control; the message names the cure."""
    chain = chain_of([STAGES[0], TransportDelay(delay=1e-3)])
    for convert in (chain.state_space, chain.transfer_function):
        with pytest.raises(ModelError, match=r"0.001 s.*without_delay\(\).*control\.pade"):
            convert()
    assert chain_of([TransportDelay(delay=0.0)]).state_space()(1j) == 1.0


def test_time_constants_twelve_decades_apart() -> None:
    """100 ps to 100 s in one chain: poles exact, response right at both ends, rest on 1 V."""
    taus = [1e-10, 1e2, 1e-4, 1e-7, 1e-1]
    chain = chain_of([RcLowpass(resistance=1e3, capacitance=tau / 1e3) for tau in taus])
    np.testing.assert_allclose(chain.poles, [-1.0 / tau for tau in taus], rtol=1e-15)
    f = np.logspace(-4, 10, 57)
    s = 2j * np.pi * f
    true = np.prod([1.0 / (1.0 + s * tau) for tau in taus], axis=0)
    np.testing.assert_allclose(chain.response(f), true, rtol=1e-13)
    np.testing.assert_allclose(chain.settled(1.0), 1.0, rtol=1e-14)


@pytest.mark.parametrize("pole", [(1.0, 0.0), (2.0, 300.0)])
def test_an_unstable_stage_is_refused(pole: tuple[float, float]) -> None:
    """A pole in the right half plane is named, with the stage that has it."""
    poles = (pole,) if pole[1] == 0.0 else (pole, (pole[0], -pole[1]))
    with pytest.raises(
        ModelError, match=r"stage 'hot' is unstable.*no pole may lie in the right half plane"
    ):
        chain_of([PolesZeros(name="hot", poles=poles)])
