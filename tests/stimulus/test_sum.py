"""Sums: every term once, in any nesting; what is known of the terms is known of the sum."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from drives import outputs

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.stages import RcLowpass
from frontend_sim.errors import ScenarioError
from frontend_sim.stimulus.sum import Sum

STEP: dict[str, Any] = {"kind": "step", "before": 0.5, "after": -1.0, "at": 0.01}
RAMP: dict[str, Any] = {"kind": "ramp", "slope": 20.0, "at": 0.02, "length": 0.03}
SINE: dict[str, Any] = {"kind": "sine", "amplitude": 0.3, "frequency": 150.0, "offset": 1.0}
BURST: dict[str, Any] = {"kind": "noise-burst", "rms": 0.1, "bandwidth": 2e3, "length": 0.05}


def _drives(*terms: Any) -> Any:
    return Sum.model_validate({"term": list(terms)}).drives((3,))


def test_nesting_means_nothing_to_the_signal() -> None:
    """((a + b) + c) is a + (b + c), value by value and through a chain."""
    left = _drives({"kind": "sum", "term": [STEP, RAMP]}, SINE)
    right = _drives(STEP, {"kind": "sum", "term": [RAMP, SINE]})
    times = np.linspace(-0.01, 0.08, 91)
    for one, other in zip(left, right, strict=True):
        np.testing.assert_array_equal(one.values(times), other.values(times))
    chain = chain_of([RcLowpass(resistance=1e3, capacitance=1e-6)])
    found = [outputs(chain, list(drives), times[times >= 0.0]) for drives in (left, right)]
    np.testing.assert_array_equal(found[0], found[1])


def test_the_response_to_a_sum_is_the_sum_of_responses() -> None:
    """Shapes and points together, each in its own way through time, add up to rounding."""
    chain = chain_of([RcLowpass(resistance=1e3, capacitance=1e-6)])
    times = np.linspace(0.0, 0.08, 300)
    terms = [STEP, RAMP, SINE, BURST]
    whole = outputs(chain, list(_drives(*terms)), times)
    drives = _drives(*terms)
    apart = sum(outputs(chain, [drive], times) for drive in drives)
    np.testing.assert_allclose(whole, apart, rtol=0, atol=1e-15)


def test_a_term_keeps_its_noise_when_others_change() -> None:
    """The burst depends on its place in the sum, not on what the other terms are."""
    times = np.linspace(0.0, 0.05, 500)
    first = _drives(STEP, BURST)[1].values(times)
    second = _drives(SINE, BURST)[1].values(times)
    elsewhere = _drives(BURST, STEP)[0].values(times)
    np.testing.assert_array_equal(first, second)
    assert np.max(np.abs(first - elsewhere)) > 0.05


def test_a_sum_of_endless_terms_is_endless() -> None:
    """No term that ends, no known length, no files, no notes."""
    stimulus = Sum.model_validate({"term": [STEP, {"kind": "sum", "term": [SINE]}]})
    assert stimulus.known_length() is None
    assert stimulus.files() == ()
    assert stimulus.notes() == ()


@pytest.mark.parametrize("values", [{}, {"term": []}, {"term": [{"kind": "step"}]}, {"term": [5]}])
def test_wrong_sums_are_refused(values: dict[str, Any]) -> None:
    """No terms, an incomplete term, a term that is none."""
    with pytest.raises(ScenarioError):
        Sum.model_validate(values)
