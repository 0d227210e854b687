"""The reference of the scenario file lists every key of every kind, and no other."""

from __future__ import annotations

import importlib.util
import re
from pathlib import Path
from types import ModuleType

import pytest

from frontend_sim.scenario import check_scenario, parse_scenario
from frontend_sim.scenario.tables import keys, tables

DOCS = Path(__file__).parents[2] / "docs"


@pytest.fixture(scope="module")
def script() -> ModuleType:
    """Return the script that writes the tables."""
    spec = importlib.util.spec_from_file_location("scenario_tables", DOCS / "scenario_tables.py")
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


@pytest.fixture(scope="module")
def text() -> str:
    """Return the page."""
    return (DOCS / "scenario.md").read_text(encoding="utf-8")


def test_the_page_is_up_to_date(script: ModuleType, text: str) -> None:
    """Where this fails, run ``python docs/scenario_tables.py``."""
    assert script.page(text) == text


def test_every_key_is_listed_and_no_other(text: str) -> None:
    """The keys of each table on the page are those that the program reads."""
    listed = [
        set(re.findall(r"^\| `(\w+)` \|", block, re.M))
        for block in re.findall(r"(?:^\|.*\n)+", text, re.M)
    ]
    known = [set(keys(table.model)) for table in tables()]
    assert listed == known


def test_every_kind_has_a_heading(text: str) -> None:
    """All kinds are on the page, in the order of the program."""
    headings = re.findall(r'^### kind = "(.+)"$', text, re.M)
    assert headings == [table.kind for table in tables() if table.kind]


def test_no_key_is_without_an_explanation() -> None:
    """Every key but the kind has a description of its own, without a full stop."""
    for table in tables():
        for name, field in keys(table.model).items():
            if name != "kind":
                assert field.description, f"{table.place}: {name}"
                assert not field.description.endswith(".")


def test_the_example_runs(text: str) -> None:
    """The example at the top of the page is a right scenario."""
    blocks = re.findall(r"```toml\n(.*?)```", text, re.S)
    assert blocks
    for block in blocks:
        check_scenario(parse_scenario(block))
