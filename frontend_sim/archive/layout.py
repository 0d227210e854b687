"""The layout of a record, version 1: what is stored where, in which unit, and how."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from frontend_sim.converter import AnyAdc

FORMAT = "frontend_sim record"
FORMAT_VERSION = 1
SCAN_FORMAT_VERSION = 2
"""Version of the record of a scan; that of one channel has stayed as it was."""
OF_A_PART = 2
"""What both have more where a record keeps a part of its run alone: versions 3 and 4."""

SCENARIO = "scenario"
RESOLVED = "resolved"
NOTES = "notes"
ADC = "adc"
WAVEFORM = "waveform"
MEASURE = "measure"
CHECK = "check"
CHANNEL = "channel"
KEPT = "kept"

TIME = "time"
"""Name of the time axis within ``/adc`` and ``/waveform``."""

INVENTORY = "inventory_sha256"
"""Root attribute with the digest of all that no checksum of HDF5 covers, see ``inventory.py``."""

PLAIN = "1"
"""Unit of a count, of a flag and of text."""


@dataclass(frozen=True)
class Column:
    """One numeric dataset that grows along time.

    Parameters
    ----------
    name : of the dataset within its group
    field : of ``RunBlock`` and ``Run`` that it holds
    units, description : its attributes
    kind : type of its elements; None is the smallest integer that holds the converter's codes
    compressed : by gzip after a byte shuffle. Time, codes, the voltages of codes and flags shrink
        to 2, 47, 40 and 1 % (measured on a noisy sine at 12 bits); values with a full mantissa to
        78 % only, at a tenth of the speed, and stay as they are.
    """

    name: str
    field: str
    units: str
    description: str
    kind: str | None = "<f8"
    compressed: bool = False


CONVERSIONS = (
    Column(TIME, "time", "s", "instant of sampling", compressed=True),
    Column("code", "codes", PLAIN, "code of the conversion", kind=None, compressed=True),
    Column("pin", "pin", "V", "exact analog value at the instant, before noise and rounding"),
    Column("voltage", "voltage", "V", "the code read back as a voltage", compressed=True),
    Column(
        "overrange", "overrange", PLAIN, "whether the code was clipped", kind="?", compressed=True
    ),
)

NUMBER = Column(
    "number", "", PLAIN, "number of the conversion in the whole run", kind="<i8", compressed=True
)
"""Kept where a record keeps a part of its run."""

STIMULUS = "stimulus"
"""Name of the dataset, and of the field of ``RunBlock``, with what arrived at a sensor."""


HELD = Column("held", "held", "V", "voltage of the sampling capacitor, before noise and rounding")
"""Kept where the converter has an input network; the pin is then that without its load."""


def stimulus_column(unit: str) -> Column:
    """Return the column of a stimulus that is no voltage, of some SI unit."""
    about = "physical quantity at the sensor, at the instant"
    return Column(STIMULUS, STIMULUS, unit or PLAIN, about)


WAVEFORM_TIME = Column(
    TIME, "waveform_time", "s", "time axis of all points of the chain", compressed=True
)

INTEGERS = ("<u1", "<i1", "<u2", "<i2", "<u4", "<i4", "<i8")


def code_type(adc: AnyAdc) -> str:
    """Return the smallest integer type that holds every code of a converter, as NumPy names it."""

    def holds(name: str) -> bool:
        limits = np.iinfo(name)
        return limits.min <= adc.lowest_code and adc.highest_code <= limits.max

    return next(name for name in INTEGERS if holds(name))
