"""What the tables of a scan must keep together."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING

import numpy as np

from frontend_sim.analog.stages.base import Stage
from frontend_sim.converter import AnyAdc
from frontend_sim.converter.adc import Adc
from frontend_sim.errors import ModelError, nearest
from frontend_sim.quantities import TIME, as_text
from frontend_sim.scenario.checks.base import Check
from frontend_sim.scenario.rules import BrokenRule
from frontend_sim.scenario.scan import Channel, Scan
from frontend_sim.scenario.signal import PIN, UnitError, named, signal_units

if TYPE_CHECKING:
    from frontend_sim.scenario.settings import SimulationSettings

MOST_LOOKS = 1 << 17
"""Most looks in one scan."""

LINEAR = "stages behind the multiplexer must be linear"


def channel_faults(channels: Sequence[Channel], checks: Sequence[Check]) -> Iterator[BrokenRule]:
    """Return which channels share a name, and which checks name a channel that is not there."""
    taken: dict[str, int] = {}
    for position, channel in enumerate(channels):
        if channel.name in taken:
            yield (
                ("channel", position, "name"),
                f"the name {channel.name!r} is taken by channel {taken[channel.name] + 1}; give "
                "every channel a name of its own",
            )
        taken.setdefault(channel.name, position)
    for position, check in enumerate(checks):
        if check.channel is not None and check.channel not in taken:
            text = f"there is no channel {check.channel!r}{nearest(check.channel, taken)}"
            yield ("check", position, "channel"), text


def scan_faults(
    scan: Scan,
    names: Sequence[str],
    adc: AnyAdc,
    settings: SimulationSettings,
    channels: Sequence[Channel],
) -> Iterator[BrokenRule]:
    """Return what is wrong with the turns of a scan."""
    if not isinstance(adc, Adc):
        yield (
            ("adc", "kind"),
            "a scan takes a sampling converter; an oversampling one is not modelled behind a "
            "multiplexer",
        )
        return
    looks = len(scan.order or names) * scan.dwell * adc.looks
    if looks > MOST_LOOKS:
        yield (
            ("scan", "dwell"),
            f"one scan would take {looks:g} looks of the converter, more than {MOST_LOOKS:g}; "
            "lower dwell, or adc.averaging.count",
        )
        return
    yield from _order_faults(scan, names)
    yield from _time_faults(scan, adc)
    if scan.sampling == "simultaneous":
        yield from _simultaneous_faults(scan, names, adc)
    if scan.chain:
        yield from _shared_faults(scan, settings, channels)


def _order_faults(scan: Scan, names: Sequence[str]) -> Iterator[BrokenRule]:
    if scan.order is None:
        return
    for position, name in enumerate(scan.order):
        if name not in names:
            text = f"there is no channel {name!r}{nearest(name, names)}"
            yield ("scan", "order", position), text
    left = [name for name in names if name not in scan.order]
    if left and set(scan.order) <= set(names):
        those = ", ".join(map(repr, left))
        yield (
            ("scan", "order"),
            f"no visit to {those}; name every channel, or take its [[channel]] out",
        )


def _time_faults(scan: Scan, adc: Adc) -> Iterator[BrokenRule]:
    needed = scan.settle + scan.dwell / adc.rate
    if scan.slot is not None and needed > scan.slot * (1.0 + 1e-9):
        parts = f"{scan.dwell} / adc.rate = {as_text(scan.dwell / adc.rate, TIME, 6)}"
        settle = f"settle {as_text(scan.settle, TIME, 6)} and " if scan.settle else ""
        yield (
            ("scan", "slot"),
            f"given {as_text(scan.slot, TIME, 6)}, but a visit takes {as_text(needed, TIME, 6)}: "
            f"{settle}{parts} for acquisition and conversion; lengthen slot, shorten settle, or "
            "raise adc.rate",
        )
    if adc.averaging is not None and adc.averaging.interval is not None and scan.dwell > 1:
        yield (
            ("adc", "averaging", "interval"),
            "has no place in a scan with a dwell above 1, whose looks are evenly spaced; leave it "
            "out",
        )


def _simultaneous_faults(scan: Scan, names: Sequence[str], adc: Adc) -> Iterator[BrokenRule]:
    held = "a sample-and-hold has one value for each channel and scan"
    if scan.dwell > 1:
        yield ("scan", "dwell"), f"{held}; leave dwell out with simultaneous sampling"
    if scan.order is not None and len(scan.order) > len(names):
        yield ("scan", "order"), f"{held}; with simultaneous sampling name each channel once"
    if adc.averaging is not None:
        yield ("adc", "averaging"), f"{held}, and averaging would take it again; leave it out"
    if scan.chain:
        yield (
            ("scan", "chain"),
            "shared stages behind sample-and-holds are not modelled; take sequential sampling",
        )


def _shared_faults(
    scan: Scan, settings: SimulationSettings, channels: Sequence[Channel]
) -> Iterator[BrokenRule]:
    if settings.discretization != "exact":
        yield (
            ("simulation", "discretization"),
            "a scan with shared stages is stepped exactly; leave discretization out",
        )
    try:
        unit = signal_units(scan.chain)[0]
        if unit != PIN:
            text = f"the shared stages take a {named(unit)}; a multiplexer switches voltages"
            yield ("scan", "chain", 0), text
    except UnitError as error:
        yield ("scan", "chain", error.position), str(error)
    for position, stage in enumerate(scan.chain):
        if stage.limiter() is not None:
            yield ("scan", "chain", position), f"{LINEAR}; leave its limits out"
        elif _gathers(stage):
            yield (
                ("scan", "chain", position),
                "a pole at the origin behind the multiplexer gathers the channels without end; "
                "give the integrator a large but finite time constant",
            )
        if stage.transport_delay() > 0.0:
            yield (
                ("scan", "chain", position),
                "a transport delay behind the multiplexer is not modelled",
            )
    for number, channel in enumerate(channels):
        for position, stage in enumerate(channel.chain):
            if stage.limiter() is not None:
                yield (
                    ("channel", number, "chain", position),
                    "a stage that is not linear (a limit, the curve of a sensor) is not modelled "
                    "before shared stages; take it out, or the shared stages",
                )


def _gathers(stage: Stage) -> bool:
    """Return whether a stage has a pole at the origin; what is no circuit at all is told later."""
    try:
        return any(bool(np.any(block.poles == 0.0)) for block in stage.blocks())
    except ModelError:
        return False
