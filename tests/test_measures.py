"""All measures in one place: the list, the page about it, and what loads."""

from __future__ import annotations

import re
import subprocess
import sys
from pathlib import Path

import pytest

from frontend_sim import measures

PAGE = Path(__file__).resolve().parents[1] / "docs" / "measures.md"


def test_every_measure_loads_and_is_documented() -> None:
    """Each name is a function with a docstring, and ``dir`` tells it."""
    for name in measures.__all__:
        found = getattr(measures, name)
        assert callable(found), name
        assert found.__doc__, name
        assert name in dir(measures)
    assert list(measures.__all__) == sorted(measures.__all__)


def test_the_page_lists_them_all() -> None:
    """The first column of the table names every measure, and no other function."""
    rows = [
        line for line in PAGE.read_text(encoding="utf-8").splitlines() if line.startswith("| `")
    ]
    named = {name for row in rows for name in re.findall(r"`(\w+)`", row.split("|")[1])}
    assert named == set(measures.__all__)


def test_an_unknown_measure_is_an_attribute_error() -> None:
    """A typing error looks as everywhere else."""
    with pytest.raises(AttributeError, match="no attribute 'fit_sin'"):
        measures.fit_sin  # noqa: B018 - the access is the test


def test_the_list_costs_nothing() -> None:
    """The names load what they need when they are asked for."""
    script = "import sys; import frontend_sim.measures; print('numpy' in sys.modules)"
    done = subprocess.run(
        [sys.executable, "-c", script], capture_output=True, text=True, check=True
    )
    assert done.stdout.strip() == "False"
