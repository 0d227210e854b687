"""Dimensions and their bounds."""

from __future__ import annotations

import math

import pytest
from dimensions import DIMENSIONS

from frontend_sim.quantities import (
    Bounds,
    Dimension,
    parse,
)


@pytest.mark.parametrize("dimension", DIMENSIONS, ids=lambda d: d.name)
def test_examples_of_messages_can_be_read(dimension: Dimension) -> None:
    """What a message offers as an example is right."""
    for example_ in dimension.example.replace(" or ", ", ").split(", "):
        assert math.isfinite(parse(eval(example_), dimension))  # the example is a literal


@pytest.mark.parametrize(
    ("bounds", "value", "complaint"),
    [
        (Bounds(above=0.0), 0.0, "must be above 0 V"),
        (Bounds(least=1.0), 0.0, "must be at least 1 V"),
        (Bounds(below=1.0), 1.0, "must be below 1 V"),
        (Bounds(most=1.0), 2.0, "must be at most 1 V"),
        (Bounds(least=1.0, most=2.0), 2.0, None),
    ],
)
def test_each_bound_has_its_words(bounds: Bounds, value: float, complaint: str | None) -> None:
    """The complaint names the limit that was crossed, or there is none."""
    assert bounds.complaint(value, "V") == complaint
