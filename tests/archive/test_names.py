"""Names of points as names of datasets."""

from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.archive.names import dataset_name, point_name

NAMES = st.text(st.characters(exclude_categories=["Cs"]), max_size=12) | st.sampled_from(
    ["", ".", "..", "time", "%", "%2F", "a/b", "/", "%74ime", "µ Ω", "a\0b", "two\nlines"]
)


@given(NAMES)
def test_a_name_comes_back(name: str) -> None:
    """Escaping loses nothing, so different points never meet in one dataset."""
    assert point_name(dataset_name(name)) == name


@given(NAMES)
def test_hdf5_takes_it_for_one_object(name: str) -> None:
    """No slash that opens a group, no NUL that ends the name, no name with another meaning."""
    escaped = dataset_name(name)
    assert escaped not in ("", ".", "..", "time")
    assert not set(escaped) & set("/\0\n")


def test_common_names_stay_readable() -> None:
    """A usual name is its own dataset; a slash is escaped as in a URL."""
    assert dataset_name("input filter") == "input filter"
    assert dataset_name("Verstärker Ω") == "Verstärker Ω"
    assert dataset_name("in/out") == "in%2Fout"
