"""Names, files and seeds of runs."""

from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.replay import file_name, seed_of

TEXT = st.text(min_size=1, max_size=200)


@given(TEXT)
def test_a_file_name_is_one_that_every_system_takes(name: str) -> None:
    """No separator, no reserved character, not hidden, not too long."""
    file = file_name(name)
    assert not set(file) & set('/\\:*?"<>|\0')
    assert not file.startswith((".", "-"))
    assert len(file.encode()) < 200


@given(st.sets(TEXT, min_size=2, max_size=20))
def test_different_runs_have_different_files(names: set[str]) -> None:
    """Also where the file system does not tell capital letters from small ones."""
    assert len({file_name(name).casefold() for name in names}) == len(names)


@given(st.integers(0, 2**63 - 1), TEXT)
def test_a_seed_is_that_of_the_set_and_the_name(seed: int, name: str) -> None:
    """It is a valid seed, and the same whenever it is asked for."""
    found = seed_of(seed, name)
    assert 0 <= found < 2**63
    assert found == seed_of(seed, name)
    assert found != seed_of(seed, name + " ")


def test_readable_names_stay_readable() -> None:
    """The names that sets make are the names of files."""
    name = "resistance=12kohm,temperature=85degC,draw 0042"
    assert file_name(name) == f"{name}.h5"
