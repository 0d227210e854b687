"""Large files: read in blocks, in bounded memory, at the speed of compiled code."""

from __future__ import annotations

import os
import subprocess
import sys
import time
from pathlib import Path

import numpy as np
import pytest
from recorded import forget, recording, wav

MEASURE = """
import sys
from resident import resident_peak
from frontend_sim.converter.adc import Adc
from frontend_sim.scenario import Scenario
from frontend_sim.simulation import Simulation
from frontend_sim.stimulus.recording import Recording
from frontend_sim.analog.stages import Butterworth
stimulus = Recording(file=sys.argv[1], rate=1e6)
adc = Adc(rate=2e3, bits=12, low=-1.0, high=1.0)
chain = (Butterworth(order=4, corner=500.0),)
simulation = Simulation(Scenario(stimulus=stimulus, chain=chain, adc=adc))
count = sum(len(block.codes) for block in simulation.blocks())
print(count, resident_peak())
"""
POINTS = 100_000_000


def _empty_npy(file: Path) -> None:
    np.lib.format.open_memmap(file, "w+", np.float32, (POINTS,)).flush()


def _empty_wav(file: Path) -> None:
    file.write_bytes(wav(b"", promised=2 * POINTS))
    with file.open("r+b") as out:
        out.truncate(out.seek(0, 2) + 2 * POINTS)


@pytest.mark.slow
@pytest.mark.skipif(sys.platform == "win32", reason="peak memory is measured with POSIX means")
@pytest.mark.parametrize(("name", "make"), [("a.npy", _empty_npy), ("a.wav", _empty_wav)])
def test_a_hundred_million_points_stay_below_a_gibibyte(
    tmp_path: Path, name: str, make: object
) -> None:
    """A whole run over 100 million points of float32, and of 16 bits, peaks below 1 GiB.

    The files are holes that read as zeros, so they take no room on the disk.
    """
    file = tmp_path / name
    make(file)  # type: ignore[operator]  # one of the two functions above
    tests = str(Path(__file__).parents[2])
    done = subprocess.run(
        [sys.executable, "-c", MEASURE, str(file)],
        capture_output=True,
        text=True,
        check=True,
        env={**os.environ, "PYTHONPATH": tests},
    )
    count, most = map(int, done.stdout.split())
    assert count == POINTS // 500
    assert most < 2**30


@pytest.mark.slow
def test_tables_are_parsed_in_compiled_code(tmp_path: Path) -> None:
    """A clean table takes at most four times the time of ``numpy.loadtxt``, layout and all.

    Both are measured in this process, the best of three; row by row it would be thirty times.
    """
    file = tmp_path / "a.csv"
    numbers = np.random.default_rng(1).standard_normal(300_000)
    rows = (f"{i / 1000:.3f},{number:.5f}\n" for i, number in enumerate(numbers.tolist()))
    file.write_text("t,x\n" + "".join(rows))

    def ours() -> None:
        forget()
        recording(file, time="t").known_length()

    def theirs() -> None:
        np.loadtxt(file, delimiter=",", skiprows=1)

    best = {}
    for run in (ours, theirs):
        laps = []
        for _ in range(3):
            begun = time.process_time()
            run()
            laps.append(time.process_time() - begun)
        best[run] = min(laps)
    assert best[ours] < 4.0 * best[theirs]
