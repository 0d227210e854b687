"""Names of points of the chain as names of datasets, and back."""

from __future__ import annotations

import re
from urllib.parse import unquote

from frontend_sim.archive.layout import TIME

_UNSAFE = re.compile(r"[%/\x00-\x1f\x7f]")

_RESERVED = (".", "..", TIME)


def dataset_name(point: str) -> str:
    """Return a name that HDF5 takes for one object, different for different points.

    A slash would open a group and a NUL end the name, so these, ``%`` and the other control
    characters become ``%`` and two hexadecimal digits, as in a URL; so does the first character
    of a name that has a meaning of its own. An empty name becomes ``%``.
    """
    if point == "":
        return "%"
    if point in _RESERVED:
        return f"%{ord(point[0]):02X}{point[1:]}"
    return _UNSAFE.sub(lambda found: f"%{ord(found[0]):02X}", point)


def point_name(dataset: str) -> str:
    """Return the point whose ``dataset_name`` this is."""
    return "" if dataset == "%" else unquote(dataset)
