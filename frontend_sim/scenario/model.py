"""The scenario: everything that one run depends on, frozen and validated."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any, Self

from pydantic import Field, model_validator

from frontend_sim.analog.stages import AnyStage
from frontend_sim.converter import AnyAdc
from frontend_sim.errors import nearest
from frontend_sim.scenario.checks import AnyCheck
from frontend_sim.scenario.checks.rules import check_faults, instant_faults
from frontend_sim.scenario.environment import Environment
from frontend_sim.scenario.rules import conversions_fault, fault, faults, points_fault
from frontend_sim.scenario.scenario_file import ScenarioFile
from frontend_sim.scenario.settings import SimulationSettings
from frontend_sim.scenario.signal import PIN, UnitError, named, signal_units
from frontend_sim.scenario.supply import supply_faults
from frontend_sim.stimulus import AnyStimulus

STIMULUS = "stimulus"
"""Name of the first point of the chain, before any stage."""


class Scenario(ScenarioFile):
    """What arrives, what the circuit does to it, how the converter looks, how it is computed."""

    stimulus: AnyStimulus = Field(description="what arrives at the first stage")
    chain: tuple[AnyStage, ...] = Field(
        default=(), description="the stages, in order from the sensor to the converter's pin"
    )
    environment: Environment = Field(default=Environment(), description="where the circuit stands")
    adc: AnyAdc = Field(description="the converter")
    simulation: SimulationSettings = Field(
        default=SimulationSettings(), description="how the run is computed"
    )
    check: tuple[AnyCheck, ...] = Field(
        default=(), description="what must hold, each check with its limit"
    )

    @model_validator(mode="after")
    def _stages_have_names_of_their_own(self) -> Self:
        taken = {STIMULUS: "the name of the chain's first point, before any stage"}
        for position, name in enumerate(self.points()[1:], start=1):
            if not name.isprintable():
                raise fault(["chain", position - 1, "name"], "the name must be one line of text")
            if name in taken:
                raise fault(
                    ["chain", position - 1, "name"],
                    f"the name {name!r} is taken: it is {taken[name]}; give every stage a name of "
                    "its own, or none",
                )
            taken[name] = f"the name of stage {position}"
        return self

    @model_validator(mode="after")
    def _units_fit(self) -> Self:
        try:
            unit = signal_units(self.chain)[0]
        except UnitError as error:
            raise fault(["chain", error.position], str(error)) from None
        wrong = self.stimulus.unit_faults(unit)
        if wrong:
            takes = "" if unit == PIN else f"; {self._taker()} takes a {named(unit)}"
            told = [(("stimulus", *path), f"{text}{takes}") for path, text in wrong]
            raise faults(type(self).__name__, told)
        if unit == "K" and self.simulation.initial == "rest":
            raise fault(
                ["simulation", "initial"],
                'initial = "rest" has no meaning for a temperature: before the run it would be '
                '0 K, absolute zero; take "settled"',
            )
        self._measure(unit)
        return self

    def _taker(self) -> str:
        """Return what decides on the unit of the stimulus: a stage, or the converter."""
        labels = zip(self.chain, self.points()[1:], strict=True)
        return next((repr(label) for stage, label in labels if stage.units()), "the converter")

    def _measure(self, unit: str) -> None:
        """Let the stimulus know its unit; a scenario is frozen only once it is made."""
        self.__dict__["stimulus"] = self.stimulus.measured_in(unit)

    @model_validator(mode="after")
    def _supply_feeds_something(self) -> Self:
        referred = self.adc.reference is not None and self.adc.reference.ratiometric
        text = supply_faults(self.environment.supply, self.chain, referred)
        if text is not None:
            raise fault(["environment", "supply"], text)
        return self

    @model_validator(mode="after")
    def _waveform_points_exist(self) -> Self:
        points = self.points()
        for position, name in enumerate(self.simulation.waveform_points or ()):
            if name not in points:
                raise fault(
                    ["simulation", "waveform_points", position],
                    f"the chain has no point {name!r}{nearest(name, points)}",
                )
        return self

    @model_validator(mode="after")
    def _some_conversion_falls_into_the_run(self) -> Self:
        duration = self.simulation.duration
        if duration is not None:
            text = self.length_fault(duration)
            if text is not None:
                raise fault(["simulation", "duration"], text)
        return self

    @model_validator(mode="after")
    def _checks_fit(self) -> Self:
        found = list(check_faults(self.check, self.points(), self.units(), self.adc.true_rate))
        for position, check in enumerate(self.check):
            if check.channel is not None:
                text = "has a meaning in a scan of several [[channel]] only; take it out"
                found.append((("check", position, "channel"), text))
        if self.simulation.duration is not None:
            found += instant_faults(self.check, self.simulation.duration)
        if found:
            raise faults(type(self).__name__, found)
        return self

    def length_fault(self, duration: float) -> str | None:
        """Return what is wrong with a run of some duration [s]: too many points, or no conversion.

        A waveform and a given grid of a discrete model count as conversions do.
        """
        settings = self.simulation
        rates = {"waveform_rate": settings.waveform_rate}
        if settings.discretization != "exact":
            rates["grid_rate"] = settings.grid_rate
        return conversions_fault(self.adc, duration) or points_fault(duration, rates)

    def points(self) -> tuple[str, ...]:
        """Return the names of the chain's points: the stimulus, then the output of each stage."""
        labels = [stage.label(position) for position, stage in enumerate(self.chain, start=1)]
        return (STIMULUS, *labels)

    def units(self) -> tuple[str, ...]:
        """Return the SI units at the chain's points, in the order of ``points``."""
        return signal_units(self.chain)

    @property
    def stimulus_unit(self) -> str:
        """SI unit of the stimulus: V, or what the first sensor of the chain takes."""
        return self.units()[0]

    def model_copy(self, *, update: Mapping[str, Any] | None = None, deep: bool = False) -> Self:
        """Return a copy; one with other values has no ``source``, which would tell the old ones."""
        changed = {"source": "", **update} if update else None
        copy = super().model_copy(update=changed, deep=deep)
        if update and not {"chain", "stimulus"}.isdisjoint(update):
            copy._measure(copy.stimulus_unit)
        return copy

    def files(self) -> tuple[Path, ...]:
        """Return the files that the scenario is made from: recordings, tables of the converter."""
        return tuple(dict.fromkeys([*self.stimulus.files(), *self.adc.files()]))
