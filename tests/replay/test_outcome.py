"""The digest of a run: it tells runs that differ, and nothing else."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from frontend_sim.measure.result import Result
from frontend_sim.replay.outcome import Fingerprint
from frontend_sim.simulation import RunBlock

RESULTS = (Result("level", 1.0, "V", verdict="holds"),)


def block(start: int = 0, stop: int = 8) -> RunBlock:
    """Some conversions in a row, with everything that a block may have."""
    number = np.arange(start, stop)
    time = number.astype(np.float64)
    volts = np.sin(time)
    return RunBlock(
        start, time, volts, number, volts, number > 5, time, {"filter": volts}, volts + 1.0, -volts
    )


def digest(*blocks: RunBlock) -> str:
    """Take the digest of a run of one channel."""
    fingerprint = Fingerprint()
    assert list(fingerprint.watching(("", each) for each in blocks)) == [("", b) for b in blocks]
    return fingerprint.digest(RESULTS, ("a note",))


@pytest.mark.parametrize("name", ["pin", "codes", "overrange", "stimulus", "held"])
def test_one_value_that_differs_is_told(name: str) -> None:
    """One conversion of one array differs as little as it can."""
    values = getattr(block(), name).copy()
    values[3] = np.nextafter(values[3], np.inf) if values.dtype == float else values[3] ^ 1
    changed: dict[str, Any] = {name: values}
    assert digest(replace(block(), **changed)) != digest(block())


def test_a_waveform_that_differs_is_told() -> None:
    """Its values count, and so does the point that they belong to."""
    (values,) = block().waveform.values()
    changed = values.copy()
    changed[-1] = np.nextafter(changed[-1], np.inf)
    others = [{"filter": changed}, {"amplifier": values}, {}]
    found = {digest(replace(block(), waveform=waveform)) for waveform in others}
    assert len(found | {digest(block())}) == 4


def test_a_cut_is_not_told() -> None:
    """Blocks may be cut anywhere."""
    assert digest(block(0, 3), block(3, 8)) == digest(block())


def test_results_notes_and_channels_are_told() -> None:
    """Another result, another note, another name of the channel."""
    found = set()
    for channel, results, notes in [
        ("", RESULTS, ("a note",)),
        ("other", RESULTS, ("a note",)),
        ("", (replace(RESULTS[0], value=np.nextafter(1.0, 2.0)),), ("a note",)),
        ("", RESULTS, ()),
    ]:
        fingerprint = Fingerprint()
        fingerprint.add(channel, block())
        found.add(fingerprint.digest(results, notes))
    assert len(found) == 4
