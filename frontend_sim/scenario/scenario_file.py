"""What every scenario has in common, however many channels it has."""

from __future__ import annotations

from abc import abstractmethod
from collections.abc import Callable, Mapping
from pathlib import Path as FilePath
from typing import Annotated, Any, Literal

from pydantic import BeforeValidator, Field, ValidationError

from frontend_sim.errors import Problem
from frontend_sim.scenario.digest import digest_of
from frontend_sim.scenario.rules import Path, newer_format
from frontend_sim.values import Value

FORMAT = 1
"""Version of the scenario format that this program reads."""


class ScenarioFile(Value):
    """The head of a scenario file, its digest, and where its values stand.

    ``source`` holds the file as it was written, and is empty for a scenario made in Python.
    """

    format: Annotated[Literal[1], BeforeValidator(newer_format(FORMAT))] = Field(
        default=1, description="version of the scenario format"
    )
    title: str = Field(default="", max_length=200, description="what the scenario shows")
    seed: int = Field(
        default=0, ge=0, lt=2**63, strict=True, description="seed of everything random in the run"
    )
    source: str = Field(default="", exclude=True, repr=False, description="the file as written")

    @classmethod
    def _problems(cls, error: ValidationError, given: Any) -> tuple[Problem, ...]:
        """Return what is wrong, as of a file with these tables."""
        from frontend_sim.scenario.explain import explain
        from frontend_sim.scenario.vary import as_tables

        if not isinstance(given, Mapping):
            return super()._problems(error, given)
        return explain(error.errors(include_url=False), as_tables(given), {})

    @abstractmethod
    def files(self) -> tuple[FilePath, ...]:
        """Return the files that the scenario is made from: recordings, tables of the converter."""

    def resolved(self) -> dict[str, Any]:
        """Return every value in SI units, defaults filled in, as plain data for JSON."""
        return self.model_dump(mode="json")

    def digest(self, sha256: Callable[[FilePath], str] | None = None) -> str:
        """Return the SHA-256 of the resolved values, files counted by content, not by name.

        The same scenario in another folder has the same digest; title and source text do not
        count.

        Parameters
        ----------
        sha256 : digest of a file's content; left out, ``sha256_of``
        """
        return digest_of(self.resolved(), self.files(), sha256)

    def in_file(self, path: Path) -> Path:
        """Return where in the file a path of the scenario is: there."""
        return path

    @property
    def file_text(self) -> str:
        """The file that the scenario stands in, as written."""
        return self.source
