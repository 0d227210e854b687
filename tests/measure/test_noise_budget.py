"""Noise without a run: known variances, the part that folds, sums of sources."""

from __future__ import annotations

import math

import mpmath as mp
import numpy as np
import pytest
from nodal import GROUND, Net, open_loop, transfers
from scipy import integrate

from frontend_sim.analog.block import first_order
from frontend_sim.analog.chain import chain_of, compose
from frontend_sim.analog.noise import (
    BOLTZMANN,
    NoiseInput,
    at_input,
    stationary_covariance,
    step_covariance,
    thermal_density,
)
from frontend_sim.analog.section import Section
from frontend_sim.analog.stages import Butterworth, InvertingAmplifier, RcHighpass, RcLowpass
from frontend_sim.converter.adc import Adc
from frontend_sim.errors import ModelError
from frontend_sim.measure.noise_budget import noise_budget, noise_density

ADC = Adc(rate=20e3, bits=16, high=3.3)
T = 300.0


def _white(density: float, stages: list[Butterworth | RcLowpass], corner: float = 0.0) -> Section:
    blocks = tuple(block for stage in stages for block in stage.blocks())
    return Section("filter", blocks, 0.0, (at_input("white source", density, blocks, corner),))


def _rc(resistance: float, capacitance: float) -> Section:
    stage = RcLowpass(resistance=resistance, capacitance=capacitance)
    return Section("rc", stage.blocks(), 0.0, stage.noise(T))


def test_thermal_noise_of_one_kilohm() -> None:
    """4.070 nV/sqrt(Hz) at 300 K; Nyquist 1928, computed."""
    assert thermal_density(1e3, T) == pytest.approx(4.070e-9, abs=0.5e-12)


@pytest.mark.parametrize(("capacitance", "rms"), [(1e-12, 64.36e-6), (10e-12, 20.35e-6)])
@pytest.mark.parametrize("resistance", [10.0, 1e3, 1e6])
def test_noise_of_an_rc_is_k_t_over_c(capacitance: float, rms: float, resistance: float) -> None:
    """kT/C at 300 K for any resistor: 1 pF 64.36 uV, 10 pF 20.35 uV; Johnson and Nyquist 1928."""
    budget = noise_budget(compose([_rc(resistance, capacitance)]), ADC, 1.0)
    assert budget.rms == pytest.approx(rms, abs=0.005e-6)
    assert budget.rms == pytest.approx(math.sqrt(BOLTZMANN * T / capacitance), rel=1e-12)


@pytest.mark.parametrize(("order", "ratio"), [(1, 1.5708), (2, 1.1107), (3, 1.0472), (4, 1.0262)])
def test_noise_bandwidth_of_butterworth(order: int, ratio: float) -> None:
    """Noise bandwidth over corner, pi/(2n) / sin(pi/(2n)); closed form."""
    chain = compose([_white(1e-6, [Butterworth(order=order, corner=1e3)])])
    budget = noise_budget(chain, ADC, 1.0)
    assert budget.rms**2 / 1e-12 / 1e3 == pytest.approx(ratio, abs=5e-5)


@pytest.mark.parametrize("order", [1, 2, 3, 4])
def test_noise_bandwidth_of_equal_sections(order: int) -> None:
    """n equal buffered RC sections: sqrt(pi) Gamma(n - 1/2) / (2 Gamma(n)) of one section's corner.

    Closed form of the integral of (1 + x²)^-n from zero to infinity.
    """
    stages = [RcLowpass(resistance=1e3, capacitance=1e-7)] * order
    budget = noise_budget(compose([_white(1e-6, list(stages))]), ADC, 1.0)
    corner = 1.0 / (2.0 * math.pi * 1e-4)
    factor = math.sqrt(math.pi) * math.gamma(order - 0.5) / (2.0 * math.gamma(order))
    assert budget.rms**2 / 1e-12 == pytest.approx(factor * corner, rel=1e-10)


def test_the_part_above_half_the_rate_of_one_pole() -> None:
    """For one pole the power below f is (2/pi) atan(f/corner) of all."""
    budget = noise_budget(compose([_rc(1e3, 1e-9)]), ADC, 1.0)
    corner = 1.0 / (2.0 * math.pi * 1e-6)
    above = 1.0 - 2.0 / math.pi * math.atan(10e3 / corner)
    assert (budget.folded / budget.rms) ** 2 == pytest.approx(above, rel=1e-9)
    assert budget.rows[0].folded == budget.folded


@pytest.mark.parametrize("error", [-0.1, 0.1])
def test_a_clock_off_its_rate_folds_at_its_own_half(error: float) -> None:
    """The codes come at rate (1 + rate_error), so half of that is where folding begins."""
    adc = ADC.model_copy(update={"rate_error": error})
    budget = noise_budget(compose([_rc(1e3, 1e-9)]), adc, 1.0)
    corner = 1.0 / (2.0 * math.pi * 1e-6)
    above = 1.0 - 2.0 / math.pi * math.atan(10e3 * (1.0 + error) / corner)
    assert (budget.folded / budget.rms) ** 2 == pytest.approx(above, rel=1e-9)


def _inverting(net: Net) -> str:
    """Return the output of 1 kohm and 47 kohm beside 330 pF around 1 MHz, with 3.3 kohm at plus."""
    net.hold("in")
    net.resistor("input_resistance", "in", "minus", 1e3)
    net.resistor("feedback_resistance", "minus", "out", 47e3)
    net.capacitor("minus", "out", 330e-12)
    net.resistor("compensation_resistance", "plus", GROUND, 3.3e3)
    net.inject("plus", "noninverting")
    net.inject("minus", "inverting")
    gain = open_loop(net, {"gain_bandwidth": 1e6})
    net.amplifier("voltage", {"plus": mp.mpf(1), "minus": mp.mpf(-1)}, "out", gain, None)
    return "out"


def test_each_row_is_the_integral_of_the_nodes_density() -> None:
    """Sources of an inverting amplifier, all of each and what folds, against |H|² S of nodal
    equations written down by hand, integrated over fifteen decades; to 1e-7."""
    stage = InvertingAmplifier(
        input_resistance=1e3, feedback_resistance=47e3, compensation_resistance=3.3e3,
        feedback_capacitance=330e-12, gain_bandwidth=1e6, voltage_noise=8e-9, current_noise=5e-12,
    )  # fmt: skip
    budget = noise_budget(chain_of([stage], T), ADC, 1.0)
    half = math.log(10e3)
    edges = np.concatenate([np.linspace(-4.6, half, 24), np.linspace(half, 32.0, 36)[1:]])
    nodes, weights = np.polynomial.legendre.leggauss(6)
    centre, width = 0.5 * (edges[1:] + edges[:-1]), 0.5 * np.diff(edges)
    frequency = np.exp(centre[:, None] + width[:, None] * nodes)
    share = (width[:, None] * weights) * frequency
    densities = {"voltage": 8e-9, "noninverting": 5e-12, "inverting": 5e-12}
    ohms = {"input_resistance": 1e3, "feedback_resistance": 47e3, "compensation_resistance": 3.3e3}
    densities |= {name: thermal_density(value, T) for name, value in ohms.items()}
    rows = {row.source: row for row in budget.rows}
    assert len(rows) == len(densities)
    for name, gain in transfers(_inverting, frequency.ravel()).items():
        if name == "u":
            continue
        power = np.abs(gain.reshape(frequency.shape)) ** 2 * densities[name] ** 2 * share
        (row,) = [rows[told] for told in rows if f" {name} " in f" {told} "]
        assert row.rms**2 == pytest.approx(float(np.sum(power)), rel=1e-7)
        above = float(np.sum(power[centre > half]))
        assert row.folded**2 == pytest.approx(above, rel=1e-7)


def test_sources_add_in_power() -> None:
    """Shares add up to one, the total to the root of the sum of squares, the largest first."""
    adc = ADC.model_copy(update={"input_noise": 30e-6})
    budget = noise_budget(compose([_rc(1e4, 1e-11), _rc(1e3, 1e-10)]), adc, 1.0)
    assert sum(row.share for row in budget.rows) == pytest.approx(1.0, rel=1e-12)
    assert budget.rms == pytest.approx(math.hypot(*(row.rms for row in budget.rows)), rel=1e-12)
    assert [row.rms for row in budget.rows] == sorted((r.rms for r in budget.rows), reverse=True)
    assert budget.lsb == pytest.approx(budget.rms / adc.lsb)


def test_one_over_f_has_its_slope_and_its_corner() -> None:
    """The bank's density follows density² (1 + corner/f) within 2 % over five decades.

    It begins two decades below the lowest of them, where it turns flat.
    """
    wide = first_order(-2.0 * math.pi * 1e9, (0.0, 2.0 * math.pi * 1e9))
    source = at_input("amplifier", 1e-8, (wide,), corner=100.0)
    model = compose([Section("amplifier", (wide,), 0.0, (source,))]).noise_model(1e-4)
    frequency = np.geomspace(0.01, 1e3, 60)
    wanted = 1e-16 * (1.0 + 100.0 / frequency)
    # 2 %: the ripple of two poles per decade, and the end of the bank at 100 corners.
    np.testing.assert_allclose(noise_density(model, model.b, frequency), wanted, rtol=0.02)


def test_one_over_f_has_the_power_of_its_band() -> None:
    """Behind a wide pole: the white part plus density² · corner · ln(top / lowest)."""
    wide = first_order(-2.0 * math.pi * 1e9, (0.0, 2.0 * math.pi * 1e9))
    source = at_input("amplifier", 1e-8, (wide,), corner=100.0)
    budget = noise_budget(compose([Section("amplifier", (wide,), 0.0, (source,))]), ADC, 0.01)
    power = 1e-16 * (math.pi / 2.0 * 1e9 + 100.0 * math.log(1e4 / 0.01))
    assert budget.rms**2 == pytest.approx(power, rel=1e-6)


def test_covariance_of_a_step_agrees_with_quadrature() -> None:
    """The integral of exp(a s) b b' exp(a' s) by scipy, for a high pass, a low pass and a pair."""
    from scipy.linalg import expm

    stages = [
        RcHighpass(resistance=1e5, capacitance=1e-8),
        RcLowpass(resistance=1e3, capacitance=1e-8),
        Butterworth(order=2, corner=3e3),
    ]
    chain = compose([Section(s.kind, s.blocks(), 0.0, s.noise(T)) for s in stages])
    model = chain.noise_model(1.0)
    step = 50e-6

    def integrand(s: float) -> np.ndarray[tuple[int, ...], np.dtype[np.float64]]:
        moved = expm(model.a * s) @ model.b
        return np.asarray(moved @ moved.T)

    true, _ = integrate.quad_vec(integrand, 0.0, step, epsabs=0.0, epsrel=1e-12)
    _, q = step_covariance(model.a, model.b, step)
    np.testing.assert_allclose(q, true, rtol=1e-9, atol=1e-12 * np.max(true))


def test_stationary_covariance_solves_its_equation() -> None:
    """The residual of the Lyapunov equation vanishes beside its terms, time constants far apart."""
    chain = compose([_rc(1e3, 1e-10), _rc(1e6, 1e-5), _rc(1e3, 1e-7)])
    model = chain.noise_model(1.0)
    p = stationary_covariance(model.a, model.b)
    left = model.a @ p + p @ model.a.T
    np.testing.assert_allclose(left, -model.b @ model.b.T, atol=1e-12 * np.max(np.abs(model.a @ p)))


def test_unfiltered_white_noise_is_told_apart() -> None:
    """A white source with a direct way to the pin has infinite power: only its rest counts.

    y = w - LP(w) with a pole at 1 krad/s; without the direct w there remains e² · 1000/4.
    """
    block = first_order(-1e3, (1.0, 0.0))
    source = NoiseInput("input", 1e-8, 0.0, 0, block.b, block.d)
    chain = compose([Section("high pass", (block,), 0.0, (source,))])
    budget = noise_budget(chain, ADC, 1.0)
    assert budget.unbounded == ("high pass: input",)
    assert budget.rms == pytest.approx(1e-8 * math.sqrt(250.0), rel=1e-12)


def test_an_integrator_gathers_noise_without_bound() -> None:
    """There is no stationary noise behind a pole at the origin."""
    block = first_order(0.0, (0.0, 1e3))
    source = at_input("input", 1e-8, (block,))
    with pytest.raises(ModelError, match="without bound"):
        noise_budget(compose([Section("integrator", (block,), 0.0, (source,))]), ADC, 1.0)
