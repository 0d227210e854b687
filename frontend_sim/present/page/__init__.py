"""One self-contained page of HTML: verdicts first, how it was computed last."""

from frontend_sim.present.page.content import Page
from frontend_sim.present.page.night_page import night_page
from frontend_sim.present.page.record_page import record_page
from frontend_sim.present.page.render import check_page_target, render, write_page
from frontend_sim.present.page.scan_page import scan_page

__all__ = [
    "Page",
    "check_page_target",
    "night_page",
    "record_page",
    "render",
    "scan_page",
    "write_page",
]
