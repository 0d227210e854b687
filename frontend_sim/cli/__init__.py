"""Arguments become calls of the library, and errors become one message and an exit status."""

from frontend_sim.cli.command import main

__all__ = ["main"]
