"""What a user may ask for, and what is refused, with the reason."""

from __future__ import annotations

from typing import Any

import pytest
from checked import FILTER, made
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.errors import InputError
from frontend_sim.quantities import Part
from frontend_sim.scenario.key import value_at
from frontend_sim.solve import solve_for, varied
from frontend_sim.solve.trial import named_checks

SETTLING = {"kind": "settling", "within": "0.5 LSB", "before": "300 us"}
SCENARIO = made(SETTLING)

REFUSED: dict[str, tuple[str, Any, Any, dict[str, Any], str]] = {
    "unknown key": ("chain[1].resistanc", 1, 2, {}, "did you mean 'resistance'"),
    "no number": ("chain[1].name", 1, 2, {}, "has no number"),
    "no key": ("[1]", 1, 2, {}, "is no key"),
    "reversed": ("adc.rate", "2 kHz", "1 kHz", {}, "bounds are reversed, 2 kHz lies above 1 kHz"),
    "equal": ("adc.rate", "2 kHz", "2 kHz", {}, "both bounds are 2 kHz"),
    "unit": ("adc.rate", "2 V", "3 V", {}, "unit of voltage"),
    "below the key's limits": ("chain[1].resistance", 0, "1k", {}, "must be above 0 ohm"),
    "above the key's limits": ("adc.bits", 4, 40, {}, "less than or equal to 32"),
    "below the limit of a limit": ("check[1].within", "-1 mV", "1 mV", {}, "given -1 mV; a limit"),
    "half a bit": ("adc.bits", 4.5, 8, {}, "whole numbers only"),
    "two units of a limit": ("check[1].within", "1 LSB", "1 mV", {}, "in one unit"),
    "tolerance": ("chain[1].resistance.tolerance", "1 %", "120 %", {}, "below 100 %"),
    "tolerance of none": ("adc.rate.tolerance", 0, 0.1, {}, "has no keys inside"),
    "series": ("chain[1].resistance", 1, 2, {"series": "E25"}, "no series 'E25'"),
    "series of whole numbers": ("adc.bits", 4, 8, {"series": "E6"}, "whole number"),
    "empty series": ("chain[1].resistance", 101, 119, {"series": "E12"}, "fewer than two members"),
    "series from zero": ("adc.first", 0, 1e-3, {"series": "E6"}, "above 0"),
    "logarithm of zero": ("adc.first", 0, 1e-3, {"scale": "log"}, "needs bounds above 0"),
    "endless": ("seed", 0, 1e12, {}, "nearer to each other"),
    "too fine": ("adc.rate", 1e3, 1e4, {"tolerance": 1e-12}, "must lie from"),
}


@pytest.mark.parametrize("name", REFUSED)
def test_what_is_refused(name: str) -> None:
    """One message with the key and what to do; nothing is run."""
    key, low, high, more, message = REFUSED[name]
    with pytest.raises(InputError) as caught:
        varied(SCENARIO, key, low, high, **more)
    assert message in str(caught.value)
    if name not in ("no key", "series", "too fine"):
        assert key.partition("[")[0] in str(caught.value)


@settings(max_examples=100, deadline=None)
@given(low=st.text(max_size=12), high=st.text(max_size=12), key=st.text(max_size=20))
def test_any_text_is_read_or_refused(key: str, low: str, high: str) -> None:
    """Whatever is typed, the answer is a domain or an error of this package."""
    for name in (key, "chain[1].resistance", "check[1].within"):
        try:
            found = varied(SCENARIO, name, low, high)
        except InputError:
            continue
        assert found.domain.spread(3)


def test_values_are_placed_and_told() -> None:
    """A part keeps its spread, a limit its unit, a whole number is one."""
    part = {**FILTER, "resistance": {"value": "10k", "tolerance": "5 %"}}
    scenario = made(SETTLING, chain=[part])
    key = varied(scenario, "chain[1].resistance", "1k", "20k")
    assert key.key == "chain[input filter].resistance"
    placed = value_at(key.placed(scenario, 4.7e3), key.key)
    assert (placed, key.text(4.7e3)) == (Part(4.7e3, 0.05), "4.7 kohm")
    key = varied(scenario, "check[1].within", "0.1 LSB", "2 LSB")
    assert key.text(0.25) == "0.25 LSB"
    assert value_at(key.placed(scenario, 0.25), "check[1].within").unit == "LSB"
    key = varied(scenario, "adc.bits", 8, 16)
    assert value_at(key.placed(scenario, 9.0), "adc.bits") == 9
    assert key.text(9.0) == "9"
    key = varied(made(SETTLING), "chain[1].resistance.tolerance", "0.1 %", "5 %")
    assert (key.text(0.02), key.of_tolerance, key.now) == ("2 %", True, 0.0)
    placed = value_at(key.placed(made(SETTLING), 0.02), "chain[1].resistance")
    assert placed == Part(10e3, 0.02)


def test_value_and_tolerance_of_one_part_go_together() -> None:
    """In whatever order they are placed, neither undoes the other."""
    value = varied(SCENARIO, "chain[1].resistance", "1k", "20k")
    tolerance = varied(SCENARIO, "chain[1].resistance.tolerance", "1 %", "5 %")
    first = tolerance.placed(value.placed(SCENARIO, 2e3), 0.02)
    second = tolerance.placed(SCENARIO, 0.02)
    assert value_at(first, "chain[1].resistance") == Part(2e3, 0.02)
    again = varied(second, "chain[1].resistance", "1k", "20k").placed(second, 2e3)
    assert value_at(again, "chain[1].resistance") == Part(2e3, 0.02)


def test_checks_are_named_or_counted() -> None:
    """By name or place; an unknown one names the nearest, and none at all says what to add."""
    scenario = made(SETTLING, {"kind": "clipping", "name": "never clipped"})
    assert named_checks(scenario, ["2", "settling"]) == ("never clipped", "settling")
    with pytest.raises(InputError, match="did you mean 'settling'"):
        named_checks(scenario, ["setling"])
    with pytest.raises(InputError, match=r"add a \[\[check\]\]"):
        named_checks(made(), [])


def test_only_named_checks_count() -> None:
    """A check that is not named may fail, and the proof is without it."""
    scenario = made(SETTLING, {"kind": "corner", "at_least": "1 MHz"})
    assert solve_for(scenario, "chain[1].resistance", "1k", "100k", "most").value is None
    found = solve_for(scenario, "chain[1].resistance", "1k", "100k", "most", checks=["settling"])
    assert found.answer is not None
    assert [row.name for row in found.answer.results] == ["settling"]


def test_everything_or_nothing_passes() -> None:
    """Both are answers: the bound itself, or none, with what is nearest."""
    found = solve_for(SCENARIO, "chain[1].resistance", 10, 100, "most")
    assert (found.shape, found.value, found.beyond) == ("all pass", 100.0, None)
    assert "the bound of what was looked at" in found.sentences()[0]
    found = solve_for(SCENARIO, "chain[1].resistance", "100k", "1M", "least")
    assert (found.shape, found.value) == ("none passes", None)
    assert "nearest at 100 kohm, where settling fails" in found.sentences()[0]
    assert found.as_dict()["value"] is None


def test_what_cannot_be_run_does_not_pass() -> None:
    """A wait beyond the end of the run is no value that passes, and the reason is told."""
    found = solve_for(SCENARIO, "check[1].before", "10 us", "1 s", "most")
    assert found.value == pytest.approx(19e-3)
    assert found.beyond is not None
    assert "the run ends at 20 ms" in found.sentences()[0]
    late = made(SETTLING, adc={"first": "1 ms"})
    with pytest.raises(InputError, match=r"no value of simulation\.duration can be run"):
        solve_for(late, "simulation.duration", "1 us", "2 us", "least")


def test_too_many_corners_are_refused() -> None:
    """Eleven parts have 2048 corners; the message says how many are looked at."""
    parts = [
        {"kind": "rc-lowpass", "resistance": {"value": 1e3, "tolerance": 0.01}, "capacitance": 1e-9}
    ] * 11
    with pytest.raises(InputError, match="2048 corners"):
        solve_for(made(SETTLING, chain=parts), "check[1].before", "1 us", "1 ms", "least",
                  corners=True)  # fmt: skip


@pytest.mark.parametrize("points", [2, 1001])
def test_points_have_limits(points: int) -> None:
    """Too few tell nothing, too many never end."""
    with pytest.raises(InputError, match="from 3 to 1000"):
        solve_for(SCENARIO, "adc.rate", "20 kHz", "1 MHz", "least", points=points)
