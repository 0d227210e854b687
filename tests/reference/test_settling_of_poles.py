"""Published steps of one and two poles, found on whole runs."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import simulate

TAU = 1e-4
RC = {"kind": "rc-lowpass", "resistance": "1 kohm", "capacitance": "100 nF"}


def _pin_after(chain: list[dict[str, Any]], times: list[float]) -> NDArray[np.float64]:
    """Return the pin at times after a unit step, each met by a conversion of its own."""
    values = []
    for time in times:
        scenario = Scenario.model_validate(
            {
                "stimulus": {"kind": "step", "after": 1.0},
                "chain": chain,
                "adc": {"rate": 1e3, "bits": 12, "low": -5.0, "high": 5.0, "first": time},
                "simulation": {"duration": time + 1e-4},
            }
        )
        values.append(float(simulate(scenario).pin[0]))
    return np.array(values)


def test_residual_after_time_constants() -> None:
    """e^-n is left after n time constants; after five, 0.674 %.

    Source: common practice, "settled after five time constants" (computed from the closed form).
    """
    n = np.arange(1, 13)
    residual = 1.0 - _pin_after([RC], list(n * TAU))
    np.testing.assert_allclose(residual, np.exp(-n), rtol=0, atol=1e-14)
    assert residual[4] == pytest.approx(0.00674, abs=5e-6)


# Published: ln 2^(N+1) time constants to half an LSB (computed from the closed form).
HALF_LSB = {8: 6.238, 10: 7.625, 12: 9.011, 14: 10.397, 16: 11.784, 18: 13.170, 20: 14.556,
            24: 17.329}  # fmt: skip


@pytest.mark.parametrize(("bits", "published"), HALF_LSB.items())
def test_time_constants_to_half_an_lsb(bits: int, published: float) -> None:
    """A step of full scale is half an LSB short of its end at the published time, and not before.

    The table has three decimals; half a unit of the last moves the residual by 0.05 %.
    """
    early, late = (1.0 - _pin_after([RC], [(published + d) * TAU])[0] for d in (-5e-4, 5e-4))
    assert late <= 2.0 ** -(bits + 1) <= early


@pytest.mark.parametrize("gain", [2.0, 4.0])
def test_critically_damped_pair(gain: float) -> None:
    """Two equal low passes and a gain g: g (1 - e^(-t/T) (1 + t/T)).

    Source: any control textbook, e.g. Ogata, *Modern Control Engineering* (from memory).
    """
    amplifier = {"kind": "noninverting-amplifier", "gain": np.sqrt(gain)}
    t = np.array([0.1, 0.5, 1.0, 2.0, 5.0, 20.0])
    found = _pin_after([RC, amplifier, RC, amplifier], list(t * TAU))
    np.testing.assert_allclose(found, gain * (1.0 - np.exp(-t) * (1.0 + t)), rtol=0, atol=1e-13)
    section = {"kind": "second-order", "corner": 1.0 / (2.0 * np.pi * TAU), "quality_factor": 0.5,
               "gain": gain}  # fmt: skip
    np.testing.assert_allclose(_pin_after([section], list(t * TAU)), found, rtol=0, atol=1e-13)
