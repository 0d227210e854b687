"""How well an input network settles, against closed forms."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest

from frontend_sim.analog.port import OutputImpedance, Port
from frontend_sim.measure.acquisition import Acquisition, time_needed
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation.switched_network import SwitchedNetwork

RATE, BITS, HIGH = 100e3, 16, 2.5
SOURCE, SWITCH, SAMPLING = 2e3, 1e3, 20e-12
TAU = (SOURCE + SWITCH) * SAMPLING


def acquisition(
    acquisition_time: float = 300e-9, averaging: dict[str, int] | None = None, **keys: Any
) -> Acquisition:
    """Return the acquisition behind a resistance alone, with some keys of its own."""
    network = {
        "source_resistance": SOURCE,
        "switch_resistance": SWITCH,
        "sampling_capacitance": SAMPLING,
        "acquisition_time": acquisition_time,
        **keys,
    }
    adc = {"rate": RATE, "bits": BITS, "high": HIGH, "averaging": averaging, "input": network}
    values = {"stimulus": {"kind": "step", "after": 1.0}, "adc": adc}
    found = Acquisition.of(Scenario.model_validate({**values, "simulation": {"duration": 1e-3}}))
    assert found is not None
    return found


def test_a_resistance_alone_settles_by_one_time_constant() -> None:
    """Residual 2^N e^(-T/tau) LSB and time tau ln 2^(N+1), the closed forms, to 1e-9 of each."""
    found = acquisition()
    assert found.step_error == pytest.approx(2.0**BITS * math.exp(-300e-9 / TAU), rel=1e-9)
    assert found.time_needed == pytest.approx(TAU * math.log(2.0 ** (BITS + 1)), rel=1e-9)
    assert found.steady_error == pytest.approx(0.0, abs=1e-9)


def test_an_lsb_is_that_of_the_codes() -> None:
    """A sum of 16 codes has LSB of a sixteenth: errors count 16 times, half an LSB takes longer."""
    plain, summed = acquisition(holds="zero"), acquisition(averaging={"count": 16}, holds="zero")
    assert summed.step_error == pytest.approx(16.0 * plain.step_error, rel=1e-12)
    assert summed.steady_error == pytest.approx(16.0 * plain.steady_error, rel=1e-9)
    assert summed.time_needed == pytest.approx(TAU * math.log(2.0 ** (BITS + 5)), rel=1e-9)


def test_a_capacitor_that_starts_from_zero_draws_a_current() -> None:
    """An input at full scale gives C V (1 - e^(-T/tau)) at each look, and errs by the rest."""
    found, left = acquisition(holds="zero"), math.exp(-300e-9 / TAU)
    assert found.steady_error == pytest.approx(2.0**BITS * left, rel=1e-9)
    assert found.steady_current == pytest.approx(SAMPLING * HIGH * (1 - left) * RATE, rel=1e-9)


def test_a_reservoir_shares_its_charge() -> None:
    """With a large capacitor at the pin a fast switch leaves C_s / (C_s + C) of the step."""
    found = acquisition(source_resistance=1e6, switch_resistance=10.0, pin_capacitance=10e-9)
    share = SAMPLING / (SAMPLING + 10e-9)
    assert found.step_error == pytest.approx(2.0**BITS * share, rel=1e-4)
    # It is then the source that must make up for it, with its own time constant.
    tau = 1e6 * (SAMPLING + 10e-9)
    assert found.time_needed == pytest.approx(tau * math.log(2.0 ** (BITS + 1) * share), rel=1e-4)


def test_a_full_precharge_leaves_nothing_to_do() -> None:
    """A buffer that goes all the way needs no acquisition at all."""
    found = acquisition(precharge_share=1.0)
    assert (found.step, found.step_error, found.time_needed) == (0.0, 0.0, 0.0)


def test_thermal_noise_of_the_capacitor() -> None:
    """The square root of kT/C: 20.35 uV for 10 pF at 300 K, as computed in the check values."""
    found = acquisition(sampling_capacitance=10e-12)
    assert found.noise == pytest.approx(20.35e-6 * math.sqrt(298.15 / 300.0), rel=3e-4)
    assert acquisition(noise=False).noise == 0.0


def test_a_residual_that_rings_is_followed_to_its_last_crossing() -> None:
    """The time found is the last crossing on a grid a hundred times finer."""
    circuit = OutputImpedance(*_resonance())
    network = SwitchedNetwork.of(Port.of(circuit, 0.0, 0.0), 50.0, 200e-12)
    found = time_needed(network, 1.0, 1e-4)
    assert found is not None
    times = np.linspace(0.5 * found, 2.0 * found, 6001)
    outside = np.abs(network.residual(times)) > 1e-4
    last = times[np.flatnonzero(outside)[-1]]
    assert found == pytest.approx(last, abs=2.0 * (times[1] - times[0]))
    assert np.count_nonzero(np.diff(np.sign(network.residual(times)))) > 2


def _resonance() -> tuple[Any, Any]:
    """Return R + sL beside C: 30 ohm, 10 uH, 1 nF."""
    from fractions import Fraction

    r, l, c = Fraction(30), Fraction(1, 100_000), Fraction(1, 1_000_000_000)  # noqa: E741  # inductance
    return (r / (l * c), 1 / c), (1 / (l * c), r / l, Fraction(1))
