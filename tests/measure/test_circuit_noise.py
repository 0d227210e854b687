"""The noise budget of a circuit whose converter has an input network."""

from __future__ import annotations

import math

import numpy as np
import pytest

from frontend_sim.analog.noise import BOLTZMANN
from frontend_sim.measure.checks import checks_before_run
from frontend_sim.measure.circuit_noise import circuit_noise
from frontend_sim.measure.noise_budget import CAPACITOR, NoiseBudget
from frontend_sim.measure.response.inspection import inspect_scenario
from frontend_sim.scenario import Scenario, parse_scenario
from frontend_sim.scenario.circuit import circuit_of
from frontend_sim.simulation import simulate

TEMPERATURE = 298.15
ALONE = math.sqrt(BOLTZMANN * TEMPERATURE / 5e-12)
"""k T / C of 5 pF, 28.7 uV; Nyquist 1928, computed."""


def _scenario(network: str = "", more: str = "", acquisition: str = "2 us") -> Scenario:
    """Return a sine behind 20 kohm and 200 pF (4.5 uV) and a 24 bit converter; values invented."""
    return parse_scenario(
        f"""
        format = 1
        seed = 5
        [stimulus]
        kind = "sine"
        amplitude = "0.4 V"
        frequency = "1.7 kHz"
        [[chain]]
        kind = "rc-lowpass"
        resistance = "20 kohm"
        capacitance = "200 pF"
        [[chain]]
        kind = "buffer"
        gain_bandwidth = "10 MHz"
        voltage_noise = "20 nV/sqrt(Hz)"
        [adc]
        rate = "100 kHz"
        bits = 24
        low = "-1 V"
        high = "1 V"
        [adc.input]
        source_resistance = "1 kohm"
        switch_resistance = "1 kohm"
        sampling_capacitance = "5 pF"
        acquisition_time = "{acquisition}"
        {network}
        {more}
        [simulation]
        duration = "200 ms"
        """
    )


def _budget(scenario: Scenario) -> NoiseBudget:
    return circuit_noise(scenario, circuit_of(scenario), 0.5)


def test_the_capacitor_is_a_source_of_its_own() -> None:
    """Its row is the square root of k T / C, and everything adds up in power."""
    budget = _budget(_scenario())
    rows = {row.source: row for row in budget.rows}
    assert rows[CAPACITOR].rms == pytest.approx(ALONE, rel=1e-12)
    assert budget.rms == pytest.approx(math.hypot(*(row.rms for row in budget.rows)), rel=1e-12)
    assert budget.sampled


def test_the_network_limits_the_bandwidth_before_it() -> None:
    """The buffer's white noise passes the pole of 2 kohm and 5 pF beside its own, 10 MHz.

    Two poles p and q in a row leave the density times p q / (p + q) / 4.
    """
    rows = {row.source: row for row in _budget(_scenario()).rows}
    (name,) = [source for source in rows if "voltage noise" in source]
    p, q = 2.0 * math.pi * 10e6, 1.0 / (2e3 * 5e-12)
    assert rows[name].rms == pytest.approx(20e-9 * math.sqrt(p * q / (p + q) / 4.0), rel=1e-6)


def test_a_run_scatters_as_the_budget_says() -> None:
    """20 000 codes less what is held: within 4 standard errors, 4 / sqrt(40 000) = 2 %."""
    scenario = _scenario()
    run = simulate(scenario)
    assert np.std(run.voltage - run.held) == pytest.approx(_budget(scenario).rms, rel=0.02)


def test_an_average_takes_the_capacitor_down() -> None:
    """The noise of 16 closings is 16 independent values."""
    average = '[adc.averaging]\ncount = 16\nshift = 0\ninterval = "0.5 us"'
    rows = {row.source: row for row in _budget(_scenario(more=average, acquisition="0.2 us")).rows}
    assert rows[CAPACITOR].rms == pytest.approx(ALONE / 4.0, rel=1e-9)


def test_noise_may_be_taken_out() -> None:
    """With input.noise = false there is no row, in the budget as in the run."""
    assert all(row.source != CAPACITOR for row in _budget(_scenario("noise = false")).rows)


def test_checks_and_inspect_count_it() -> None:
    """A check by the budget fails on the capacitor alone, and inspect shows the same number."""
    check = '[[check]]\nkind = "noise"\nbasis = "budget"\nat_most = "20 uV"'
    scenario = _scenario(more=check)
    found = inspect_scenario(scenario).noise
    assert found is not None
    assert found.rms > ALONE
    result = checks_before_run(scenario)[0]
    assert result.value == pytest.approx(found.rms, rel=1e-9)
    assert result.verdict == "fails"
