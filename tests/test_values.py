"""The base of all values: frozen, closed, comparable; and the tables of kinds."""

from __future__ import annotations

import json
from typing import Annotated, Literal

import pytest
from pydantic import Field

from frontend_sim.analog.stages import STAGES, AnyStage
from frontend_sim.errors import ScenarioError
from frontend_sim.quantities import Voltage
from frontend_sim.scenario import Scenario
from frontend_sim.stimulus import STIMULI, AnyStimulus
from frontend_sim.values import Value, table


class Point(Value):
    """A value for these tests."""

    kind: Literal["point"] = "point"
    level: Voltage = 0.0
    path: tuple[float, ...] = ()


class Other(Value):
    """Another kind for these tests."""

    kind: Literal["other"] = "other"


def test_values_are_frozen() -> None:
    """A value cannot be changed after it was made."""
    point = Point(level=1.0)
    for name in ("level", "nothing"):
        with pytest.raises(ScenarioError, match=f"^Point: {name}: a value is frozen; make another"):
            setattr(point, name, 2.0)
        with pytest.raises(ScenarioError, match=f"^Point: {name}: a value is frozen"):
            delattr(point, name)
    assert point == Point(level=1.0)


def test_unknown_keys_are_refused() -> None:
    """A key that no field knows is an error, not ignored."""
    with pytest.raises(ScenarioError, match="Point: lvl: unknown here; did you mean 'level'"):
        Point.model_validate({"lvl": 1.0})


def test_a_wrong_parameter_is_told_in_our_own_words() -> None:
    """Made with keywords or from plain data: what is wrong, with its path, and what it may be."""
    from frontend_sim.analog.stages.rc_lowpass import RcLowpass

    told = "RcLowpass: resistance: given -1; a resistance here must be above 0 ohm"
    values = {"resistance": -1, "capacitance": "1 nF"}
    for make in (lambda: RcLowpass(**values), lambda: RcLowpass.model_validate(values)):
        with pytest.raises(ScenarioError) as caught:
            make()
        assert str(caught.value) == told
        assert caught.value.__cause__ is None
        assert caught.value.__suppress_context__
    with pytest.raises(ScenarioError) as caught:
        RcLowpass(capacitance="1 V", name=3)
    assert [problem.key for problem in caught.value.problems] == [
        "name",
        "resistance",
        "capacitance",
    ]


def test_a_value_read_from_json_is_told_in_the_same_words() -> None:
    """From JSON and from texts alone, faults are those of the constructor; so is broken JSON."""
    tables = {"stimulus": {"kind": "step"}, "adc": {"rate": "1 V", "high": "1 V"}}
    words = set()
    for make, given in (
        (Scenario.model_validate, tables),
        (Scenario.model_validate_strings, tables),
        (Scenario.model_validate_json, json.dumps(tables)),
        (Scenario.model_validate_json, json.dumps(tables).encode()),
    ):
        with pytest.raises(ScenarioError, match=r"adc\.rate: given \"1 V\"") as caught:
            make(given)  # type: ignore[arg-type]  # each takes its own
        words.add(str(caught.value))
    assert len(words) == 1
    with pytest.raises(ScenarioError, match=r"Point: this is no JSON: .* line 1 column 11"):
        Point.model_validate_json('{"level": }')
    assert Point.model_validate_json('{"level": "1 mV", "path": [1]}') == Point(
        level=1e-3, path=(1.0,)
    )


def test_values_inside_of_others_are_told_with_their_path() -> None:
    """A value made by another one is not refused by itself: the path starts at the outer one."""

    class Line(Value):
        """A value that holds others."""

        ends: tuple[Point, ...]

    with pytest.raises(ScenarioError) as caught:
        Line(ends=[Point(), {"level": "1 s"}])
    (problem,) = caught.value.problems
    assert problem.key == "ends[2].level"
    assert "'s' is a unit of time" in problem.text
    with pytest.raises(ScenarioError, match=r"Scenario: chain\[1\]\.gain \(gain\): given"):
        Scenario(
            stimulus={"kind": "step", "after": 1.0},
            chain=[{"kind": "gain", "gain": "x"}],
            adc={"rate": 1e3, "bits": 12, "high": 1.0},
        )


@pytest.mark.parametrize("number", [float("nan"), float("inf"), -float("inf")])
def test_numbers_are_finite(number: float) -> None:
    """Neither infinity nor NaN gets into a value."""
    with pytest.raises(ScenarioError):
        Point(path=(number,))


def test_lists_become_tuples_so_that_values_can_be_hashed_and_compared() -> None:
    """Equal parameters make equal values with equal hashes."""
    one, other = Point.model_validate({"path": [1, 2]}), Point(path=(1.0, 2.0))
    assert one == other
    assert hash(one) == hash(other)
    assert one != Point(path=(2.0, 1.0))


def test_defaults_are_validated() -> None:
    """A default outside of its bounds is found when the value is made."""

    class Wrong(Value):
        """A value with a wrong default."""

        level: Annotated[float, Field(gt=0.0)] = -1.0

    with pytest.raises(ScenarioError):
        Wrong()


def test_kind_table_has_the_kinds_in_the_order_of_the_union() -> None:
    """A union with or without its discriminator becomes kind -> class."""
    expected = {"point": Point, "other": Other}
    assert table(Point | Other) == expected
    assert table(Annotated[Point | Other, Field(discriminator="kind")]) == expected
    assert list(table(Other | Point)) == ["other", "point"]


def test_kind_tables_are_whole() -> None:
    """Every kind stands in its table once, under its own name."""
    for kinds, union in ((STAGES, AnyStage), (STIMULI, AnyStimulus)):
        assert kinds == table(union)
        for kind, model in kinds.items():
            assert model.model_fields["kind"].default == kind
        assert len(set(kinds.values())) == len(kinds)
