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
