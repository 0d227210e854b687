"""How fast the engine is, as ratios against peers measured in the same run.

    python tests/benchmarks/engine.py [--quick]

Each pair is timed back to back, several times, and the median of the ratios is told: a single ratio
is noise on a busy machine. Exit status 1 if a target of the project is missed.
"""

from __future__ import annotations

import argparse
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from statistics import median
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from frontend_sim.scenario.model import Scenario

TESTS = str(Path(__file__).resolve().parents[1])
sys.path.insert(0, TESTS)

POINT_RATE, CONVERSION_RATE, CORNER = 1e6, 20e3, 8e3


@dataclass
class Row:
    """One line of the result: what was compared, the ratio, the target it has to meet."""

    name: str
    ratio: float
    target: float
    at_least: bool

    @property
    def met(self) -> bool:
        """Whether the target is met."""
        return self.ratio >= self.target if self.at_least else self.ratio <= self.target


def seconds(work: Callable[[], object]) -> float:
    """Time one call."""
    start = time.perf_counter()
    work()
    return time.perf_counter() - start


def paired(ours: Callable[[], object], theirs: Callable[[], object], runs: int) -> float:
    """Return the median of theirs/ours, measured back to back after one warm-up of each."""
    ours()
    theirs()
    return median(seconds(theirs) / seconds(ours) for _ in range(runs))


def chain_rows(points: int, runs: int) -> list[Row]:
    """Recorded points through an eighth-order chain, against libraries that step every point."""
    import control
    from drives import InMemory
    from scipy import signal

    from frontend_sim.analog.chain import chain_of
    from frontend_sim.analog.stages import Butterworth
    from frontend_sim.simulation.engine import BLOCK
    from frontend_sim.simulation.linear import Axis, Linear

    u = np.random.default_rng(0).standard_normal(points)
    chain = chain_of([Butterworth(order=8, corner=CORNER)])
    drive = InMemory(u, POINT_RATE)
    sections = signal.butter(8, CORNER, fs=POINT_RATE, output="sos")

    def through(rate: float) -> Callable[[], None]:
        def work() -> None:
            model = Linear.of(
                chain, [drive], [1], "settled", Axis(1.0 / rate, 2.0 / rate, uniform=True)
            )
            states = model.start()
            count = int(points / POINT_RATE * rate)
            for start in range(0, count, BLOCK):
                instants = np.arange(start, min(start + BLOCK, count), dtype=np.float64)
                instants /= rate
                states, _ = model.advance(states, start, instants)

        return work

    def filtered() -> object:
        return signal.sosfilt(sections, u)

    few = 20_000
    system = chain.state_space()
    lti = (system.A, system.B, system.C, system.D)
    times = np.arange(few) / POINT_RATE

    def by_scipy() -> object:
        return signal.lsim(lti, u[:few], times)

    def by_control() -> object:
        return control.forced_response(system, times, u[:few])

    conversions, waveform = through(CONVERSION_RATE), through(POINT_RATE)
    per_point, few_runs = points / few, max(runs // 2, 1)
    only, whole = paired(conversions, filtered, runs), paired(waveform, filtered, runs)
    scipy = per_point * paired(conversions, by_scipy, few_runs)
    theirs = per_point * paired(conversions, by_control, few_runs)
    name = "conversions only, per point, times as fast as"
    return [
        Row("conversions only, times as fast as sosfilt", only, 4.0, True),
        Row("full waveform, times as fast as sosfilt", whole, 1.0, True),
        Row(f"{name} scipy.signal.lsim", scipy, 1000.0, True),
        Row(f"{name} control.forced_response", theirs, 1000.0, True),
    ]


def timed_scenario(
    stimulus: dict[str, object], rate: float, count: int, **simulation: object
) -> Scenario:
    """Return an eighth-order chain behind a noisy amplifier."""
    from frontend_sim.scenario.model import Scenario

    amplifier = {
        "kind": "noninverting-amplifier", "gain": 2, "gain_bandwidth": "1 MHz",
        "voltage_noise": "10 nV/sqrt(Hz)",
    }  # fmt: skip
    return Scenario.model_validate(
        {
            "stimulus": stimulus,
            "chain": [amplifier, {"kind": "butterworth", "order": 8, "corner": CORNER}],
            "adc": {"rate": rate, "bits": 16, "low": -8.0, "high": 8.0},
            "simulation": {"duration": count / rate, **simulation},
        }
    )


def timed_run(
    stimulus: dict[str, object], rate: float, count: int, **simulation: object
) -> Callable[[], None]:
    """Return a run of ``timed_scenario``, block by block."""
    from frontend_sim.simulation import Simulation

    scenario = timed_scenario(stimulus, rate, count, **simulation)

    def work() -> None:
        for _ in Simulation(scenario).blocks():
            pass

    return work


def analytic_rows(count: int, runs: int) -> list[Row]:
    """A sine costs per conversion: not per period, and twice as many conversions twice as much."""

    def run(frequency: float, conversions: int) -> Callable[[], None]:
        sine = {"kind": "sine", "amplitude": 1.0, "frequency": frequency}
        return timed_run(sine, CONVERSION_RATE, conversions, noise=False)

    fast = paired(run(9.7, count), run(97e3, count), runs)
    faster = paired(run(97e3, count), run(9.7e6, count), runs)
    twice = paired(run(997.0, count), run(997.0, 2 * count), runs)
    return [
        Row("a sine of 10 000 times the frequency, time", fast, 1.5, False),
        # Beyond 1000 radians between conversions a row has one instant, see ``row_length``.
        Row("a sine of 200 periods between conversions against 5, time", faster, 15.0, False),
        Row("twice the conversions of a sine, time", twice, 2.5, False),
    ]


def numbers(count: int) -> Callable[[], object]:
    """Return drawing as many normal numbers as the noise of ``timed_run`` needs."""
    from frontend_sim.simulation import Simulation

    scenario = timed_scenario({"kind": "step", "after": 1.0}, CONVERSION_RATE, count)
    states = len(Simulation(scenario).chain.noise_model(0.1 * CONVERSION_RATE / count).a)
    generator = np.random.Generator(np.random.Philox(0))
    return lambda: generator.standard_normal(states * count)


def noise_rows(count: int, runs: int) -> list[Row]:
    """Noise costs per conversion, whatever else is computed or passes between two of them.

    What noise adds to a run is compared: with the waveform at 10 and at 100 points for each
    conversion, and with a hundredfold interval between conversions.
    """
    sine = {"kind": "sine", "amplitude": 1.0, "frequency": 9.7}

    def added(rate: float, **simulation: object) -> Callable[[], float]:
        loud = timed_run(sine, rate, count, noise=True, **simulation)
        quiet = timed_run(sine, rate, count, noise=False, **simulation)
        loud()
        quiet()
        return lambda: seconds(loud) - seconds(quiet)

    def ratio(ours: Callable[[], float], theirs: Callable[[], float]) -> float:
        pairs = [(theirs(), ours()) for _ in range(2 * runs)]
        return median(more for more, _ in pairs) / median(less for _, less in pairs)

    rate = CONVERSION_RATE
    few = added(rate, waveform_rate=10.0 * rate, waveform_points=["stimulus"])
    many = added(rate, waveform_rate=100.0 * rate, waveform_points=["stimulus"])
    alone, slow = added(rate), added(rate / 100.0)
    drawn = ratio(lambda: seconds(numbers(count)), alone)
    return [
        Row("noise of a run, times drawing its random numbers", drawn, 6.0, False),
        Row("cost of noise, waveform ten times as dense", ratio(few, many), 1.5, False),
        Row("cost of noise, interval a hundred times as long", ratio(alone, slow), 1.5, False),
    ]


def start_row(runs: int) -> Row:
    """Help costs at most three times an import of numpy."""

    def help_page() -> object:
        command = [sys.executable, "-m", "frontend_sim", "--help"]
        return subprocess.run(command, check=True, capture_output=True)

    def numpy() -> object:
        return subprocess.run([sys.executable, "-c", "import numpy"], check=True)

    ratio = paired(numpy, help_page, runs)
    return Row("frontend-sim --help, times python -c 'import numpy'", ratio, 3.0, False)


MEMORY = """
import sys
sys.path.insert(0, sys.argv[2])
from resident import resident_peak
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation import Simulation
scenario = Scenario.model_validate({
    "stimulus": {"kind": "recording", "file": sys.argv[1], "rate": 1e6},
    "chain": [{"kind": "butterworth", "order": 8, "corner": 8e3}],
    "adc": {"rate": 20e3, "bits": 16, "low": -8.0, "high": 8.0},
})
count = sum(len(block.codes) for block in Simulation(scenario).blocks())
print(count, resident_peak())
"""


def memory_row(points: int) -> Row:
    """Points from a file, in a process of its own: the largest resident size [GiB]."""
    with tempfile.TemporaryDirectory() as folder:
        file = Path(folder) / "points.npy"
        data = np.lib.format.open_memmap(file, mode="w+", dtype=np.float32, shape=(points,))
        rng = np.random.default_rng(0)
        for start in range(0, points, 1 << 22):
            part = data[start : start + (1 << 22)]
            part[:] = rng.standard_normal(len(part), dtype=np.float32)
        del data
        command = [sys.executable, "-c", MEMORY, str(file), TESTS]
        done = subprocess.run(command, check=True, capture_output=True, text=True)
    gibibytes = int(done.stdout.split()[1]) / 2**30
    return Row(f"{points:g} points from a file, resident memory in GiB", gibibytes, 1.0, False)


def main() -> int:
    """Measure everything and print a table."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--quick", action="store_true", help="a tenth of the points, fewer runs")
    quick = parser.parse_args().quick
    points, runs = (1_000_000, 3) if quick else (10_000_000, 9)
    rows = [
        *chain_rows(points, runs),
        *analytic_rows(points // 10, runs),
        *noise_rows(points // 10, runs),
        start_row(runs),
        memory_row(10 * points),
    ]
    for row in rows:
        sign, verdict = (">=" if row.at_least else "<="), ("met" if row.met else "MISSED")
        print(f"{row.ratio:10.3g}  {sign} {row.target:<6g} {verdict:<6}  {row.name}")
    return 0 if all(row.met for row in rows) else 1


if __name__ == "__main__":
    sys.exit(main())
