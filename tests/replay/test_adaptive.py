"""Draws are added until what they say is tight, and no longer."""

from __future__ import annotations

from pathlib import Path

import pytest
from nights import BASE, made_set

from frontend_sim.archive.set_table import SetTable, open_set
from frontend_sim.errors import InputError
from frontend_sim.measure.statistics import pass_rate, stability
from frontend_sim.replay import replay_set
from frontend_sim.summary import summarize

RULES = 'seed = 3\nkeep = "nothing"\n[draws]\ncount = {count}\n[draws.until]\n{until}\n'


def night(directory: Path, until: str, count: int = 2000, name: str = "night") -> SetTable:
    """Replay a set of draws in this process."""
    file = made_set(directory, RULES.format(count=count, until=until), scenario=BASE)
    done = replay_set(file, directory / name, on="in-process")
    assert done.ran + done.kept == done.tally.planned
    return open_set(directory / name)


def test_draws_go_on_until_the_yield_is_narrow(tmp_path: Path) -> None:
    """The interval is as narrow as asked for, and one block less would not have done."""
    table = night(tmp_path, 'yield = "25 %"\nblock = 40')
    count = len(table.names)
    assert count % 40 == 0
    assert 40 < count < 400
    assert table.complete
    assert table.planned == count
    rate = summarize(table).rate
    assert rate is not None
    assert rate.width <= 0.25
    held = table.verdicts[: count - 40] == "holds"
    assert pass_rate(int(held.sum()), count - 40).width > 0.25


def test_the_yield_of_each_group_is_narrow(tmp_path: Path) -> None:
    """Draws at two resistors are two samples; both are as tight as asked for."""
    vary = '[[vary]]\nkey = "chain[1].resistance"\nvalues = ["10 kohm", "9.8 kohm"]\n'
    rules = RULES.format(count=2000, until='yield = "25 %"\nblock = 40\n')
    replay_set(made_set(tmp_path, rules + vary), tmp_path / "night", on="in-process")
    table = open_set(tmp_path / "night")
    half = len(table.names) // 2
    held = [int((part == "holds").sum()) for part in (table.verdicts[:half], table.verdicts[half:])]
    assert max(pass_rate(one, half).width for one in held) <= 0.25
    fewer = [
        int((part[: half - 40] == "holds").sum())
        for part in (table.verdicts[:half], table.verdicts[half:])
    ]
    assert max(pass_rate(one, half - 40).width for one in fewer) > 0.25


def test_draws_go_on_until_digits_are_stable(tmp_path: Path) -> None:
    """One digit of the deviation of every check is stable in blocks of 40, by JCGM 101."""
    table = night(tmp_path, "digits = 1\nblock = 40")
    values = table.checks[0].value
    assert 80 <= len(values) < 2000
    assert stability(list(values.reshape(-1, 40)), 1).tight
    assert not stability(list(values.reshape(-1, 40)[:-1]), 1).tight


def test_a_night_ends_at_its_count(tmp_path: Path) -> None:
    """What would take more draws than allowed stops there, with all of them."""
    table = night(tmp_path, 'yield = "1 %"\nblock = 40', count=90)
    assert len(table.names) == 90
    assert table.complete


def test_the_end_does_not_depend_on_how_it_was_reached(tmp_path: Path) -> None:
    """A night that had more draws already ends at the same draw, with the same digest."""
    first = night(tmp_path, 'yield = "25 %"\nblock = 40')
    other = tmp_path / "other"
    other.mkdir()
    file = made_set(other, 'seed = 3\nkeep = "nothing"\n[draws]\ncount = 300\n', scenario=BASE)
    replay_set(file, other / "night", on="in-process")
    again = night(other, 'yield = "25 %"\nblock = 40')
    assert again.digest == first.digest
    assert len(again.names) == len(first.names) < 300


@pytest.mark.parametrize(
    ("until", "told"),
    [
        ("block = 100", 'yield = "2 %"'),
        ("digits = 0", "digits"),
        ("digits = 1\nblock = 10", "block"),
        ('yield = "200 %"', "yield"),
        ("digit = 1", "did you mean 'digits'"),
    ],
)
def test_wrong_ends_are_refused(tmp_path: Path, until: str, told: str) -> None:
    """What says when it is enough must say so."""
    with pytest.raises(InputError, match=told):
        night(tmp_path, until)
    assert not (tmp_path / "night").exists()
