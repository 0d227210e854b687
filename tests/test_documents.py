"""The pages of the documentation hang together."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
PAGES = [ROOT / "README.md", ROOT / "DEVELOPERS.md", *sorted((ROOT / "docs").rglob("*.md"))]


def anchor(heading: str) -> str:
    """Return what a link to a heading ends with, as the viewers of Markdown make it."""
    return re.sub(r"[^\w\- ]", "", heading.strip().lower()).replace(" ", "-")


@pytest.mark.parametrize("page", PAGES, ids=lambda page: str(page.relative_to(ROOT)))
def test_every_link_leads_somewhere(page: Path) -> None:
    """The file is there, and so is the heading within it."""
    text = re.sub(r"```.*?```", "", page.read_text(encoding="utf-8"), flags=re.S)
    for link in re.findall(r"\]\(([^)\s]+)\)", text):
        file, _, heading = link.partition("#")
        target = (page.parent / file).resolve() if file else page
        assert target.exists(), link
        if heading:
            headings = re.findall(r"^#+ (.*)$", target.read_text(encoding="utf-8"), re.M)
            assert heading in map(anchor, headings), link


def test_every_page_is_listed_in_the_readme() -> None:
    """By itself, or by its folder."""
    listed = re.findall(r"\]\((docs/[^)]+)\)", PAGES[0].read_text(encoding="utf-8"))
    for page in PAGES[2:]:
        name = page.relative_to(ROOT).as_posix()
        assert name in listed or f"{page.parent.relative_to(ROOT).as_posix()}/" in listed, name


def test_the_glossary_is_sorted_and_has_each_word_once() -> None:
    """Who looks for a word finds it."""
    text = (ROOT / "docs" / "glossary.md").read_text(encoding="utf-8")
    rows = re.findall(r"^\| (.+?) \|", text, re.M)
    words = [re.sub(r"[^a-z ]", "", word.lower()) for word in rows[1:]]
    assert words == sorted(set(words))
