"""The grid of limiters in a run: picked, estimated, told; discrete models; notes."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from frontend_sim.analog.cut import CutChain
from frontend_sim.analog.stages import RailLimit
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import Run, accuracy, resolution, simulate
from frontend_sim.simulation.models import Models

STIMULI: dict[str, dict[str, Any]] = {
    "sine": {"kind": "sine", "amplitude": 1.2, "frequency": 997.0, "offset": 0.9},
    "step": {"kind": "step", "before": 0.3, "after": 2.2, "at": 0.00101},
    "ramp": {"kind": "ramp", "slope": 300.0, "at": 0.00303},
    "half-sine": {"kind": "half-sine", "peak": 2.5, "length": 0.005, "at": 0.002},
    "pulse": {
        "kind": "pulse",
        "low": 0.2,
        "high": 2.1,
        "width": 2e-4,
        "period": 1.7e-3,
        "at": 1e-3,
    },
}

AMPLIFIER = {
    "kind": "noninverting-amplifier", "gain": 2, "gain_bandwidth": 1e5,
    "slew_rate": 2e4, "output_low": 0.1, "output_high": 3.2,
}  # fmt: skip
CHAINS: dict[str, list[dict[str, Any]]] = {
    "amplifier between filters": [
        {"kind": "rc-lowpass", "resistance": 1e3, "capacitance": 1e-8},
        AMPLIFIER,
        {"kind": "butterworth", "order": 2, "corner": 6e3},
    ],
    "amplifier, AC-coupled": [
        AMPLIFIER, {"kind": "rc-highpass", "resistance": 1e4, "capacitance": 1e-7}
    ],
    "Sallen-Key that slews, filtered": [
        {"kind": "sallen-key", "resistance_1": 12e3, "resistance_2": 15e3, "capacitance_1": 2.2e-9,
         "capacitance_2": 1e-9, "gain_bandwidth": 1e6, "slew_rate": 8e3, "output_high": 1.9},
        {"kind": "rc-lowpass", "resistance": 1e3, "capacitance": 4.7e-8},
    ],
    "multiple feedback at its rail": [
        {"kind": "rc-lowpass", "resistance": 1e3, "capacitance": 1e-8},
        {"kind": "multiple-feedback", "input_resistance": 12e3, "feedback_resistance": 15e3,
         "middle_resistance": 8e3, "ground_capacitance": 2.2e-9, "feedback_capacitance": 1e-9,
         "output_low": -1.4},
    ],
    "clamp": [
        {"kind": "clamp", "low": 0, "high": 1.5, "resistance": 1e3, "capacitance": 1e-8,
         "diode_resistance": 30},
        {"kind": "rc-lowpass", "resistance": 1e3, "capacitance": 4.7e-8},
    ],
    "rails, twice": [
        {"kind": "rail-limit", "high": 1.5},
        {"kind": "rc-highpass", "resistance": 1e4, "capacitance": 1e-7},
        {"kind": "rail-limit", "low": -0.3},
    ],
}  # fmt: skip


def _scenario(stimulus: str, chain: str, **simulation: Any) -> Scenario:
    return Scenario.model_validate(
        {
            "stimulus": STIMULI[stimulus],
            "chain": CHAINS[chain],
            "adc": {"rate": 20e3, "bits": 12, "low": -3.3, "high": 3.3},
            "simulation": {"duration": 0.01, **simulation},
        }
    )


def _error(run: Run, finest: Run) -> float:
    return float(np.max(np.abs(run.pin - finest.pin))) / run.scenario.adc.lsb


@pytest.mark.parametrize("chain", CHAINS)
@pytest.mark.parametrize("stimulus", STIMULI)
def test_the_estimate_is_an_upper_bound(stimulus: str, chain: str) -> None:
    """The picked grid keeps the accuracy; its estimate covers the distance from a far finer one.

    The finer grid has 64 times the points, so its own error is some thousand times smaller.
    """
    run = simulate(_scenario(stimulus, chain))
    assert run.grid is not None
    assert run.grid.method == "exact"
    assert run.grid.estimate is not None
    finest = simulate(_scenario(stimulus, chain, grid_rate=64.0 * run.grid.grid_rate))
    assert _error(run, finest) <= run.grid.estimate <= 0.05
    assert not any("coarse" in note for note in run.notes)


@pytest.mark.parametrize("chain", CHAINS)
@pytest.mark.parametrize("stimulus", STIMULI)
def test_the_picked_grid_is_not_much_finer_than_needed(
    stimulus: str, chain: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A grid of an eighth of the points is not accurate enough, unless the search began there: what
    is picked is at most four times the coarsest sufficient one.
    """
    begun: list[float] = []

    def first(*given: Any) -> resolution.FirstGrid:
        begun.append(resolution.first_multiple(*given).rate)
        return resolution.first_multiple(*given)

    monkeypatch.setattr(accuracy, "first_multiple", first)
    run = simulate(_scenario(stimulus, chain))
    assert run.grid is not None
    coarse = run.grid.grid_rate / 8.0
    assert run.grid.grid_rate >= 4.0 * begun[0]
    if coarse >= begun[0]:
        finest = simulate(_scenario(stimulus, chain, grid_rate=16.0 * run.grid.grid_rate))
        found = simulate(_scenario(stimulus, chain, grid_rate=coarse))
        assert _error(found, finest) > 0.05


def test_the_search_is_bounded_and_tells_where_it_stopped(monkeypatch: pytest.MonkeyPatch) -> None:
    """With room for three small grids the third is taken; number, bound and cure are told."""
    monkeypatch.setattr(accuracy, "MOST_WORK", 1500)
    run = simulate(_scenario("sine", "amplifier between filters", accuracy=1e-9))
    assert run.grid is not None
    assert run.grid.grid_rate == 80e3
    (note,) = (note for note in run.notes if "search" in note)
    assert "stopped at 80000 points per second, after grids of 1500 points together" in note
    assert f"the estimate of {run.grid.estimate:.3g} LSB is still above" in note
    assert "give simulation.grid_rate to look closer" in note


def test_the_search_counts_events(monkeypatch: pytest.MonkeyPatch) -> None:
    """A thousand edges cost more than the points of the first grids: no third one is tried.

    The first two agree, so that there is nothing to warn of.
    """
    monkeypatch.setattr(accuracy, "MOST_WORK", 100_000)
    edges = {"kind": "pulse", "low": -1.0, "high": 2.0, "width": 8e-6, "period": 20e-6}
    plain = {
        "chain": [{"kind": "rail-limit", "high": 0.7}],
        "adc": {"rate": 1e4, "bits": 12, "low": -5.0, "high": 5.0},
        "simulation": {"duration": 0.01},
    }
    few = {**edges, "period": 1e-3}
    runs = [simulate(Scenario.model_validate({**plain, "stimulus": s})) for s in (few, edges)]
    assert [run.grid.grid_rate for run in runs if run.grid is not None] == [4e4, 2e4]
    assert not any("search" in note for run in runs for note in run.notes)


def test_the_search_tells_that_it_goes_on() -> None:
    """Nothing of a run is done while its grid is searched for, and this is told at every trial."""
    told: list[float] = []
    run = simulate(_scenario("sine", "amplifier between filters"), progress=told.append)
    assert run.grid is not None
    begun = told.index(next(share for share in told if share > 0.0))
    assert begun >= np.log2(run.grid.grid_rate / 20e3)
    assert told[-1] == 1.0


def test_the_first_grid_for_a_sweep_is_that_for_its_highest_tone() -> None:
    """A sweep is a chain of integrators, and yet as fast as the sine of its end."""
    chirp = {"kind": "chirp", "start_frequency": 10.0, "stop_frequency": 1e5, "length": 0.01}
    sine = {"kind": "sine", "frequency": 1e5}
    rates = []
    for stimulus in (chirp, sine):
        drives = Scenario.model_validate(
            {
                "stimulus": {"amplitude": 1.0, **stimulus},
                "chain": CHAINS["rails, twice"],
                "adc": {"rate": 20e3, "bits": 12, "low": -3.3, "high": 3.3},
                "simulation": {"duration": 0.01},
            }
        ).stimulus.drives((1,))
        cut = CutChain.of([RailLimit(high=1.0)])
        models = Models(cut.chain, cut, drives, "settled", 0.01)
        rates.append(resolution.first_multiple(models, 20e3, accuracy.MOST_TRIAL).rate)
    assert rates[0] == rates[1] >= 0.5 * 2.0 * np.pi * 1e5


@pytest.mark.parametrize("order", [1.0, 1.5, 2.0, 3.0])
@pytest.mark.parametrize("start", [1.0, 1e-6])
def test_the_bound_of_smooth_convergence(order: float, start: float) -> None:
    """Where errors fall as h^order the bound lies above the error, by a factor of 20 at most."""
    errors = start * 0.5 ** (order * np.arange(4))
    changes = list(-np.diff(errors))
    found = accuracy.bound(changes)
    assert errors[3] < found < 20.0 * errors[3]
    if order == 2.0:
        assert found < 2.0 * errors[3]
    # Two grids that agree by chance do not deceive it.
    assert accuracy.bound([*changes, 0.0]) > 0.3 * changes[-1]


def test_grids_that_do_not_come_nearer_yet_are_not_trusted() -> None:
    """A surge shorter than a step of the first grids: the second change is larger than the first.

    What is picked is as near to a far finer grid as its estimate says.
    """
    scenario: dict[str, Any] = {
        "stimulus": {
            "kind": "double-exponential", "peak": 1.1, "at": 6.9e-6,
            "rise_constant": 6.9e-7, "decay_constant": 1.38e-5,
        },
        "chain": [
            {"kind": "rc-lowpass", "resistance": 1e3, "capacitance": 4.84e-9},
            {"kind": "noninverting-amplifier", "gain": 4.085, "gain_bandwidth": 4.3e6,
             "second_pole": 3.48e6, "slew_rate": 28982.0, "output_high": 1.0},
        ],
        "adc": {"rate": 2.9e5, "bits": 14, "low": -50.0, "high": 50.0},
        "simulation": {"duration": 20 / 2.9e5},
    }  # fmt: skip
    run = simulate(Scenario.model_validate(scenario))
    assert run.grid is not None
    assert run.grid.estimate is not None
    scenario["simulation"]["grid_rate"] = 16.0 * run.grid.grid_rate
    assert _error(run, simulate(Scenario.model_validate(scenario))) <= run.grid.estimate <= 0.05


def test_a_jump_costs_no_accuracy_where_the_closed_form_is_exact() -> None:
    """A step into rails and a high pass is exact on the first grids that are tried."""
    run = simulate(_scenario("step", "rails, twice"))
    assert run.grid is not None
    assert run.grid.largest_error < 1e-9
    high = 1.5 - 0.3
    after = np.where(run.time >= 0.00101, high * np.exp(-(run.time - 0.00101) / 1e-3), 0.0)
    np.testing.assert_allclose(run.pin, after, rtol=0, atol=1e-12)


def test_a_given_grid_tells_its_error() -> None:
    """With a given grid the report says what half the points would change, and a note if much."""
    run = simulate(_scenario("sine", "amplifier between filters", grid_rate=20e3))
    half = simulate(_scenario("sine", "amplifier between filters", grid_rate=10e3))
    assert run.grid is not None
    assert run.grid.estimate is None
    assert run.grid.largest_error == pytest.approx(_error(run, half), rel=1e-12)
    assert any("grid of 20000 points per second is coarse" in note for note in run.notes)
    fine = simulate(_scenario("sine", "amplifier between filters", grid_rate=2.56e6))
    assert not any("coarse" in note for note in fine.notes)


@pytest.mark.parametrize(("method", "order"), [("zoh", 1), ("foh", 2), ("bilinear", 2)])
def test_discrete_models_of_a_chain_with_limits(method: str, order: int) -> None:
    """They come nearer to the exact steps at least with the order that they have without limits.

    Near the reference's own accuracy, where its grid becomes the same, they even meet it.
    """
    errors = []
    for rate in (160e3, 320e3, 640e3, 1280e3):
        scenario = _scenario(
            "sine", "amplifier between filters", discretization=method, grid_rate=rate
        )
        run = simulate(scenario)
        assert run.grid is not None
        assert run.grid.method == method
        errors.append(run.grid.largest_error)
    assert -np.polyfit(np.arange(4), np.log2(errors), 1)[0] > order - 0.35
    assert errors[0] > 10.0 * errors[-1] if order == 2 else errors[0] > 4.0 * errors[-1]


@pytest.mark.parametrize("at", [0.0, 0.00101])
@pytest.mark.parametrize("method", ["zoh", "foh", "bilinear"])
def test_discrete_models_of_a_step(method: str, at: float) -> None:
    """A step into the rails ends where the exact steps end, and the picked grid is accurate."""
    stimulus = {"kind": "step", "before": 0.3, "after": 1.0, "at": at}
    scenario = _scenario("step", "amplifier between filters").model_dump(mode="json")
    scenario["stimulus"] = stimulus
    exact = simulate(Scenario.model_validate(scenario))
    scenario["simulation"] |= {"discretization": method, "grid_rate": 2e6}
    run = simulate(Scenario.model_validate(scenario))
    # One step of the grid late, of a slope of 20 V/ms, is 10 mV.
    np.testing.assert_allclose(run.pin, exact.pin, rtol=0, atol=1e-2)
    np.testing.assert_allclose(run.pin[-1], exact.pin[-1], rtol=0, atol=1e-9)


def test_notes_tell_limits_and_instants() -> None:
    """A square wave of 0.2 V and 2.1 V through gain 2: at the upper rail for all but the edges."""
    run = simulate(_scenario("step", "amplifier, AC-coupled", duration=0.01))
    (upper,) = (note for note in run.notes if "upper rail" in note)
    # From 0.6 V at 20 V/ms to 3.2 V it takes 130 us; the slope begins at once, since the demand of
    # the step is far above the slew rate.
    assert "'1 noninverting-amplifier' was at its upper rail for 8.86 ms" in upper
    assert "(first at t = 1.14 ms)" in upper
    (slew,) = (note for note in run.notes if "upwards" in note)
    assert "for 130 us (first at t = 1.01 ms)" in slew


def test_waveforms_show_the_limited_signal() -> None:
    """The waveform behind a limiter is the limited one, and agrees with the pin at conversions."""
    run = simulate(_scenario("sine", "amplifier between filters", waveform_rate=20e3))
    amplifier = run.waveform["2 noninverting-amplifier"]
    assert amplifier.max() == pytest.approx(3.2, abs=1e-12)
    assert amplifier.min() == pytest.approx(0.1, abs=1e-12)
    np.testing.assert_allclose(run.waveform["3 butterworth"], run.pin, rtol=0, atol=1e-12)
    before = run.waveform["1 rc-lowpass"]
    assert before.max() > 1.9


def test_fast_poles_are_looked_at_after_a_jump() -> None:
    """A ringing of 2 us in front of a rail is not missed, though conversions are 1 ms apart."""
    scenario = Scenario.model_validate(
        {
            "stimulus": {"kind": "step", "after": 1.0, "at": 0.0015003},
            "chain": [
                {"kind": "second-order", "corner": 1e6, "quality_factor": 8.0},
                {"kind": "rail-limit", "high": 1.2},
                {"kind": "rc-lowpass", "resistance": 1e3, "capacitance": 1e-6},
            ],
            "adc": {"rate": 1e3, "bits": 16, "high": 2.0},
            "simulation": {"duration": 0.01},
        }
    )
    run = simulate(scenario)
    assert any("upper rail" in note for note in run.notes)
    finest = simulate(
        scenario.model_copy(
            update={"simulation": scenario.simulation.model_copy(update={"grid_rate": 256e6})}
        )
    )
    assert run.grid is not None
    assert run.grid.estimate is not None
    assert _error(run, finest) <= run.grid.estimate
