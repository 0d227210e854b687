"""Instants that all lie alike between points of a recording."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.stages.rc_lowpass import RcLowpass
from frontend_sim.analog.stages.transport_delay import TransportDelay
from frontend_sim.simulation.linear import Axis, Linear
from tests.drives import InMemory

STAGES = [
    RcLowpass(resistance=1e3, capacitance=1e-9),
    RcLowpass(resistance=1e3, capacitance=50e-12),
    TransportDelay(delay=1e-6),
]


@pytest.mark.parametrize("between", ["hold", "line"])
def test_the_known_step_is_that_of_the_table(between: Any) -> None:
    """On an even axis one known step serves all; the table of any interval agrees to 1e-13."""
    chain = chain_of(STAGES)
    rng = np.random.default_rng(5)
    drive = InMemory(rng.uniform(-1.0, 1.0, 40_000), 800e3, between)
    instants = np.arange(4_000) / 100e3
    found = []
    for uniform in (True, False):
        model = Linear.of(chain, [drive], [3], "settled", Axis(1e-5, 2e-5, uniform))
        _, (values,) = model.advance(model.start(), 0, instants)
        found.append(values)
    np.testing.assert_allclose(found[0], found[1], rtol=0, atol=1e-13)
