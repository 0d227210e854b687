"""What a nonlinear stage costs per point of its grid, beside one pass of a filter section.

    python tests/benchmarks/nonlinear.py [--quick]

A run of one second with a grid of 1 MHz for its limited stage, the same chain without the limits,
and one pass of ``scipy.signal.sosfilt`` with one section over as many points are timed back to
back. The cost of the stage is the difference of the two runs per point of the grid: the signal in
front of it at every point, its own steps, and what the filter behind makes of them. What else the
machine does only adds, so the quickest of many rounds counts; a round goes through all stages, as a
shared processor may be slower for some seconds. Exit status 1 if a stage costs more than 60 ns per
point; on a machine that is busy the ratio tells more.
"""

from __future__ import annotations

import argparse
import sys
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

GRID, CONVERSIONS, TARGET = 1e6, 20e3, 60.0

AMPLIFIER: dict[str, Any] = {
    "kind": "noninverting-amplifier", "gain": 2, "gain_bandwidth": 1e5, "slew_rate": 2e4,
    "output_low": 0.1, "output_high": 3.2,
}  # fmt: skip
STAGES: dict[str, dict[str, Any]] = {
    "amplifier, limits never reached": {**AMPLIFIER, "output_low": -9, "output_high": 9},
    "amplifier at its rails most of the time": AMPLIFIER,
    "amplifier of two poles at its rails": {**AMPLIFIER, "second_pole": 5e5},
    "Sallen-Key at its rails": {
        "kind": "sallen-key", "resistance_1": 1e4, "resistance_2": 1e4, "capacitance_1": 2e-9,
        "capacitance_2": 1e-9, "gain_bandwidth": 1e6, "output_low": 0.1, "output_high": 1.6,
    },
    "slew-limit": {"kind": "slew-limit", "slew_rate": 5e3, "bandwidth": 1e5},
    "rail-limit": {"kind": "rail-limit", "low": 0.1, "high": 1.6},
    "clamp": {"kind": "clamp", "low": 0, "high": 1.5, "resistance": 1e3, "capacitance": 1e-9,
              "diode_resistance": 40},
}  # fmt: skip
FILTER = {"kind": "butterworth", "order": 4, "corner": 8e3}


def seconds(work: Callable[[], object]) -> float:
    """Time one call."""
    start = time.perf_counter()
    work()
    return time.perf_counter() - start


def chain(stage: dict[str, Any]) -> list[Any]:
    """Return a filter, the stage, and a filter, as stages."""
    from frontend_sim.analog.stages import STAGES as KINDS

    rows = (FILTER, stage, FILTER)
    return [KINDS[row["kind"]].model_validate(row) for row in rows]


def runs_of(
    stage: dict[str, Any], points: int, recorded: bool
) -> tuple[Callable[[], object], Callable[[], object]]:
    """Return a run through a limited stage, and one through its linear model."""
    from drives import InMemory

    from frontend_sim.analog.cut import CutChain
    from frontend_sim.simulation.limited import Limited
    from frontend_sim.simulation.linear import Axis, Linear
    from frontend_sim.stimulus.sine import Tone

    tone = Tone(1.2, 997.0, 0.3, 0.9)
    drive = InMemory(tone.values(np.arange(points + 5) / GRID), GRID) if recorded else tone
    cut = CutChain.of(chain(stage))
    axis = Axis(1.0 / CONVERSIONS, 2.0 / CONVERSIONS, uniform=True)
    instants = np.arange(int(points / GRID * CONVERSIONS)) / CONVERSIONS

    def limited() -> object:
        model = Limited.of(cut, [drive], [3], "settled", axis, GRID, points / GRID)
        return model.advance(model.start(), 0, instants)

    def linear() -> object:
        model = Linear.of(cut.chain, [drive], [cut.points[-1]], "settled", axis)
        return model.advance(model.start(), 0, instants)

    return limited, linear


def main() -> int:
    """Time all stages, print a table, return the exit status."""
    from scipy import signal

    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--quick", action="store_true", help="fewer points, fewer runs")
    quick = parser.parse_args().quick
    points, runs = (250_000, 5) if quick else (1_000_000, 25)
    section = signal.butter(2, 0.1, output="sos")
    noise = np.random.default_rng(0).standard_normal(points)
    rows = {
        f"{name}, {'recording' if recorded else 'sine'}": runs_of(stage, points, recorded)
        for recorded in (True, False)
        for name, stage in STAGES.items()
    }
    for limited, linear in rows.values():
        limited()
        linear()
    quickest = {label: np.full(3, np.inf) for label in rows}
    for _ in range(runs):
        for label, (limited, linear) in rows.items():
            works = (limited, linear, lambda: signal.sosfilt(section, noise))
            times = np.array([seconds(work) for work in works])
            quickest[label] = np.minimum(quickest[label], times)
    missed = False
    print(f"{'':50s} {'stage':>8s} {'whole run':>10s} {'section':>8s} {'ratio':>6s}")
    for label, times in quickest.items():
        whole, less, other = 1e9 * times / points
        ratio = (whole - less) / other
        print(f"{label:50s} {whole - less:8.1f} {whole:10.1f} {other:8.1f} {ratio:6.2f}")
        missed |= whole - less > TARGET
    print(f"ns per point of the grid; target for the stage: at most {TARGET:g}")
    return int(missed)


if __name__ == "__main__":
    sys.exit(main())
