"""What instants and events cost: a few of the long steps each, however many there are."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest
from drives import InMemory, marched

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.cut import CutChain
from frontend_sim.analog.stages import Butterworth, RailLimit
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import Simulation, interval_kernels
from frontend_sim.simulation.limited import Limited
from frontend_sim.simulation.linear import Axis, Linear
from frontend_sim.simulation.uniform import UniformPath
from frontend_sim.stimulus import Pulse

COUNT = 4000


@pytest.fixture
def parts(monkeypatch: pytest.MonkeyPatch) -> list[int]:
    """Collect the number of instants that a path over recorded points takes at a time."""
    counted: list[int] = []
    read = UniformPath._read

    def counting(self: UniformPath, states: Any, points: Any, here: Any, since: Any) -> Any:
        counted.append(len(here))
        return read(self, states, points, here, since)

    monkeypatch.setattr(UniformPath, "_read", counting)
    return counted


def test_a_recording_that_jumps_at_every_conversion_is_clipped_many_at_a_time(
    parts: list[int],
) -> None:
    """Both sides of 4000 jumps in some ten parts, where they were asked a few at a time."""
    data = np.random.default_rng(5).uniform(-4.0, 4.0, COUNT)
    drive, cut = InMemory(data, 1e4, "hold"), CutChain.of([RailLimit(low=-1.0, high=1.0)])
    axis, last = Axis(1e-4, 1e-4), [len(cut.points) - 1]
    model = Limited.of(cut, [drive], last, "settled", axis, 1e4, COUNT / 1e4)
    found = marched(model, np.arange(COUNT) / 1e4, None)
    np.testing.assert_array_equal(found, np.clip(data, -1.0, 1.0))
    assert len(parts) < COUNT / 100


def test_a_point_inside_the_chain_is_told_at_many_instants_at_a_time(
    parts: list[int], tmp_path: Path
) -> None:
    """A recording at all its conversions, as checks of other points than the pin ask for it."""
    file = tmp_path / "points.csv"
    np.savetxt(file, np.random.default_rng(1).uniform(-1.0, 1.0, COUNT), header="x", comments="")
    rc = {"kind": "rc-lowpass", "resistance": 1e3, "capacitance": 1e-9}
    scenario = Scenario.model_validate(
        {
            "stimulus": {"kind": "recording", "file": file, "column": "x", "rate": 1e5},
            "chain": [rc, {"kind": "gain", "gain": 0.5}],
            "adc": {"rate": 1e5, "bits": 12, "low": -1.0, "high": 1.0},
        }
    )
    simulation = Simulation(scenario)
    instants = simulation.look_instants()
    inside, pin = simulation.values(simulation.chain.points[1:], instants)
    np.testing.assert_allclose(pin, 0.5 * inside, rtol=0, atol=1e-15)
    assert len(parts) < COUNT / 100


def test_an_event_costs_two_steps_of_its_own(monkeypatch: pytest.MonkeyPatch) -> None:
    """Of the 32 instants in a row of them an edge leaves all but its neighbours as they are."""
    taken, others = 0, 0
    march = interval_kernels.march

    def counting(z: Any, n: int, count: Any, *rest: Any) -> None:
        nonlocal taken, others
        taken += int(np.count_nonzero(count))
        others += int(np.count_nonzero(count == 0))
        march(z, n, count, *rest)

    monkeypatch.setattr(interval_kernels, "march", counting)
    (drive,) = Pulse(high=1.0, width=1.23e-3, period=5.11e-3).drives((1,))
    chain = chain_of([Butterworth(order=3, corner=3e3)])
    model = Linear.of(chain, [drive], [1], "settled", Axis(1e-4, 2e-4, uniform=True))
    instants = np.arange(COUNT) / 1e4
    model.advance(model.start(), 0, instants)
    events = len(drive.events(0.0, float(instants[-1])))  # type: ignore[union-attr]  # no points
    assert events > 150
    assert others <= 2 * events + 1
    assert taken <= COUNT / 32 + 1 + 2 * events
