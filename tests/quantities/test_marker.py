"""Fields of values that read quantities."""

from __future__ import annotations

import pytest
from pydantic import TypeAdapter, ValidationError

from frontend_sim.quantities import (
    FREQUENCY,
    Frequency,
    PositiveTime,
    Voltage,
    dimension_of,
)


def test_optional_fields_take_none_and_others_do_not() -> None:
    """None passes where a key may be left out, and is refused where it may not."""
    assert TypeAdapter(Frequency | None).validate_python(None) is None
    assert TypeAdapter(Frequency | None).validate_python("1 kHz") == 1000.0
    with pytest.raises(ValidationError, match="given None; expected a frequency"):
        TypeAdapter(Frequency).validate_python(None)


def test_bounds_are_told_with_their_unit() -> None:
    """A value beyond its bounds is told with what was given and the limit."""
    with pytest.raises(ValidationError, match='given "0 ms"; a time here must be above 0 s'):
        TypeAdapter(PositiveTime).validate_python("0 ms")


def test_braces_in_a_text_are_shown_as_they_are() -> None:
    """A message is no template: braces in what was given stay."""
    with pytest.raises(ValidationError, match=r"\{reason\}"):
        TypeAdapter(Voltage).validate_python("5 {reason}")


def test_the_dimension_of_a_field_is_found() -> None:
    """The dimension is found through Annotated and optional types, and not where there is none."""
    assert dimension_of(Frequency) is FREQUENCY
    assert dimension_of(Frequency | None) is FREQUENCY
    assert dimension_of(int) is None
