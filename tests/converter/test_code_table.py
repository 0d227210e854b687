"""Tables of codes: what is read, and every way in which a file can be wrong."""

from __future__ import annotations

import io
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.converter.code_table import read_code_table
from frontend_sim.errors import ScenarioError


def header(shape: tuple[int, ...]) -> bytes:
    """Return an NPY file that promises more numbers than it has, none."""
    stream = io.BytesIO()
    about = {"descr": "<f8", "fortran_order": False, "shape": shape}
    np.lib.format.write_array_header_1_0(stream, about)
    return stream.getvalue()


@pytest.mark.parametrize(
    "text",
    [
        "1\n2\n-0.5\n",
        "inl in LSB\n1\n2\n-5e-1",
        "\ufeffcode,inl\n\n# from a test bench\n0,1\n1,2\n2,-.5\n",
        "0;1\r\n1;2\r\n2;-0.5\r\n",
        "  7\t1\n  8\t2\n  9\t-0.5\n",
    ],
)
def test_ways_to_write_a_table(tmp_path: Path, text: str) -> None:
    """One number in a line or code and number, with heading, comments, BOM, any delimiter."""
    path = tmp_path / "table.txt"
    path.write_text(text, encoding="utf-8")
    np.testing.assert_array_equal(read_code_table(path), [1.0, 2.0, -0.5])


@given(numbers=st.lists(st.floats(-1e6, 1e6), min_size=1, max_size=40))
@settings(max_examples=50, deadline=None)
def test_no_digit_is_lost(tmp_path_factory: pytest.TempPathFactory, numbers: list[float]) -> None:
    """What is written comes back, as text and as NPY."""
    folder = tmp_path_factory.mktemp("table")
    (folder / "a.csv").write_text("\n".join(map(repr, numbers)))
    np.save(folder / "a.npy", np.array(numbers))
    np.testing.assert_array_equal(read_code_table(folder / "a.csv"), numbers)
    np.testing.assert_array_equal(read_code_table(folder / "a.npy"), numbers)


@pytest.mark.parametrize(
    ("name", "content", "message"),
    [
        ("a.xls", b"1", "a table of codes is one of .csv, .tsv, .txt, .npy"),
        ("a.csv", b"", "holds no number"),
        ("a.csv", b"a heading\nanother\n", "holds no number"),
        ("a.csv", b"1\ntwo\n", "line 2: expected a number, or a code and a number, given 'two'"),
        ("a.csv", b"1.5V\n", "line 1: expected a number"),
        ("a.csv", b"0,1,2\n", "line 1: expected one number, or a code and a number"),
        ("a.csv", b"0,1\n5\n", "line 2: has not as many numbers as the lines before"),
        ("a.csv", b"1\n0,5\n", "line 2: has not as many numbers as the lines before"),
        ("a.csv", b"0,1\n2,5\n", "line 2: codes must be whole numbers that count up by one"),
        ("a.csv", b"0,1\n0,5\n", "line 2: codes must be whole numbers that count up by one"),
        ("a.csv", b"0.5,1\n", "line 1: codes must be whole numbers"),
        ("a.csv", b"0,5\n1,5,5\n", "line 2: expected one number"),
        ("a.csv", b"1\nnan\n", "number 2 is not finite"),
        ("a.csv", b"inf\n", "number 1 is not finite"),
        ("a.csv", b"1\n\xff\xfe\n", "no text in UTF-8"),
        ("a.npy", b"\x93NUMPY but not really", "damaged, or no NPY file"),
        ("a.npy", b"", "damaged, or no NPY file"),
        ("a.npy", b"PK\x05\x06", "damaged, or no NPY file"),
        ("a.npy", header((10**15,)), "damaged, or no NPY file"),
        ("a.npy", header((10,)), "damaged, or no NPY file"),
    ],
)
def test_wrong_files_are_refused(tmp_path: Path, name: str, content: bytes, message: str) -> None:
    """One message that names the file, the line and what was given."""
    path = tmp_path / name
    path.write_bytes(content)
    with pytest.raises(ScenarioError, match=message) as caught:
        read_code_table(path)
    assert str(path) in str(caught.value)


def test_wrong_arrays_are_refused(tmp_path: Path) -> None:
    """Two dimensions, text, complex numbers, pickled objects are no row of real numbers."""
    path = tmp_path / "a.npy"
    for array in (np.zeros((2, 2)), np.array(["a"]), np.array([1j])):
        np.save(path, array)
        with pytest.raises(ScenarioError, match="expected one row of real numbers"):
            read_code_table(path)
    np.save(path, np.array([{}]), allow_pickle=True)
    with pytest.raises(ScenarioError, match="no NPY file of plain numbers"):
        read_code_table(path)


def test_missing_files_and_directories_are_told(tmp_path: Path) -> None:
    """Each with its own words."""
    with pytest.raises(ScenarioError, match=r"none.csv: there is no such file"):
        read_code_table(tmp_path / "none.csv")
    (tmp_path / "folder.csv").mkdir()
    with pytest.raises(ScenarioError, match="this is a directory"):
        read_code_table(tmp_path / "folder.csv")


@given(content=st.binary(max_size=60))
@settings(max_examples=150, deadline=None)
def test_no_content_brings_another_error(
    tmp_path_factory: pytest.TempPathFactory, content: bytes
) -> None:
    """Any bytes are numbers or one clear refusal, as text and as NPY."""
    folder = tmp_path_factory.mktemp("bytes")
    for name in ("a.csv", "a.npy"):
        (folder / name).write_bytes(content)
        told, numbers = "", np.zeros(1)
        try:
            numbers = read_code_table(folder / name)
        except ScenarioError as error:
            told = str(error)
        assert np.all(np.isfinite(numbers))
        assert "\n" not in told
