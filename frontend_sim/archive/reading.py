"""The border between HDF5 and the reader of a record."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from frontend_sim.errors import InputError, RecordError


@contextmanager
def reading(path: Path, what: str) -> Iterator[None]:
    """Turn whatever HDF5 raises on a damaged or foreign file into a RecordError on ``what``."""
    try:
        yield
    except InputError:
        raise
    except (OSError, RuntimeError, KeyError, ValueError, TypeError, AttributeError) as error:
        reason = str(error).partition("\n")[0] or type(error).__name__
        raise RecordError(
            f"{path}: {what} cannot be read ({reason}); the record is damaged: restore it "
            "from a copy, or run its scenario again"
        ) from error
