"""The sampling converter ready to run: cuts, instants, behind a real chain."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from digitizing import digitized
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.stages.rc_lowpass import RcLowpass
from frontend_sim.converter import Adc, AnyAdc, OversamplingAdc
from frontend_sim.converter.clock import look_count
from frontend_sim.converter.quantizer import converted_voltage, quantize, read_back
from frontend_sim.simulation.linear import Axis, Linear
from frontend_sim.simulation.uniform import WAVEFORM_TILE
from frontend_sim.stimulus.sine import Sine

AVERAGINGS = st.one_of(
    st.none(),
    st.builds(
        lambda count, shift, burst: {"count": count, "shift": shift}
        | ({"interval": 1e-5} if burst else {}),
        st.integers(2, 16), st.integers(0, 3), st.booleans(),
    ),
)  # fmt: skip
DITHERS = st.one_of(
    st.none(),
    st.fixed_dictionaries(
        {
            "shape": st.sampled_from(["uniform", "triangular"]),
            "width": st.floats(0.5, 3.0),
            "subtractive": st.booleans(),
        }
    ),
)


@given(
    averaging=AVERAGINGS,
    dither=DITHERS,
    nonlinearity=st.sampled_from([None, {"capacitor_mismatch": 0.03, "shape": "bow", "peak": 2.0}]),
    constant=st.sampled_from([0.0, 1e-2]),
    seed=st.integers(0, 2**63 - 1),
    cuts=st.lists(st.integers(1, 40_000), max_size=30),
)
@settings(max_examples=50, deadline=None)
def test_cuts_never_change_a_bit(
    averaging: Any, dither: Any, nonlinearity: Any, constant: float, seed: int, cuts: list[int]
) -> None:
    """Codes, voltages, flags and instants, with everything random in them."""
    made = Adc(
        rate=1e3, bits=12, low=-1.0, high=1.0, input_noise=1e-3, aperture_jitter=1e-7,
        rate_error=1e-4, averaging=averaging, dither=dither, nonlinearity=nonlinearity,
        wander={"shape": "gauss-markov", "rms": 1e-8, "correlation_time": 1},
        reference={"noise": 1e-3, "filter_time_constant": constant},
    )  # fmt: skip
    codes = 40_000 // made.looks

    def signal(times: Any) -> Any:
        return 1.01 * np.sin(2.0 * np.pi * 77.7 * times)

    whole, parts = digitized(made, signal, codes, seed), digitized(made, signal, codes, seed, cuts)
    for name in ("time", "pin", "codes", "voltage", "overrange"):
        np.testing.assert_array_equal(getattr(whole, name), getattr(parts, name))


def test_a_plain_converter_is_quantized_noise_and_all() -> None:
    """Without averaging and dither: what the functions of the quantizer give by themselves."""
    made = Adc(rate=1e4, bits=10, high=2.0, input_noise=1e-2, offset=1e-3, gain_error=0.01)

    def signal(times: Any) -> Any:
        return 1.0 + 1.05 * np.sin(2.0 * np.pi * 123.0 * times)

    found = digitized(made, signal, 3000, seed=9)
    codes, overrange = quantize(made, converted_voltage(made, signal(found.time), 0, 9))
    np.testing.assert_array_equal(found.codes, codes)
    np.testing.assert_array_equal(found.overrange, overrange)
    np.testing.assert_array_equal(found.voltage, read_back(made, codes))
    assert np.any(overrange)


def test_noise_of_the_circuit_is_not_in_the_pin() -> None:
    """It moves codes; the exact voltage at the pin is kept beside them without it."""
    made = Adc(rate=1e3, bits=16, low=-1.0, high=1.0)
    digitizer = made.digitizer(0)
    times, pin = digitizer.instants(0, 4), np.zeros(4)
    noise = np.array([0.1, -0.2, 0.3, 0.0])
    _, found = digitizer.convert(digitizer.start(), 0, times, pin, noise)
    np.testing.assert_array_equal(found.pin, pin)
    assert found.voltage == pytest.approx(noise, abs=made.lsb)
    over = OversamplingAdc(
        modulator_rate=1e3, order=1, decimation=2, bits=16, low=-1.0, high=1.0
    ).digitizer(0)
    _, mean = over.convert(over.start(), 0, times, pin, noise)
    assert mean.voltage == pytest.approx([-0.05, 0.15], abs=made.lsb)
    np.testing.assert_array_equal(mean.pin, [0.0, 0.0])


@pytest.mark.parametrize(
    "adc",
    [
        Adc(rate=20e3, bits=32, low=-1.0, high=1.0),
        Adc(rate=2e3, bits=24, low=-1.0, high=1.0, averaging={"count": 9, "interval": "10 us"}),
        OversamplingAdc(
            modulator_rate=256e3, order=3, decimation=64, bits=32, low=-1.0, high=1.0
        ),
        OversamplingAdc(
            modulator_rate=256e3, order=4, decimation=16, bits=32, low=-1.0, high=1.0,
            conversion="restarted", data_rate="1 kHz", rate_error="0.3 %",
        ),
    ],
    ids=["plain", "burst", "continuous", "restarted"],
)  # fmt: skip
def test_behind_a_chain(adc: AnyAdc) -> None:
    """A sine through an RC section, exact at every look, against its closed form.

    From rest at t = 0: sine of the steady state, less its value at t = 0 decaying with R C. The
    codes' mean over their looks is taken of the closed form by a plain sum.
    """
    constant, omega = 1e-3, 2.0 * np.pi * 200.0
    chain = chain_of((RcLowpass(resistance=10e3, capacitance=100e-9),))
    sine = Sine(amplitude=0.9, frequency=200.0)
    digitizer = adc.digitizer(3)
    axis = Axis(digitizer.interval, digitizer.longest)
    model = Linear.of(chain, sine.drives((0,)), [1], "rest", axis)
    codes = 60
    looks = look_count(adc, codes)
    states, state, found = model.start(), digitizer.start(), []
    for start in range(0, looks, WAVEFORM_TILE):
        stop = min(start + WAVEFORM_TILE, looks)
        times = digitizer.instants(start, stop)
        states, (pin,) = model.advance(states, start, times)
        state, part = digitizer.convert(state, start, times, pin)
        found.append(part.voltage)
    size, phase = 0.9 / np.hypot(1.0, omega * constant), -np.arctan(omega * constant)

    def closed(times: Any) -> Any:
        steady = size * np.sin(omega * times + phase)
        return steady - size * np.sin(phase) * np.exp(-times / constant)

    expected = digitized(adc, closed, codes, seed=3).voltage
    error = np.abs(np.concatenate(found) - expected)
    assert np.max(error) <= adc.lsb * (1.0 + 1e-6) + 1e-9
