"""The bytes of a scenario file become text."""

from __future__ import annotations

from pathlib import Path

from frontend_sim.errors import Problem, ScenarioError, shortened
from frontend_sim.scenario.closest import closest

LARGEST = 4 << 20
"""A scenario file larger than this is something else [bytes]."""


def read_text(file: Path) -> str:
    """Return the text of a scenario file.

    Raises
    ------
    ScenarioError
        If there is no such file, it may not be read, or it holds no text in UTF-8.
    """
    try:
        with file.open("rb") as stream:
            content = stream.read(LARGEST + 1)
    except FileNotFoundError:
        raise ScenarioError(f"there is no such file{_near(file)}", str(file)) from None
    except IsADirectoryError:
        raise ScenarioError(f"this is a directory{_inside(file)}", str(file)) from None
    except PermissionError:
        raise ScenarioError("the file may not be read; check its permissions", str(file)) from None
    except (OSError, ValueError) as error:  # ValueError: a NUL in the name
        reason = getattr(error, "strerror", None) or error
        raise ScenarioError(f"the file cannot be read: {reason}", shortened(file)) from None
    return _decoded(content, str(file))


def _near(file: Path) -> str:
    if not file.parent.is_dir():
        return f"; the directory {file.parent} does not exist"
    meant = closest(file.stem, [Path(name).stem for name in _scenarios(file.parent)])
    return f"; did you mean {file.parent / meant}.toml?" if meant else ""


def _inside(directory: Path) -> str:
    names = _scenarios(directory)
    return f"; give a file in it, for instance {directory / names[0]}" if names else "; give a file"


def _scenarios(directory: Path) -> list[str]:
    try:
        return sorted(path.name for path in directory.iterdir() if path.suffix == ".toml")
    except OSError:
        return []


def _decoded(content: bytes, name: str) -> str:
    if len(content) > LARGEST:
        raise ScenarioError(
            f"the file is larger than {LARGEST >> 20} MiB; a scenario is a short text, and a "
            "recording is named in it by stimulus.file",
            name,
        )
    if content.startswith(b"\x89HDF"):
        raise ScenarioError(
            "this is an HDF5 file; a scenario is a text in TOML (a record keeps the one that it "
            "was made from in /scenario)",
            name,
        )
    if content.startswith((b"\xff\xfe", b"\xfe\xff")):
        raise ScenarioError("the text is in UTF-16; save it as UTF-8", name)
    if b"\0" in content:
        raise ScenarioError("this is a binary file; a scenario is a text in TOML", name)
    try:
        return content.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = content.count(b"\n", 0, error.start) + 1
        character = content[error.start : error.start + 1].decode("latin-1")
        likely = f", in Latin-1 {character!r}" if character.isprintable() else ""
        text = f"the byte 0x{content[error.start]:02x}{likely} is not UTF-8; save the file as UTF-8"
        raise ScenarioError([Problem(text, line=line)], name) from None
