"""Draws of one chain go side by side, and each is the run that it is by itself."""

from __future__ import annotations

from typing import get_args

import numpy as np
from drives import InMemory
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.stages import Butterworth, Gain, RcLowpass
from frontend_sim.analog.stages.noninverting_amplifier import NoninvertingAmplifier
from frontend_sim.simulation.draws import BESIDE, Draws, Known
from frontend_sim.simulation.engine import BLOCK
from frontend_sim.simulation.linear import Axis, Initial, Linear
from frontend_sim.simulation.uniform import LONGEST_SUM
from frontend_sim.stimulus.drive import Between

RATE = 1e5


def model(
    drive: InMemory, corner: float, stride: int, order: int = 3, initial: Initial = "settled"
) -> Linear:
    """Return the pin of a chain at every stride-th point of a drive."""
    stages = [RcLowpass(resistance=1e3, capacitance=1e-7), Butterworth(order=order, corner=corner)]
    interval = stride / RATE
    axis = Axis(interval, 2.0 * interval, uniform=True)
    return Linear.of(chain_of(stages), [drive], [2], initial, axis)


def alone(one: Linear, instants: np.ndarray) -> np.ndarray:
    """Return what a run by itself gives, block by block."""
    states, parts = one.start(), []
    for start in range(0, len(instants), BLOCK):
        states, (values,) = one.advance(states, start, instants[start : start + BLOCK])
        parts.append(values)
    return np.concatenate(parts)


@settings(max_examples=40, deadline=None)
@given(
    st.integers(1, 300),
    st.integers(1, 5000),
    st.lists(st.floats(10.0, 2e4), min_size=1, max_size=BESIDE + 2),
    st.sampled_from(get_args(Between)),
    st.sampled_from(get_args(Initial)),
)
def test_each_draw_is_its_own_run(
    stride: int, count: int, corners: list[float], between: Between, initial: Initial
) -> None:
    """Side by side or alone, the pin of every draw is the same to the last bit."""
    points = np.random.default_rng(stride).standard_normal(count * stride + 2)
    drive = InMemory(points, RATE, between)
    models = [model(drive, corner, stride, initial=initial) for corner in corners]
    instants = np.arange(count) / (RATE / stride)
    draws = Draws.of(models)
    assert draws is not None
    together = draws.outputs(instants)
    for one, row in zip(models, together, strict=True):
        assert np.array_equal(row, alone(one, instants))


def test_offsets_of_stages_are_there() -> None:
    """A constant that an amplifier adds is in the draws as in the run alone."""
    drive = InMemory(np.ones(4000), RATE)
    chains = [
        chain_of([NoninvertingAmplifier(gain=2.0, gain_bandwidth=1e5, offset_voltage=offset)])
        for offset in (0.0, 1e-3)
    ]
    axis = Axis(10 / RATE, 20 / RATE, uniform=True)
    models = [Linear.of(chain, [drive], [1], "settled", axis) for chain in chains]
    draws = Draws.of(models)
    assert draws is not None
    rows = draws.outputs(np.arange(400) * 10 / RATE)
    assert np.allclose(rows[1] - rows[0], 2e-3, rtol=0.0, atol=1e-12)


def test_what_cannot_go_side_by_side_is_told() -> None:
    """Another recording, stride or order, two drives, a stride beyond one sum, or two conversions
    for each point: no draws.
    """
    points = np.ones(LONGEST_SUM * 4)
    drive, other = InMemory(points, RATE), InMemory(points, RATE)
    assert Draws.of([model(drive, 1e3, 10), model(other, 1e3, 10)]) is None
    assert Draws.of([model(drive, 1e3, 10), model(drive, 1e3, 20)]) is None
    assert Draws.of([model(drive, 1e3, LONGEST_SUM + 1)]) is None
    assert Draws.of([model(drive, 1e3, 10), model(drive, 1e3, 10, order=4)]) is None
    assert Draws.of([model(drive, 1e3, 10), model(drive, 2e3, 10)]) is not None
    axis = Axis(10 / RATE, 20 / RATE, uniform=True)
    two = Linear.of(chain_of([Gain(gain=1.0)]), [drive, other], [1], "settled", axis)
    assert Draws.of([two]) is None
    denser = Axis(0.5 / RATE, 1.0 / RATE, uniform=True)
    assert (
        Draws.of([Linear.of(chain_of([Gain(gain=1.0)]), [drive], [1], "settled", denser)]) is None
    )
    assert Draws.of([]) is None


def test_known_values_come_back_by_number() -> None:
    """Values that are known already are handed out as a model hands them out."""
    known = Known(np.arange(10.0))
    _, values = known.advance(None, 3, np.zeros(4))
    assert values.tolist() == [[3.0, 4.0, 5.0, 6.0]]
