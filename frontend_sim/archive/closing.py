"""What is closed at the end of a ``with``."""

from __future__ import annotations

from abc import ABC, abstractmethod
from types import TracebackType
from typing import Self


class Closing(ABC):
    """A context manager that closes itself, whatever ends the body."""

    @abstractmethod
    def close(self) -> None:
        """Give back what is held."""

    def __enter__(self) -> Self:
        """Return the same."""
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        """Close."""
        self.close()
