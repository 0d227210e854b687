"""What each change between two nights does alone."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from frontend_sim.archive.set_table import SetTable
from frontend_sim.comparison.attribution import Attribution, attribute
from frontend_sim.comparison.base_scenario import scenario_of
from frontend_sim.errors import InputError

if TYPE_CHECKING:
    from frontend_sim.comparison.sets import SetComparison


def attribute_sets(
    first: SetTable,
    second: SetTable,
    comparison: SetComparison,
    progress: Callable[[float], None] | None = None,
) -> Attribution:
    """Run the scenario that the first night varies with each change alone, see ``attribute``.

    That is the nominal circuit: the runs of a night are around it.

    Raises
    ------
    InputError
        If the nights vary several scenarios, or one of the two cannot be run.
    """
    if len(first.base_values) != 1 or len(second.base_values) != 1:
        raise InputError(
            "the nights vary several scenarios; compare the records of one run of each to "
            "attribute its change"
        )
    scenarios = scenario_of(first.base_values[0]), scenario_of(second.base_values[0])
    if None in scenarios:
        raise InputError("the scenarios come from another version and cannot be run by this one")
    return attribute(*scenarios, comparison.changed, progress)
