"""The colours of all plots: a set that colour-blind readers tell apart.

Source: M. Okabe and K. Ito 2008, "Color Universal Design".
"""

from __future__ import annotations

from typing import Final

BLACK: Final = "#000000"
ORANGE: Final = "#E69F00"
SKY_BLUE: Final = "#56B4E9"
GREEN: Final = "#009E73"
YELLOW: Final = "#F0E442"
BLUE: Final = "#0072B2"
VERMILION: Final = "#D55E00"
PURPLE: Final = "#CC79A7"

EXACT = BLUE
"""What is computed exactly."""

LIMIT = VERMILION
"""Limits, and what is beyond them."""

MARK = "#555555"
"""Lines that mark a place: corners, rates, times."""

SERIES = (BLUE, ORANGE, GREEN, PURPLE, SKY_BLUE, VERMILION, BLACK, YELLOW)
"""Points of a chain, in order."""
