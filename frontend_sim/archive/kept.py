"""Which part of its run a record keeps."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from frontend_sim.archive.layout import KEPT
from frontend_sim.archive.text import describe
from frontend_sim.simulation.stretches import Stretches

if TYPE_CHECKING:
    import h5py

ABOUT = "first and last instant of each stretch of which conversions and waveforms are kept"


def put_stretches(group: h5py.Group, stretches: Stretches, conversions: int) -> None:
    """Write which part of a run is kept.

    Parameters
    ----------
    group : the root of a record, or the group of a channel
    stretches : of time that is kept
    conversions : of the whole run
    """
    spans = stretches.spans
    packing = {"chunks": spans.shape, "fletcher32": True} if len(spans) else {}
    dataset = group.create_dataset(KEPT, data=np.asarray(spans, "<f8"), **packing)
    describe(dataset, "s", ABOUT)
    dataset.attrs["around"] = stretches.around
    dataset.attrs["conversions"] = conversions


@dataclass(frozen=True, eq=False)
class Kept:
    """What a record keeps of its run.

    Parameters
    ----------
    stretches : of time
    conversions : of the whole run
    """

    stretches: Stretches
    conversions: int


def get_stretches(group: h5py.Group) -> Kept | None:
    """Read back what ``put_stretches`` wrote; None where all of the run is kept."""
    if KEPT not in group:
        return None
    dataset = group[KEPT]
    stretches = Stretches(dataset[...], float(dataset.attrs["around"]))
    return Kept(stretches, int(dataset.attrs["conversions"]))
