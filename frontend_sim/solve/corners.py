"""The corners of a scenario: every part at an end of its tolerance."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import product

from frontend_sim.errors import InputError
from frontend_sim.quantities import Part
from frontend_sim.scenario.scan_scenario import AnyScenario
from frontend_sim.scenario.spread import SpreadPart, spread_parts
from frontend_sim.scenario.vary import with_values
from frontend_sim.scenario.walk import key_text

MOST_PARTS = 10
"""Parts with a tolerance; they have 2 to this power corners."""

NOMINAL: tuple[int, ...] = ()
"""The corner at which every part has its nominal value."""

Corner = tuple[int, ...]
"""For each part with a tolerance -1 or 1, its lower or upper end; empty for the nominal values."""


@dataclass(frozen=True)
class Corners:
    """All corners of a scenario, its nominal values first.

    A measure that rises or falls with each part over its tolerance has its extremes at corners;
    of another one they say nothing about what lies between.
    """

    scenario: AnyScenario
    parts: tuple[SpreadPart, ...]

    @classmethod
    def of(cls, scenario: AnyScenario) -> Corners:
        """Find the parts that have a tolerance.

        Raises
        ------
        InputError
            If they are more than ``MOST_PARTS``.
        """
        parts = tuple(part for part in spread_parts(scenario) if part.tolerance)
        if len(parts) > MOST_PARTS:
            raise InputError(
                f"{len(parts)} parts have a tolerance, which makes {2 ** len(parts)} corners; at "
                f"most {MOST_PARTS} parts, {2**MOST_PARTS} corners, are looked at: take the "
                "tolerance of those out that matter least, see frontend-sim sensitivity"
            )
        return cls(scenario, parts)

    def __iter__(self) -> Iterator[Corner]:
        """Return the corners, the nominal values first."""
        yield NOMINAL
        if self.parts:
            yield from product((-1, 1), repeat=len(self.parts))

    @property
    def count(self) -> int:
        """Number of corners, the nominal values among them."""
        return 1 + (2 ** len(self.parts) if self.parts else 0)

    def at(self, corner: Corner) -> AnyScenario:
        """Return the scenario with its parts at a corner; tolerances are used up there.

        Raises
        ------
        ScenarioError
            If a part cannot have such a value.
        """
        values = {
            key_text(self.scenario, spread.path): Part(_end(spread, sign), 0.0, spread.drift)
            for spread, sign in zip(self.parts, corner, strict=False)
        }
        return with_values(self.scenario, values)

    def text(self, corner: Corner) -> str:
        """Return a corner in words; "" for the nominal values."""
        return ", ".join(
            f"{key_text(self.scenario, spread.path)} {'+' if sign > 0 else '-'}"
            f"{100.0 * spread.tolerance:.6g} %"
            for spread, sign in zip(self.parts, corner, strict=False)
        )


def _end(spread: SpreadPart, sign: int) -> float:
    lowest, highest = spread.corners
    return highest if sign > 0 else lowest
