"""Which grid a run goes on, and what it is compared with."""

from __future__ import annotations

from dataclasses import dataclass

from frontend_sim.analog.discretize import warped_frequency
from frontend_sim.errors import ScenarioError
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation.accuracy import SURE, Distance, Trials, pick_grid, pick_limiter_grid
from frontend_sim.simulation.linear import GridMethod
from frontend_sim.simulation.models import Models, Stepping
from frontend_sim.simulation.run import GridReport

COARSE = 0.5
"""A grid that moves the pin by more than this is told in the notes [LSB]."""


@dataclass(frozen=True, eq=False)
class Plan:
    """How a run is stepped, and how far that is known to lie from the exact answer.

    Parameters
    ----------
    reference : what the whole run is compared with; None where nothing is left to compare
    estimate : error of a grid that was picked, else None [LSB]
    measured : distance that the trials have already seen over the whole run, else None
    notes : what had to be decided
    """

    stepping: Stepping
    reference: Stepping | None = None
    estimate: float | None = None
    measured: Distance | None = None
    notes: tuple[str, ...] = ()

    @classmethod
    def of(cls, scenario: Scenario, models: Models, trials: Trials) -> Plan:
        """Plan a run.

        Raises
        ------
        ScenarioError
            If no grid reaches the accuracy, or a pre-warp frequency lies beyond the grid.
        """
        settings = scenario.simulation
        exact = Stepping()
        if models.cut is not None:
            if settings.discretization == "exact":
                return _limited(settings.grid_rate, models, trials)
            # The reference for a discrete model needs a grid of its own for the limiters.
            exact = Stepping(rate=pick_limiter_grid(models, trials).rate)
        if settings.discretization == "exact":
            return cls(exact)
        if settings.grid_rate is not None:
            method = GridMethod(settings.discretization, settings.grid_rate, settings.prewarp)
            _refuse_prewarp_beyond(method)
            estimate = None
        else:
            method, estimate = pick_grid(settings, models, trials, exact)
        rate = None if models.cut is None else method.rate
        return cls(Stepping(method, rate), exact, estimate)

    def report(self, scenario: Scenario, distance: Distance) -> tuple[GridReport | None, str]:
        """Return the report on the grid, if there is one, and a note if it is too coarse."""
        method, rate = self.stepping.method, self.stepping.rate
        distance = self.measured or distance
        settings = scenario.simulation
        limit = settings.accuracy if self.estimate is not None else COARSE
        far = distance.largest > limit
        if method is not None:
            warping = _warping(method, scenario.adc.rate)
            note = (
                f"the {method.method} model at {method.rate:g} points per second lies up to "
                f"{distance.largest:.3g} LSB from the exact answer; raise simulation.grid_rate or "
                'set simulation.discretization = "exact"'
            )
            name, grid = str(method.method), method.rate
        elif rate is not None:
            # The search has looked at whether its estimate is good enough, and told if it is not.
            far = distance.largest > (COARSE if self.estimate is None else limit / SURE)
            cure = 'raise simulation.grid_rate, or set it to "auto"'
            if self.estimate is not None:
                cure = "give a simulation.grid_rate above it"
            note = (
                f"the limiters' grid of {rate:g} points per second is coarse: half as many points "
                f"move the pin by up to {distance.largest:.3g} LSB; {cure}"
            )
            name, grid, warping = "exact", rate, 0.0
        else:
            return None, ""
        report = GridReport(name, grid, self.estimate, distance.largest, distance.rms, warping)
        return report, note if far else ""


def _limited(given: float | None, models: Models, trials: Trials) -> Plan:
    if given is not None:
        return Plan(Stepping(rate=given), Stepping(rate=0.5 * given))
    found = pick_limiter_grid(models, trials)
    reference = None if found.measured is not None else Stepping(rate=0.5 * found.rate)
    return Plan(Stepping(rate=found.rate), reference, found.estimate, found.measured, found.notes)


def _warping(method: GridMethod, conversion_rate: float) -> float:
    if method.method != "bilinear":
        return 0.0
    half = 0.5 * conversion_rate
    return warped_frequency(half, 1.0 / method.rate, method.prewarp) / half - 1.0


def _refuse_prewarp_beyond(method: GridMethod) -> None:
    if method.prewarp is not None and method.prewarp >= 0.5 * method.rate:
        raise ScenarioError(
            f"simulation.prewarp {method.prewarp:g} Hz must lie below half the grid rate, "
            f"{0.5 * method.rate:g} Hz"
        )
