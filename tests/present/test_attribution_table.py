"""The table of what each change does alone."""

from __future__ import annotations

from rich.console import Console

from frontend_sim.comparison import Attribution, Share
from frontend_sim.present.comparison_table import attribution_table


def test_what_moves_nothing_is_not_told_as_a_number() -> None:
    """Only what moves a measure has a row; nothing beyond the sum reads as none."""
    split = Attribution(
        units={"pin, mean": "LSB", "headroom": "V"},
        total={"pin, mean": 0.1, "headroom": 0.0},
        shares=(
            Share("chain[1].gain", {"pin, mean": 0.1 + 1e-13, "headroom": 0.0}),
            Share("chain[2].corner", {"pin, mean": 0.0, "headroom": 0.0}),
        ),
        rounding={"pin, mean": 1e-9, "headroom": 1e-9},
    )
    console = Console(width=100)
    with console.capture() as caught:
        console.print(attribution_table(split))
    rows = [" ".join(line.split()) for line in caught.get().splitlines()]
    text = "\n".join(rows)
    assert "chain[1].gain" in text
    assert "+0.1000 LSB" in text
    assert any("beyond the sum" in row and "none" in row for row in rows)
    assert "e-" not in text
    assert "chain[2].corner" not in text
    assert "headroom" not in text


def test_margins_are_told_as_such() -> None:
    """What moves by -3.5 us is the margin of a wait that grows; that of a share is in percent."""
    split = Attribution(
        units={"settling": "s", "overshoot": "1"},
        total={"settling": -3.5e-6, "overshoot": 0.02},
        shares=(Share("chain[1].capacitance", {"settling": -3.5e-6, "overshoot": 0.02}),),
        rounding={"settling": 1e-12, "overshoot": 1e-12},
        margins=frozenset({"settling", "overshoot"}),
    )
    console = Console(width=100)
    with console.capture() as caught:
        console.print(attribution_table(split))
    text = " ".join(caught.get().split())
    assert "settling: margin │ chain[1].capacitance │ -3.500 us" in text
    assert "overshoot: margin │ chain[1].capacitance │ +2.000 %" in text
