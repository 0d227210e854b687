"""What inspect tells beside the response of a chain: what folds, and verdicts that need no run."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Self

from frontend_sim.measure.aliasing import Aliasing
from frontend_sim.measure.checks import checks_before_run
from frontend_sim.measure.result import Result, verdict_of
from frontend_sim.present.aliasing_table import aliasing_in, aliasing_summary, aliasing_table
from frontend_sim.present.result_table import plain_results, result_tables
from frontend_sim.scenario.model import Scenario

if TYPE_CHECKING:
    from rich.console import RenderableType


@dataclass(frozen=True, eq=False)
class BeforeRun:
    """What is known of a scenario before any run.

    Parameters
    ----------
    aliasing : what folds; None where it cannot be told
    checks : verdicts on the checks that need no run
    """

    aliasing: Aliasing | None
    checks: tuple[Result, ...]

    @classmethod
    def of(cls, scenario: Scenario) -> Self:
        """Look at stimulus, chain, converter and checks of a scenario."""
        return cls(aliasing_in(scenario), checks_before_run(scenario))

    @property
    def notes(self) -> tuple[str, ...]:
        """What the reader must know of what folds."""
        return () if self.aliasing is None else self.aliasing.notes

    @property
    def status(self) -> int:
        """Exit status: 1 where a check fails, else 0."""
        return 1 if verdict_of(self.checks) == "fails" else 0

    def tables(self) -> tuple[RenderableType, ...]:
        """Return the tables for the terminal: what folds, measures, verdicts."""
        folds = None if self.aliasing is None else aliasing_table(self.aliasing)
        between = () if folds is None else (folds,)
        return (*between, *result_tables([vars(row) for row in self.checks]))

    def summary(self) -> dict[str, Any]:
        """Return plain data for JSON."""
        folding = None if self.aliasing is None else aliasing_summary(self.aliasing)
        return {"aliasing": folding, "checks": plain_results(self.checks)}
