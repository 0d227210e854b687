"""The border to libraries that read files: whatever they raise becomes one error of ours."""

from __future__ import annotations

import warnings
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from frontend_sim.errors import RecordingError


@contextmanager
def border(file: Path, fault: str) -> Iterator[None]:
    """Turn every error inside into a RecordingError ``file: fault: what the library said``.

    A damaged file makes a library raise any of a dozen kinds, from the depths of its parser.
    """
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # of odd headers; what they lead to is checked
            yield
    except RecordingError:
        raise
    except Exception as error:  # noqa: BLE001 - a dozen kinds, from any parser
        said = " ".join(str(error).split())
        raise RecordingError(f"{file}: {fault}: {said or type(error).__name__}") from None
