"""Amplifier stages against nodal analysis written down by hand, at 40 digits."""

from __future__ import annotations

import math
from typing import Any

import mpmath as mp
import numpy as np
import pytest
from hypothesis import given, reject, settings
from hypothesis import strategies as st
from nodal import GROUND, Net, at_rest, open_loop, transfers
from noisy import NOISE, by_nodes, by_sources, spread

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.stages import STAGES
from frontend_sim.analog.stages.amplifier_stage import AmplifierStage
from frontend_sim.errors import ScenarioError

FREQUENCIES = np.logspace(-1, 7.5, 35)
"""Eight and a half decades around everything below [Hz]."""

Values = dict[str, Any]

TEMPERATURE = 330.0


def _noninverting(net: Net, p: Values) -> str:
    net.hold("in")
    plus = "in"
    if "source_resistance" in p:
        plus = "plus"
        net.resistor("source_resistance", "in", "plus", p["source_resistance"])
    net.inject(plus, "i+")
    if "gain" in p:
        senses = {plus: mp.mpf(1), "out": -1 / mp.mpf(p["gain"])}
    else:
        senses = {plus: mp.mpf(1), "minus": mp.mpf(-1)}
        net.resistor("feedback_resistance", "out", "minus", p["feedback_resistance"])
        net.resistor("ground_resistance", "minus", GROUND, p["ground_resistance"])
        if "feedback_capacitance" in p:
            net.capacitor("out", "minus", p["feedback_capacitance"])
        net.inject("minus", "i-")
    _output(net, p, senses)
    return "out"


def _buffer(net: Net, p: Values) -> str:
    net.hold("in")
    net.resistor("source_resistance", "in", "plus", p["source_resistance"])
    net.inject("plus", "i+")
    net.inject("out", "i-")
    _output(net, p, {"plus": mp.mpf(1), "out": mp.mpf(-1)})
    return "out"


def _inverting(net: Net, p: Values) -> str:
    net.hold("in")
    net.hold("reference", "reference")
    plus = "reference"
    if "compensation_resistance" in p:
        plus = "plus"
        net.resistor("compensation_resistance", "reference", "plus", p["compensation_resistance"])
    net.inject(plus, "i+")
    if "gain" in p:
        g = mp.mpf(p["gain"])
        senses = {plus: mp.mpf(1), "in": g / (1 - g), "out": -1 / (1 - g)}
    else:
        senses = {plus: mp.mpf(1), "minus": mp.mpf(-1)}
        net.resistor("input_resistance", "in", "minus", p["input_resistance"])
        net.resistor("feedback_resistance", "out", "minus", p["feedback_resistance"])
        if "feedback_capacitance" in p:
            net.capacitor("out", "minus", p["feedback_capacitance"])
        net.inject("minus", "i-")
    _output(net, p, senses)
    return "out"


def _difference(net: Net, p: Values) -> str:
    for node, sign in (("high", 0.5), ("low", -0.5)):
        net.hold(node, "u", sign)
        net.hold(node, "common")
    net.hold("reference", "reference")
    net.resistor("input_resistance", "low", "minus", p["input_resistance"])
    net.resistor("feedback_resistance", "minus", "out", p["feedback_resistance"])
    net.resistor("r3", "high", "plus", p["noninverting_input_resistance"])
    net.resistor("r4", "plus", "reference", p["reference_resistance"])
    if "feedback_capacitance" in p:
        net.capacitor("minus", "out", p["feedback_capacitance"])
        net.capacitor("plus", "reference", p["reference_capacitance"])
    net.inject("plus", "i+")
    net.inject("minus", "i-")
    _output(net, p, {"plus": mp.mpf(1), "minus": mp.mpf(-1)})
    return "out"


def _transimpedance(net: Net, p: Values) -> str:
    net.inject("minus", "u")
    net.hold("reference", "reference")
    net.resistor("feedback_resistance", "minus", "out", p["feedback_resistance"])
    if "feedback_capacitance" in p:
        net.capacitor("minus", "out", p["feedback_capacitance"])
    if "input_capacitance" in p:
        net.capacitor("minus", GROUND, p["input_capacitance"])
    if "shunt_resistance" in p:
        net.resistor("shunt_resistance", "minus", GROUND, p["shunt_resistance"])
    net.inject("reference", "i+")
    net.inject("minus", "i-")
    _output(net, p, {"reference": mp.mpf(1), "minus": mp.mpf(-1)})
    return "out"


def _output(net: Net, p: Values, senses: dict[str, Any]) -> None:
    net.amplifier("amplifier", senses, "out", open_loop(net, p), p.get("output_resistance"))
    if "load_resistance" in p:
        net.resistor("load_resistance", "out", GROUND, p["load_resistance"])
    if "load_capacitance" in p:
        net.capacitor("out", GROUND, p["load_capacitance"])


ONE_POLE = {"gain_bandwidth": 1e6}
REAL = {"gain_bandwidth": 1e6, "open_loop_gain": 2e4, "second_pole": 3e6}
LOADED = {**REAL, "output_resistance": 75.0, "load_resistance": 2e3, "load_capacitance": 1e-10}
DIVIDER = {"feedback_resistance": 47e3, "ground_resistance": 3.3e3}
PAIR = {"feedback_resistance": 47e3, "input_resistance": 3.3e3}
FOUR = {
    "input_resistance": 1e3,
    "feedback_resistance": 1e4,
    "noninverting_input_resistance": 1.02e3,
    "reference_resistance": 0.99e4,
}
DIODE = {"feedback_resistance": 1e6, "feedback_capacitance": 2e-12, "input_capacitance": 1e-10}

ROWS: list[tuple[str, Any, Values]] = [
    ("noninverting-amplifier", _noninverting, {"gain": 3.3, **LOADED}),
    ("noninverting-amplifier", _noninverting, {**DIVIDER, "source_resistance": 1e5}),
    ("noninverting-amplifier", _noninverting, {**DIVIDER, **ONE_POLE}),
    ("noninverting-amplifier", _noninverting, {**DIVIDER, **REAL, "source_resistance": 1e5}),
    ("noninverting-amplifier", _noninverting, {**DIVIDER, "open_loop_gain": 5e3}),
    (
        "noninverting-amplifier",
        _noninverting,
        {**DIVIDER, **LOADED, "feedback_capacitance": 1e-10, "source_resistance": 1e3},
    ),
    ("buffer", _buffer, {"source_resistance": 1e4, **ONE_POLE}),
    ("buffer", _buffer, {"source_resistance": 1e4, **LOADED}),
    ("inverting-amplifier", _inverting, {"gain": -2.5, **REAL, "compensation_resistance": 1e3}),
    ("inverting-amplifier", _inverting, {**PAIR, "feedback_capacitance": 3.3e-9}),
    ("inverting-amplifier", _inverting, {**PAIR, **ONE_POLE, "compensation_resistance": 3e3}),
    ("inverting-amplifier", _inverting, {**PAIR, **LOADED, "feedback_capacitance": 3.3e-9}),
    ("difference-amplifier", _difference, {**FOUR}),
    ("difference-amplifier", _difference, {**FOUR, **LOADED}),
    (
        "difference-amplifier",
        _difference,
        {**FOUR, **ONE_POLE, "feedback_capacitance": 1e-9, "reference_capacitance": 1.1e-9},
    ),
    ("transimpedance-amplifier", _transimpedance, {"feedback_resistance": 1e5}),
    ("transimpedance-amplifier", _transimpedance, {**DIODE, **ONE_POLE}),
    ("transimpedance-amplifier", _transimpedance, {**DIODE, **LOADED, "shunt_resistance": 1e7}),
]


def _stage(kind: str, values: Values) -> AmplifierStage:
    stage = STAGES[kind].model_validate({"kind": kind, **values})
    assert isinstance(stage, AmplifierStage)
    return stage


@pytest.mark.parametrize(("kind", "build", "values"), ROWS)
def test_response_is_that_of_the_nodes(kind: str, build: Any, values: Values) -> None:
    """Over eight decades to 1e-9 of the value, however deep in the stop band."""
    true = transfers(lambda net: build(net, values), FREQUENCIES)["u"]
    found = chain_of([_stage(kind, values)]).response(FREQUENCIES)
    np.testing.assert_allclose(found, true, rtol=1e-9)


@pytest.mark.parametrize(("kind", "build", "values"), ROWS)
def test_noise_at_the_output_is_that_of_the_nodes(kind: str, build: Any, values: Values) -> None:
    """The density of all sources together, sum of |H|² S, to 1e-9 at every frequency."""
    stage = _stage(kind, {**values, **NOISE})
    true = by_nodes(lambda net: build(net, values), FREQUENCIES, TEMPERATURE)
    found = by_sources(stage, FREQUENCIES, TEMPERATURE)
    np.testing.assert_allclose(found, true, rtol=1e-9)


@given(
    row=st.sampled_from(ROWS),
    exponents=st.lists(st.floats(-2.0, 2.0), min_size=16, max_size=16),
)
@settings(max_examples=25, deadline=None)
def test_any_values_are_those_of_the_nodes(row: Any, exponents: list[float]) -> None:
    """Every part and datum a hundred times more or less: response to 1e-9 of the value, noise to
    1e-9 of its largest density, where the circuit is one that works."""
    kind, build, values = row
    values = spread(values, exponents)
    try:
        stage = _stage(kind, {**values, **NOISE})
    except ScenarioError:
        reject()
    frequencies = FREQUENCIES[::5]
    true = transfers(lambda net: build(net, values), frequencies)["u"]
    np.testing.assert_allclose(chain_of([stage]).response(frequencies), true, rtol=1e-9)
    noise = by_nodes(lambda net: build(net, values), frequencies, TEMPERATURE)
    found = by_sources(stage, frequencies, TEMPERATURE)
    np.testing.assert_allclose(found, noise, rtol=1e-9, atol=1e-9 * np.max(noise))


CONSTANTS = {"offset_voltage": 2e-3, "offset_drift": 1e-5, "bias_current": 3e-8}


@pytest.mark.parametrize(("kind", "build", "values"), ROWS)
def test_constants_reach_the_output_as_the_nodes_say(kind: str, build: Any, values: Values) -> None:
    """Offset voltage and drift at the noninverting input, bias current out of both input nodes,
    reference and common-mode voltage: their sum at rest, to 1e-12."""
    wanted = {"reference_voltage": 1.65, "common_mode_voltage": 4.0}
    own = {key: v for key, v in wanted.items() if key in STAGES[kind].model_fields}
    stage = _stage(kind, {**values, **CONSTANTS, **own})
    rest = at_rest(lambda net: build(net, values))
    true = rest["amplifier"] * (2e-3 + 1e-5 * (TEMPERATURE - 298.15))
    true -= 3e-8 * (rest["i+"] + rest.get("i-", 0.0))
    true += 1.65 * rest.get("reference", 0.0) + 4.0 * rest.get("common", 0.0)
    assert stage.offset(TEMPERATURE) == pytest.approx(true, rel=1e-12)


def test_one_pole_closes_to_the_textbook_loop() -> None:
    """Noise gain 11 at 1 MHz: gain 11 noninverting and -10 inverting, one pole at 1 MHz / 11."""
    w = 2.0 * math.pi * 1e6 / 11.0
    for kind, gain in (("noninverting-amplifier", 11.0), ("inverting-amplifier", -10.0)):
        (block,) = _stage(kind, {"gain": gain, **ONE_POLE}).blocks()
        assert block.poles == pytest.approx([-w], rel=1e-14)
        assert block.c[0] * block.b[0] == pytest.approx(gain * w, rel=1e-14)
        assert block.d == 0.0


def test_a_second_pole_gives_the_exact_second_order() -> None:
    """G w_u w_2 / (G s² + G w_2 s + w_u w_2): Q = sqrt(f_u / (G f_2)), corner sqrt(f_u f_2 / G)."""
    stage = _stage("noninverting-amplifier", {"gain": 4, "gain_bandwidth": 8e6, "second_pole": 5e5})
    (block,) = stage.blocks()
    natural = 2.0 * math.pi * math.sqrt(8e6 * 5e5 / 4.0)
    quality = math.sqrt(8e6 / (4.0 * 5e5))
    assert np.prod(block.poles).real == pytest.approx(natural**2, rel=1e-13)
    assert -np.sum(block.poles).real == pytest.approx(natural / quality, rel=1e-13)


def test_open_loop_gain_costs_its_share() -> None:
    """100 dB leaves 1 + 10/1e5 of the gain of 10, and the pole moves out by as much."""
    values = {"gain": 10, "open_loop_gain": "100 dB", "gain_bandwidth": "1 MHz"}
    (block,) = _stage("noninverting-amplifier", values).blocks()
    assert block.response(np.zeros(1))[0].real == pytest.approx(10.0 / (1.0 + 1e-4), rel=1e-12)
    assert block.poles[0].real == pytest.approx(-2e5 * math.pi * (1.0 + 1e-4), rel=1e-12)


def test_bias_currents_of_equal_resistances_cancel() -> None:
    """A compensation resistance of R_f parallel R_in takes the effect of the bias current away."""
    values = {**PAIR, "bias_current": 1e-6}
    bare = _stage("inverting-amplifier", values).offset(298.15)
    assert bare == pytest.approx(1e-6 * 47e3, rel=1e-12)
    parallel = 47e3 * 3.3e3 / 50.3e3
    compensated = _stage("inverting-amplifier", {**values, "compensation_resistance": parallel})
    assert compensated.offset(298.15) == pytest.approx(0.0, abs=1e-15)


def test_the_shares_of_a_mismatched_difference_amplifier() -> None:
    """One of four resistors 1 % off: common-mode gain d / (1 + R1/R2 (1 + d)), closed form."""
    four = {**FOUR, "noninverting_input_resistance": 1e3, "reference_resistance": 1.01e4}
    stage = _stage("difference-amplifier", {**four, "common_mode_voltage": 1.0})
    plus = 10.1 / 11.1 * 11.0
    assert stage.offset(298.15) == pytest.approx(plus - 10.0, rel=1e-12)
    (block,) = stage.blocks()
    assert block.d == pytest.approx(0.5 * (plus + 10.0), rel=1e-14)


def test_a_capacitive_load_takes_the_phase_margin() -> None:
    """A loop with two poles of its own and a third from the load has a pole pair on the right."""
    stable = {"gain_bandwidth": 1e6, "second_pole": 3e5, "output_resistance": 100.0}
    _stage("buffer", {**stable, "load_capacitance": 1e-10})
    with pytest.raises(ValueError, match="no phase margin left: the circuit is unstable: it has"):
        _stage("buffer", {**stable, "load_capacitance": 1e-6})
