"""The line of every key of a TOML text, or none rather than a wrong one."""

from __future__ import annotations

import tomllib
from typing import Any

import tomli_w
from hypothesis import given
from hypothesis import strategies as st

from frontend_sim.scenario.locate import line_of, lines_of
from frontend_sim.scenario.tables import Path

TEXT = '''# a comment [not.a.table]
a.b = 1
"quoted key".'another one' = [1,   # [ in a comment
  [2,
   {q = 3, r.s = """
text with "quotes", # and = signs
[and.brackets]""""},  ],
]
t1 = "a # b = [c]"
[t]
k = 'lit"eral'
[[c]]
when = 1979-05-27 07:32:00Z
[c.sub]
w = """\\
   continued \\""" still"""
[[c.inner]]
w = \'\'\'x]\'\'\'
[[c.inner]]
w = {}
[[c]]
 [[ c . inner ]]   # spaces
"w" = [ ]
[c.inner.deep."e.r"]
v = -1e3
'''


def test_every_way_to_write_a_key_is_followed() -> None:
    """Dotted, quoted and bare keys, tables, arrays of them, inline ones, strings of all kinds."""
    lines = lines_of(TEXT, tomllib.loads(TEXT))
    expected: dict[Path, int] = {
        ("a",): 2,
        ("a", "b"): 2,
        ("quoted key",): 3,
        ("quoted key", "another one"): 3,
        ("quoted key", "another one", 0): 3,
        ("quoted key", "another one", 1): 4,
        ("quoted key", "another one", 1, 0): 4,
        ("quoted key", "another one", 1, 1): 5,
        ("quoted key", "another one", 1, 1, "q"): 5,
        ("quoted key", "another one", 1, 1, "r"): 5,
        ("quoted key", "another one", 1, 1, "r", "s"): 5,
        ("t1",): 9,
        ("t",): 10,
        ("t", "k"): 11,
        ("c",): 12,
        ("c", 0): 12,
        ("c", 0, "when"): 13,
        ("c", 0, "sub"): 14,
        ("c", 0, "sub", "w"): 15,
        ("c", 0, "inner"): 17,
        ("c", 0, "inner", 0): 17,
        ("c", 0, "inner", 0, "w"): 18,
        ("c", 0, "inner", 1): 19,
        ("c", 0, "inner", 1, "w"): 20,
        ("c", 1): 21,
        ("c", 1, "inner"): 22,
        ("c", 1, "inner", 0): 22,
        ("c", 1, "inner", 0, "w"): 23,
        ("c", 1, "inner", 0, "deep"): 24,
        ("c", 1, "inner", 0, "deep", "e.r"): 24,
        ("c", 1, "inner", 0, "deep", "e.r", "v"): 25,
    }
    assert lines == expected


def test_line_ends_of_other_systems_do_not_shift_lines() -> None:
    """Carriage returns before line feeds change nothing."""
    text = TEXT.replace("\n", "\r\n")
    assert lines_of(text, tomllib.loads(text)) == lines_of(TEXT, tomllib.loads(TEXT))


def test_no_line_is_told_where_text_and_data_disagree() -> None:
    """Lines of another text are not used."""
    assert lines_of("a = 1\n", {"a": 1, "b": 2}) == {}
    assert lines_of("not toml at all", {"a": 1}) == {}
    assert lines_of("a = [1, 2]", {"a": [1]}) == {}


def test_what_is_missing_is_told_on_the_line_of_its_table() -> None:
    """A missing key has the line of the table around it; at the top there is none."""
    text = "x = 1\n[[c]]\n[[c]]\n"
    lines = lines_of(text, tomllib.loads(text))
    assert line_of(("c", 1, "missing"), lines) == 3
    assert line_of(("missing",), lines) is None


def _leaves(data: Any, above: Path = ()) -> list[tuple[Path, Any]]:
    items = data.items() if isinstance(data, dict) else enumerate(data)
    found: list[tuple[Path, Any]] = []
    for key, value in items:
        path = (*above, key)
        inside = isinstance(value, (dict, list))
        found += _leaves(value, path) if inside else [(path, value)]
    return found


def _numbered(shape: Any, counter: list[int]) -> Any:
    """Put a different number at every leaf."""
    if isinstance(shape, dict):
        return {key: _numbered(value, counter) for key, value in shape.items()}
    if isinstance(shape, list):
        return [_numbered(value, counter) for value in shape]
    counter[0] += 1
    number = 100_000 + counter[0]
    return number if counter[0] % 2 else f'a "{number}"\n# = [[x]]\n' if shape else f"{number}"


SHAPES = st.recursive(
    st.booleans(),
    lambda inner: (
        st.lists(inner, max_size=4) | st.dictionaries(st.text(max_size=5), inner, max_size=4)
    ),
    max_leaves=20,
)


@given(st.dictionaries(st.text(max_size=5), SHAPES, max_size=5), st.booleans())
def test_the_line_of_any_leaf_holds_its_value(shape: dict[str, Any], multiline: bool) -> None:
    """Whatever a writer writes, the line that is told has the value, which stands there only."""
    data = _numbered(shape, [0])
    text = tomli_w.dumps(data, multiline_strings=multiline)
    rows = text.split("\n")
    lines = lines_of(text, tomllib.loads(text))
    for path, value in _leaves(data):
        number = "".join(c for c in str(value) if c.isdigit())[:6]
        here = lines[path] - 1
        # A string over several lines begins on the line of its key.
        assert number in rows[here] or (rows[here].endswith('"""') and number in rows[here + 1])


@given(st.text(alphabet="ab.=[]{}\"'\\\n\r#, 1", max_size=60))
def test_any_text_is_survived(text: str) -> None:
    """On any text the scanner ends, and where it tells lines the keys are those of the reader."""
    try:
        data = tomllib.loads(text)
    except tomllib.TOMLDecodeError:
        lines_of(text, {"x": 1})
        return
    for path, line in lines_of(text, data).items():
        assert 1 <= line <= text.count("\n") + 1
        assert path
