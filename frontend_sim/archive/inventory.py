"""A digest of all of a record that no checksum of HDF5 covers."""

from __future__ import annotations

import hashlib
import json
from typing import TYPE_CHECKING, Any

from frontend_sim.archive.layout import INVENTORY

if TYPE_CHECKING:
    import h5py

_OF_HDF5 = ("CLASS", "NAME", "DIMENSION_LIST", "REFERENCE_LIST")
"""Attributes by which HDF5 ties axes to data; the ties themselves are listed instead."""


def inventory(file: h5py.File) -> str:
    """Return the SHA-256 over every object's name, attributes, axes and text.

    HDF5 guards the numbers (Fletcher's checksum per chunk) and its own structure, but strings of
    variable length, which hold the scenario, the notes and most attributes, by nothing.
    """
    found: dict[str, Any] = {"/": _attributes(file)}
    file.visititems(lambda name, item: found.update({name: _entry(item)}))
    text = json.dumps(found, sort_keys=True, separators=(",", ":"), default=repr)
    return hashlib.sha256(text.encode()).hexdigest()


def _entry(item: h5py.HLObject) -> dict[str, Any]:
    import h5py

    entry: dict[str, Any] = {"attributes": _attributes(item)}
    if isinstance(item, h5py.Dataset):
        entry["axes"] = [[scale.name for scale in axis.values()] for axis in item.dims]
        if h5py.check_string_dtype(item.dtype) is not None:
            entry["text"] = _plain(item.asstr(errors="surrogateescape")[...])
    return entry


def _attributes(item: h5py.HLObject) -> dict[str, Any]:
    names = [name for name in item.attrs if name not in (*_OF_HDF5, INVENTORY)]
    return {name: _plain(item.attrs[name]) for name in names}


def _plain(value: Any) -> Any:
    return value.tolist() if hasattr(value, "tolist") else value
