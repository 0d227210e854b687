"""The scenarios that a night varies, made of what its table keeps of them."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

from frontend_sim.errors import InputError


def scenario_of(values: Mapping[str, Any]) -> Any:
    """Return the scenario of a table, None where this version cannot build it."""
    from frontend_sim.archive.rebuild import rebuild, rebuild_scan

    make = rebuild_scan if "channel" in values else rebuild
    try:
        return make(dict(values), {}, "", Path("set"))
    except InputError:
        return None
