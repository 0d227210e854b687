"""The rule of checks with a lowest and a highest value: one of them, in the right order."""

from __future__ import annotations

from frontend_sim.scenario.rules import fault


def refuse_bounds(at_least: float | None, at_most: float | None, unit: str) -> None:
    """Refuse no limit at all, and two that leave nothing between.

    Parameters
    ----------
    unit : of both, for the message

    Raises
    ------
    PydanticCustomError
        If either is so; to be called in a validator.
    """
    if at_least is None and at_most is None:
        raise fault([], "no limit; give at_least, at_most or both")
    if at_least is not None and at_most is not None and at_least > at_most:
        raise fault(
            ["at_least"],
            f"at_least {at_least:g} {unit} lies above at_most {at_most:g} {unit}; exchange them, "
            "or correct one",
        )
