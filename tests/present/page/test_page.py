"""The page: what it says, that it is sound HTML, and how it looks in a browser."""

from __future__ import annotations

import base64
import io
import re
import shutil
from collections.abc import Iterator
from html.parser import HTMLParser
from pathlib import Path
from typing import Any
from xml.etree import ElementTree

import pytest
from compared import LSB, made, night, varied
from nights import BASE, made_set
from rich.console import Console

from frontend_sim.archive import open_record, record_run
from frontend_sim.comparison import compare_records, compare_sets
from frontend_sim.errors import OutputError
from frontend_sim.present.night_table import night_tables
from frontend_sim.present.page import Page, night_page, record_page, render, write_page
from frontend_sim.present.page.record_page import verdict_of_checks
from frontend_sim.present.replay_table import replay_tables
from frontend_sim.replay import replay_set
from frontend_sim.simulation import Simulation
from frontend_sim.summary import NightSummary, summarize

VOID = {"meta", "img", "br", "wbr", "link", "input", "hr"}
"""Elements without an end."""

BROWSERS = ("chromium", "chromium-browser", "google-chrome")


class Outline(HTMLParser):
    """What a page is made of; an element that is not closed in its order is an error."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.open: list[str] = []
        self.tags: list[tuple[str, dict[str, str | None]]] = []
        self.words: list[tuple[str, str]] = []
        self.feed(text)
        self.close()
        assert self.open == []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append((tag, dict(attrs)))
        if tag not in VOID:
            self.open.append(tag)

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        if data.strip():
            self.words.append((self.open[-1], data.strip()))

    def all(self, tag: str) -> list[dict[str, str | None]]:
        """Return the attributes of all elements of a kind."""
        return [attributes for name, attributes in self.tags if name == tag]

    def text_of(self, *tags: str) -> list[str]:
        """Return the text that stands directly in elements of some kinds."""
        return [text for tag, text in self.words if tag in tags]


@pytest.fixture(scope="module")
def pages(tmp_path_factory: pytest.TempPathFactory) -> dict[str, Page]:
    """The page of a record and that of a night, each with what changed."""
    folder = tmp_path_factory.mktemp("pages")
    for name, scenario in (("a", made()), ("b", varied(offset=0.1e-3 + LSB))):
        record_run(Simulation(scenario), folder / f"{name}.h5")
    rules = "seed = {}\n[corners]\n[draws]\ncount = 60\n"
    first = night(folder, "one", rules.format(1))
    second = night(folder, "two", rules.format(1), corner="3.4 kHz")
    with open_record(folder / "a.h5") as one, open_record(folder / "b.h5") as other:
        record = record_page(other, compare_records(one, other))
    return {
        "record": record,
        "night": night_page(summarize(second), compare_sets(first, second)),
    }


@pytest.mark.parametrize("name", ["record", "night"])
def test_a_page_needs_nothing_else(pages: dict[str, Page], name: str) -> None:
    """No script, no link to elsewhere: all pictures are inside, and are sound SVG."""
    text = render(pages[name])
    outline = Outline(text)
    assert outline.all("script") == []
    assert outline.all("link") == []
    assert "http" not in re.sub(r"base64,[^\"]*", "", text)
    for image in outline.all("img"):
        head, _, data = str(image["src"]).partition(",")
        assert head == "data:image/svg+xml;base64"
        assert ElementTree.fromstring(base64.b64decode(data)).tag.endswith("svg")
    for link in outline.all("a"):
        anchor = str(link["href"])
        assert anchor.startswith("#")
        assert any(each.get("id") == anchor[1:] for _, each in outline.tags)


@pytest.mark.parametrize("name", ["record", "night"])
def test_a_page_can_be_read_aloud(pages: dict[str, Page], name: str) -> None:
    """Language, one first heading, a caption and headers in every table, alternative text."""
    outline = Outline(render(pages[name]))
    assert outline.all("html")[0]["lang"] == "en"
    assert len(outline.all("h1")) == 1
    assert len(outline.all("h2")) == len(pages[name].sections)
    assert len(outline.all("pre")) == {"record": 1, "night": 2}[name]
    assert len(outline.all("caption")) == len(outline.all("table")) > 3
    assert {each.get("scope") for each in outline.all("th")} == {"col", "row"}
    assert all(len(str(image["alt"])) > 40 for image in outline.all("img"))
    identifiers = [each["id"] for _, each in outline.tags if "id" in each]
    assert len(identifiers) == len(set(identifiers))


def test_verdicts_come_first_and_cautions_last(pages: dict[str, Page]) -> None:
    """The order is that of a reader in the morning."""
    headings = [section.heading for section in pages["night"].sections]
    assert headings == [
        "Verdicts",
        "Worst cases",
        "What changed",
        "Distributions and margins",
        "What explains the spread",
        "How it was computed",
        "What this page is not",
    ]
    assert [section.name for section in pages["record"].sections][:2] == ["verdicts", "changes"]


def test_a_night_tells_its_numbers(pages: dict[str, Page]) -> None:
    """Yield with interval, worst run with its parameters, digest, versions, and the changed key."""
    page = pages["night"]
    told = " ".join(Outline(render(page)).text_of("th", "td", "dd", "p", "h1"))
    assert page.verdict.startswith("Fails in ")
    assert re.search(r"\d+\.\d % \(\d+\.\d to \d+\.\d %\)", told)
    assert "chain[input filter].capacitance = 4.935" in told
    assert "corner 1-1" in told
    assert "check[1].at_least" in told
    assert "digest of all scenarios and results (SHA-256)" in told
    assert "numpy" in told
    assert "licensed engineer" in told


LEVELS = """
[[check]]
kind = "level"
name = "early"
at = "0.1 ms"
at_least = "1.9 V"

[[check]]
kind = "level"
name = "late"
at = "0.2 ms"
at_least = "1.99 V"

[[check]]
kind = "overshoot"
at_most = "2 %"
"""
"""Two checks that fail in every run, and a share that holds."""


@pytest.fixture(scope="module")
def failing(tmp_path_factory: pytest.TempPathFactory) -> NightSummary:
    """A night of 30 draws and 5 corners in which two checks always fail."""
    folder = tmp_path_factory.mktemp("failing")
    rules = 'keep = "nothing"\n[corners]\n[draws]\ncount = 30\n'
    file = made_set(folder, rules, scenario=BASE.partition("[[check]]")[0] + LEVELS)
    return summarize(replay_set(file, folder / "night", on="in-process").table())


def test_failing_runs_that_are_not_listed_are_counted(failing: NightSummary) -> None:
    """Each failing check has its share of 20 rows, the worst runs first; 50 of 70 are left."""
    page = night_page(failing)
    table = next(each for each in page.sections[0].tables if each.caption.startswith("Runs that"))
    assert [row[1].text for row in table.rows] == ["early"] * 10 + ["late"] * 10
    assert table.note == "50 more stand in the table of the set."
    worst = {check.name: failing.table.names[check.worst] for check in failing.checks}
    assert [table.rows[place][0].text for place in (0, 10)] == [worst["early"], worst["late"]]


def test_advice_is_that_of_its_check(failing: NightSummary) -> None:
    """A run tells what to change first for its first check that fails; others name that check."""
    page = night_page(failing)
    table = next(each for each in page.sections[0].tables if each.caption.startswith("Runs that"))
    told = {row[1].text: row[4].text for row in table.rows}
    assert told["early"].startswith("raise the level by")
    assert told["late"].startswith("early: raise the level by")


def test_shares_read_as_percent_at_the_terminal_too(failing: NightSummary) -> None:
    """The limit of the overshoot is 2 %, on the page and in both tables of the terminal."""
    tables = (*replay_tables(failing.table), *night_tables(failing))
    console = Console(width=160)
    with console.capture() as caught:
        console.print(*tables)
    assert "≤ 2.000 %" in caught.get()
    assert "0.02" not in caught.get()
    assert "≤ 2.000 %" in render(night_page(failing))


def test_the_names_of_groups_are_read_in_full(tmp_path: Path, browser: Any) -> None:
    """Long names of runs stay within their place on the page, and are whole at the terminal."""
    vary = (
        '[[vary]]\nkey = "chain[input filter].resistance"\nvalues = ["10 kohm", "12 kohm"]\n'
        '[[vary]]\nkey = "environment.temperature"\nvalues = ["-40 degC", "85 degC"]\n'
    )
    rules = f'keep = "nothing"\n{vary}[draws]\ncount = 5\n'
    table = replay_set(made_set(tmp_path, rules), tmp_path / "night", on="in-process").table()
    stream = io.StringIO()
    Console(file=stream, width=80).print(*replay_tables(table))
    assert "…" not in stream.getvalue()
    page = render(night_page(summarize(table)))
    assert "resistance=12kohm,<wbr>temperature=85degC,<wbr>draw 000" in page
    path = tmp_path / "page.html"
    path.write_text(page, "utf-8")
    sheet = browser.new_page(viewport={"width": 1000, "height": 800})
    sheet.goto(path.as_uri())
    found = sheet.evaluate(
        "[...document.querySelectorAll('dt')].map(e => e.scrollWidth - e.clientWidth)"
    )
    sheet.close()
    assert max(found) <= 0


def test_a_night_without_draws_has_no_yield(tmp_path: Path) -> None:
    """There is no empty column for what was not drawn."""
    page = night_page(summarize(night(tmp_path, "corners", 'keep = "nothing"\n[corners]\n')))
    assert page.sections[0].tables[0].head == ("check", "verdict", "fails in", "worst margin")
    assert "yield" not in render(page)


def test_what_a_user_wrote_is_escaped(tmp_path: Path) -> None:
    """A title of HTML stays text, in the title, the heading and the scenario."""
    evil = '<script>alert(1)</script> & "quotes" $x_1$'
    record_run(Simulation(made(title=evil)), tmp_path / "a.h5")
    with open_record(tmp_path / "a.h5") as record:
        text = render(record_page(record))
    outline = Outline(text)
    assert outline.all("script") == []
    assert outline.text_of("h1") == [evil]


@pytest.mark.parametrize(
    ("checks", "broken", "told"),
    [(1, 0, "Holds: the only check"), (2, 0, "Holds: all 2 checks"),
     (1, 1, "Fails: the only check"), (3, 2, "Fails: 2 of 3 checks")],
)  # fmt: skip
def test_headlines_count_the_checks(checks: int, broken: int, told: str) -> None:
    """A single check is not one of several."""
    assert verdict_of_checks(checks, broken)[1] == told


def test_a_record_without_checks_says_so(tmp_path: Path) -> None:
    """No verdict is no verdict, neither good nor bad."""
    record_run(Simulation(made(check=[])), tmp_path / "a.h5")
    with open_record(tmp_path / "a.h5") as record:
        page = record_page(record)
    assert (page.tone, page.verdict) == ("open", "No check was made")


def test_pages_are_not_overwritten_unasked(pages: dict[str, Page], tmp_path: Path) -> None:
    """A page that is there is replaced when asked; what is no page is never written."""
    target = tmp_path / "page.html"
    write_page(pages["record"], target)
    with pytest.raises(OutputError, match="exists"):
        write_page(pages["record"], target)
    write_page(pages["night"], target, overwrite=True)
    assert "Fails in" in target.read_text("utf-8")
    with pytest.raises(OutputError, match=r"is written as \.html"):
        write_page(pages["record"], tmp_path / "page.pdf")
    with pytest.raises(OutputError, match="there is no directory"):
        write_page(pages["record"], tmp_path / "none" / "page.html")
    assert sorted(path.name for path in tmp_path.iterdir()) == ["page.html"]


@pytest.fixture(scope="module")
def browser() -> Iterator[Any]:
    """A real browser without a screen."""
    program = next((found for name in BROWSERS if (found := shutil.which(name))), None)
    if program is None:
        pytest.skip(f"no browser here: none of {', '.join(BROWSERS)} is installed")
    playwright = pytest.importorskip("playwright.sync_api")
    quiet = ["--no-sandbox", "--disable-gpu", "--disable-quic", "--disable-sync"]
    quiet += ["--disable-background-networking", "--disable-component-update", "--no-first-run"]
    with playwright.sync_playwright() as started:
        opened = started.chromium.launch(executable_path=program, args=quiet)
        yield opened
        opened.close()


LOOK = """() => {
  const wide = [...document.querySelectorAll('body *')].filter(each =>
    !each.closest('.scroll') && each.getBoundingClientRect().right > innerWidth + 1);
  const box = document.querySelector('.verdict').getBoundingClientRect();
  return {
    scroll: document.documentElement.scrollWidth, width: innerWidth,
    wide: wide.map(each => each.tagName),
    images: [...document.images].every(each => each.complete && each.naturalWidth > 300),
    verdict: box.bottom < innerHeight && box.height > 20,
    ink: getComputedStyle(document.body).color,
    paper: getComputedStyle(document.body).backgroundColor,
    small: Math.min(...[...document.querySelectorAll('p, td, th, figcaption')].map(
      each => parseFloat(getComputedStyle(each).fontSize))),
  };
}"""


def _luminance(colour: str) -> float:
    """Relative luminance of a colour as a browser tells it. Source: WCAG 2.1, from memory."""
    parts = [int(part) / 255.0 for part in re.findall(r"\d+", colour)[:3]]
    linear = [p / 12.92 if p <= 0.03928 else ((p + 0.055) / 1.055) ** 2.4 for p in parts]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


@pytest.mark.parametrize("width", [390, 1280])
@pytest.mark.parametrize("name", ["record", "night"])
def test_a_page_looks_right(
    pages: dict[str, Page], browser: Any, tmp_path: Path, name: str, width: int
) -> None:
    """On a phone and on a desk: nothing sticks out, the verdict is seen at once, text is dark."""
    path = write_page(pages[name], tmp_path / "page.html")
    asked: list[str] = []
    sheet = browser.new_page(viewport={"width": width, "height": 800})
    sheet.on("request", lambda request: asked.append(request.url))
    faults: list[str] = []
    sheet.on("console", lambda message: faults.append(message.text))
    sheet.on("pageerror", lambda error: faults.append(str(error)))
    sheet.goto(path.as_uri(), wait_until="load")
    seen = sheet.evaluate(LOOK)
    sheet.close()
    assert [url for url in asked if not url.startswith(("file:", "data:"))] == []
    assert faults == []
    assert seen["scroll"] <= seen["width"]
    assert seen["wide"] == []
    assert seen["images"]
    assert seen["verdict"]
    assert seen["small"] >= 12.0
    ratio = (_luminance(seen["paper"]) + 0.05) / (_luminance(seen["ink"]) + 0.05)
    assert ratio > 7.0  # WCAG 2.1, 1.4.6, dark on light


def test_a_folded_section_opens(pages: dict[str, Page], browser: Any, tmp_path: Path) -> None:
    """How it was computed is folded, and opens at a click on its heading."""
    path = write_page(pages["record"], tmp_path / "page.html")
    sheet = browser.new_page(viewport={"width": 1280, "height": 800})
    sheet.goto(path.as_uri())
    caption = sheet.get_by_text("Versions", exact=True)
    assert not caption.is_visible()
    sheet.get_by_text("How it was computed").last.click()
    assert caption.is_visible()
    sheet.close()


def test_a_night_without_checks_says_so(tmp_path: Path) -> None:
    """A set whose scenarios have no check has a page all the same, without a verdict."""
    rules = '[[vary]]\nkey = "adc.bits"\nvalues = [10, 12]\n'
    table = night(tmp_path, "night", rules, checks=False)
    page = night_page(summarize(table))
    assert (page.tone, page.verdict) == ("open", "No check was made")
    assert "worst" not in [section.name for section in page.sections]
    Outline(render(page))
