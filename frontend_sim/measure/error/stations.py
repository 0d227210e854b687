"""The way from the quantity to the code, one idealization taken away after the other."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

from frontend_sim.converter import Adc
from frontend_sim.converter.paced import PacedAdc
from frontend_sim.converter.quantizer import converted_voltage
from frontend_sim.measure.aliasing.aliasing import Aliasing
from frontend_sim.measure.aliasing.error import AliasError, Response
from frontend_sim.measure.aliasing.sieve import Sieve
from frontend_sim.measure.arrays import Real
from frontend_sim.measure.error.ideal import Ideal, constant_of, dc_gain
from frontend_sim.scenario.channel_scenario import ChannelScenario
from frontend_sim.scenario.circuit import stages_of

if TYPE_CHECKING:
    from frontend_sim.simulation import Simulation
    from frontend_sim.simulation.finished import Finished

Station = tuple[str, Real]
"""What is no longer ideal, and the codes with all that is not, shape (K,) [V]."""


@dataclass(frozen=True, eq=False)
class Stations:
    """The stations of the codes of a run, all referred to the pin.

    Parameters
    ----------
    run : that was made;  simulation : the same scenario, ready to be asked
    ideal : the line that firmware reads by
    aliasing : of the scenario
    """

    run: Finished
    simulation: Simulation
    ideal: Ideal
    aliasing: Aliasing

    @cached_property
    def adc(self) -> Adc:
        """The converter."""
        return self.run.scenario.adc  # type: ignore[return-value]  # every kind has these names

    @cached_property
    def sieve(self) -> Sieve:
        """The weights of the converter's looks."""
        return Sieve.of(self.adc)

    @cached_property
    def count(self) -> int:
        """Number of codes."""
        return len(self.run.time)

    @cached_property
    def looks(self) -> Real:
        """True instants of all looks, shape (L,) [s]."""
        if len(self.sieve.weights) == 1:
            return self.run.time
        scenario = self.run.scenario
        digitizer = self.adc.digitizer(scenario.seed, scenario.environment.temperature)
        return digitizer.instants(0, self.sieve.looks(self.count))

    @cached_property
    def folded(self) -> AliasError:
        """What of the codes lies above half the rate."""
        return self.aliasing.error(self.run.time)

    @cached_property
    def beyond(self) -> AliasError:
        """What of the quantity lies above half the rate, at the codes [unit]."""
        return self.aliasing.error(self.run.time, "stimulus")

    @cached_property
    def gain(self) -> float:
        """Volts for one unit of the quantity at zero frequency [V/unit].

        What blocks dc has no gain of its own to compare; its pass band is the ideal's.
        """
        own = dc_gain(self.simulation.chain)
        return own if 0.0 < abs(own) < math.inf else self.ideal.gain

    def codes(self, values: Real) -> Real:
        """Return what the converter's weights make of values at all looks, shape (K,) [V]."""
        if len(self.sieve.weights) == 1:
            return values
        return self.sieve.codes(values, self.count)

    def quantity(self, instants: Real) -> Real:
        """Return the quantity at increasing instants, shape of theirs [unit]."""
        drives = self.simulation.drives
        total = np.zeros(len(instants))
        for drive in drives:
            total = total + drive.values(instants)
        return total

    def ideal_codes(self) -> Real:
        """Return what the codes should stand for, shape (K,) [V]."""
        return self.ideal.volts(self.quantity(self._nominal()))

    def before_the_pin(self) -> Iterator[Station]:
        """Return the stations from the quantity to the pin."""
        ideal, chain, time = self.ideal, self.simulation.chain, self.run.time
        yield "", ideal.gain * self.quantity(self._nominal()) + ideal.offset
        true = self.quantity(time)
        yield "timing", ideal.gain * true + ideal.offset
        yield "gain", self.gain * true + ideal.offset
        constant = constant_of(chain, stages_of(self.run.scenario))
        line = self.gain * true + constant
        yield "offset", line
        if self.aliasing.possible:
            # Behind the sieve the newest look stands for the code; the rest is settling.
            yield "beyond half the rate", line - self.gain * self.beyond.volts
        settings = self.run.scenario.simulation
        whole = Response(chain, len(chain.points) - 1, settings.initial)
        linear = whole.to(self.simulation.drives, self.looks) + constant
        sifted = self.codes(linear)
        yield "settling", sifted - self.folded.volts
        yield "aliasing", sifted

    def behind_the_pin(self) -> Iterator[Station]:
        """Return the stations from the pin to the code."""
        adc, run = self.adc, self.run
        pin, held = self._at_the_looks()
        scenario = self.run.scenario
        limited = any(stage.limiter() is not None for stage in stages_of(scenario))
        # A linear chain of a scan differs from itself alone by what is left of other channels.
        scanned = isinstance(scenario, ChannelScenario) and not limited
        yield "channel change" if scanned else "nonlinearity", self.codes(pin)
        if len(held):
            yield "acquisition", self.codes(held)
        else:
            held = pin
        temperature, seed = run.scenario.environment.temperature, run.scenario.seed
        still = adc.reference and adc.reference.model_copy(update={"noise": 0.0})
        quiet = adc.model_copy(update={"input_noise": 0.0, "reference": still})
        straight = quiet.model_copy(update={"offset": 0.0})
        yield "gain", self.codes(converted_voltage(straight, held, 0, seed, temperature))
        yield "offset", self.codes(converted_voltage(quiet, held, 0, seed, temperature))
        noise = self._noise(pin, held)
        if isinstance(scenario, ChannelScenario) and not self._drawn_alike(held, noise):
            yield from self._without_draws(
                self.codes(converted_voltage(quiet, held, 0, seed, temperature)), held
            )
            return
        loud = converted_voltage(adc, held + noise, 0, seed, temperature)
        yield "noise", self.codes(loud)
        yield "clipping", self.codes(np.clip(loud, adc.low, self._top))
        if adc.nonlinearity is not None:
            even = adc.model_copy(update={"nonlinearity": None}).digitizer(seed, temperature)
            _, made = even.convert(even.start(), 0, self.looks, held, noise)
            yield "quantization", made.voltage
            yield "nonlinearity", run.voltage
        else:
            yield "quantization", run.voltage

    @property
    def _top(self) -> float:
        """Voltage of the highest code, where rounding ends [V]."""
        adc = self.adc
        nearest = isinstance(adc, Adc) and adc.rounding == "nearest"
        return adc.high - adc.core_lsb if nearest else adc.high

    def _drawn_alike(self, held: Real, noise: Real) -> bool:
        """Return whether a channel by itself draws what it drew within its scan.

        There the converter draws by the number of the conversion in the scan, which a channel does
        not know; if nothing random is larger than the rounding, both give the same codes.
        """
        digitizer = self.adc.digitizer(
            self.run.scenario.seed, self.run.scenario.environment.temperature
        )
        _, made = digitizer.convert(digitizer.start(), 0, self.looks, held, noise)
        return np.array_equal(made.codes, self.run.codes)

    def _without_draws(self, quiet: Real, held: Real) -> Iterator[Station]:
        """Return the stations to the code where noise and rounding cannot be told apart."""
        adc, scenario = self.adc, self.run.scenario
        clipped = np.clip(quiet, adc.low, self._top)
        yield "clipping", clipped
        if adc.nonlinearity is not None:
            bent, even = (
                each.digitizer(scenario.seed, scenario.environment.temperature)
                for each in (adc, adc.model_copy(update={"nonlinearity": None}))
            )
            made = [
                each.convert(each.start(), 0, self.looks, held)[1].voltage for each in (bent, even)
            ]
            clipped = clipped + (made[0] - made[1])
            yield "nonlinearity", clipped
        yield "noise and quantization", self.run.voltage

    def _at_the_looks(self) -> tuple[Real, Real]:
        """Return pin and held voltage at all looks; the latter empty without an input network."""
        if len(self.sieve.weights) == 1:
            return self.run.pin, self.run.held
        axis = self.simulation.look_axis()
        pin = self.simulation.pin_steps(axis).advance(0, self.looks)
        sampler = self.simulation.held_steps(axis)
        return pin, np.empty(0) if sampler is None else sampler.advance(0, self.looks)

    def _nominal(self) -> Real:
        """Return the instants at which firmware believes that the codes were taken, shape (K,)."""
        adc = self.adc.model_copy(update={"rate_error": 0.0})
        newest = adc.last_look(0) + (adc.last_look(1) - adc.last_look(0)) * np.arange(self.count)
        instants = adc.pattern.at(newest.astype(np.int64))
        # The rhythm of a scan is in true time; its clock counts so much faster or slower.
        return instants * self.adc.tempo if isinstance(self.adc, PacedAdc) else instants

    def _noise(self, pin: Real, held: Real) -> Real:
        """Return the noise of circuit and sampling capacitor at all looks, as in the run [V]."""
        path, count = self.simulation.noise_path, len(pin)
        noise = np.zeros(count) if path is None else path.advance(path.start(), 0, count)[1]
        sampler = self.simulation.held_steps(self.simulation.look_axis())
        if sampler is None:
            return np.asarray(noise)
        return np.asarray(sampler.added(0, held, pin, noise) - (held - pin))
