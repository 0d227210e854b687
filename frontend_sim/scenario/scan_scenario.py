"""The scenario of a scan: several channels, one converter."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from functools import cached_property
from pathlib import Path
from typing import Any, Self

from pydantic import Field, ValidationError, model_validator

from frontend_sim.converter import AnyAdc
from frontend_sim.converter.adc import Adc
from frontend_sim.errors import ScenarioError
from frontend_sim.scenario.channel_scenario import ChannelScenario, Origin, with_channel
from frontend_sim.scenario.checks import AnyCheck
from frontend_sim.scenario.environment import Environment
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.rhythm import Rhythm
from frontend_sim.scenario.rules import BrokenRule, faults
from frontend_sim.scenario.scan import Channel, Scan
from frontend_sim.scenario.scan_rules import channel_faults, scan_faults
from frontend_sim.scenario.scenario_file import ScenarioFile
from frontend_sim.scenario.settings import SimulationSettings
from frontend_sim.values import Value, validated

NO_END = (
    "missing; none of the channels' stimuli ends by itself, so say how long to run, for instance "
    'duration = "10 ms"'
)
"""What is wrong with a scan that nothing ends."""


class ScanScenario(ScenarioFile):
    """What arrives at several channels, what their circuits do, how one converter scans them."""

    channel: tuple[Channel, ...] = Field(
        min_length=1, description="the channels of a scan, instead of [stimulus] and [[chain]]"
    )
    scan: Scan = Field(default=Scan(), description="how the converter takes turns at the channels")
    environment: Environment = Field(default=Environment(), description="where the circuit stands")
    adc: AnyAdc = Field(description="the converter")
    simulation: SimulationSettings = Field(
        default=SimulationSettings(), description="how the run is computed"
    )
    check: tuple[AnyCheck, ...] = Field(
        default=(), description="what must hold, each check with its limit"
    )

    @model_validator(mode="after")
    def _turns_are_possible(self) -> Self:
        self._refuse(channel_faults(self.channel, self.check))
        self._refuse(scan_faults(self.scan, self.names, self.adc, self.simulation, self.channel))
        if self.environment.supply is not None:
            text = "a supply that moves is not modelled in a scan yet; take it out"
            self._refuse(iter([(("environment", "supply"), text)]))
        return self

    @model_validator(mode="after")
    def _channels_are_scenarios(self) -> Self:
        made: list[ChannelScenario] = []
        found: list[BrokenRule] = []
        for position in range(len(self.channel)):
            try:
                made.append(self._channel(position, self.simulation.duration))
            except ValidationError as error:
                found += _faults_in_file(error, self._origin(position), self.names[position])
        self._refuse(iter(dict(found).items()))
        for channel, scenario in zip(self.channel, made, strict=True):
            # As in ``Scenario``: the stimulus gets to know its unit.
            channel.__dict__["stimulus"] = scenario.stimulus
        return self

    def _refuse(self, found: Iterator[BrokenRule]) -> None:
        told = list(found)
        if told:
            raise faults(type(self).__name__, told)

    @property
    def names(self) -> tuple[str, ...]:
        """Names of the channels, in the order of the file."""
        return tuple(channel.name for channel in self.channel)

    @cached_property
    def sampling_adc(self) -> Adc:
        """The converter, which is a sampling one in a scan."""
        assert isinstance(self.adc, Adc)  # a rule of the scan
        return self.adc

    @property
    def rhythm(self) -> Rhythm:
        """When the converter looks at which channel."""
        return Rhythm.of(self.scan, self.names, self.sampling_adc)

    def channels(self, duration: float | None = None) -> tuple[ChannelScenario, ...]:
        """Return each channel as a scenario of its own, in the order of the file.

        Its chain ends with the stages that are shared, its converter looks when it is the channel's
        turn, its checks are those that name it and those that name no channel.

        Parameters
        ----------
        duration : of the run, where the file leaves it to the recordings [s]
        """
        given = self.simulation.duration if duration is None else duration
        return tuple(self._channel(position, given) for position in range(len(self.channel)))

    def run_length(self) -> float:
        """Return how long a run takes: as said, or until the first stimulus is no longer known [s].

        Raises
        ------
        InputError
            If nothing tells it, or a recording cannot be read.
        """
        if self.simulation.duration is not None:
            return self.simulation.duration
        known = [channel.stimulus.known_length() for channel in self.channel]
        ends = [length for length in known if length is not None]
        if not ends:
            raise ScenarioError(f"simulation.duration: {NO_END}")
        return min(ends)

    def _channel(self, position: int, duration: float | None) -> ChannelScenario:
        """Return one channel as a scenario. Raises ValidationError where its parts do not fit."""
        channel, origin = self.channel[position], self._origin(position)
        settings = self.simulation
        changes: dict[str, Any] = {"duration": duration}
        if self.scan.chain and settings.waveform_rate and settings.waveform_points is None:
            # Behind the multiplexer there is no waveform of one channel.
            own = [stage.label(place) for place, stage in enumerate(channel.chain, start=1)]
            changes["waveform_points"] = ("stimulus", *own)
        return validated(
            ChannelScenario,
            {
                "title": f"{self.title}: {channel.name}"[:200] if self.title else channel.name,
                "seed": channel_seed(self.seed, channel.name),
                "stimulus": channel.stimulus,
                "chain": (*channel.chain, *self.scan.chain),
                "environment": self.environment,
                "adc": self.rhythm.visiting(self.sampling_adc, position),
                "simulation": settings.model_copy(update=changes),
                "check": [self._check(place) for place in origin.checks],
                "channel": channel.name,
                "origin": origin,
            },
        )

    def _check(self, place: int) -> Value:
        return self.check[place].model_copy(update={"channel": None})

    def _origin(self, position: int) -> Origin:
        channel = self.channel[position]
        mine = (None, channel.name)
        checks = tuple(place for place, one in enumerate(self.check) if one.channel in mine)
        return Origin(text=self.source, channel=position, stages=len(channel.chain), checks=checks)

    def model_copy(self, *, update: Mapping[str, Any] | None = None, deep: bool = False) -> Self:
        """Return a copy, validated again; one with other values has no ``source``."""
        given = {name: getattr(self, name) for name in type(self).model_fields}
        return type(self).model_validate(
            {**given, **({"source": ""} if update else {}), **(update or {})}
        )

    def files(self) -> tuple[Path, ...]:
        """Return the files that the scenario is made from: recordings, tables of the converter."""
        of_channels = [file for channel in self.channel for file in channel.stimulus.files()]
        return tuple(dict.fromkeys([*of_channels, *self.adc.files()]))


AnyScenario = Scenario | ScanScenario
"""What a scenario file may become."""


def channel_seed(seed: int, name: str) -> int:
    """Return the seed of what is random before the multiplexer of a channel."""
    from frontend_sim.randomness import stream

    return stream(seed, "channel", name)[1] & (2**63 - 1) ^ seed


def single(scenario: AnyScenario, what: str, name: str = "") -> Scenario:
    """Return a scenario of one channel, for what knows no scans.

    Parameters
    ----------
    what : cannot be done with a scan, for the message
    name : what the scenario is called in messages

    Raises
    ------
    ScenarioError
        If the scenario is a scan.
    """
    if isinstance(scenario, ScanScenario):
        raise ScenarioError(
            f"{what} takes a scenario of one channel, and this is a scan of "
            f"{len(scenario.channel)}; take one of its channels: in Python scenario.channels()",
            name,
        )
    return scenario


def _faults_in_file(error: ValidationError, origin: Origin, name: str) -> Iterator[BrokenRule]:
    """Return what is wrong with one channel, with its paths in the file of the scan."""
    for detail in error.errors(include_url=False):
        context = detail.get("ctx") or {}
        path = (*detail["loc"], *context.get("path", ()))
        text = str(context.get("reason", detail["msg"]))
        yield origin.path(path), with_channel(path, text, name)
