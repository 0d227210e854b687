"""Jumps, points and conversions that coincide on paper coincide in the run."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from drives import InMemory, marched, outputs

from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.stages import Gain, RcLowpass, TransportDelay
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import simulate
from frontend_sim.stimulus.drive import Lines


@pytest.mark.parametrize("at", [1, 3, 7])
def test_a_jump_behind_a_delay_has_its_new_value_at_its_own_instant(at: int) -> None:
    """Delays of 1 to 399 ms: the conversion at jump + delay has the new value, the one before not.

    instant - delay carries the rounding of the instant, which is larger than that of the jump.
    """
    jump = Lines.of(0.0, [at * 1e-3], [1.0])
    for delay in range(1, 400):
        chain = chain_of([Gain(gain=1.0), TransportDelay(delay=delay * 1e-3)])
        times = np.arange(at + delay - 1, at + delay + 2) / 1000.0
        found = outputs(chain, [jump], times, interval=1e-3)
        np.testing.assert_array_equal(found, [0.0, 1.0, 1.0], err_msg=f"delay {delay} ms")


@pytest.mark.parametrize("delay", [33, 99, 333])
def test_held_points_behind_a_delay_keep_their_instants(delay: int) -> None:
    """Points and conversions at 1 kHz, a delay of whole milliseconds: a shift by whole points."""
    data = np.random.default_rng(1).integers(0, 2, 2000).astype(float)
    chain = chain_of([Gain(gain=1.0), TransportDelay(delay=delay * 1e-3)])
    found = outputs(chain, [InMemory(data, 1e3, "hold")], np.arange(2000) / 1e3)
    np.testing.assert_array_equal(found[delay:], data[: 2000 - delay])


@pytest.mark.parametrize("method", ["foh", "bilinear", "zoh"])
def test_a_discrete_model_treats_a_jump_at_zero_like_any_other(method: str) -> None:
    """A step at t = 0 and one a grid point later give the same codes, one conversion apart."""

    def run(at: float) -> Any:
        return simulate(
            Scenario.model_validate(
                {
                    "stimulus": {"kind": "step", "after": 3.0, "at": at},
                    "chain": [{"kind": "rc-lowpass", "resistance": 10e3, "capacitance": 1e-7}],
                    "adc": {"rate": 1e3, "bits": 12, "high": 3.3},
                    "simulation": {
                        "duration": 0.02, "discretization": method, "grid_rate": 1e3, "noise": False
                    },
                }
            )
        )  # fmt: skip

    at_zero, later = run(0.0), run(1e-3)
    np.testing.assert_allclose(at_zero.pin[:-1], later.pin[1:], rtol=0, atol=1e-12)
    assert at_zero.grid is not None
    assert later.grid is not None
    assert at_zero.grid.largest_error == pytest.approx(later.grid.largest_error, rel=1e-9)


def test_a_fast_sine_seen_rarely_is_exact() -> None:
    """100 MHz, ten conversions after 100 s: right to 1e-9 of full scale, with few nodes.

    The time of a conversion is a float; its rounding alone turns the sine by 1e-6 of a cycle, so
    the closed form is taken at the same float.
    """
    from frontend_sim.stimulus.phase import cycles
    from frontend_sim.stimulus.sine import Tone

    tau, frequency = 1e-6, 100e6
    chain = chain_of([RcLowpass(resistance=1e3, capacitance=tau / 1e3)])
    times = 100.0 + np.arange(10) * 0.1037
    found = outputs(chain, [Tone(1.0, frequency, 0.0, 0.0)], times)
    h = 1.0 / (1.0 + 2j * np.pi * frequency * tau)
    true = np.imag(h * np.exp(2j * np.pi * cycles(frequency, times)))
    np.testing.assert_allclose(found, true, rtol=0, atol=1e-9)


def test_a_long_stretch_of_points_is_read_in_parts() -> None:
    """Ten million points before the first conversion are never in memory at once."""
    largest = 0

    class Counted(InMemory):
        def points(self, first: int, last: int) -> Any:
            nonlocal largest
            largest = max(largest, last - first)
            return np.ones(last - first)

    chain = chain_of([RcLowpass(resistance=1e3, capacitance=1e-6)])
    found = outputs(chain, [Counted(np.ones(10), 1e6)], np.array([10.0, 10.5]), interval=0.5)
    np.testing.assert_allclose(found, 1.0, rtol=1e-12)
    assert largest <= 2 * (1 << 22) + 2


BIT = np.spacing(157e-6)


@pytest.mark.parametrize("late", [-1e-16, -3e-18, -4 * BIT, BIT, 5 * BIT, 40 * BIT, 1e-17, 1e-16])
@pytest.mark.parametrize("before", [(), ({"kind": "transport-delay", "delay": 7e-6},)])
@pytest.mark.parametrize("grid_rate", [1e6, 4e6, 1.3e6])
def test_a_conversion_just_before_an_edge_sees_the_clipped_value_before_it(
    late: float, before: tuple[dict[str, Any], ...], grid_rate: float
) -> None:
    """An edge a ten-billionth of a step beside a conversion: never a mixture of both its sides.

    Within 1e-9 of a step the edge counts as at the point of the grid, but the conversion there
    still looks before it; the clip of 5 V to 1 V came on top of 0.2 V, and gave -3.8 V. Beside a
    grid of 1.3 MHz an edge counts as at the conversion within four units in its last place.
    """
    run = simulate(
        Scenario.model_validate(
            {
                "stimulus": {"kind": "step", "before": 0.2, "after": 5.0, "at": 150e-6 + late},
                "chain": [*before, {"kind": "rail-limit", "low": -1.0, "high": 1.0}],
                "adc": {"rate": 1e6, "bits": 12, "low": -5.0, "high": 5.0},
                "simulation": {"duration": 200e-6, "grid_rate": grid_rate},
            }
        )
    )
    edge = 157 if before else 150
    np.testing.assert_allclose(run.pin[:edge], 0.2, rtol=0, atol=1e-12)
    np.testing.assert_allclose(run.pin[edge + 1 :], 1.0, rtol=0, atol=1e-12)
    seen = late <= 4 * BIT  # as the linear part of the engine has it
    assert run.pin[edge] == pytest.approx(1.0 if seen else 0.2, abs=1e-12)


@pytest.mark.parametrize("share", [-1e-10, -1e-12, -1e-14, 1e-15, 1e-13, 1e-11])
def test_held_points_beside_conversions_are_clipped_as_a_whole(share: float) -> None:
    """A recording whose rate is off by a rounding and more: each pin is the clip of a point.

    The mixture of a point's value with the next one's clip lay up to 6 V away.
    """
    from frontend_sim.analog.cut import CutChain
    from frontend_sim.analog.stages import RailLimit
    from frontend_sim.simulation.limited import Limited
    from frontend_sim.simulation.linear import Axis

    data = np.random.default_rng(5).uniform(-4.0, 4.0, 500)
    drive, times = InMemory(data, 7e3 * (1.0 + share), "hold"), np.arange(400) / 7e3
    cut, axis = CutChain.of([RailLimit(low=-1.0, high=1.0)]), Axis(1.0 / 7e3, 1.0 / 7e3)
    model = Limited.of(cut, [drive], [len(cut.points) - 1], "settled", axis, 7e3, 0.06)
    seen = outputs(chain_of([Gain(gain=1.0)]), [drive], times, interval=1.0 / 7e3)
    found = marched(model, times, None)
    np.testing.assert_allclose(found, np.clip(seen, -1.0, 1.0), rtol=0, atol=1e-12)
