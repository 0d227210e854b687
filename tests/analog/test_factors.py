"""Poles, zeros and polynomials as cascades of blocks, against products in complex arithmetic."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import mpmath as mp
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from partial_fractions import step_response

from frontend_sim.analog.block import Block
from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.factors import cascade, roots_of
from frontend_sim.analog.stages import PolesZeros, Polynomial
from frontend_sim.errors import ModelError

Complex = NDArray[np.complex128]

S = 1j * np.logspace(-1, 7, 41)
"""Angular frequencies over eight decades [rad/s]."""

MAGNITUDES = st.floats(0.5, 1e6)
DAMPINGS = st.sampled_from([0.01, 0.3, 0.707, 0.999])


def _pair(magnitude: float, damping: float) -> list[complex]:
    root = magnitude * complex(-damping, (1.0 - damping**2) ** 0.5)
    return [root, root.conjugate()]


@st.composite
def _roots(draw: Any, least: int, most: int, real_part: bool) -> list[complex]:
    """Real roots and pairs, some of them several times, some at the origin."""
    roots: list[complex] = []
    while len(roots) < least or (len(roots) < most - 1 and draw(st.booleans())):
        kind = draw(st.sampled_from(["real", "origin", "pair"]))
        if kind == "origin":
            new: list[complex] = [0j]
        elif kind == "real":
            new = [complex(-draw(MAGNITUDES))]
        else:
            new = _pair(draw(MAGNITUDES), draw(DAMPINGS) if real_part else 0.0)
        times = draw(st.sampled_from([1, 1, 2, 3]))
        roots += new * times
    return roots if len(roots) <= most else _whole(roots[:most])


def _whole(roots: list[complex]) -> list[complex]:
    """Leave a root out whose conjugate was cut off."""
    return roots[:-1] if roots[-1].imag > 0.0 else roots


def _product(
    zeros: Sequence[complex], poles: Sequence[complex], gain: float, s: Complex
) -> Complex:
    top = np.prod([s - zero for zero in zeros], axis=0) if zeros else np.ones_like(s)
    bottom = np.prod([s - pole for pole in poles], axis=0) if poles else np.ones_like(s)
    return np.asarray(gain * top / bottom)


def _response(blocks: Sequence[Block], s: Complex) -> Complex:
    return np.asarray(np.prod([block.response(s) for block in blocks], axis=0))


def _terms(block: Block, s: Complex) -> NDArray[np.float64]:
    """Return |d| + sum of |c x|, the size of what adds up to a block's output."""
    system = s[:, None, None] * np.eye(block.order) - block.a
    x = np.linalg.solve(system, np.broadcast_to(block.b[:, None], (len(s), block.order, 1)))
    return np.asarray(abs(block.d) + np.abs(x[..., 0]) @ np.abs(block.c))


@given(data=st.data(), gain=st.floats(0.01, 100.0))
@settings(max_examples=100, deadline=None)
def test_any_poles_without_zeros(data: Any, gain: float) -> None:
    """Multiple poles, poles at the origin, pairs: gain over the product of the differences."""
    poles = data.draw(_roots(1, 9, True))
    found = _response(cascade([], poles, gain), S)
    np.testing.assert_allclose(found, _product([], poles, gain, S), rtol=1e-9)


@given(data=st.data(), gain=st.floats(-10.0, 10.0).filter(lambda g: abs(g) > 1e-3))
@settings(max_examples=100, deadline=None)
def test_any_zeros_over_any_poles(data: Any, gain: float) -> None:
    """Whatever stands over whatever: right to 1e-9, or to rounding of what adds up in the blocks.

    Deep in a stop band made by zeros far from the poles, the direct path and the states cancel.
    """
    poles = data.draw(_roots(1, 9, True))
    zeros = data.draw(_roots(0, len(poles), False))
    zeros = zeros if len(zeros) <= len(poles) else []
    blocks = cascade(zeros, poles, gain)
    assert all(block.order <= 2 for block in blocks)
    assert sum(block.order for block in blocks) == len(poles)
    found, true = _response(blocks, S), _product(zeros, poles, gain, S)
    added = np.prod([_terms(block, S) for block in blocks], axis=0)
    assert np.all(np.abs(found - true) <= 1e-9 * np.abs(true) + 1e-14 * added)


@pytest.mark.parametrize(
    ("zeros", "poles"),
    [
        ([3e3j, -3e3j], [-1.0, -1e9]),
        ([3e3j, -3e3j], [-1e4, -1e4]),
        ([3e3j, -3e3j, 1e6j, -1e6j], [-1.0, -1e2, -1e4, -1e8]),
        ([-10.0], [-1e3, -1e3, -1e3]),
        ([-2e3], [*_pair(1e4, 0.05), *_pair(1e4, 0.05), -40.0]),
        ([0.0, 0.0], [-5.0, *_pair(8e3, 0.2)]),
    ],
    ids=["wide notch", "notch", "two notches", "triple", "double pair", "double zero"],
)
def test_step_responses_agree_with_partial_fractions(
    zeros: list[complex], poles: list[complex]
) -> None:
    """In time too: real poles under complex zeros, multiple poles, rates far apart, to 1e-12.

    Oracle: partial fractions at 60 digits (tests/partial_fractions.py).
    """
    from drives import outputs

    from frontend_sim.stimulus.drive import Lines

    size = np.prod([abs(pole) for pole in poles]) / np.prod([max(abs(z), 1.0) for z in zeros])
    gain = float(size) if len(poles) > len(zeros) else 1.0
    stage = PolesZeros(
        poles=tuple((complex(p).real, complex(p).imag) for p in poles),
        zeros=tuple((complex(z).real, complex(z).imag) for z in zeros),
        gain=min(gain, 1e17),
    )
    times = np.logspace(-8, 0, 17)
    found = outputs(chain_of([stage]), [Lines.of(0.0, [0.0], [1.0])], times)
    true = step_response(zeros, poles, stage.gain, list(times))
    np.testing.assert_allclose(found, true, rtol=0, atol=1e-12 * np.max(np.abs(true)))


def test_a_gain_alone_is_one_block() -> None:
    """No roots at all leave the gain."""
    (block,) = cascade([], [], -3.0)
    assert (block.order, block.d) == (0, -3.0)


def test_more_zeros_than_poles_are_refused() -> None:
    """An improper response would grow without bound."""
    with pytest.raises(ModelError, match="2 zeros stand against 1 pole;"):
        cascade([-1.0, -2.0], [-3.0], 1.0)


@pytest.mark.parametrize(
    "roots", [[-1 + 2j], [-1 - 2j], [-1 + 2j, -1 - 2.001j], [-1 + 2j, -1 + 2j, -1 - 2j]]
)
@pytest.mark.parametrize("noun", ["pole", "zero"])
def test_a_missing_conjugate_is_refused(roots: list[complex], noun: str) -> None:
    """A complex root without its conjugate gives no real circuit; the message tells which."""
    poles = roots if noun == "pole" else [-1.0] * len(roots)
    zeros = roots if noun == "zero" else []
    with pytest.raises(ModelError, match=f"complex {noun} -1 .* without its conjugate"):
        cascade(zeros, poles, 1.0)


def test_conjugates_may_differ_by_rounding() -> None:
    """Roots printed with ten digits or computed by another program still pair up."""
    (block,) = cascade([], [complex(-1.0, 2.0), complex(-1.0 + 1e-13, -2.0)], 1.0)
    assert block.order == 2


def _polynomial(roots: Sequence[complex]) -> list[float]:
    with mp.workdps(60):
        coefficients = [mp.mpf(1)]
        for root in roots:
            shifted = [*coefficients, mp.mpf(0)]
            for i, value in enumerate(coefficients):
                shifted[i + 1] -= mp.mpc(root) * value
            coefficients = shifted
        return [float(mp.re(value)) for value in coefficients]


@given(data=st.data(), leading=st.floats(0.1, 10.0))
@settings(max_examples=30, deadline=None)
@pytest.mark.filterwarnings("ignore:Descending:DeprecationWarning")  # of newer versions of mpmath
def test_roots_agree_with_mpmath(data: Any, leading: float) -> None:
    """Roots well apart, over four decades, against mpmath.polyroots at 40 digits."""
    count = data.draw(st.integers(1, 4))
    steps = data.draw(st.permutations(range(8)))[:count]
    roots: list[complex] = []
    for step in steps:
        size = 10.0 ** (step / 2.0) * data.draw(st.floats(0.8, 1.25))
        roots += data.draw(st.sampled_from([[complex(-size)], _pair(size, 0.2), [complex(size)]]))
    coefficients = [leading * value for value in _polynomial(roots)]
    with mp.workdps(40):
        true = [complex(z) for z in mp.polyroots(coefficients, maxsteps=500, extraprec=400)]
    found = roots_of(coefficients)
    assert len(found) == len(true)
    for root in true:
        nearest = min(found, key=lambda other: abs(other - root))
        assert abs(nearest - root) <= 1e-10 * abs(root)


def _value(coefficients: Sequence[float], s: Any) -> Any:
    """Return the value of a polynomial by Horner's rule, in mpmath numbers."""
    total = mp.mpf(0)
    for value in coefficients:
        total = total * s + mp.mpf(value)
    return total


def _worst_response(coefficients: list[float]) -> float:
    """Return the largest share by which the roots miss the polynomial on the imaginary axis."""
    roots = roots_of(coefficients)
    sizes = [abs(root) for root in roots if root != 0.0]
    low, high = np.log10(min(sizes)) - 1.0, np.log10(max(sizes)) + 1.0
    worst = 0.0
    with mp.workdps(40):
        for w in [*np.logspace(low, high, 40), *(abs(root.imag) for root in roots)]:
            s = mp.mpc(0, float(w))
            true = _value(coefficients, s)
            found = mp.mpf(coefficients[0])
            for root in roots:
                found *= s - mp.mpc(root)
            worst = max(worst, float(abs(found / true - 1)))
    return worst


@pytest.mark.parametrize(
    "roots",
    [
        [-1.0] * 3,
        [-1e4] * 8,
        [-0.1, -1e7, -1e7, -1e7, *_pair(5e3, 0.2)],
        [-(10.0**k) for k in range(12)],
        [-float(k) for k in range(1, 21)],
        [root for k in range(1, 6) for root in _pair(float(k), 0.01)],
    ],
    ids=["triple", "eightfold", "far apart", "every decade", "twenty in a row", "resonances"],
)
def test_factored_polynomials_give_their_response(roots: list[complex]) -> None:
    """The factors of hard polynomials reproduce their values on the imaginary axis to 1e-9.

    Equal roots, whose computed places are wrong by the n-th root of the rounding, and the twenty
    roots 1 .. 20 of Wilkinson (1959), which are as sensitive, give the right response all the same.
    """
    assert _worst_response(_polynomial(roots)) < 1e-9


@pytest.mark.parametrize("count", [3, 4, 5])
def test_polynomials_that_rounding_has_spoiled_are_refused(count: int) -> None:
    """Lightly damped pairs side by side, expanded: sixteen digits no longer hold the response."""
    roots = [root for k in range(count) for root in _pair(1000.0 + k, 1e-3)]
    with pytest.raises(ModelError, match=r"too ill-conditioned to be factored.*poles-zeros"):
        roots_of(_polynomial(roots))


@given(data=st.data())
@settings(max_examples=40, deadline=None)
def test_a_polynomial_is_refused_or_right(data: Any) -> None:
    """Never a silent wrong answer: what roots_of accepts is right to 1e-7 where it matters."""
    base = data.draw(st.floats(0.9, 1.1))
    roots: list[complex] = []
    for _ in range(data.draw(st.integers(2, 5))):
        size = base * data.draw(st.sampled_from([1.0, 1.01, 1.1, 3.0]))
        roots += _pair(size, data.draw(st.sampled_from([0.003, 0.03, 0.5])))
    try:
        worst = _worst_response(_polynomial(roots))
    except ModelError:
        return
    assert worst < 1e-7


def test_roots_at_the_origin_and_leading_zeros() -> None:
    """Trailing zero coefficients are roots at the origin, exactly; leading ones mean nothing."""
    assert roots_of([0.0, 0.0, 2.0, 4.0, 0.0, 0.0]) == [0j, 0j, -2 + 0j]
    assert roots_of([5.0]) == []
    with pytest.raises(ModelError, match="all zero"):
        roots_of([0.0, 0.0])


def test_a_quadratic_keeps_its_smaller_root() -> None:
    """s² + 1e8 s + 1: the root near the origin does not cancel."""
    assert max(root.real for root in roots_of([1.0, 1e8, 1.0])) == pytest.approx(-1e-8, rel=1e-15)


def test_the_stage_is_the_polynomials_quotient() -> None:
    """A polynomial stage of fifth order over eight decades, with its leading coefficients."""
    top, bottom = [3.0, 6e4, 9e8], [2.0, 9e4, 2e9, 2e13, 1e17, 2e19]
    chain = chain_of([Polynomial(numerator=tuple(top), denominator=tuple(bottom))])
    f = np.logspace(-1, 7, 50)
    s = 2j * np.pi * f
    true = np.polyval(top, s) / np.polyval(bottom, s)
    np.testing.assert_allclose(chain.response(f), true, rtol=1e-9)
