"""Gain, corners, group delay, attenuation, noise bandwidth and poles against closed forms."""

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
from frontend_sim.analog.stages import (
    Bessel,
    Butterworth,
    Chebyshev,
    Gain,
    PolesZeros,
    RcHighpass,
    RcLowpass,
    SecondOrder,
    TransportDelay,
)
from frontend_sim.analog.stages.base import Stage
from frontend_sim.measure.response.frequency_domain import FrequencyDomain
from frontend_sim.measure.response.group_delay import group_delay
from frontend_sim.measure.response.pole import poles_of
from frontend_sim.measure.response.roots import roots_of
from frontend_sim.measure.response.step_response import StepResponse

RC = 1.0 / (2.0 * math.pi * 1e3)
LOW = RcLowpass(resistance=1e3, capacitance=RC / 1e3)
HIGH = RcHighpass(resistance=1e3, capacitance=RC / 1e3)


def measured(*stages: Stage, rate: float = 20e3) -> FrequencyDomain:
    """Measure a chain."""
    return FrequencyDomain.of(StepResponse.of(chain_of(stages)), rate)


def corners(*stages: Stage) -> list[tuple[float, str]]:
    """Return frequency and side of each corner."""
    return [(corner.frequency, corner.side) for corner in measured(*stages).corners]


@pytest.mark.parametrize("order", [1, 2, 3, 4])
def test_equal_buffered_sections(order):
    """Corner sqrt(2^(1/n) - 1) of one section; its printed values are 1, 0.6436, 0.5098, 0.4350."""
    ((frequency, side),) = corners(*[LOW] * order)
    assert frequency == pytest.approx(1e3 * math.sqrt(2.0 ** (1.0 / order) - 1.0), rel=1e-12)
    assert frequency / 1e3 == pytest.approx([1, 0.6436, 0.5098, 0.4350][order - 1], abs=6e-5)
    assert side == "upper"


@pytest.mark.parametrize("order", [1, 2, 3, 4])
def test_noise_bandwidth_of_equal_sections(order):
    """f0 integral of dx / (1 + x²)^n, sqrt(pi)/2 Gamma(n - 1/2)/Gamma(n): 1.5708, 1.2203, ..."""
    found = measured(*[LOW] * order)
    integral = 0.5 * math.sqrt(math.pi) * math.gamma(order - 0.5) / math.gamma(order)
    assert found.noise_bandwidth == pytest.approx(1e3 * integral, rel=1e-12)
    ratio = found.noise_bandwidth / found.corners[0].frequency
    # The closed form at four decimals; tables made by quadrature print 1 or 2 less in the last.
    assert ratio == pytest.approx([1.5708, 1.2203, 1.1554, 1.1285][order - 1], abs=6e-5)


@pytest.mark.parametrize("order", [1, 2, 3, 4, 8, 12])
def test_butterworth(order):
    """Corner where it was asked for; noise bandwidth (pi/2n) / sin(pi/2n) of it; monotone."""
    found = measured(Butterworth(order=order, corner=123.0), Gain(gain=-2.5))
    assert [corner.frequency for corner in found.corners] == pytest.approx([123.0], rel=1e-12)
    angle = math.pi / (2.0 * order)
    assert found.noise_bandwidth == pytest.approx(123.0 * angle / math.sin(angle), rel=1e-11)
    assert (found.largest.value, found.largest.frequency) == (pytest.approx(2.5, rel=1e-13), 0.0)


def test_noise_bandwidth_of_rates_far_apart():
    """Two low passes eight decades apart: 1/(4 (T1 + T2)), by residues."""
    found = measured(
        RcLowpass(resistance=1.0, capacitance=10.0), RcLowpass(resistance=1.0, capacitance=1e-7)
    )
    assert found.noise_bandwidth == pytest.approx(0.25 / (10.0 + 1e-7), rel=1e-13)


def test_noise_bandwidth_of_a_high_pass_is_infinite():
    """White noise goes through a high pass without end."""
    assert measured(HIGH).noise_bandwidth == math.inf


def test_high_pass_has_a_lower_corner():
    """A high pass of first order, its gain tends to one at infinity."""
    found = measured(HIGH, Gain(gain=2.0))
    assert corners(HIGH) == [(pytest.approx(1e3, rel=1e-12), "lower")]
    assert (found.largest.value, found.largest.frequency) == (2.0, math.inf)
    assert found.attenuations[0].below_dc is None


@pytest.mark.parametrize("quality", [0.3, 1.0, 30.0, 1e6])
def test_band_pass_has_two_corners(quality):
    """f0 (sqrt(1 + 1/4Q²) -+ 1/2Q), gain one at f0: filter handbooks, common practice."""
    found = measured(SecondOrder(corner=1e3, quality_factor=quality, response="band-pass"))
    middle, half = math.sqrt(1.0 + 0.25 / quality**2), 0.5 / quality
    assert [c.frequency for c in found.corners] == pytest.approx(
        [1e3 * (middle - half), 1e3 * (middle + half)], rel=1e-12
    )
    assert [c.side for c in found.corners] == ["lower", "upper"]
    assert found.largest.frequency == pytest.approx(1e3, rel=1e-10)
    assert found.noise_bandwidth == pytest.approx(0.5 * math.pi * 1e3 / quality, rel=1e-10)


@pytest.mark.parametrize("quality", [0.7, 5.0, 1e5])
def test_notch_has_two_corners(quality):
    """The same two corners, with the sides changed about."""
    found = corners(SecondOrder(corner=1e3, quality_factor=quality, response="notch"))
    middle, half = math.sqrt(1.0 + 0.25 / quality**2), 0.5 / quality
    assert found == [
        (pytest.approx(1e3 * (middle - half), rel=1e-11), "upper"),
        (pytest.approx(1e3 * (middle + half), rel=1e-11), "lower"),
    ]


@pytest.mark.parametrize("response", ["band-pass", "band-stop"])
def test_band_filters(response):
    """Butterworth bands have their corners where they were asked for."""
    stage = Butterworth(order=4, response=response, lower_corner=200.0, upper_corner=5e3)
    assert [f for f, _ in corners(stage)] == pytest.approx([200.0, 5e3], rel=1e-12)


@pytest.mark.parametrize("order", [2, 3, 5])
@pytest.mark.parametrize("ripple", [0.1, 1.0])
def test_chebyshev_corner_lies_beyond_its_ripple_band(order, ripple):
    """f cosh(acosh(1/e)/n) at half power below the largest gain; any filter handbook."""
    epsilon = math.sqrt(10.0 ** (ripple / 10.0) - 1.0)
    expected = 1e3 * math.cosh(math.acosh(1.0 / epsilon) / order)
    found = measured(Chebyshev(order=order, ripple=ripple, corner=1e3))
    assert [c.frequency for c in found.corners] == pytest.approx([expected], rel=1e-11)
    assert found.largest.value == pytest.approx(1.0, rel=1e-12)


def test_ripple_deeper_than_3_db_gives_every_crossing():
    """Order 5 with 6 dB of ripple dips twice below -3 dB: five corners, T_5 = cos(5 acos x)."""
    stage = Chebyshev(order=5, ripple=6.0, corner=1e3)
    epsilon = math.sqrt(10.0**0.6 - 1.0)
    # T_5(x) = ±1/e lies inside the ripple band, all its roots are cosines.
    angles = [(math.acos(level) + 2.0 * math.pi * k) / 5.0
              for level in (1.0 / epsilon, -1.0 / epsilon) for k in range(5)]  # fmt: skip
    expected = sorted({round(1e3 * abs(math.cos(angle)), 7) for angle in angles})
    assert [f for f, _ in corners(stage)] == pytest.approx(expected, rel=1e-9)


@pytest.mark.parametrize("quality", [0.8, 3.0, 1e4])
def test_resonance_peak(quality):
    """Q / sqrt(1 - 1/4Q²) at f0 sqrt(1 - 1/2Q²): any control textbook."""
    found = measured(SecondOrder(corner=1e3, quality_factor=quality)).largest
    assert found.value == pytest.approx(quality / math.sqrt(1.0 - 0.25 / quality**2), rel=1e-11)
    assert found.frequency == pytest.approx(1e3 * math.sqrt(1.0 - 0.5 / quality**2), rel=1e-9)


@pytest.mark.parametrize(
    "stage", [Gain(gain=3.0), Gain(gain=0.0), TransportDelay(delay=1.0), PolesZeros(poles=(0.0,))]
)
def test_no_corner(stage):
    """A flat, a silent and an unbounded response have no corner."""
    assert corners(stage) == []


@settings(max_examples=40, deadline=None)
@given(
    pairs=st.lists(st.tuples(st.floats(-5.0, 5.0), st.floats(-0.3, 4.0)), max_size=3),
    high=st.floats(-5.0, 5.0),
    low=st.floats(-5.0, 5.0),
)
def test_gain_at_each_corner(pairs, high, low):
    """Any chain: |H| at each corner is |H|max/sqrt 2 to 1e-11, and no grid point tops |H|max."""
    stages = [SecondOrder(corner=10.0**f, quality_factor=10.0**q) for f, q in pairs]
    stages.append(RcHighpass(resistance=1.0, capacitance=10.0**-high))
    stages.append(RcLowpass(resistance=1.0, capacitance=10.0**-low))
    chain = chain_of(stages)
    found = FrequencyDomain.of(StepResponse.of(chain), 1.0)
    assert found.corners
    for corner in found.corners:
        at = abs(chain.response(np.array([corner.frequency]))[0])
        # A steep flank turns an error of 1e-14 of the frequency into Q times as much of the gain.
        assert at == pytest.approx(found.largest.value / math.sqrt(2.0), rel=1e-9)
    everywhere = np.abs(chain.response(np.geomspace(1e-8, 1e8, 4001)))
    assert np.max(everywhere) <= found.largest.value * (1.0 + 1e-11)


def test_attenuation_at_half_the_rate_and_the_rate():
    """Butterworth of order n: 10 lg(1 + (f/fc)^2n) dB."""
    found = measured(Butterworth(order=4, corner=1e3), Gain(gain=5.0), rate=20e3)
    for attenuation, ratio in zip(found.attenuations, (10.0, 20.0), strict=True):
        expected = 10.0 * math.log10(1.0 + ratio**8)
        assert attenuation.below_largest == pytest.approx(expected, rel=1e-12)
        assert attenuation.below_dc == pytest.approx(expected, rel=1e-12)


def test_attenuation_of_a_silent_frequency_is_infinite():
    """A notch at half the rate lets nothing through there."""
    stage = PolesZeros(
        poles=((-1.0, 0.0), (-1.0, 0.0)),
        zeros=((0.0, math.pi * 100.0), (0.0, -math.pi * 100.0)),
    )
    assert measured(stage, rate=100.0).attenuations[0].below_largest > 280.0


def test_group_delay_of_a_low_pass():
    """T / (1 + (wT)²), plus the pure delay."""
    roots = roots_of(chain_of([LOW, TransportDelay(delay=2e-3)]))
    frequency = np.array([0.0, 1.0, 1e3, 1e6])
    expected = 2e-3 + RC / (1.0 + (2.0 * np.pi * frequency * RC) ** 2)
    np.testing.assert_allclose(group_delay(roots, frequency), expected, rtol=1e-13)


@pytest.mark.parametrize(
    "stages",
    [
        [Butterworth(order=5, corner=1e3), HIGH],
        [SecondOrder(corner=700.0, quality_factor=30.0, response="band-pass")],
        [Chebyshev(order=4, corner=2e3, response="high-pass")],
        [PolesZeros(poles=(-1e3, -2e4), zeros=(5e3,), gain=-1.0)],
    ],
)
def test_group_delay_is_the_derivative_of_the_phase(stages):
    """-d arg H / dw by mpmath at 40 digits, from the poles and zeros of the stages themselves."""
    chain = chain_of(stages)
    roots = roots_of(chain)
    frequencies = np.array([3.0, 500.0, 690.0, 1e3, 4e3, 1e5])
    found = group_delay(roots, frequencies)
    with mp.workdps(40):

        def polynomial(coefficients: NDArray[np.float64], s: Any) -> Any:
            value = mp.mpf(0)
            for coefficient in coefficients:
                value = value * s + mp.mpf(float(coefficient))
            return value

        def phase(w: Any) -> Any:
            s = mp.mpc(0, w)
            total = mp.mpf(0)
            for section in chain.sections:
                for block in section.blocks:
                    top, bottom = block.polynomials()
                    total += mp.arg(polynomial(top, s))
                    total -= mp.arg(polynomial(bottom, s))
            return total

        for frequency, value in zip(frequencies, found, strict=True):
            w = 2 * mp.pi * mp.mpf(float(frequency))
            step = w * mp.mpf("1e-12")
            difference = phase(w + step) - phase(w - step)
            # The arguments of the blocks may jump by a turn between the two points.
            turn = 2 * mp.pi
            difference -= turn * mp.nint(difference / turn)
            expected = float(-difference / (2 * step))
            assert value == pytest.approx(expected, rel=1e-7, abs=1e-16)


def test_group_delay_ignores_the_jump_at_a_notch():
    """At a zero on the axis the phase jumps, the delay does not: that of the poles is left."""
    roots = roots_of(chain_of([SecondOrder(corner=1e3, quality_factor=2.0, response="notch")]))
    near = group_delay(roots, np.array([999.999999, 1000.0, 1000.000001]))
    np.testing.assert_allclose(near, 2.0 * 2.0 / (2.0 * np.pi * 1e3), rtol=1e-6)


def test_group_delay_in_the_band():
    """Of a band pass at its centre: 2 Q / w0; of a high pass in its band: none."""
    found = measured(SecondOrder(corner=1e3, quality_factor=5.0, response="band-pass"))
    assert found.group_delay_band == pytest.approx(10.0 / (2.0 * math.pi * 1e3), rel=1e-9)
    assert measured(HIGH).group_delay_band == 0.0


def test_butterworth_quality_factors():
    """Order 4: 0.5412 and 1.3066 (closed form 1/(2 cos) of pi/8 and 3 pi/8)."""
    found = poles_of(chain_of([Butterworth(order=4, corner=1e3)]))
    assert sorted(pole.quality_factor for pole in found) == pytest.approx(
        [0.5 / math.cos(math.pi / 8.0), 0.5 / math.cos(3.0 * math.pi / 8.0)], rel=1e-13
    )
    assert sorted(pole.quality_factor for pole in found) == pytest.approx(
        [0.5412, 1.3066], abs=6e-5
    )
    assert [pole.natural_frequency for pole in found] == pytest.approx([1e3, 1e3], rel=1e-14)


@pytest.mark.parametrize(
    ("order", "expected"),
    [(2, [(-1.10160, 0.63601)]), (3, [(-1.32268, 0.0), (-1.04741, 0.99926)])],
)
def test_bessel_poles(order, expected):
    """-3 dB normalized (Thomson 1949, computed), at the printed precision."""
    chain = chain_of([Bessel(order=order, corner=1.0 / (2.0 * math.pi), name="filter")])
    found = sorted((pole.real, pole.imaginary) for pole in poles_of(chain))
    assert found == [pytest.approx(pair, abs=6e-6) for pair in sorted(expected)]
    assert {pole.stage for pole in poles_of(chain)} == {"filter"}


def test_real_pole():
    """Damping ratio one, Q one half, the time constant RC."""
    (pole,) = poles_of(chain_of([LOW]))
    assert (pole.damping_ratio, pole.quality_factor) == (1.0, 0.5)
    assert pole.time_constant == pytest.approx(RC, rel=1e-15)
    assert pole.natural_frequency == pytest.approx(1e3, rel=1e-14)


def test_poles_without_damping():
    """At the origin there is no damping ratio, on the axis it is zero; no time constant either."""
    found = poles_of(chain_of([PolesZeros(poles=(0.0, (0.0, 3.0), (0.0, -3.0)))]))
    by_size = sorted(found, key=lambda pole: pole.natural_frequency)
    assert [pole.damping_ratio for pole in by_size] == [None, 0.0]
    assert [pole.time_constant for pole in by_size] == [None, None]
    assert [pole.quality_factor for pole in by_size] == [None, None]
