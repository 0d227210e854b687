"""Text in HDF5: UTF-8, no NUL."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from frontend_sim.archive.layout import PLAIN

if TYPE_CHECKING:
    import h5py


def clean(text: str) -> str:
    """Return text that HDF5 can hold: a string ends at the first NUL there, and is UTF-8.

    A NUL becomes the sign for it (U+2400), half a surrogate pair its escape.
    """
    return text.replace("\0", "\u2400").encode("utf-8", "backslashreplace").decode()


def put_text(
    group: h5py.Group, name: str, text: str | Sequence[str], description: str
) -> h5py.Dataset:
    """Write one text, or a row of texts, as a dataset of UTF-8 strings."""
    import h5py

    one = isinstance(text, str)
    value = clean(text) if isinstance(text, str) else [clean(item) for item in text]
    shape = () if one else (len(text),)
    dataset = group.create_dataset(name, shape=shape, dtype=h5py.string_dtype())
    if one or len(text) > 0:
        dataset[...] = value
    describe(dataset, PLAIN, description)
    return dataset


def describe(dataset: h5py.Dataset, units: str, description: str) -> None:
    """Give a dataset its unit and a sentence that says what it holds."""
    dataset.attrs["units"] = units
    dataset.attrs["description"] = description
