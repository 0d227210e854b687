"""Memory is bounded by the block, not by the run."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

SCRIPT = """
import sys
from archived import Cut, made_run, scenario
from resident import resident_peak
from frontend_sim.archive import record_run

class Long(Cut):
    def blocks(self, progress=None):
        for _ in range(int(sys.argv[2])):
            yield from super().blocks()

record_run(Long(made_run(scenario(), 50_000, ("stimulus", "pin")), 50_000), sys.argv[1])
print(resident_peak())
"""


def peak(path: Path, blocks: int) -> float:
    """Return the largest memory of a process that records some blocks [MiB]."""
    places = [str(Path(__file__).parents[1]), *filter(None, sys.path)]
    done = subprocess.run(
        [sys.executable, "-c", SCRIPT, str(path), str(blocks)],
        capture_output=True,
        text=True,
        check=True,
        env={**os.environ, "PYTHONPATH": os.pathsep.join(places)},
    )
    return float(done.stdout) / 2**20


@pytest.mark.skipif(os.name != "posix", reason="needs the system's account of memory")
def test_ten_times_the_run_takes_no_more_memory(tmp_path: Path) -> None:
    """60 blocks make a record of 100 MB and take at most 25 MiB more than 6 blocks do.

    The allowance is for chunks that HDF5 keeps: 8 datasets of at most 1 MiB each, and the pages
    of the file that is read back.
    """
    short, long = peak(tmp_path / "a.h5", 6), peak(tmp_path / "b.h5", 60)
    assert (tmp_path / "b.h5").stat().st_size > 80e6
    assert long - short < 25.0
