"""Scenarios changed at random: a scenario or one of our own errors comes out, and nothing else."""

from __future__ import annotations

import copy
import datetime
import re
from typing import Any

import tomli_w
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from scenario_kinds import CHECK_SAMPLES, STAGE_SAMPLES, STIMULUS_SAMPLES

from frontend_sim.errors import InputError
from frontend_sim.scenario import check_scenario, parse_scenario, scenario_text
from frontend_sim.scenario.tables import keys, tables

JARGON = re.compile(
    r"pydantic|union_tag|input_value|input_type|Input should|Value error|discriminator|<class|"
    r"function-|_parsing|Traceback"
)

KEYS = sorted({key for table in tables() for key in keys(table.model)})
KINDS = sorted({table.kind for table in tables() if table.kind})

NUMBERS = st.one_of(
    st.integers(-3, 40),
    st.integers(-(10**40), 10**40),
    st.floats(),
    st.sampled_from([1e308, -1e308, 5e-324, 1e18, 1e-15, 10**400]),
)
TEXTS = st.one_of(
    st.sampled_from(KINDS),
    st.sampled_from(["low-pass", "band-stop", "bilinear", "exact", "auto", "rest", "stimulus"]),
    st.builds(
        lambda number, unit: f"{number:.3g} {unit}",
        st.floats(-1e30, 1e30),
        st.sampled_from(["V", "Hz", "s", "F", "ohm", "rad/s", "V/s", "%", "m", "dB", "LSB", "K"]),
    ),
    st.text(max_size=12),
)
DATES = st.sampled_from(
    [datetime.date(2020, 1, 1), datetime.time(1, 2), datetime.datetime(2020, 1, 1, 1, 2)]
)
SCALARS = st.one_of(NUMBERS, TEXTS, st.booleans(), DATES)
JUNK = st.recursive(
    SCALARS,
    lambda inner: (
        st.lists(inner, max_size=3)
        | st.dictionaries(st.sampled_from(["kind", *KEYS]), inner, max_size=3)
    ),
    max_leaves=6,
)
NAMES = st.one_of(st.sampled_from([*KEYS, "source", "kind"]), st.text(max_size=6))


@st.composite
def right(draw: st.DrawFn) -> dict[str, Any]:
    """Draw a scenario that is right, of any kinds."""
    return copy.deepcopy(
        {
            "format": 1,
            "title": "invented",
            "seed": 3,
            "stimulus": draw(st.sampled_from([s for s in STIMULUS_SAMPLES if "file" not in s])),
            "chain": draw(st.lists(st.sampled_from(STAGE_SAMPLES), max_size=3, unique_by=id)),
            "adc": {"rate": "20 kHz", "bits": 12, "high": "3.3 V", "first": "1 ms"},
            "simulation": {"duration": "250 ms", "waveform_rate": "1 MHz", "initial": "rest"},
            "check": draw(st.lists(st.sampled_from(CHECK_SAMPLES), max_size=3, unique_by=id)),
        }
    )


@st.composite
def right_scan(draw: st.DrawFn) -> dict[str, Any]:
    """Draw a scan that is right, of any kinds."""
    data = draw(right())
    stimulus, chain = data.pop("stimulus"), data.pop("chain")
    names = ["oil", "water"]
    data["channel"] = [
        {"name": name, "stimulus": copy.deepcopy(stimulus), "chain": copy.deepcopy(chain)}
        for name in names
    ]
    data["scan"] = draw(
        st.sampled_from(
            [
                {},
                {"order": ["oil", "water", "oil"], "dwell": 3, "discard": 2, "slot": "1 ms"},
                {"sampling": "simultaneous", "skew_frequency": "50 Hz"},
                {"settle": "1 us", "chain": [{"kind": "gain", "gain": 2}]},
            ]
        )
    )
    return data


def places(data: Any) -> list[tuple[Any, Any]]:
    """Return every table or array, with each of its keys or positions."""
    found = []
    for key, value in data.items() if isinstance(data, dict) else enumerate(data):
        found.append((data, key))
        if isinstance(value, (dict, list)):
            found += places(value)
    return found


@st.composite
def mutated(draw: st.DrawFn) -> str:
    """Draw a right scenario, and drop, rename, add or replace up to three keys."""
    data = draw(st.one_of(right(), right_scan()))
    for _ in range(draw(st.integers(1, 3))):
        spots = places(data)
        if not spots:
            break
        table, key = draw(st.sampled_from(spots))
        change = draw(st.sampled_from(["drop", "rename", "add", "replace", "replace", "replace"]))
        if change == "drop":
            del table[key]
        elif change == "rename" and isinstance(table, dict):
            table[draw(NAMES)] = table.pop(key)
        elif change == "add" and isinstance(table, dict):
            table[draw(NAMES)] = draw(JUNK)
        else:
            table[key] = draw(JUNK)
    return tomli_w.dumps(data)


@settings(
    max_examples=500, deadline=5000, suppress_health_check=[HealthCheck.too_slow]
)  # the deadline catches what hangs
@given(mutated())
def test_a_mutated_scenario_is_read_or_told(text: str) -> None:
    """Only our own errors come out, in our own words, and what is read can be written again."""
    try:
        scenario = parse_scenario(text)
        check_scenario(scenario)
    except InputError as error:
        message = str(error)
        assert not JARGON.search(message.replace(text, "")), message
        return
    assert parse_scenario(scenario_text(scenario)).resolved() == scenario.resolved()


@settings(max_examples=300, deadline=5000)
@given(st.one_of(right(), right_scan()), st.data())
def test_a_mutilated_text_is_read_or_told(data: dict[str, Any], draw: st.DataObject) -> None:
    """Characters that are lost or inserted anywhere in the text do no harm either."""
    text = tomli_w.dumps(data)
    for _ in range(draw.draw(st.integers(1, 4))):
        start = draw.draw(st.integers(0, len(text)))
        stop = min(start + draw.draw(st.integers(0, 8)), len(text))
        inserted = draw.draw(st.text(alphabet="[]{}=\"'\\#,.\n 0e-µV", max_size=4))
        text = text[:start] + inserted + text[stop:]
    try:
        check_scenario(parse_scenario(text))
    except InputError as error:
        assert str(error)  # noqa: PT017 - there may be no error at all


@settings(max_examples=200, deadline=5000)
@given(st.text(max_size=200))
def test_any_text_is_told(text: str) -> None:
    """A text that is no scenario is refused, whatever it is."""
    try:
        parse_scenario(text)
    except InputError:
        return
    raise AssertionError("no text without [stimulus] and [adc] is a scenario")
