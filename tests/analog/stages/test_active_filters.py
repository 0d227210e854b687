"""Filter sections from part values against nodal analysis written down by hand, at 40 digits."""

from __future__ import annotations

import math
from typing import Any

import mpmath as mp
import numpy as np
import pytest
from hypothesis import given, reject, settings
from hypothesis import strategies as st
from nodal import GROUND, Net, open_loop, transfers
from noisy import NOISE, by_nodes, by_sources, spread
from numpy.typing import NDArray
from scipy import signal

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.stages import STAGES, Butterworth
from frontend_sim.analog.stages.active_filter import ActiveFilter
from frontend_sim.errors import ScenarioError

Values = dict[str, Any]
Real = NDArray[np.float64]

DECADES = np.logspace(-4.1, 4.4, 35)
"""Eight and a half decades around a corner, without the very centre of a notch."""


def _low(net: Net, p: Values) -> str:
    net.resistor("r1", "in", "middle", p["resistance_1"])
    net.resistor("r2", "middle", "plus", p["resistance_2"])
    net.capacitor("middle", "out", p["capacitance_1"])
    net.capacitor("plus", GROUND, p["capacitance_2"])
    return _around(net, p)


def _high(net: Net, p: Values) -> str:
    net.capacitor("in", "middle", p["capacitance_1"])
    net.capacitor("middle", "plus", p["capacitance_2"])
    net.resistor("r1", "middle", "out", p["resistance_1"])
    net.resistor("r2", "plus", GROUND, p["resistance_2"])
    return _around(net, p)


def _around(net: Net, p: Values) -> str:
    net.hold("in")
    minus = "out"
    if "feedback_resistance" in p:
        minus = "minus"
        net.resistor("rf", "out", "minus", p["feedback_resistance"])
        net.resistor("rg", "minus", GROUND, p["ground_resistance"])
    return _amplifier(net, p, {"plus": mp.mpf(1), minus: mp.mpf(-1)}, ("plus", minus))


def _mfb_low(net: Net, p: Values) -> str:
    net.hold("in")
    net.resistor("r1", "in", "middle", p["input_resistance"])
    net.resistor("r2", "middle", "out", p["feedback_resistance"])
    net.resistor("r3", "middle", "minus", p["middle_resistance"])
    net.capacitor("middle", GROUND, p["ground_capacitance"])
    net.capacitor("minus", "out", p["feedback_capacitance"])
    return _amplifier(net, p, {"minus": mp.mpf(-1)}, (None, "minus"))


def _mfb_band(net: Net, p: Values) -> str:
    net.hold("in")
    net.resistor("r1", "in", "middle", p["input_resistance"])
    if "ground_resistance" in p:
        net.resistor("r2", "middle", GROUND, p["ground_resistance"])
    net.resistor("r3", "minus", "out", p["feedback_resistance"])
    net.capacitor("middle", "out", p["feedback_capacitance"])
    net.capacitor("middle", "minus", p["middle_capacitance"])
    return _amplifier(net, p, {"minus": mp.mpf(-1)}, (None, "minus"))


def _twin_t(net: Net, p: Values) -> str:
    net.hold("in")
    k = p.get("feedback", 0.0)
    foot = "foot" if k else GROUND
    net.resistor("r1", "in", "first", p["resistance_1"])
    net.resistor("r2", "first", "plus", p["resistance_2"])
    net.capacitor("first", foot, p["shunt_capacitance"])
    net.capacitor("in", "second", p["capacitance_1"])
    net.capacitor("second", "plus", p["capacitance_2"])
    net.resistor("r3", "second", foot, p["shunt_resistance"])
    if k:
        senses = {"out": mp.mpf(k), "foot": mp.mpf(-1)}
        net.amplifier("second amplifier", senses, "foot", open_loop(net, p),
                      p.get("output_resistance"))  # fmt: skip
        net.inject("foot", "second i-")
    return _amplifier(net, p, {"plus": mp.mpf(1), "out": mp.mpf(-1)}, ("plus", "out"))


def _amplifier(net: Net, p: Values, senses: Any, inputs: tuple[str | None, str]) -> str:
    net.amplifier("amplifier", senses, "out", open_loop(net, p), p.get("output_resistance"))
    for node, name in zip(inputs, ("i+", "i-"), strict=True):
        if node is not None:
            net.inject(node, name)
    if "load_resistance" in p:
        net.resistor("load", "out", GROUND, p["load_resistance"])
    if "load_capacitance" in p:
        net.capacitor("out", GROUND, p["load_capacitance"])
    return "out"


SK: Values = {
    "kind": "sallen-key",
    "resistance_1": 8.2e3,
    "resistance_2": 12e3,
    "capacitance_1": 22e-9,
    "capacitance_2": 10e-9,
}
HIGH: Values = {**SK, "response": "high-pass"}
GAINED = {"feedback_resistance": 3.3e3, "ground_resistance": 10e3}
MFB: Values = {
    "kind": "multiple-feedback",
    "input_resistance": 10e3,
    "feedback_resistance": 22e3,
    "middle_resistance": 6.8e3,
    "ground_capacitance": 47e-9,
    "feedback_capacitance": 3.3e-9,
}
BAND: Values = {
    "kind": "multiple-feedback",
    "response": "band-pass",
    "input_resistance": 82e3,
    "feedback_resistance": 160e3,
    "feedback_capacitance": 10e-9,
    "middle_capacitance": 12e-9,
}
TWIN: Values = {
    "kind": "twin-t-notch",
    "resistance_1": 31.6e3,
    "resistance_2": 31.6e3,
    "shunt_resistance": 15.8e3,
    "capacitance_1": 100e-9,
    "capacitance_2": 100e-9,
    "shunt_capacitance": 200e-9,
}
MISMATCHED: Values = {**TWIN, "resistance_2": 31.2e3, "capacitance_1": 103e-9}
ONE_POLE = {"gain_bandwidth": 1e6}
REAL = {
    "gain_bandwidth": 1e6,
    "open_loop_gain": 1e5,
    "second_pole": 4e6,
    "output_resistance": 120.0,
    "load_resistance": 5e3,
}

ROWS: list[tuple[Any, Values]] = [
    *((_low, {**SK, **more}) for more in ({}, GAINED, ONE_POLE, {**GAINED, **REAL})),
    *((_high, {**HIGH, **more}) for more in ({}, GAINED, ONE_POLE, {**GAINED, **REAL})),
    *((_mfb_low, {**MFB, **more}) for more in ({}, ONE_POLE, REAL)),
    *((_mfb_band, {**BAND, **more}) for more in ({}, ONE_POLE, REAL)),
    (_mfb_band, {**BAND, **REAL, "ground_resistance": 1.6e3}),
    *((_twin_t, {**TWIN, **more}) for more in ({}, ONE_POLE, {"feedback": 0.9})),
    *((_twin_t, {**MISMATCHED, **more}) for more in ({}, {"feedback": 0.8, **ONE_POLE})),
    (_twin_t, {**MISMATCHED, "feedback": 0.8, **REAL, "load_capacitance": 1e-10}),
]


def _stage(values: Values) -> ActiveFilter:
    stage = STAGES[values["kind"]].model_validate(values)
    assert isinstance(stage, ActiveFilter)
    return stage


@pytest.mark.parametrize(("build", "values"), ROWS)
def test_response_is_that_of_the_nodes(build: Any, values: Values) -> None:
    """Over eight decades to 1e-9 of the value, beside a notch and deep in a stop band too."""
    stage = _stage(values)
    frequencies = stage.nominal_corner * DECADES
    true = transfers(lambda net: build(net, values), frequencies)["u"]
    found = chain_of([stage]).response(frequencies)
    np.testing.assert_allclose(found, true, rtol=1e-9)


@pytest.mark.parametrize(("build", "values"), ROWS)
def test_noise_at_the_output_is_that_of_the_nodes(build: Any, values: Values) -> None:
    """Sum of |H|² S over resistors, voltage and current noise of every amplifier, to 1e-9.

    Where the noise of a high pass or an integrator falls to nothing its sources cancel in the
    matrices, so the tolerance is that of the largest density there is.
    """
    stage = _stage({**values, **NOISE})
    frequencies = stage.nominal_corner * DECADES[::2]
    true = by_nodes(lambda net: build(net, values), frequencies, 300.0)
    found = by_sources(stage, frequencies, 300.0)
    np.testing.assert_allclose(found, true, rtol=1e-9)


@given(
    row=st.sampled_from(ROWS),
    exponents=st.lists(st.floats(-1.0, 1.0), min_size=16, max_size=16),
)
@settings(max_examples=20, deadline=None)
def test_any_values_are_those_of_the_nodes(row: Any, exponents: list[float]) -> None:
    """Every part and datum ten times more or less: response to 1e-9 of the value, noise to 1e-9 of
    its largest density, where the circuit is one that works."""
    build, values = row
    values = spread(values, exponents)
    try:
        stage = _stage({**values, **NOISE})
    except ScenarioError:
        reject()
    frequencies = stage.nominal_corner * DECADES[::5]
    true = transfers(lambda net: build(net, values), frequencies)["u"]
    np.testing.assert_allclose(chain_of([stage]).response(frequencies), true, rtol=1e-9)
    noise = by_nodes(lambda net: build(net, values), frequencies, 300.0)
    found = by_sources(stage, frequencies, 300.0)
    np.testing.assert_allclose(found, noise, rtol=1e-9, atol=1e-9 * np.max(noise))


@pytest.mark.parametrize("values", [SK, HIGH], ids=["low-pass", "high-pass"])
def test_butterworth_parts_make_the_butterworth_response(values: Values) -> None:
    """Equal resistances and C1 = 2 C2, or equal capacitances and R2 = 2 R1: Q = 1/sqrt 2.

    Against the closed form of the other stage, over eight decades to 1e-9.
    """
    response = values.get("response", "low-pass")
    parts = {"resistance_1": 10e3, "capacitance_2": 10e-9}
    parts |= (
        {"resistance_2": 10e3, "capacitance_1": 20e-9}
        if response == "low-pass"
        else {"resistance_2": 20e3, "capacitance_1": 10e-9}
    )
    stage = _stage({**values, **parts})
    corner = 1.0 / (2.0 * math.pi * 1e-4 * math.sqrt(2.0))
    assert stage.nominal_corner == pytest.approx(corner, rel=1e-14)
    assert stage.nominal_quality_factor == pytest.approx(math.sqrt(0.5), rel=1e-14)
    true = chain_of([Butterworth(order=2, corner=corner, response=response)])  # type: ignore[arg-type]  # a name out of the table
    frequencies = corner * DECADES
    np.testing.assert_allclose(
        chain_of([stage]).response(frequencies), true.response(frequencies), rtol=1e-9
    )


def test_step_of_a_butterworth_section() -> None:
    """1 - exp(-a t) (cos a t + sin a t) with a = w0/sqrt 2 (Ogata, from memory), to 1e-13."""
    from scipy.linalg import expm

    values = {**SK, "resistance_1": 1e4, "resistance_2": 1e4, "capacitance_1": 2e-8}
    chain = chain_of([_stage(values)])
    a = 1.0 / (1e-4 * 2.0)
    whole = np.zeros((3, 3))
    whole[:2, :2], whole[:2, 2] = chain.a, chain.b
    for t in np.array([0.1, 0.5, 1.0, 3.0, 10.0]) / a:
        found = chain.c[-1] @ expm(whole * t)[:2, 2]
        true = 1.0 - math.exp(-a * t) * (math.cos(a * t) + math.sin(a * t))
        assert found == pytest.approx(true, abs=1e-13)


@pytest.mark.parametrize(
    ("build", "values"), [row for row in ROWS if not set(ONE_POLE) & set(row[1])]
)
def test_nominal_corner_and_q_are_those_of_the_poles(build: Any, values: Values) -> None:
    """The closed forms in part values against the poles of the solved circuit, to 1e-12."""
    stage = _stage(values)
    assert stage.shifted_corner == pytest.approx(stage.nominal_corner, rel=5e-3)
    if values["kind"] != "twin-t-notch":
        assert stage.shifted_corner == pytest.approx(stage.nominal_corner, rel=1e-12)
        assert stage.shifted_quality_factor == pytest.approx(
            stage.nominal_quality_factor, rel=1e-12
        )


@pytest.mark.parametrize(
    ("build", "values"),
    [(_low, {**SK, **ONE_POLE}), (_high, {**HIGH, **ONE_POLE}), (_mfb_low, {**MFB, **ONE_POLE}),
     (_mfb_band, {**BAND, **ONE_POLE}), (_twin_t, {**TWIN, "feedback": 0.9, **ONE_POLE})],
)  # fmt: skip
def test_shifted_corner_and_q_are_a_root_of_the_nodes(build: Any, values: Values) -> None:
    """At the shifted pair of poles the nodal equations are singular, and it is not the nominal one.

    Found by Muller's method from the nominal pair, at 40 digits; agreement to 1e-12.
    """
    stage = _stage(values)
    nominal = _pole(stage.nominal_corner, stage.nominal_quality_factor)
    with mp.workdps(40):

        def determinant(s: Any) -> Any:
            net = Net(mp.mpc(s))
            build(net, values)
            return net.determinant()

        around = (nominal, 1.001 * nominal, 0.999 * nominal)
        root = complex(mp.findroot(determinant, around, "muller", verify=False))
    shifted = _pole(stage.shifted_corner, stage.shifted_quality_factor)
    assert abs(shifted - root) <= 1e-12 * abs(root)
    assert abs(shifted - nominal) > 1e-5 * abs(nominal)


def _pole(corner: float, quality: float) -> complex:
    """Return the upper pole of a pair."""
    natural = 2.0 * math.pi * corner
    return natural * complex(-0.5 / quality, math.sqrt(1.0 - 0.25 / quality**2))


def test_slow_amplifier_lowers_the_corner_of_a_unity_gain_section() -> None:
    """Equal parts: s³ + s² (3 w + u) + s (w² + 2 w u) + u w² by hand, with u = 2 pi f_u.

    From v+ = out (1 + s/u), v+ (s + w) = w m and the currents into the middle node m; the two slow
    roots by numpy.roots, to 1e-9.
    """
    values = {**SK, "resistance_1": 1e4, "resistance_2": 1e4, "capacitance_1": 1e-8}
    stage = _stage({**values, "gain_bandwidth": 1e6})
    w, u = 1e4, 2.0 * math.pi * 1e6
    roots = np.roots([1.0, 3.0 * w + u, w * w + 2.0 * w * u, u * w * w])
    slow = np.sort(np.abs(roots))[:2]
    assert 2.0 * math.pi * stage.shifted_corner == pytest.approx(math.sqrt(np.prod(slow)), rel=1e-9)
    assert stage.shifted_corner < stage.nominal_corner


def test_the_stop_band_rises_again() -> None:
    """The gain was lower before it rises to r/(R1 + r), r the output resistance beside R2."""
    stage = _stage({**SK, "gain_bandwidth": 1e6, "output_resistance": 100.0})
    corner = stage.nominal_corner
    gain = np.abs(chain_of([stage]).response(corner * np.array([30.0, 1e3, 1e6])))
    assert gain[0] < gain[1]
    low = 100.0 * 12e3 / 12.1e3
    through = low / (8.2e3 + low)
    assert gain[2] == pytest.approx(through, rel=1e-3)


def test_a_matched_twin_t_has_its_textbook_shape() -> None:
    """(s² + w0²)/(s² + s w0/Q + w0²) with Q = 1/(4 (1 - k)) and w0 = 1/(R C)."""
    w = 1.0 / (31.6e3 * 100e-9)
    s = 2j * np.pi * np.logspace(-2, 5, 40)
    for k in (0.0, 0.5, 0.95):
        stage = _stage({**TWIN, "feedback": k})
        quality = 0.25 / (1.0 - k)
        assert stage.nominal_quality_factor == pytest.approx(quality, rel=1e-12)
        assert stage.notch_frequency == pytest.approx(w / (2.0 * math.pi), rel=1e-14)  # type: ignore[attr-defined]  # of this kind
        true = (s * s + w * w) / (s * s + s * w / quality + w * w)
        np.testing.assert_allclose(stage.blocks()[0].response(s), true, rtol=1e-9)


def test_mismatched_parts_fill_the_notch_up() -> None:
    """A resistance 1 % off leaves a sixteenth of 1 %; matched parts leave nothing."""
    assert _stage(TWIN).notch_gain < 1e-12  # type: ignore[attr-defined]  # of this kind
    filled = _stage({**TWIN, "resistance_1": 31.6e3 * 1.01})
    frequencies = np.linspace(49.0, 52.0, 30001)
    lowest = float(np.min(np.abs(chain_of([filled]).response(frequencies))))
    assert lowest == pytest.approx(filled.notch_gain, rel=0.05)  # type: ignore[attr-defined]  # of this kind
    assert lowest == pytest.approx(0.01 / 16.0, rel=0.02)


@given(
    r=st.tuples(st.floats(1e2, 1e6), st.floats(1e2, 1e6)),
    c=st.tuples(st.floats(1e-11, 1e-6), st.floats(1e-11, 1e-6)),
    response=st.sampled_from(["low-pass", "high-pass"]),
)
@settings(max_examples=50, deadline=None)
def test_any_unity_gain_section_has_its_closed_form(
    r: tuple[float, float], c: tuple[float, float], response: str
) -> None:
    """Part values over decades: scipy.signal's response of the textbook polynomials, to 1e-9."""
    stage = _stage({**SK, "resistance_1": r[0], "resistance_2": r[1], "capacitance_1": c[0],
                    "capacitance_2": c[1], "response": response})  # fmt: skip
    w, q = 2.0 * math.pi * stage.nominal_corner, stage.nominal_quality_factor
    top = [w * w] if response == "low-pass" else [1.0, 0.0, 0.0]
    frequencies = stage.nominal_corner * np.logspace(-4, 4, 17)
    _, true = signal.freqs(top, [1.0, w / q, w * w], 2.0 * np.pi * frequencies)
    np.testing.assert_allclose(chain_of([stage]).response(frequencies), true, rtol=1e-9)


REFUSED: list[tuple[Values, str]] = [
    ({**SK, "resistance_1": "-10 kohm"}, "above 0"),
    ({**SK, "feedback_resistance": 1e3}, "together, or neither"),
    ({**SK, "feedback_resistance": 30e3, "ground_resistance": 10e3}, "oscillates from K = 2.12"),
    ({**HIGH, "feedback_resistance": 40e3, "ground_resistance": 10e3}, "oscillates from K = 3.18"),
    ({**SK, "gain_bandwidth": "500 Hz"}, "gain_bandwidth 500 Hz lies below what the filter"),
    ({**MFB, "gain_bandwidth": 2e3}, "gain_bandwidth 2000 Hz lies below what the filter"),
    ({**SK, "response": "band-pass"}, "'low-pass' or 'high-pass'"),
    ({**MFB, "middle_capacitance": 1e-9}, "a low-pass response has no middle_capacitance"),
    ({key: MFB[key] for key in MFB if key != "middle_resistance"}, "middle_resistance is missing"),
    ({**BAND, "ground_capacitance": 1e-9}, "a band-pass response has no ground_capacitance"),
    ({**TWIN, "feedback": 1.0}, "less than 1"),
    ({**TWIN, "feedback": 0.95, **ONE_POLE, "second_pole": 1e3}, "no phase margin.*lower quality"),
]


@pytest.mark.parametrize(("values", "message"), REFUSED)
def test_what_makes_no_filter_is_named(values: Values, message: str) -> None:
    """Parts that contradict each other, amplifiers that are too slow, loops that oscillate."""
    with pytest.raises(ValueError, match=message):
        _stage(values)
