"""The digest of a scenario: the same for the same values, wherever its files lie."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any


def digest_of(
    values: dict[str, Any], files: Sequence[Path], sha256: Callable[[Path], str] | None = None
) -> str:
    """Return the SHA-256 of resolved values, files counted by content, the title not at all."""
    counted = {key: value for key, value in values.items() if key != "title"}
    named = {str(file): (sha256 or sha256_of)(file) for file in files}
    text = json.dumps(_renamed(counted, named), sort_keys=True, separators=(",", ":"))
    return hashlib.sha256(text.encode()).hexdigest()


def sha256_of(file: Path) -> str:
    """Return the SHA-256 of a file's content, read in blocks."""
    with file.open("rb") as stream:
        return hashlib.file_digest(stream, "sha256").hexdigest()


def _renamed(value: Any, names: dict[str, str]) -> Any:
    if isinstance(value, dict):
        return {key: _renamed(item, names) for key, item in value.items()}
    if isinstance(value, list):
        return [_renamed(item, names) for item in value]
    return names.get(value, value) if isinstance(value, str) else value
