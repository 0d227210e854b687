"""Whatever samples are given, a measure answers or refuses: no other error, and no warning."""

from __future__ import annotations

from contextlib import suppress

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra import numpy as arrays
from sines import converter

from frontend_sim.errors import MeasureError
from frontend_sim.measure.aliasing import sampled_alias_error
from frontend_sim.measure.linearity import ramp_linearity, sine_linearity
from frontend_sim.measure.mains import mains_levels, mains_rejection, tone_levels
from frontend_sim.measure.noise import code_histogram, code_noise, noise_of
from frontend_sim.measure.sine_fit import cramer_rao, fit_sine, fit_sine_at
from frontend_sim.measure.spectrum import amplitude_spectrum, coherence_of, coherent_tone
from frontend_sim.measure.tone_quality import tone_quality
from frontend_sim.measure.transition import (
    delay,
    droop_of,
    excursions_of,
    rise_time,
    sampled_settling,
)

ADC = converter(4)

ON_VALUES = {
    "spectrum": lambda values, number: amplitude_spectrum(values, number),
    "alias error": lambda values, number: sampled_alias_error(values, number, 1.0),
    "alias error of periods": lambda values, number: sampled_alias_error(
        values, 10.0, number, edges="periodic"
    ),
    "quality": lambda values, number: tone_quality(values, number),
    "quality under a window": lambda values, number: tone_quality(values, 1.0, window="hann"),
    "fit": lambda values, number: fit_sine(values, rate=number),
    "fit with a guess": lambda values, number: fit_sine(values, rate=10.0, frequency=number),
    "fit at": lambda values, number: fit_sine_at(values, number, rate=10.0),
    "fit at instants": lambda values, number: fit_sine(
        values, times=np.sort(values), frequency=number
    ),
    "sine": lambda values, number: sine_linearity(values, ADC, amplitude=number, offset=0.0),
    "ramp": lambda values, number: ramp_linearity(values, ADC, span=(-1.0, number)),
    "noise": lambda values, number: noise_of(values, number),
    "code noise": lambda values, number: code_noise(values, ADC),
    "histogram": lambda values, number: code_histogram(values).normal_counts(),
    "settling": lambda values, number: sampled_settling(
        np.arange(len(values)), values, number, 0.5
    ),
    "overshoot": lambda values, number: excursions_of(np.arange(len(values)), values, final=number),
    "rise": lambda values, number: rise_time(np.arange(len(values)), values),
    "delay": lambda values, number: delay(np.arange(len(values)), values, number),
    "droop": lambda values, number: droop_of(np.arange(len(values)), values, 0.0, 5.0, number),
    "tones": lambda values, number: tone_levels(values, [number], rate=10.0),
    "mains": lambda values, number: mains_levels(values, number),
    "rejection": lambda values, number: mains_rejection(values, values, 200.0),
}

numbers = st.floats(-1e99, 1e99) | st.floats() | st.floats(0.1, 1000.0)

rows = st.one_of(
    arrays.arrays(np.float64, st.integers(0, 70), elements=st.floats(-10.0, 10.0)),
    arrays.arrays(np.float64, st.integers(0, 40), elements=st.floats(-1e99, 1e99)),
    arrays.arrays(np.float64, st.integers(0, 40), elements=st.floats()),
    arrays.arrays(np.int64, st.integers(0, 300), elements=st.integers(0, 15)),
    arrays.arrays(np.int64, st.integers(0, 40)),
    arrays.arrays(np.float64, st.tuples(st.integers(0, 3), st.integers(0, 3))),
    arrays.arrays(np.dtype("U3"), st.integers(1, 5)),
    st.builds(lambda x, count: np.full(count, x), st.floats(-1e99, 1e99), st.integers(0, 40)),
    st.builds(
        lambda amplitude, cycles: amplitude * np.sin(2.0 * np.pi * cycles * np.arange(64) / 64.0),
        st.floats(1e-99, 1e99), st.floats(0.0, 40.0),
    ),
)  # fmt: skip


@pytest.mark.parametrize("measure", ON_VALUES.values(), ids=ON_VALUES)
@settings(max_examples=50, deadline=None)
@given(values=rows, number=numbers)
def test_a_measure_answers_or_refuses(measure, values, number):
    """Numbers of any size, none at all, text, several rows: one clear error, or a result."""
    with suppress(MeasureError):
        measure(values, number)


@settings(max_examples=100, deadline=None)
@given(numbers, numbers, numbers, st.integers(-5, 2000))
def test_plans_answer_or_refuse(first, second, third, count):
    """The functions that plan a measurement take any numbers as well."""
    for call in (
        lambda: coherence_of(first, second, count),
        lambda: coherent_tone(first, second, count),
        lambda: cramer_rao(first, second, third, max(count, 0), rate=first),
    ):
        with suppress(MeasureError):
            call()
