"""All that can be said of a scenario before any run."""

from __future__ import annotations

import dataclasses
import math
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from frontend_sim.analog.chain import Chain
from frontend_sim.analog.discretize import METHODS
from frontend_sim.analog.loading import unbuffered_notes
from frontend_sim.analog.stages.curved_sensor import CurvedSensor
from frontend_sim.converter import AnyAdc
from frontend_sim.converter.sinc_quantities import SincQuantities
from frontend_sim.errors import ModelError
from frontend_sim.measure.acquisition import Acquisition
from frontend_sim.measure.circuit_noise import circuit_noise
from frontend_sim.measure.look_weights import LookWeights
from frontend_sim.measure.noise_budget import NoiseBudget
from frontend_sim.measure.response.amplifiers import AmplifierResponse, amplifiers_of
from frontend_sim.measure.response.frequency_domain import FrequencyDomain
from frontend_sim.measure.response.grid_model import GridModel
from frontend_sim.measure.response.large_signal import LargeSignal
from frontend_sim.measure.response.loading import Loading, loading_of
from frontend_sim.measure.response.model_distance import Exact, ModelDistance, model_distance
from frontend_sim.measure.response.pin_level import PinLevel
from frontend_sim.measure.response.pole import Pole, poles_of
from frontend_sim.measure.response.referred import Referred
from frontend_sim.measure.response.step_response import StepResponse
from frontend_sim.measure.response.time_domain import TimeDomain
from frontend_sim.scenario.amplifier_notes import amplifier_notes
from frontend_sim.scenario.circuit import circuit_of, stages_of
from frontend_sim.scenario.loading_notes import loading_notes
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.told_unit import told_unit

ZERO_CELSIUS = 273.15
"""0 degC [K]."""


@dataclass(frozen=True, eq=False)
class Inspection:
    """What the transfer function from the stimulus to the converter's pin tells.

    Parameters
    ----------
    title : of the scenario
    adc : converter for whose rate and LSB the numbers are
    unit : SI unit of the stimulus; responses are in V for one of it
    order : number of states of the chain
    time : step response: start, end, shape, settling
    frequency : gain, corners, group delay, attenuation, noise bandwidth
    poles : stage by stage
    models : how far zoh, foh and bilinear lie from exact, at the grid rate
    loading : what the sections of ladders do to each other
    amplifiers : what real amplifiers do to their stages: corners, Q, stop band
    level : what the pin rests at, and the stimulus that reaches the ends of the range
    referred : range, LSB and noise as a stimulus, in the unit that the file has for it
    large_signal : what slew rates do to large signals; None if no stage has one
    filter : what the converter's own filter does; None where a code is one look
    noise : where the noise at the pin comes from; None where a pole at the origin gathers it
    acquisition : how the converter's input network settles; None where it has none
    notes : what the reader should know beside the numbers
    response : the step response, for plots
    grid_models : the discrete models, for plots
    """

    title: str
    adc: AnyAdc
    unit: str
    order: int
    time: TimeDomain
    frequency: FrequencyDomain
    poles: tuple[Pole, ...]
    models: tuple[ModelDistance, ...]
    loading: tuple[Loading, ...]
    amplifiers: tuple[AmplifierResponse, ...]
    level: PinLevel
    referred: Referred
    large_signal: LargeSignal | None
    filter: SincQuantities | None
    noise: NoiseBudget | None
    notes: tuple[str, ...]
    response: StepResponse = field(repr=False)
    grid_models: tuple[GridModel, ...] = field(repr=False)
    acquisition: Acquisition | None = None

    def as_dict(self) -> dict[str, Any]:
        """Return plain data for JSON: None for what is not there.

        All is in SI units but ``referred``, which has the same numbers in the file's unit.

        JSON knows no infinity, so it becomes None (null) too: of a gain that grows without bound,
        of the frequency of a gain that is largest at ever higher frequencies, of an end that drifts
        away, of the attenuation where nothing passes.
        """
        converter = {
            name: getattr(self.adc, name) for name in ("rate", "bits", "low", "high", "lsb")
        }
        left_out = {"response", "grid_models", "adc"}
        kept = [each.name for each in dataclasses.fields(self) if each.name not in left_out]
        return {"adc": converter, **{name: _plain(getattr(self, name)) for name in kept}}


def inspect_scenario(scenario: Scenario) -> Inspection:
    """Measure the response of a scenario's chain, from its transfer function alone.

    Raises
    ------
    ModelError
        If the chain is unstable, or rings too long to be searched.
    """
    chain, adc = circuit_of(scenario), scenario.adc
    response = StepResponse.of(chain)
    frequency = FrequencyDomain.of(response, adc.true_rate)
    time = TimeDomain.of(response, frequency.largest.value, adc)
    grid_models, models = _models(scenario, response, time, frequency)
    noise, about_noise = _noise(scenario, chain)
    stages = stages_of(scenario)
    zero = ZERO_CELSIUS if scenario.stimulus_unit == "K" else 0.0
    level = PinLevel.of(chain, stages, adc, scenario.environment.temperature, zero)
    small = next((each.time for each in time.settlings if each.label == "0.5 LSB"), None)
    return Inspection(
        scenario.title,
        adc,
        scenario.stimulus_unit,
        chain.order,
        time,
        frequency,
        poles_of(chain),
        models,
        loading_of(stages, adc.true_rate),
        amplifiers_of(stages),
        level,
        Referred.of(told_unit(scenario), adc, time, frequency.largest.value, level, noise),
        LargeSignal.of(scenario, chain, stages, level, small),
        _filter_of(adc),
        noise,
        (
            *_notes(scenario, time, frequency),
            *amplifier_notes(scenario, stages),
            *about_noise,
        ),
        response,
        grid_models,
        Acquisition.of(scenario),
    )


def _noise(scenario: Scenario, chain: Chain) -> tuple[NoiseBudget | None, tuple[str, ...]]:
    """Return the noise budget, down to a tenth of the reciprocal of the run's length, and notes."""
    duration = scenario.simulation.duration or scenario.stimulus.known_length() or 1.0
    try:
        budget = circuit_noise(scenario, chain, 0.1 / duration)
    except ModelError as error:
        return None, (f"there is no noise budget: {error}",)
    if not budget.unbounded:
        return budget, ()
    return budget, (
        "nothing limits the bandwidth of these noise sources before the converter, so the part "
        f"that reaches it directly is left out of the budget: {', '.join(budget.unbounded)}",
    )


def _filter_of(adc: AnyAdc) -> SincQuantities | None:
    """Return what the converter's filter does, an average being one of first order."""
    if adc.kind == "oversampling":
        return adc.quantities()
    sinc = LookWeights.of(adc).sinc
    return None if sinc is None else SincQuantities.of(sinc, False)


def grid_rate_of(scenario: Scenario) -> float:
    """Return the grid rate, which is the conversion rate where it is left to the tool [Hz]."""
    rate = scenario.simulation.grid_rate
    return scenario.adc.rate if rate is None else rate


def _models(
    scenario: Scenario, response: StepResponse, time: TimeDomain, frequency: FrequencyDomain
) -> tuple[tuple[GridModel, ...], tuple[ModelDistance, ...]]:
    """Return discrete models and their distances; there is none for a chain without states."""
    if response.chain.order == 0:
        return (), ()
    rate, prewarp = grid_rate_of(scenario), scenario.simulation.prewarp
    if prewarp is not None and prewarp >= 0.5 * rate:
        prewarp = None
    models = tuple(GridModel.of(response.chain, method, rate, prewarp) for method in METHODS)
    exact = Exact.of(
        response,
        frequency.corners,
        frequency.largest.value,
        rate,
        0.5 * scenario.adc.rate,
        time.full_scale_step / scenario.adc.lsb,
    )
    return models, tuple(model_distance(exact, model, prewarp) for model in models)


def _notes(scenario: Scenario, time: TimeDomain, frequency: FrequencyDomain) -> tuple[str, ...]:
    notes = [*unbuffered_notes(scenario.chain), *_curves(scenario), *_limits(scenario)]
    notes += loading_notes(stages_of(scenario))
    if time.end is None:
        notes.append("a pair of poles without damping: a step rings for ever and never settles")
    elif math.isinf(time.end):
        notes.append("a pole at the origin: a step drifts away without bound and never settles")
    if math.isinf(frequency.largest.value):
        notes.append("the gain has no largest value, so there is no -3 dB corner")
    rate, prewarp = grid_rate_of(scenario), scenario.simulation.prewarp
    if prewarp is not None and prewarp >= 0.5 * rate:
        notes.append(
            f"prewarp {prewarp:g} Hz is not below half the grid rate, {0.5 * rate:g} Hz; the "
            "bilinear model is shown without it"
        )
    return tuple(notes)


def _limits(scenario: Scenario) -> list[str]:
    """Tell of slew rates, rails and clamps, which numbers for small signals leave out."""
    return [
        f"the limits of {stage.label(place)!r} are not in these numbers, which are for small "
        "signals; a run has them"
        for place, stage in enumerate(scenario.chain, start=1)
        if stage.limiter() is not None and not isinstance(stage, CurvedSensor)
    ]


def _curves(scenario: Scenario) -> list[str]:
    """Tell of sensors whose curve is taken as its tangent."""
    return [
        f"{stage.label(place)!r} is a curve, taken as its tangent at "
        f"{stage.shown(stage.operating_point())}; a run takes the curve itself"
        for place, stage in enumerate(scenario.chain, start=1)
        if isinstance(stage, CurvedSensor)
    ]


def _plain(value: Any) -> Any:
    """Turn dataclasses, tuples and numbers into what the json module writes."""
    if dataclasses.is_dataclass(value) and not isinstance(value, type):
        return {each.name: _plain(getattr(value, each.name)) for each in dataclasses.fields(value)}
    if isinstance(value, tuple):
        return [_plain(item) for item in value]
    if isinstance(value, (float, np.floating)):
        return None if math.isinf(value) else float(value)
    return value
