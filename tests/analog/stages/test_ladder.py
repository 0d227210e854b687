"""The ladder against products of complex chain matrices, and against published poles."""

from __future__ import annotations

import math
from typing import Any

import mpmath as mp
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.noise import BOLTZMANN, stationary_covariance
from frontend_sim.analog.stages import Ladder

Values = dict[str, Any]

DIGITS = 60
"""A leakage of 1e12 ohm beside 1e-3 ohm over eight decades loses half of them."""


def _impedance(element: Values, s: Any) -> Any:
    """Return the impedance of one element, its parasitic resistances included."""
    z = mp.mpf(element.get("series_resistance", 0.0))
    if "resistance" in element:
        return mp.mpf(element["resistance"])
    if "inductance" in element:
        return z + s * mp.mpf(element["inductance"])
    y = s * mp.mpf(element["capacitance"])
    if "leakage_resistance" in element:
        y += 1 / mp.mpf(element["leakage_resistance"])
    return z + 1 / y


def _two_ports(values: Values, s: Any) -> list[tuple[Any, Any, Any, Any]]:
    """Return the chain matrices (A, B, C, D) of source, elements and load, in order."""
    ports = []
    if "source_resistance" in values:
        ports.append((1, mp.mpf(values["source_resistance"]), 0, 1))
    for element in values["element"]:
        z = _impedance(element, s)
        ports.append((1, z, 0, 1) if element["place"] == "series" else (1, 0, 1 / z, 1))
    y = s * mp.mpf(values.get("load_capacitance", 0.0))
    if "load_resistance" in values:
        y += 1 / mp.mpf(values["load_resistance"])
    return [*ports, (1, 0, y, 1)]


def _product(ports: list[tuple[Any, Any, Any, Any]]) -> tuple[Any, Any, Any, Any]:
    a, b, c, d = mp.mpf(1), mp.mpf(0), mp.mpf(0), mp.mpf(1)
    for e, f, g, h in ports:
        a, b, c, d = a * e + b * g, a * f + b * h, c * e + d * g, c * f + d * h
    return a, b, c, d


def _true_response(values: Values, frequencies: NDArray[np.float64]) -> NDArray[np.complex128]:
    """Return 1 / A of the whole ladder's chain matrix at frequencies [Hz]."""
    with mp.workdps(DIGITS):
        found = [
            complex(1 / _product(_two_ports(values, mp.mpc(0, 2 * mp.pi * mp.mpf(float(f)))))[0])
            for f in frequencies
        ]
    return np.array(found)


def _ladder(values: Values) -> Ladder:
    return Ladder.model_validate({"kind": "ladder", **values})


RC: list[Values] = [{"place": "series", "resistance": 1e4}, {"place": "shunt", "capacitance": 1e-8}]

FILTER: Values = {
    "source_resistance": 50.0,
    "load_resistance": 50.0,
    "element": [
        {"place": "shunt", "capacitance": 1e-9, "series_resistance": 0.02},
        {"place": "series", "inductance": 5e-6, "series_resistance": 0.3},
        {"place": "shunt", "capacitance": 2e-9, "leakage_resistance": 1e9},
        {"place": "series", "inductance": 5e-6, "series_resistance": 0.3},
        {"place": "shunt", "capacitance": 1e-9, "series_resistance": 0.02},
    ],
}

DECOUPLING: Values = {
    "source_resistance": 1e4,
    "load_resistance": 1e7,
    "load_capacitance": 2e-11,
    "element": [
        {"place": "shunt", "capacitance": 1e-5, "series_resistance": 5e-3},
        {"place": "series", "resistance": 1e-3},
        {"place": "shunt", "capacitance": 1e-7, "series_resistance": 2e-2},
        {"place": "series", "capacitance": 1e-6, "leakage_resistance": 1e10},
        {"place": "series", "resistance": 10.0},
    ],
}

ROWS: list[tuple[Values, float]] = [
    ({"element": RC + RC}, 1.6e3),
    ({"element": RC * 6, "load_resistance": 1e5}, 1.6e3),
    ({"element": [{"place": "series", "capacitance": 1e-6}, {"place": "shunt", "resistance": 1e5}]},
     1.6),
    (FILTER, 2e6),
    (DECOUPLING, 1e3),
    # A capacitance straight across the source, two in parallel, two inductors in series.
    ({"source_resistance": 600.0, "load_resistance": 1e4,
      "element": [{"place": "shunt", "capacitance": 1e-9},
                  {"place": "shunt", "capacitance": 2e-9},
                  {"place": "series", "inductance": 1e-3},
                  {"place": "series", "inductance": 2e-3}]},
     5e4),
    ({"load_resistance": 1e4,
      "element": [{"place": "shunt", "capacitance": 1e-9}, {"place": "series", "resistance": 1e3},
                  {"place": "shunt", "capacitance": 1e-9}]}, 1.6e5),
]  # fmt: skip


@pytest.mark.parametrize(("values", "centre"), ROWS)
def test_response_is_that_of_the_chain_matrices(values: Values, centre: float) -> None:
    """Over ten decades to 1e-9 of the value, though pass band and stop band are 1e-50 apart."""
    frequencies = centre * np.logspace(-5, 5, 41)
    found = chain_of([_ladder(values)]).response(frequencies)
    np.testing.assert_allclose(found, _true_response(values, frequencies), rtol=1e-9)


@pytest.mark.parametrize(("values", "centre"), ROWS)
def test_matrices_give_that_response(values: Values, centre: float) -> None:
    """c (s - a)^-1 b + d in doubles, which the engine steps, to 1e-13 of the largest gain."""
    frequencies = centre * np.logspace(-5, 5, 41)
    (block,) = _ladder(values).blocks()
    s = 2j * np.pi * frequencies
    system = s[:, None, None] * np.eye(block.order) - block.a
    # Rows differ by all the decades between the poles: scaled first, or pivots would mix them.
    size = np.max(np.abs(system), axis=2)
    x = np.linalg.solve(system / size[..., None], (block.b / size)[..., None])
    true = _true_response(values, frequencies)
    atol = 1e-13 * float(np.max(np.abs(true)))
    np.testing.assert_allclose(x[..., 0] @ block.c + block.d, true, rtol=0.0, atol=atol)


def test_two_equal_unbuffered_sections() -> None:
    """Poles -0.38197 and -2.61803 per RC, Q = 1/3 (../shared/check-values.md, nodal analysis):
    the roots of x² + 3 x + 1."""
    poles = np.sort(_ladder({"element": RC + RC}).blocks()[0].poles.real)[::-1] * 1e-4
    np.testing.assert_allclose(poles, [-0.38197, -2.61803], atol=5e-6)
    np.testing.assert_allclose(poles, (np.array([1.0, -1.0]) * 5**0.5 - 3.0) / 2.0, rtol=1e-14)
    assert math.sqrt(poles[0] * poles[1]) / -np.sum(poles) == pytest.approx(1.0 / 3.0, rel=1e-14)


def test_step_of_two_equal_unbuffered_sections() -> None:
    """1 - (p2 exp(p1 t) - p1 exp(p2 t)) / (p2 - p1), by partial fractions, at some instants."""
    from scipy.linalg import expm

    chain = chain_of([_ladder({"element": RC + RC})])
    p1, p2 = (5**0.5 - 3.0) / 2e-4, (-(5**0.5) - 3.0) / 2e-4
    for t in (1e-5, 1e-4, 3e-4, 1e-3):
        whole = np.zeros((3, 3))
        whole[:2, :2], whole[:2, 2] = chain.a, chain.b
        found = chain.c[-1] @ expm(whole * t)[:2, 2]
        true = 1.0 - (p2 * math.exp(p1 * t) - p1 * math.exp(p2 * t)) / (p2 - p1)
        assert found == pytest.approx(true, abs=1e-13)


def test_slow_poles_survive_fast_neighbours() -> None:
    """Ten microfarads and 100 nF over milliohms: the slow pole, against 60 digits, to 1e-14.

    The voltages of the two capacitors would store it as the difference of entries 1e9 times as
    large.
    """
    values = {
        "source_resistance": 1e5,
        "load_resistance": 1e12,
        "element": [
            {"place": "shunt", "capacitance": 1e-5},
            {"place": "series", "resistance": 1e-3},
            {"place": "shunt", "capacitance": 1e-9},
        ],
    }
    with mp.workdps(60):
        g, h, k = 1 / mp.mpf(1e5), 1 / mp.mpf(1e-3), 1 / mp.mpf(1e12)
        c1, c2 = mp.mpf(1e-5), mp.mpf(1e-9)
        # (s C1 + g + h)(s C2 + h + k) = h²
        b = c1 * (h + k) + c2 * (g + h)
        true = sorted(
            float(
                (-b + sign * mp.sqrt(b * b - 4 * c1 * c2 * (g * (h + k) + h * k))) / (2 * c1 * c2)
            )
            for sign in (1, -1)
        )
    assert true[0] / true[1] > 1e11
    np.testing.assert_allclose(np.sort(_ladder(values).blocks()[0].poles.real), true, rtol=1e-14)


OHMS = st.floats(-3.0, 9.0).map(lambda x: float(f"{10.0**x:.3g}"))
FARADS = st.floats(-12.0, -4.0).map(lambda x: float(f"{10.0**x:.3g}"))
HENRIES = st.floats(-9.0, 0.0).map(lambda x: float(f"{10.0**x:.3g}"))


@st.composite
def _elements(draw: Any) -> Values:
    place = draw(st.sampled_from(["series", "shunt"]))
    kind = draw(st.sampled_from(["resistance", "inductance", "capacitance"]))
    element: Values = {"place": place, kind: draw({"resistance": OHMS, "inductance": HENRIES,
                                                   "capacitance": FARADS}[kind])}  # fmt: skip
    if kind != "resistance" and draw(st.booleans()):
        element["series_resistance"] = draw(OHMS)
    if kind == "capacitance" and draw(st.booleans()):
        element["leakage_resistance"] = draw(OHMS)
    return element


@st.composite
def _ladders(draw: Any) -> Values:
    values: Values = {
        "source_resistance": draw(OHMS),
        "load_resistance": draw(OHMS),
        "element": draw(st.lists(_elements(), min_size=1, max_size=7)),
    }
    if draw(st.booleans()):
        values["load_capacitance"] = draw(FARADS)
    return values


@given(values=_ladders())
@settings(max_examples=60, deadline=None)
def test_any_ladder_is_its_chain_matrix(values: Values) -> None:
    """Parts over many decades, in any order: response to 1e-9 of the value over eight decades."""
    frequencies = np.logspace(-1, 7, 9)
    found = chain_of([_ladder(values)]).response(frequencies)
    np.testing.assert_allclose(found, _true_response(values, frequencies), rtol=1e-9)


@given(values=_ladders())
@settings(max_examples=60, deadline=None)
def test_any_ladder_is_passive(values: Values) -> None:
    """No pole lies to the right of the imaginary axis, and the matrix has the poles it tells."""
    (block,) = _ladder(values).blocks()
    assert np.all(block.poles.real <= 0.0)
    assert len(block.poles) == block.order


@pytest.mark.parametrize("sections", [1, 2, 5])
def test_a_lossless_ladder_keeps_its_poles_on_the_axis(sections: int) -> None:
    """Inductances and capacitances at an ideal source: real parts of exactly zero."""
    lc = [{"place": "series", "inductance": 1e-3}, {"place": "shunt", "capacitance": 1e-9}]
    (block,) = _ladder({"element": lc * sections}).blocks()
    assert np.all(block.poles.real == 0.0)
    natural = 1e6 * 2.0 * np.sin(np.pi * (2 * np.arange(1, sections + 1) - 1) / (4 * sections + 2))
    found = np.sort(block.poles.imag[block.poles.imag > 0.0])
    np.testing.assert_allclose(found, np.sort(natural), rtol=1e-13)


def test_noise_is_that_of_every_resistor() -> None:
    """Sum of |H|² 4 k T R over source, load, elements and their parasitics, to 1e-9.

    A series resistance's noise reaches the output through the chain matrices before and behind it.
    """
    ladder = _ladder(FILTER)
    (block,) = ladder.blocks()
    frequencies = np.logspace(3, 9, 13)
    total = np.zeros(len(frequencies))
    for source in ladder.noise(300.0):
        for i, f in enumerate(frequencies):
            system = 2j * np.pi * f * np.eye(block.order) - block.a
            gain = block.c @ np.linalg.solve(system, source.b) + source.d
            total[i] += abs(gain) ** 2 * source.density**2
    true = [_true_noise(FILTER, float(f)) for f in frequencies]
    np.testing.assert_allclose(total, true, rtol=1e-9)


def _true_noise(values: Values, f: float) -> float:
    """Return 4 k T times the real part of the impedance seen back into the output (Nyquist).

    Where every resistance is at one temperature, that is the whole noise of a passive network: an
    answer that knows nothing of single resistors.
    """
    with mp.workdps(DIGITS):
        s = mp.mpc(0, 2 * mp.pi * mp.mpf(f))
        a, b, _, _ = _product(_two_ports(values, s))
        return float(4 * mp.mpf(BOLTZMANN) * 300 * mp.re(b / a))


def test_noise_of_a_capacitive_output_is_kt_over_c() -> None:
    """sqrt(k T / C) at the last capacitance, whatever resistances stand before it, to 1e-9."""
    ladder = _ladder({"source_resistance": 1e3, "element": [*RC, *RC[:1],
                      {"place": "shunt", "capacitance": 1e-11}]})  # fmt: skip
    model = chain_of([ladder], 300.0).noise_model(1.0)
    covariance = stationary_covariance(model.a, model.b)
    variance = float(model.c @ covariance @ model.c)
    assert variance == pytest.approx(BOLTZMANN * 300.0 / 1e-11, rel=1e-9)


def test_buffered_sections_leave_the_loading_out() -> None:
    """Two RC sections with buffers between: 1/(1 + s R C)², where the ladder has 3 s R C."""
    sections = _ladder({"element": RC + RC}).buffered()
    s = 2j * np.pi * np.logspace(0, 8, 17)
    found = np.prod([block.response(s) for block in sections], axis=0)
    np.testing.assert_allclose(found, 1.0 / (1.0 + s * 1e-4) ** 2, rtol=1e-12)


REFUSED: list[tuple[Values, str]] = [
    ({"element": []}, "at least 1 item"),
    ({"element": [{"place": "series", "resistance": "-10 kohm"}]}, "above 0"),
    ({"element": [{"place": "across", "resistance": 1e3}]}, "'series' or 'shunt'"),
    ({"element": [{"place": "series"}]}, "this one has none of them"),
    (
        {"element": [{"place": "series", "resistance": 1e3, "capacitance": 1e-9}]},
        "has resistance and capacitance",
    ),
    (
        {"element": [{"place": "series", "resistance": 1e3, "series_resistance": 1.0}]},
        "series_resistance goes with an inductance or a capacitance",
    ),
    (
        {"element": [{"place": "series", "inductance": 1e-3, "leakage_resistance": 1e9}]},
        "leakage_resistance goes with a capacitance",
    ),
    ({"element": [{"place": "shunt", "capacitance": 1e-9}]}, "straight across an ideal source"),
    (
        {"element": [RC[0], {"place": "series", "capacitance": 1e-9}]},
        "nothing defines the level of the output at rest.*capacitance of element 2",
    ),
    (
        {"element": [{"place": "series", "capacitance": 1e-9},
                     {"place": "shunt", "capacitance": 1e-9}], "load_capacitance": 1e-9},
        "nothing defines the level of the output at rest.*capacitance of element 1",
    ),
    (
        {"element": [{"place": "series", "inductance": 1e-3},
                     {"place": "shunt", "inductance": 1e-3}]},
        "current through the inductance of element 2 would grow without end",
    ),
]  # fmt: skip


@pytest.mark.parametrize(("values", "message"), REFUSED)
def test_degenerate_ladders_are_named(values: Values, message: str) -> None:
    """What has no level at rest, or is no element, is told with its number and a cure."""
    with pytest.raises(ValueError, match=message):
        _ladder(values)


def test_a_floating_middle_is_harmless() -> None:
    """Two series capacitances with nothing between act as one, without a pole at the origin."""
    series = {"place": "series", "capacitance": 2e-9}
    ladder = _ladder({"element": [series, series], "load_resistance": 1e6})
    np.testing.assert_allclose(ladder.blocks()[0].poles, [-1e3], rtol=1e-14)
