"""A scheduler's end of the command, at any time, ends it with the usual status."""

from __future__ import annotations

import subprocess
import sys

import pytest


def ended(script: str) -> subprocess.CompletedProcess[str]:
    """Run a script in a process of its own."""
    return subprocess.run([sys.executable, "-c", script], capture_output=True, text=True)


@pytest.mark.skipif(sys.platform == "win32", reason="Windows has no SIGTERM to handle")
@pytest.mark.parametrize("name", ["SIGTERM", "SIGHUP"])
def test_a_signal_while_libraries_load(name):
    """As soon as the command's first module is there, a signal means status 130 and a message."""
    done = ended(
        "import os, signal, sys\n"
        "sys.argv = ['/bin/frontend-sim', 'schema']\n"
        "class Loader:\n"
        "    def find_spec(self, name, path=None, target=None):\n"
        "        if name == 'click':\n"
        f"            os.kill(os.getpid(), signal.{name})\n"
        "sys.meta_path.insert(0, Loader())\n"
        "import frontend_sim.cli\n"
    )
    assert done.returncode == 130
    assert done.stderr == "interrupted; nothing half written is left\n"


def test_an_interruption_in_code_that_a_library_makes():
    """Python would end itself by SIGINT where exec() was interrupted; the status is 130 still."""
    done = ended(
        "import frontend_sim.cli.command as cli\n"
        "cli.command.main = lambda *_, **__: exec('raise KeyboardInterrupt')\n"
        "cli.main()\n"
    )
    assert done.returncode == 130
    assert "interrupted" in done.stderr


def test_other_programs_keep_their_handlers():
    """Importing the command's package into another program leaves signals alone."""
    done = ended(
        "import signal, frontend_sim.cli\n"
        "assert signal.getsignal(signal.SIGTERM) is signal.SIG_DFL\n"
    )
    assert done.returncode == 0, done.stderr
