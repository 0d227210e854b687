"""How fast a night is: overhead per run, runs per minute, memory of the coordinator.

    python tests/benchmarks/replay.py [--quick]

10 000 short runs of 1000 conversions on two workers, storage, table, summary and page included, and
the same set with 100 runs for the memory. The overhead of a run is the processor time that the
larger night takes beyond the smaller one, coordinator and workers together, for each run, less that
of the library's own calls in this very process: time on the clock is noise on a busy machine.

Draws of an eighth-order chain over a recording of a million points, 20 000 conversions, against as
many passes of ``scipy.signal.sosfilt``: from part values to the pin at every conversion, the
preparation of each draw counted, on two cores as a night has them; in processor time as well.
Rounds of both alternate, and the quickest of each counts: what else the machine does only adds to a
round.

Exit status 1 if a target of the project is missed.
"""

from __future__ import annotations

import argparse
import json
import os
import resource
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from scenario_samples import edited  # found by the path above

SCENARIO = (
    edited(
        ('"10 kohm"', '{ value = "10 kohm", tolerance = "1 %" }'),
        ('"4.7 nF"', '{ value = "4.7 nF", tolerance = "5 %" }'),
        ('duration = "250 ms"', 'duration = "50 ms"'),
    )
    + """
[[check]]
kind = "level"
at = "10 ms"
at_least = "-100 mV"
"""
)

WORKERS = 2
POINTS, POINT_RATE, RATE, CORNER = 1_000_000, 1e6, 20e3, 8e3
LEAST_RATIO = 10.0
MOST_SECONDS, MOST_OVERHEAD, MOST_GROWTH = 180.0, 10e-3, 1.25


def night(count: int, directory: Path) -> None:
    """Run a night of so many draws, and print what it took; runs in a process of its own."""
    from resident import resident_peak

    from frontend_sim.replay import replay_set

    (directory / "base.toml").write_text(SCENARIO)
    (directory / "set.toml").write_text(
        f'base = "base.toml"\nkeep = "nothing"\n[draws]\ncount = {count}\n'
    )
    done = replay_set(directory / "set.toml", directory / "runs", workers=WORKERS)
    assert done.complete
    done.table()
    used = [resource.getrusage(who) for who in (resource.RUSAGE_SELF, resource.RUSAGE_CHILDREN)]
    told = {
        "seconds": done.seconds,
        "processor": sum(each.ru_utime + each.ru_stime for each in used),
        "memory": resident_peak(),
    }
    begun = time.monotonic()
    page(directory)
    print(json.dumps({**told, "page": time.monotonic() - begun}))


def page(directory: Path) -> None:
    """Summarize a night, and write its page."""
    from frontend_sim.archive.set_table import open_set
    from frontend_sim.present.page import night_page, write_page
    from frontend_sim.summary import summarize

    write_page(night_page(summarize(open_set(directory / "runs"))), directory / "page.html")


def alone(count: int) -> float:
    """Return what one run takes in this process, from values to verdicts [s]."""
    from frontend_sim import Simulation, evaluate_checks, parse_scenario

    scenario = parse_scenario(SCENARIO)
    evaluate_checks(Simulation(scenario))
    begun = time.process_time()
    for _ in range(count):
        evaluate_checks(Simulation(scenario))
    return (time.process_time() - begun) / count


def side_by_side(count: int) -> tuple[float, float]:
    """Return the processor time of a draw, and of a pass of ``sosfilt`` [s]."""
    import numpy as np
    from drives import InMemory
    from scipy import signal

    from frontend_sim.analog.chain import chain_of
    from frontend_sim.analog.stages import Butterworth
    from frontend_sim.simulation.draws import Draws
    from frontend_sim.simulation.linear import Axis, Linear

    points = np.random.default_rng(0).standard_normal(POINTS)
    drive, axis = InMemory(points, POINT_RATE), Axis(1 / RATE, 2 / RATE, uniform=True)
    instants = np.arange(int(POINTS / POINT_RATE * RATE)) / RATE
    sections = signal.butter(8, CORNER, fs=POINT_RATE, output="sos")

    def draws() -> None:
        chains = [
            chain_of([Butterworth(order=8, corner=CORNER * (1.0 + 1e-4 * k))]) for k in range(count)
        ]
        models = [Linear.of(chain, [drive], [1], "settled", axis) for chain in chains]
        found = Draws.of(models)
        assert found is not None
        found.outputs(instants)

    def filters() -> None:
        for _ in range(count):
            signal.sosfilt(sections, points)

    ours, theirs = [], []
    draws()
    for _ in range(9):
        ours.append(processor(draws) / count)
        theirs.append(processor(filters) / count)
    return min(ours), min(theirs)


def processor(work: Callable[[], None]) -> float:
    """Return the processor time of a call [s]."""
    begun = time.process_time()
    work()
    return time.process_time() - begun


def measured(count: int) -> dict[str, float]:
    """Run a night in another process."""
    with tempfile.TemporaryDirectory() as folder:
        command = [sys.executable, __file__, "--night", str(count), "--directory", folder]
        done = subprocess.run(command, check=True, capture_output=True, text=True)
        return dict(json.loads(done.stdout))


def main() -> int:
    """Measure, print, and tell whether the targets are met."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--quick", action="store_true", help="a tenth of the runs")
    parser.add_argument("--night", type=int, help=argparse.SUPPRESS)
    parser.add_argument("--directory", type=Path, help=argparse.SUPPRESS)
    given = parser.parse_args()
    if given.night:
        night(given.night, given.directory)
        return 0
    count = 1000 if given.quick else 10_000
    few, many = measured(100), measured(count)
    single = alone(100)
    total = many["seconds"] * 10_000 / count + many["page"]
    overhead = (many["processor"] - few["processor"]) / (count - 100) - single
    growth = many["memory"] / few["memory"]
    print(f"{os.cpu_count()} cores, {count} runs of 1000 conversions on {WORKERS} workers")
    print(f"night of 10 000 runs      {total:8.1f} s    at most {MOST_SECONDS:g}")
    print(f"summary and page in it    {many['page']:8.1f} s")
    print(f"one run alone             {single * 1e3:8.2f} ms")
    print(f"overhead of a run         {overhead * 1e3:8.2f} ms   at most {MOST_OVERHEAD * 1e3:g}")
    print(f"memory, {count} to 100 runs  {growth:8.2f}      at most {MOST_GROWTH:g}")
    draw, passed = side_by_side(32)
    ratio = WORKERS * passed / draw
    print(f"a draw {draw * 1e3:.2f} ms, a pass of sosfilt {passed * 1e3:.2f} ms")
    print(f"draws, two workers          {ratio:8.2f} x    at least {LEAST_RATIO:g}")
    met = total <= MOST_SECONDS and overhead <= MOST_OVERHEAD and growth <= MOST_GROWTH
    met = met and ratio >= LEAST_RATIO
    return 0 if met else 1


if __name__ == "__main__":
    sys.exit(main())
