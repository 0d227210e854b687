"""What a page says, before it is laid out."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

Tone = Literal["", "holds", "fails", "open"]
"""How a cell, or the page, is meant: said in words as well, so that colour is never alone."""


@dataclass(frozen=True)
class Cell:
    """One cell of a table.

    Parameters
    ----------
    text : what it says
    tone : how it is meant
    number : whether it is set as a number, to the right
    """

    text: str
    tone: Tone = ""
    number: bool = False


@dataclass(frozen=True)
class PageTable:
    """A table with a caption; the first cell of each row is its header.

    Parameters
    ----------
    caption : what the table shows
    head : names of the columns
    rows : as many cells each
    note : a sentence below it, "" for none
    """

    caption: str
    head: tuple[str, ...]
    rows: tuple[tuple[Cell, ...], ...]
    note: str = ""


@dataclass(frozen=True)
class PageFigure:
    """A picture.

    Parameters
    ----------
    source : as a ``data:`` address, so that the page needs nothing else
    description : what is to be seen, for those who cannot see it
    caption : below it
    """

    source: str
    description: str
    caption: str


@dataclass(frozen=True)
class Section:
    """A part of the page with a heading.

    Parameters
    ----------
    name : of its anchor
    heading : its title
    text : paragraphs
    tables, figures : in this order
    listings : name and text of what was written, line by line
    folded : whether it opens when asked for
    """

    name: str
    heading: str
    text: tuple[str, ...] = ()
    tables: tuple[PageTable, ...] = ()
    figures: tuple[PageFigure, ...] = ()
    listings: tuple[tuple[str, str], ...] = ()
    folded: bool = False


@dataclass(frozen=True)
class Page:
    """A page to read in the morning.

    Parameters
    ----------
    title : of what was run
    tone, verdict : what came out, in a few words
    summary : the next thing to know, in a sentence
    facts : name and value of a few numbers beside the verdict
    sections : verdicts first
    made : by which program, and when
    """

    title: str
    tone: Tone
    verdict: str
    summary: str
    facts: tuple[tuple[str, str], ...]
    sections: tuple[Section, ...]
    made: str


def number(text: str, tone: Tone = "") -> Cell:
    """Return a cell with a number in it."""
    return Cell(text, tone, number=True)
