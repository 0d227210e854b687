"""Aliasing of a scenario or a run: what folds, where to, and what it does to the codes."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, Self

import numpy as np

from frontend_sim.analog.chain import Chain
from frontend_sim.errors import MeasureError
from frontend_sim.measure.aliasing.alias import Alias, Folder
from frontend_sim.measure.aliasing.error import AliasError, Response, above_in
from frontend_sim.measure.aliasing.recorded import recorded_alias
from frontend_sim.measure.aliasing.sieve import Sieve
from frontend_sim.measure.aliasing.source import Above, parts_above
from frontend_sim.measure.aliasing.split import Edges
from frontend_sim.measure.arrays import Real
from frontend_sim.measure.response.gain import largest_gain
from frontend_sim.measure.response.step_response import StepResponse
from frontend_sim.quantities import FREQUENCY, as_text
from frontend_sim.randomness import stream
from frontend_sim.scenario.circuit import circuit_of, stages_of
from frontend_sim.scenario.model import Scenario

if TYPE_CHECKING:
    from frontend_sim.simulation.finished import Finished

FAINT = 1e-3
"""Of a long row of lines, a train's harmonics, those below this are not listed [LSB]."""

MOST_LISTED = 50
"""The strongest lines of a stimulus that are listed."""


@dataclass(frozen=True, eq=False)
class Aliasing:
    """What the converter folds down, by superposition in the linear chain.

    Parameters
    ----------
    scenario : whose stimulus, chain and converter it is about
    parts : what of each stimulus lies above half the rate
    folder : chain and converter
    edges : how a recording goes on beyond its ends
    """

    scenario: Scenario
    parts: tuple[Above, ...]
    folder: Folder
    edges: Edges = "reflected"

    @classmethod
    def of(cls, scenario: Scenario, chain: Chain | None = None, edges: Edges = "reflected") -> Self:
        """Take stimulus, chain and converter of a scenario.

        Parameters
        ----------
        chain : of the scenario, where it is composed already
        edges : "reflected", or "periodic" where a recording is a whole number of periods
        """
        model = chain or circuit_of(scenario)
        adc, key = scenario.adc, stream(scenario.seed, "stimulus")
        largest = largest_gain(StepResponse.of(model)).value
        length = duration_of(scenario)
        parts = tuple(parts_above(scenario.stimulus, key, 0.5 * adc.true_rate, length))
        return cls(scenario, parts, Folder(model, adc, largest), edges)

    @property
    def half(self) -> float:
        """Half the rate of the codes, by a right clock [Hz]."""
        return 0.5 * self.scenario.adc.true_rate

    @cached_property
    def aliases(self) -> tuple[Alias, ...]:
        """Every line and band that folds, by frequency; of trains those that can be seen."""
        found = []
        for part in self.parts:
            found += self.folder.of_lines(part.lines, MOST_LISTED, FAINT)
            found += [self.folder.of_band(band) for band in part.bands]
            found += [
                recorded_alias(self.folder, part.source, drive, duration_of(self.scenario))
                for drive in part.points
                if self.half < part.reach < math.inf
            ]
        return tuple(sorted(found, key=lambda each: (each.frequency, each.source)))

    @cached_property
    def notes(self) -> tuple[str, ...]:
        """What the reader must know: a recording that cannot show aliasing, limits, models."""
        notes = [self._recorded_note(part) for part in self.parts if part.reach <= self.half]
        settings = self.scenario.simulation
        limited = any(stage.limiter() is not None for stage in stages_of(self.scenario))
        if limited:
            notes.append("aliasing is told for small signals: limits of the chain make more lines")
        if settings.discretization != "exact":
            notes.append("aliasing is told for the exact chain, not for its discrete model")
        return tuple(notes)

    def _recorded_note(self, part: Above) -> str:
        return (
            f"the {part.source} cannot show aliasing: at "
            f"{as_text(2.0 * part.reach, FREQUENCY, 4)} it holds nothing above "
            f"{as_text(part.reach, FREQUENCY, 4)}, and the converter folds what lies above "
            f"{as_text(self.half, FREQUENCY, 4)}; what the sensor really saw there is not in it"
        )

    @property
    def possible(self) -> bool:
        """Whether anything of the stimulus can lie above half the rate."""
        return any(
            part.drives or part.whole or (part.points and part.reach > self.half)
            for part in self.parts
        )

    def error(self, time: Real, point: str | None = None) -> AliasError:
        """Return the alias error at the codes of a run.

        Parameters
        ----------
        time : true instants of the newest look in each code, as the run has them, shape (K,) [s]
        point : of the chain, looked at at these instants; left out, the codes, with what the
            converter itself weighs

        Raises
        ------
        MeasureError
            If the run is too long to be split at once.
        """
        adc = self.scenario.adc
        sieve = Sieve.of(adc)
        single = point is not None or len(sieve.weights) == 1
        instants = time
        if not single and len(time):
            digitizer = adc.digitizer(self.scenario.seed, self.scenario.environment.temperature)
            instants = digitizer.instants(0, sieve.looks(len(time)))
        names = self.folder.chain.points
        number = len(names) - 1 if point is None else names.index(point)
        response = Response(self.folder.chain, number, self.scenario.simulation.initial)
        total, unsure, methods = np.zeros(len(instants)), np.zeros(len(instants)), []
        if len(instants):
            for part in self.parts:
                values, beside, how = above_in(response, part, instants, self.half, self.edges)
                total, unsure = total + values, unsure + beside
                methods.append(how)
        if not single and len(time):
            total, unsure = (sieve.codes(row, len(time)) for row in (total, unsure))
        return AliasError(time, total, adc.lsb, unsure, tuple(methods))


def duration_of(scenario: Scenario) -> float:
    """Return the length of a run; infinite where only the run will tell [s]."""
    given = scenario.simulation.duration
    known = scenario.stimulus.known_length() if given is None else given
    return math.inf if known is None else known


def aliasing_of(subject: Scenario | Finished, edges: Edges = "reflected") -> Aliasing:
    """Return what folds in a scenario, or in the scenario of a run or a record."""
    scenario = subject if isinstance(subject, Scenario) else subject.scenario
    return Aliasing.of(scenario, edges=edges)


def alias_error(run: Finished, point: str | None = None, edges: Edges = "reflected") -> AliasError:
    """Return the codes of a run less those that a perfect band limit would give.

    The stimulus is split at half the rate of the codes, without transition, into what lies below
    and what lies above; what lies above goes through the chain, from the same start, and through
    the weights of the converter. In a linear chain that is the whole difference, by superposition.

    * Lines (sines, trains that fill the run) are above or below: exact.
    * Points (recordings, bursts of noise) are split by their spectrum, ``edges`` says how they go
      on beyond their ends; the lines or steps between the points belong to both parts alike.
    * Everything else (steps, single pulses, sweeps) has no such split; its response is split on a
      fine grid instead, and ``uncertainty`` tells what half as fine a grid would change.

    Parameters
    ----------
    run : a ``Run`` or an open ``Record``
    point : of the chain, at the instants of the codes; left out, the codes
    edges : "reflected" or "periodic"

    Raises
    ------
    MeasureError
        If there is no such point, or the run is too long to be split at once.
    """
    names = run.scenario.points()
    if point is not None and point not in names:
        raise MeasureError(f"the chain has no point {point!r}; it has {', '.join(names)}")
    return aliasing_of(run, edges).error(run.time, point)
