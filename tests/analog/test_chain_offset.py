"""Constant sources of the stages: what they leave at every point of the chain."""

from __future__ import annotations

import numpy as np
import pytest

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.stages import (
    Buffer,
    Gain,
    Ladder,
    NoninvertingAmplifier,
    PolesZeros,
    RcHighpass,
    RcLowpass,
    TransportDelay,
)
from frontend_sim.errors import ModelError

BUFFER = Buffer(offset_voltage=1e-3, offset_drift=1e-5)
LOW = RcLowpass(resistance=1e4, capacitance=1e-8)


def test_offsets_are_multiplied_by_the_gain_behind_them() -> None:
    """1 mV before a gain of 5 and a low pass of 1: 5 mV at the pin, 1 mV at its own point."""
    chain = chain_of([LOW, BUFFER, Gain(gain=5.0), LOW, TransportDelay(delay=1e-3)])
    np.testing.assert_allclose(chain.offset, [0.0, 0.0, 1e-3, 5e-3, 5e-3, 5e-3], rtol=1e-14)


def test_offsets_of_several_stages_add_up() -> None:
    """2 (1 mV) + 2 (2 mV) behind a gain of 2 with an offset of its own, at 25 degC."""
    second = NoninvertingAmplifier(gain=2.0, gain_bandwidth=1e6, offset_voltage=2e-3)
    assert chain_of([BUFFER, second]).offset[-1] == pytest.approx(6e-3, rel=1e-14)


def test_a_high_pass_takes_all_of_it() -> None:
    """Behind a high pass, or a series capacitance of a ladder, exactly nothing is left."""
    ladder = Ladder.model_validate(
        {"element": [{"place": "series", "capacitance": 1e-6}], "load_resistance": 1e4}
    )
    for stage in (RcHighpass(resistance=1e4, capacitance=1e-6), ladder):
        chain = chain_of([BUFFER, stage, Gain(gain=100.0)])
        np.testing.assert_array_equal(chain.offset[2:], 0.0)


def test_temperature_moves_the_offset() -> None:
    """10 uV/K over 40 K above 25 degC add 0.4 mV."""
    assert chain_of([BUFFER], 298.15 + 40.0).offset[-1] == pytest.approx(1.4e-3, rel=1e-12)
    assert chain_of([BUFFER]).offset[-1] == pytest.approx(1e-3, rel=1e-12)


def test_stages_without_constants_have_none() -> None:
    """A chain of ideal stages has an offset of zero everywhere, integrators included."""
    chain = chain_of([Gain(gain=2.0), PolesZeros(poles=(0.0,), gain=1e3)])  # type: ignore[arg-type]  # read as a root
    np.testing.assert_array_equal(chain.offset, 0.0)


def test_an_integrator_drifts_away_on_an_offset() -> None:
    """A pole at the origin behind an offset has no settled value: refused, with a cure."""
    integrator = PolesZeros(poles=(0.0,), gain=1e3)  # type: ignore[arg-type]  # read as a root
    with pytest.raises(ModelError, match=r"would drift away on the offset of 0.001.*high pass"):
        chain_of([BUFFER, integrator])
    after = chain_of([BUFFER, RcHighpass(resistance=1e4, capacitance=1e-6), integrator])
    assert after.offset[-1] == 0.0
