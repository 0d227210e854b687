"""Stretches of time: which instants they hold, against looking at each instant alone."""

from __future__ import annotations

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.simulation.run import RunBlock
from frontend_sim.simulation.stretches import Stretches

WHOLE = st.integers(0, 60).map(float)
"""Whole numbers, so that ends meet and no rounding is in the way."""


@given(
    st.lists(st.tuples(WHOLE, st.integers(0, 9)), max_size=12), st.integers(0, 5), st.lists(WHOLE)
)
def test_an_instant_is_held_if_it_is_near_to_what_was_asked_for(
    asked: list[tuple[float, int]], around: int, instants: list[float]
) -> None:
    """In any order, overlapping, nested or touching; and no two stretches have one in common."""
    spans = np.array([[start, start + length] for start, length in asked]).reshape(-1, 2)
    found = Stretches.about(spans, float(around))
    time = np.array(sorted(instants))
    near = [any(a - around <= t <= b + around for a, b in spans) for t in time]
    assert found.hold(time).tolist() == near
    assert np.all(found.spans[:, 0] <= found.spans[:, 1])
    assert np.all(found.spans[1:, 0] > found.spans[:-1, 1])
    assert np.all(found.spans >= 0.0)
    kept = time[found.hold(time)]
    homes = [np.flatnonzero((found.spans[:, 0] <= t) & (t <= found.spans[:, 1]))[0] for t in kept]
    assert found.breaks(kept).tolist() == [
        k for k in range(1, len(homes)) if homes[k] != homes[k - 1]
    ]


@given(st.integers(1, 10**7), st.integers(1, 10**5), st.floats(1e-3, 1e9), st.floats(0.0, 100.0))
def test_instants_on_the_ends_are_held_however_they_round(
    number: int, around: int, rate: float, first: float
) -> None:
    """A window of whole intervals has as many on both sides, and no further one."""
    where = np.array([-around - 1, -around, 0, around, around + 1])
    time = first / rate + (number + around + where) / rate
    found = Stretches.about(np.array([[time[2], time[2]]]), around / rate)
    assert found.hold(time).tolist() == [False, True, True, True, False]


def test_a_part_of_a_block_has_what_lies_in_the_stretches() -> None:
    """Conversions and waveform by their own instants; what a block does not have stays empty."""
    time, fine = np.arange(10.0), np.arange(0.0, 10.0, 0.25)
    block = RunBlock(
        0, time, time + 0.5, np.arange(10), -time, time > 7.0, fine, {"pin": 2.0 * fine}
    )
    stretches = Stretches.about(np.array([[2.0, 2.0], [8.0, 9.5]]), 1.0)
    part, places = stretches.part(block)
    assert places.tolist() == [1, 2, 3, 7, 8, 9]
    assert part.pin.tolist() == [1.5, 2.5, 3.5, 7.5, 8.5, 9.5]
    assert part.codes.tolist() == [1, 2, 3, 7, 8, 9]
    assert part.overrange.tolist() == [False, False, False, False, True, True]
    assert part.waveform_time.tolist() == [*np.arange(1.0, 3.1, 0.25), *np.arange(7.0, 10.0, 0.25)]
    assert np.array_equal(part.waveform["pin"], 2.0 * part.waveform_time)
    assert len(part.held) == len(part.stimulus) == 0
