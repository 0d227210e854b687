"""A part is its nominal number everywhere, and keeps its spread on the way through files."""

from __future__ import annotations

import copy
import json
import pickle

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.errors import QuantityError, ScenarioError
from frontend_sim.quantities import (
    CAPACITANCE,
    INDUCTANCE,
    RESISTANCE,
    Capacitance,
    Dimension,
    Frequency,
    Part,
    Resistance,
    parse,
    part_table,
)
from frontend_sim.quantities.dimension import DRIFT
from frontend_sim.quantities.spread import parse_part
from frontend_sim.values import Value


class Circuit(Value):
    """A value with parts, for these tests."""

    r: Resistance
    c: Capacitance | None = None
    f: Frequency = 1.0


PARTS = st.builds(
    Part,
    st.floats(1e-9, 1e12),
    st.floats(1e-9, 0.999),
    st.one_of(st.just(0.0), st.floats(-0.9, 0.9).filter(lambda drift: abs(drift) > 1e-12)),
)


@given(PARTS)
def test_a_part_survives_json_a_file_and_another_process(part: Part) -> None:
    """Value, tolerance and drift come back to the last bit, whichever way they go."""
    circuit = Circuit(r=part)
    assert Circuit.model_validate_json(circuit.model_dump_json()) == circuit
    assert Circuit.model_validate(circuit.model_dump()) == circuit
    assert parse_part(part_table(part, RESISTANCE), RESISTANCE) == part
    for again in (pickle.loads(pickle.dumps(part)), copy.deepcopy(part), copy.copy(part)):
        assert again == part
        assert (again.tolerance, again.drift) == (part.tolerance, part.drift)


@given(PARTS, st.floats(-1e6, 1e6))
def test_a_part_is_a_number_to_all_that_computes(part: Part, other: float) -> None:
    """Sums, products, comparisons and arrays see the nominal value."""
    plain = float(part)
    assert type(part * other) is float
    assert part * other == plain * other
    assert (part > other) == (plain > other)
    assert np.array([part])[0] == plain
    assert json.dumps(part) == json.dumps(plain)
    assert f"{part:g}" == f"{plain:g}"


@given(PARTS, PARTS)
def test_parts_are_equal_if_value_and_spread_are(one: Part, other: Part) -> None:
    """Equal parts have equal hashes; a spread makes a part unlike the plain number."""
    same = (float(one), one.tolerance, one.drift) == (float(other), other.tolerance, other.drift)
    assert (one == other) == same
    assert (one != other) != same
    assert one == Part(float(one), one.tolerance, one.drift)
    assert hash(one) == hash(Part(float(one), one.tolerance, one.drift))
    assert one != float(one)
    assert float(one) != one
    assert Part(float(one)) == float(one)
    assert hash(Part(float(one))) == hash(float(one))


def test_spread_is_a_table_and_no_spread_is_a_number() -> None:
    """Data for JSON have a table only where there is something to tell."""
    circuit = Circuit.model_validate(
        {"r": {"value": "10 kohm", "tolerance": "1 %", "drift": "50 ppm/K"}, "c": {"value": 1e-9}}
    )
    assert circuit.model_dump(mode="json") == {
        "r": {"value": 1e4, "tolerance": 0.01, "drift": 5e-5},
        "c": 1e-9,
        "f": 1.0,
    }
    assert repr(circuit.r) == "Part(10000.0, tolerance=0.01, drift=5e-05)"
    assert not isinstance(circuit.c, Part)


def test_extremes_and_drift() -> None:
    """Nominal 10 kohm of 1 % and 50 ppm/K: 9.9 and 10.1 kohm; 60 K up are 30 ohm more."""
    part = Part(10e3, 0.01, 50e-6)
    assert part.lowest == pytest.approx(9.9e3, rel=1e-15)
    assert part.highest == pytest.approx(10.1e3, rel=1e-15)
    assert part.at(298.15) == 10e3
    assert part.at(358.15) == pytest.approx(10030.0, rel=1e-14)


@pytest.mark.parametrize(
    ("code", "dimension", "value", "tolerance"),
    [
        ("4k7J", RESISTANCE, 4.7e3, 0.05),
        ("4K7F", RESISTANCE, 4.7e3, 0.01),
        ("R47G", RESISTANCE, 0.47, 0.02),
        ("470RK", RESISTANCE, 470.0, 0.1),
        ("1M0M", RESISTANCE, 1e6, 0.2),
        ("47KB", RESISTANCE, 47e3, 0.001),
        ("4n7K", CAPACITANCE, 4.7e-9, 0.1),
        ("100nM", CAPACITANCE, 100e-9, 0.2),
        ("4p7C", CAPACITANCE, 4.7e-12, 0.25 / 4.7),
        ("10uJ", INDUCTANCE, 10e-6, 0.05),
    ],
)
def test_letters_for_tolerances_are_read(
    code: str, dimension: Dimension, value: float, tolerance: float
) -> None:
    """The last letter of a code of IEC 60062 is the tolerance; from memory."""
    part = parse(code, dimension)
    assert isinstance(part, Part)
    assert float(part) == value
    assert part.tolerance == pytest.approx(tolerance, rel=1e-15)


def test_a_letter_that_may_be_the_unit_is_no_tolerance() -> None:
    """100nF is 100 nanofarads; in 4n7F nobody can know, so it is asked."""
    assert not isinstance(parse("100nF", CAPACITANCE), Part)
    with pytest.raises(QuantityError, match=r'"4n7" or \{ value = "4n7", tolerance = "1 %" \}'):
        parse("4n7F", CAPACITANCE)
    with pytest.raises(QuantityError, match="'V' is no letter for a tolerance"):
        parse("4k7V", RESISTANCE)


@pytest.mark.parametrize(
    ("text", "value"),
    [("50 ppm/K", 50e-6), ("-0.17 %/K", -1.7e-3), ("50 ppm/degC", 50e-6), ("3.9 1/kK", None)],
)
def test_drifts_are_relative_to_kelvins(text: str, value: float | None) -> None:
    """Shares per kelvin, or per degree, which is the same."""
    if value is None:
        assert parse(text, DRIFT) == 3.9e-3
    else:
        assert parse(text, DRIFT) == value


WRONG = [
    ({"value": "10 kohm", "tolerance": "-1 %"}, ["r", "tolerance"], "at least 0 and below 100 %"),
    ({"value": "10 kohm", "tolerance": "100 %"}, ["r", "tolerance"], "at least 0 and below 100 %"),
    ({"value": "10 kohm", "tolerance": 5}, ["r", "tolerance"], "at least 0 and below 100 %"),
    ({"value": "10 kohm", "tolerance": "1 V"}, ["r", "tolerance"], "a unit of voltage"),
    ({"value": "10 kohm", "tolerance": None}, ["r", "tolerance"], "given None"),
    ({"value": "10 kohm", "drift": "50 ppm"}, ["r", "drift"], '"50 ppm/K"'),
    ({"value": "10 kohm", "drift": "2 1/K"}, ["r", "drift"], "beyond the largest drift"),
    ({"value": "10 kohm", "tolerence": "1 %"}, ["r", "tolerence"], "did you mean 'tolerance'?"),
    ({"value": "10 kohm", 5: "1 %"}, ["r", "5"], "unknown key"),
    ({"tolerance": "1 %"}, ["r"], 'write { value = "10 kohm"'),
    ({}, ["r"], 'write { value = "10 kohm"'),
    ({"value": "4.7 nF"}, ["r", "value"], "a unit of capacitance"),
    ({"value": {"value": 1}}, ["r", "value"], "given a table"),
    ({"value": "-1 kohm"}, ["r", "value"], 'given "-1 kohm"; a resistance here must be above 0'),
    ({"value": "4k7J", "tolerance": "1 %"}, ["r", "tolerance"], "says 5 %; keep one of them"),
    ({"value": "10.3 kohm", "series": "E24"}, ["r", "value"], "neighbours are 10 kohm and 11 kohm"),
    ({"value": "10 kohm", "series": "E25"}, ["r", "series"], "E3, E6, E12"),
    ({"value": "10 kohm", "series": 24}, ["r", "series"], "given 24"),
    (Part(10e3, 1.5), ["r"], "below 100 %"),
]


@pytest.mark.parametrize(("given_", "path", "message"), WRONG)
def test_a_wrong_spread_is_told_with_its_key(given_: object, path: list[str], message: str) -> None:
    """What is wrong in the table of a part is told at the key where it is."""
    with pytest.raises(ScenarioError) as caught:
        Circuit.model_validate({"r": given_})
    (problem,) = caught.value.problems
    assert message in problem.text
    assert problem.key.split(".") in (path, [*path, "tolerance"])


def test_a_spread_where_none_can_be_is_refused() -> None:
    """A frequency of the stimulus or the converter is no part."""
    with pytest.raises(ScenarioError, match="given a table"):
        Circuit.model_validate({"r": 1, "f": {"value": "1 kHz", "tolerance": "1 %"}})
    with pytest.raises(ScenarioError, match="a spread has no meaning here"):
        Circuit(r=1.0, f=Part(1e3, 0.01))


def test_a_code_and_its_tolerance_may_be_told_twice_alike() -> None:
    """The letter J and 5 % agree."""
    circuit = Circuit.model_validate({"r": {"value": "4k7J", "tolerance": "±5 %"}})
    assert circuit.r == Part(4.7e3, 0.05)


@given(
    st.dictionaries(
        st.sampled_from(["value", "tolerance", "drift", "series", "x"]),
        st.one_of(
            st.text(max_size=12),
            st.floats(),
            st.booleans(),
            st.none(),
            st.lists(st.integers(), max_size=2),
            st.sampled_from(["10 kohm", "1 %", "5 ppm/K", "E96", "4k7K"]),
        ),
    )
)
def test_any_table_is_read_or_told(table: dict[str, object]) -> None:
    """A number with its spread comes out, or our own error."""
    try:
        part = parse_part(table, RESISTANCE)
    except QuantityError:
        return
    assert np.isfinite(part)
    if isinstance(part, Part):
        assert 0.0 <= part.tolerance < 1.0
