"""The JSON Schema for editors: whole, described, and right about right and wrong files."""

from __future__ import annotations

import tomllib
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import jsonschema
import pytest
from scenario_kinds import CHECK_SAMPLES, STAGE_SAMPLES, STIMULUS_SAMPLES
from scenario_samples import BASE, edited

from frontend_sim.analog.stages import STAGES
from frontend_sim.scenario import json_schema
from frontend_sim.scenario.checks import CHECKS
from frontend_sim.scenario.tables import keys, tables
from frontend_sim.stimulus import STIMULI

SCENARIOS = sorted(
    file
    for file in (Path(__file__).parents[2] / "scenarios").rglob("*.toml")
    if file.parent.name != "sets"  # these vary scenarios and are none themselves
)

DESIGN = (
    edited(
        (
            "Invented: a step behind an input filter and an amplifier",
            "A pump: after the valve slams",
        ),
        (
            'kind = "step"\nafter = "1 V"',
            'kind = "recording"\nfile = "valve_slam.csv"\ncolumn = "pressure"\ntime = "t"\n'
            'between = "line"',
        ),
    )
    + """
[[check]]
kind = "settling"
within = "0.5 LSB"
before = "12 ms"
"""
)
"""The example of the project's design."""


@pytest.fixture(scope="module")
def schema() -> dict[str, Any]:
    """Return the schema, made once."""
    return json_schema()


@pytest.fixture(scope="module")
def validator(schema: dict[str, Any]) -> jsonschema.Draft202012Validator:
    """Return a checker of files against the schema."""
    return jsonschema.Draft202012Validator(schema)


def properties(schema: Any) -> Iterator[tuple[str, dict[str, Any]]]:
    """Return every key of every table of a schema."""
    if isinstance(schema, dict):
        yield from schema.get("properties", {}).items()
        for value in schema.values():
            yield from properties(value)
    elif isinstance(schema, list):
        for value in schema:
            yield from properties(value)


def test_the_schema_is_a_schema(schema: dict[str, Any]) -> None:
    """It is valid in its own dialect and has a title."""
    jsonschema.Draft202012Validator.check_schema(schema)
    assert schema["$schema"] == "https://json-schema.org/draft/2020-12/schema"
    assert schema["title"]
    assert schema["description"]


def test_every_key_has_a_description_and_every_number_a_unit(schema: dict[str, Any]) -> None:
    """No key is left unexplained."""
    seen = 0
    for name, value in properties(schema):
        seen += 1
        assert value.get("description"), name
        if '"number"' in str(value).replace("'", '"') or '"integer"' in str(value):
            assert value.get("unit"), name
        if value.get("quantity") and value["unit"] != "1":
            assert value["description"].endswith(f"[{value['unit']}]"), name
    assert seen > 80


def test_the_schema_has_every_table_and_key(schema: dict[str, Any]) -> None:
    """The keys are those that the program reads, no more and no fewer."""
    known = {table.model.__name__: set(keys(table.model)) for table in tables()}
    found = {name: set(part["properties"]) for name, part in schema["$defs"].items()}
    found["Scenario"] = set(schema["properties"]) - {"channel", "scan"}
    assert found == known
    titles = {part["title"] for part in schema["$defs"].values()}
    assert {*STAGES, *STIMULI, *CHECKS} <= titles


def test_there_is_no_null(schema: dict[str, Any]) -> None:
    """TOML has no null, so the schema offers none."""
    assert "'null'" not in str(schema)
    assert "None" not in str(schema)


@pytest.mark.parametrize("file", SCENARIOS, ids=lambda file: file.name)
def test_example_scenarios_are_valid(
    validator: jsonschema.Draft202012Validator, file: Path
) -> None:
    """Every example of the project satisfies the schema."""
    validator.validate(tomllib.loads(file.read_text(encoding="utf-8")))


@pytest.mark.parametrize("text", [DESIGN, BASE], ids=["design", "sample"])
def test_the_designs_example_is_valid(
    validator: jsonschema.Draft202012Validator, text: str
) -> None:
    """The example that the design shows satisfies the schema."""
    validator.validate(tomllib.loads(text))


def test_a_table_of_every_kind_is_valid(validator: jsonschema.Draft202012Validator) -> None:
    """Samples of all kinds satisfy the schema, and every kind has its sample."""
    assert {sample["kind"] for sample in STIMULUS_SAMPLES} == set(STIMULI)
    assert {sample["kind"] for sample in STAGE_SAMPLES} == set(STAGES)
    assert {sample["kind"] for sample in CHECK_SAMPLES} == set(CHECKS)
    data = {**tomllib.loads(BASE), "check": CHECK_SAMPLES}
    for sample in STIMULUS_SAMPLES:
        validator.validate({**data, "stimulus": sample, "chain": STAGE_SAMPLES})


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ("bits = 12", "bits = 12.5"),
        ("bits = 12", "bits = 64"),
        ("bits = 12", "bit = 12"),
        ("bits = 12", ""),
        ('kind = "step"', 'kind = "stp"'),
        ('kind = "step"', ""),
        ('"20 kHz"', "true"),
        ('"20 kHz"', "-1"),
        ('"20 kHz"', "[1]"),
        ("gain = 2", "gain = 0.5"),
        ("seed = 7", "seed = 'x'"),
        ("seed = 7", "source = 'x'"),
        ("format = 1", "format = 2"),
        ('"exact"', '"exactly"'),
    ],
)
def test_wrong_files_are_not_valid(
    validator: jsonschema.Draft202012Validator, old: str, new: str
) -> None:
    """An editor marks what the program would refuse."""
    assert not validator.is_valid(tomllib.loads(edited((old, new))))
