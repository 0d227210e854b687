"""Words that agree with their number."""

import re
from pathlib import Path

import pytest

import frontend_sim
from frontend_sim.quantities.counting import counted, share_of


def test_words_agree_with_their_number() -> None:
    """One of a thing is one, all others are several, with a verb where one follows."""
    assert [counted(count, "run") for count in (0, 1, 2, 1000)] == [
        "0 runs", "1 run", "2 runs", "1,000 runs",
    ]  # fmt: skip
    told = [counted(count, "run has", "runs have") for count in (1, 2)]
    assert told == ["1 run has", "2 runs have"]
    assert counted(2, "stretch", "stretches") == "2 stretches"


@pytest.mark.parametrize(
    ("count", "total", "text"),
    [(3, 1200, "3 of 1,200 runs"), (0, 1, "0 of 1 run"), (12, 12, "all 12 runs"),
     (1, 1, "the only run")],
)  # fmt: skip
def test_a_part_of_several_things(count: int, total: int, text: str) -> None:
    """All of them, or the only one, are named so."""
    assert share_of(count, total, "run") == text


COUNT = re.compile(
    r"\{(?:len\([^{}]*\)|[\w.]*count[\w.]*|[\w.\[\]']*(?:matched|runs|planned|missing))(?::,)?\} "
    r"(?:runs|draws|conversions|checks|records|channels|points|keys)\b"
)


def test_no_text_counts_by_itself() -> None:
    """No message joins a number of things to a plural that one of them would not have."""
    package = Path(frontend_sim.__file__).parent
    found = [
        f"{file.relative_to(package)}: {match.group()}"
        for file in sorted(package.rglob("*.py"))
        for match in COUNT.finditer(file.read_text("utf-8"))
    ]
    assert found == []
