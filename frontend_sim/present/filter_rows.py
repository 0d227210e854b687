"""What the converter's own filter does, for the terminal."""

from __future__ import annotations

import math

import numpy as np

from frontend_sim.measure.look_weights import LookWeights
from frontend_sim.measure.response.gain import magnitude_of
from frontend_sim.measure.response.inspection import Inspection
from frontend_sim.present.numbers import engineering, fixed


def filter_rows(inspection: Inspection) -> list[tuple[str, str]]:
    """Return rows about an inspection's converter filter: corner, notches, delay, and its images.

    A filter of samples passes again around the rate of its samples, where the chain alone
    attenuates.
    """
    found, sinc = inspection.filter, LookWeights.of(inspection.adc).sinc
    if found is None or sinc is None:
        return []
    rows = [
        ("-3 dB corner", engineering(found.corner, "Hz", 4)),
        ("notches at multiples of", engineering(found.first_notch, "Hz", 4)),
    ]
    rows += [
        (
            f"at least {each.attenuation:g} dB around the first notch",
            f"{engineering(each.low, 'Hz', 4)} to {engineering(each.high, 'Hz', 4)}",
        )
        for each in found.notch_widths
    ]
    rows += [
        ("noise bandwidth", engineering(found.noise_bandwidth, "Hz", 4)),
        ("group delay", engineering(found.group_delay, "s", 4)),
        ("from a restart to the first valid code", engineering(found.latency, "s", 4)),
        (
            f"passes again at its sample rate, {engineering(sinc.modulator_rate, 'Hz', 4)}; the "
            "chain there",
            _of_the_chain(inspection, sinc.modulator_rate),
        ),
    ]
    return rows


def _of_the_chain(inspection: Inspection, rate: float) -> str:
    largest = inspection.frequency.largest.value
    gain = float(magnitude_of(inspection.response)(np.array([rate]))[0])
    if not 0.0 < largest < math.inf or gain == 0.0:
        return "nothing passes" if gain == 0.0 else "no largest gain"
    down = 20.0 * math.log10(largest / gain)
    return f"{fixed(down, 1, 'dB')} below the largest gain"
