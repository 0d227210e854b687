"""The public names are those listed by hand, load when asked for, and cost nothing before."""

from __future__ import annotations

import subprocess
import sys

import pytest

import frontend_sim as fe

HEAVY = ("numpy", "scipy", "control", "h5py", "matplotlib", "numba", "pydantic", "pint", "rich")


def test_every_public_name_loads() -> None:
    """Each name of ``__all__`` is there, is documented, and is told by ``dir``."""
    for name in fe.__all__:
        assert getattr(fe, name).__doc__, name
        assert name in dir(fe)


def test_an_unknown_name_is_an_attribute_error() -> None:
    """A typing error in Python looks as everywhere else."""
    with pytest.raises(AttributeError, match="no attribute 'simulat'"):
        fe.simulat  # noqa: B018 - the access is the test


@pytest.mark.parametrize("argument", ["--help", "--version"])
def test_help_loads_no_heavy_library(argument: str) -> None:
    """Help is quick because it loads nothing that takes long."""
    script = (
        "import sys; from frontend_sim.cli import main; status = main([sys.argv[1]]); "
        f"print(status, sorted(set({HEAVY!r}) & set(sys.modules)))"
    )
    done = subprocess.run(
        [sys.executable, "-c", script, argument], capture_output=True, text=True, check=True
    )
    assert done.stdout.splitlines()[-1] == "0 []"
