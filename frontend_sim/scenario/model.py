"""The scenario: everything that one run depends on, frozen and validated."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Callable, Mapping, Sequence
from pathlib import Path
from typing import Annotated, Any, Literal, Self

from pydantic import BeforeValidator, Field, StrictBool, model_validator

from frontend_sim.analog.stages import AnyStage
from frontend_sim.converter import AnyAdc
from frontend_sim.errors import nearest
from frontend_sim.quantities import FREQUENCY, Frequency, PositiveLsb, PositiveTime, as_text
from frontend_sim.scenario.checks import AnyCheck
from frontend_sim.scenario.checks.rules import check_faults, instant_faults
from frontend_sim.scenario.environment import Environment
from frontend_sim.scenario.rules import conversions_fault, fault, faults, newer_format, points_fault
from frontend_sim.scenario.signal import PIN, UnitError, named, signal_units
from frontend_sim.scenario.supply import supply_faults
from frontend_sim.stimulus import AnyStimulus
from frontend_sim.values import Value

FORMAT = 1
"""Version of the scenario format that this program reads."""

STIMULUS = "stimulus"
"""Name of the first point of the chain, before any stage."""

Discretization = Literal["exact", "zoh", "foh", "bilinear"]


def _auto_or(value: object) -> object:
    return None if value == "auto" else value


class SimulationSettings(Value):
    """How the run is computed and what is kept of it."""

    duration: PositiveTime | None = Field(
        default=None,
        description="conversions are taken for t in [0, duration); left out, the length of the "
        "recording",
    )
    discretization: Discretization = Field(
        default="exact",
        description="exact, or a discrete model of the chain at grid_rate: zoh (step-invariant), "
        "foh (ramp-invariant), bilinear (trapezoidal)",
    )
    grid_rate: Annotated[Frequency | None, BeforeValidator(_auto_or)] = Field(
        default=None,
        description="points per second of a discrete model, and of the grid on which rails, slew "
        'rates, clamps and curved sensors are followed; "auto", or left out, picks the coarsest '
        "multiple of the conversion rate (or of a recording's rate) whose estimated error stays "
        "below accuracy. With discretization exact and a linear chain it changes nothing in a run; "
        "inspect then shows how far discrete models at this rate are from exact",
        json_schema_extra={"examples": ["auto", "1 MHz"]},
    )
    accuracy: PositiveLsb = Field(
        default=0.05, description='largest error of a grid picked by "auto"'
    )
    prewarp: Frequency | None = Field(
        default=None, description="frequency that the bilinear model keeps exactly"
    )
    initial: Literal["settled", "rest"] = Field(
        default="settled",
        description="before t = 0 the chain has settled on the stimulus's first value, or is at "
        "rest",
    )
    noise: StrictBool = Field(
        default=True,
        description="whether codes carry the noise of the circuit: thermal noise of resistors, "
        "voltage and current noise of amplifiers; pin and waveform stay free of it",
    )
    waveform_rate: Frequency | None = Field(
        default=None, description="points per second of the kept waveforms; left out, none is kept"
    )
    waveform_points: tuple[str, ...] | None = Field(
        default=None,
        description='points of the chain whose waveform is kept: "stimulus" or names of stages (a '
        'stage without a name is called by its place and kind, "2 gain"); left out, all of them',
        json_schema_extra={"examples": [["stimulus", "input filter"]]},
    )

    @model_validator(mode="after")
    def _prewarp_suits_the_model(self) -> Self:
        if self.prewarp is None:
            return self
        if self.discretization != "bilinear":
            raise fault(
                ["prewarp"],
                f'prewarp has a meaning for discretization = "bilinear" only, not for '
                f'"{self.discretization}"; take prewarp out, or choose "bilinear"',
            )
        if self.grid_rate is not None and not self.prewarp < 0.5 * self.grid_rate:
            raise fault(
                ["prewarp"],
                f"prewarp {as_text(self.prewarp, FREQUENCY, 6)} must lie below half the grid_rate, "
                f"{as_text(0.5 * self.grid_rate, FREQUENCY, 6)}",
            )
        return self

    @model_validator(mode="after")
    def _points_need_a_rate(self) -> Self:
        points = self.waveform_points
        if points is None:
            return self
        if self.waveform_rate is None:
            raise fault(
                ["waveform_points"],
                "waveform_points needs waveform_rate, the points per second that are kept; add "
                'for instance waveform_rate = "100 kHz", or take waveform_points out',
            )
        if not points:
            raise fault(
                ["waveform_points"],
                "waveform_points names no point; name one, or leave waveform_points out for all of "
                "them, or leave waveform_rate out for none",
            )
        for position, point in enumerate(points):
            if point in points[:position]:
                raise fault(["waveform_points", position], f"{point!r} is listed twice")
        return self


class Scenario(Value):
    """What arrives, what the circuit does to it, how the converter looks, and how it is computed.

    ``source`` holds the file as it was written, and is empty for a scenario made in Python.
    """

    format: Annotated[Literal[1], BeforeValidator(newer_format(FORMAT))] = Field(
        default=1, description="version of the scenario format"
    )
    title: str = Field(default="", max_length=200, description="what the scenario shows")
    seed: int = Field(
        default=0, ge=0, lt=2**63, strict=True, description="seed of everything random in the run"
    )
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
    source: str = Field(default="", exclude=True, repr=False, description="the file as written")

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
        found = list(check_faults(self.check, self.points(), self.units(), self.adc.rate))
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

    def resolved(self) -> dict[str, Any]:
        """Return every value in SI units, defaults filled in, as plain data for JSON."""
        return self.model_dump(mode="json")

    def digest(self, sha256: Callable[[Path], str] | None = None) -> str:
        """Return the SHA-256 of the resolved values, files counted by content, not by name.

        The same scenario in another folder has the same digest; title and source text do not
        count.

        Parameters
        ----------
        sha256 : digest of a file's content; left out, ``sha256_of``
        """
        return digest_of(self.resolved(), self.files(), sha256)

    def in_file(self, path: tuple[str | int, ...]) -> tuple[str | int, ...]:
        """Return where in the file a path of the scenario is: there."""
        return path

    @property
    def file_text(self) -> str:
        """The file that the scenario stands in, as written."""
        return self.source


def digest_of(
    values: dict[str, Any], files: Sequence[Path], sha256: Callable[[Path], str] | None = None
) -> str:
    """Return the SHA-256 of resolved values, files counted by content, the title not at all."""
    counted = {key: value for key, value in values.items() if key != "title"}
    named = {str(file): (sha256 or sha256_of)(file) for file in files}
    text = json.dumps(_renamed(counted, named), sort_keys=True, separators=(",", ":"))
    return hashlib.sha256(text.encode()).hexdigest()


def sha256_of(file: Path) -> str:
    """Return the SHA-256 of a file's content, read in blocks."""
    with file.open("rb") as stream:
        return hashlib.file_digest(stream, "sha256").hexdigest()


def _renamed(value: Any, names: dict[str, str]) -> Any:
    if isinstance(value, dict):
        return {key: _renamed(item, names) for key, item in value.items()}
    if isinstance(value, list):
        return [_renamed(item, names) for item in value]
    return names.get(value, value) if isinstance(value, str) else value
