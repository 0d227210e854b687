"""Files that are no scenario: each is told, none with a traceback."""

from __future__ import annotations

import os
from pathlib import Path

import pytest
from scenario_samples import BASE

from frontend_sim.errors import ScenarioError, shortened
from frontend_sim.scenario import load_scenario


def message_of(path: Path | str) -> str:
    """Return the message that loading a file gives."""
    with pytest.raises(ScenarioError) as caught:
        load_scenario(path)
    message = str(caught.value)
    assert message.startswith((str(path), shortened(path)))
    return message


def test_a_file_is_read_with_its_text(tmp_path: Path) -> None:
    """The scenario keeps the file's text as written."""
    file = tmp_path / "right.toml"
    file.write_text(BASE, encoding="utf-8")
    assert load_scenario(file).source == BASE
    assert load_scenario(str(file)).seed == 7


def test_a_byte_order_mark_is_no_fault(tmp_path: Path) -> None:
    """Editors that begin UTF-8 with a mark are forgiven."""
    file = tmp_path / "mark.toml"
    file.write_bytes(b"\xef\xbb\xbf" + BASE.encode())
    assert load_scenario(file).source == BASE


def test_line_ends_of_other_systems_are_no_fault(tmp_path: Path) -> None:
    """Carriage returns are read, and lines are counted right."""
    file = tmp_path / "returns.toml"
    file.write_bytes(BASE.replace("\n", "\r\n").replace("bits = 12", "bits = 2").encode())
    assert "line 22: adc.bits" in message_of(file)


def test_a_missing_file_is_told_with_its_neighbour(tmp_path: Path) -> None:
    """A misspelt name gets the nearest one."""
    (tmp_path / "pump.toml").write_text(BASE, encoding="utf-8")
    message = message_of(tmp_path / "pmup.toml")
    assert "no such file" in message
    assert f"did you mean {tmp_path / 'pump.toml'}?" in message


def test_a_missing_directory_is_told(tmp_path: Path) -> None:
    """Where the folder is missing, the folder is told."""
    assert "does not exist" in message_of(tmp_path / "nowhere" / "pump.toml")


def test_a_directory_is_told_with_a_file_in_it(tmp_path: Path) -> None:
    """A directory is no scenario, but may hold one."""
    assert "this is a directory; give a file" in message_of(tmp_path)
    (tmp_path / "pump.toml").write_text(BASE, encoding="utf-8")
    assert str(tmp_path / "pump.toml") in message_of(tmp_path)


@pytest.mark.parametrize(
    ("content", "parts"),
    [
        (b"", ["the file is empty", "[stimulus]", "[adc]"]),
        (b"  \n\n", ["the file is empty"]),
        (b"# only a comment\n", ["without any key", "[stimulus]"]),
        (b"\x89HDF\r\n\x1a\n\0\0\0", ["HDF5", "/scenario"]),
        (b"RIFF\0\0\0\0WAVE", ["binary file"]),
        ("title = 'x'".encode("utf-16"), ["UTF-16", "save it as UTF-8"]),
        (b"title = 'a'\nseed = 1 # \xb5F\n", ["line 2", "0xb5", "'\u00b5'", "UTF-8"]),
        (b"\xff\xd8\xff\xe0" * 4, ["0xff", "UTF-8"]),
        (b"t,V\n0,1\n", ["line 1", "expected key = value", "t,V"]),
        (b"x" * (5 << 20), ["larger than 4 MiB"]),
        (b"a = " + b"[" * 5000 + b"]" * 5000, ["nested"]),
        (b"a = " + b"[" * 40 + b"]" * 40, ["nested more than 24 deep"]),
        (b"[" + b".".join([b"a"] * 2000) + b"]", ["nested more than 24 deep"]),
        (b"seed = 1\na = " + b"1" * 5000, ["line 2", "more than a thousand digits"]),
        (b"a = 1\x01", ["line 1", "not TOML"]),
        (b"when = 2024-13-45", ["line 1"]),
        (b"seed = 1\na = 'x\nb = 2\n", ["line 2", "second quote is missing"]),
        (b'a = 1\nb = """x\ny\n', ["line 2", "second quote is missing"]),
        (b"a = {b = 1,\n", ["line 1", "not TOML"]),
        (b"a = '''x\n", ["second quote is missing"]),
    ],
)
def test_what_is_no_scenario_is_told(tmp_path: Path, content: bytes, parts: list[str]) -> None:
    """Whatever the bytes are, the message says what they seem to be and what to do."""
    file = tmp_path / "wrong.toml"
    file.write_bytes(content)
    message = message_of(file)
    for part in parts:
        assert part in message


@pytest.mark.skipif(os.geteuid() == 0, reason="the superuser may read every file")
def test_a_file_that_may_not_be_read_is_told(tmp_path: Path) -> None:
    """Missing rights are told as such."""
    file = tmp_path / "locked.toml"
    file.write_text(BASE, encoding="utf-8")
    file.chmod(0)
    assert "may not be read" in message_of(file)


def test_rights_are_told_even_to_the_superuser(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """The system's refusal becomes our error."""

    def refuse(self: Path, mode: str) -> None:
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr(Path, "open", refuse)
    assert "may not be read; check its permissions" in message_of(tmp_path / "a.toml")


def test_a_name_that_no_file_can_have_is_told() -> None:
    """Names that the system refuses are told, not raised."""
    assert "cannot be read" in message_of("a" * 5000)
    assert len(message_of("a" * 5000)) < 200
    assert "cannot be read" in message_of("a\0b")


@pytest.mark.skipif(not Path("/dev/zero").exists(), reason="needs the endless file of zeros")
def test_an_endless_file_ends() -> None:
    """No more is read than a scenario may have."""
    assert "larger than" in message_of("/dev/zero")
