"""Plots become files, whole or not at all."""

from __future__ import annotations

import errno
import os
from pathlib import Path

import pytest

from frontend_sim.errors import OutputError
from frontend_sim.present.drawing import new_figure
from frontend_sim.present.figure_file import check_plot_target, save_figure


def drawn():
    """Return a small figure."""
    figure = new_figure(2.0, 2.0)
    figure.subplots().plot([0, 1], [0, 1])
    return figure


def test_png_and_svg_by_suffix(tmp_path: Path) -> None:
    """The suffix picks the format, capital letters count the same."""
    save_figure(drawn(), tmp_path / "a.PNG")
    save_figure(drawn(), tmp_path / "a.svg")
    assert (tmp_path / "a.PNG").read_bytes().startswith(b"\x89PNG\r\n")
    assert b"<svg" in (tmp_path / "a.svg").read_bytes()
    assert sorted(os.listdir(tmp_path)) == ["a.PNG", "a.svg"]


@pytest.mark.parametrize("suffix", ["png", "svg"])
def test_the_same_figure_gives_the_same_file(tmp_path: Path, suffix: str) -> None:
    """No date, no random names: two runs can be compared byte by byte."""
    for name in ("a", "b"):
        save_figure(drawn(), tmp_path / f"{name}.{suffix}")
    assert (tmp_path / f"a.{suffix}").read_bytes() == (tmp_path / f"b.{suffix}").read_bytes()


@pytest.mark.parametrize("name", ["plot.pdf", "plot", "plot.png.txt", ".png"])
def test_other_suffixes_are_refused(tmp_path: Path, name: str) -> None:
    """The message lists what is allowed."""
    with pytest.raises(OutputError, match=r"\.png or \.svg"):
        save_figure(drawn(), tmp_path / name)
    assert os.listdir(tmp_path) == []


def test_existing_files_stay(tmp_path: Path) -> None:
    """A file is replaced only when that was asked for."""
    target = tmp_path / "plot.png"
    target.write_text("precious")
    with pytest.raises(OutputError, match="exists; give another name"):
        save_figure(drawn(), target)
    assert target.read_text() == "precious"
    save_figure(drawn(), target, overwrite=True)
    assert target.read_bytes().startswith(b"\x89PNG")
    assert os.listdir(tmp_path) == ["plot.png"]


def test_missing_directories_and_directories(tmp_path: Path) -> None:
    """Neither a folder that is not there nor a folder itself can be written to."""
    with pytest.raises(OutputError, match="there is no directory"):
        check_plot_target(tmp_path / "none" / "plot.png")
    (tmp_path / "folder.png").mkdir()
    with pytest.raises(OutputError, match="is a directory"):
        check_plot_target(tmp_path / "folder.png", overwrite=True)
    (tmp_path / "file").write_text("")
    with pytest.raises(OutputError):
        check_plot_target(tmp_path / "file" / "plot.png")


def test_a_failing_disk_leaves_nothing(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Where writing fails half way, no file is left, and the message says why."""
    figure = drawn()

    def fail(stream, **_):
        stream.write(b"half")
        raise OSError(errno.ENOSPC, "No space left on device")

    monkeypatch.setattr(figure, "savefig", fail)
    with pytest.raises(OutputError, match="No space left on device"):
        save_figure(figure, tmp_path / "plot.png")
    assert os.listdir(tmp_path) == []


def test_a_link_is_followed(tmp_path: Path) -> None:
    """The file behind a link is replaced, the link stays; its own suffix counts."""
    (tmp_path / "real.dat").write_text("old")
    (tmp_path / "plot.png").symlink_to(tmp_path / "real.dat")
    save_figure(drawn(), tmp_path / "plot.png", overwrite=True)
    assert (tmp_path / "plot.png").is_symlink()
    assert (tmp_path / "real.dat").read_bytes().startswith(b"\x89PNG")
