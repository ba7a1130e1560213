"""Colours, sizes and widths of letters, shared by the figures and the writers.

Every colour pair also differs in lightness, and every meaning is carried by a word, a dash or a
width as well, so that the report reads in black and white.
"""

from __future__ import annotations

from types import MappingProxyType
from typing import Final

INK: Final = "#16262e"
SLATE: Final = "#4d6069"
RULE: Final = "#b4c1c6"
MIST: Final = "#edf2f3"
PAPER: Final = "#ffffff"
PETROL: Final = "#0b4a5a"
LAGOON: Final = "#3f93a5"
CLAY: Final = "#9c3b22"
SAND: Final = "#d9b77a"
PLUM: Final = "#6b4a7d"

VERDICT_COLOURS: Final = MappingProxyType({"adequate": PETROL, "not adequate": CLAY, "undetermined": SLATE})

# Advance widths of the letters space to tilde in thousandths of the size (DejaVu Sans), for
# figures that must know how long a label is before a writer draws it.
_WIDTHS: Final = (
    318, 401, 460, 838, 636, 950, 780, 275, 390, 390, 500, 838, 318, 361, 318, 337,
    636, 636, 636, 636, 636, 636, 636, 636, 636, 636, 337, 337, 838, 838, 838, 531,
    1000, 684, 686, 698, 770, 632, 575, 775, 752, 295, 295, 656, 557, 863, 748, 787,
    603, 787, 695, 635, 611, 732, 684, 989, 685, 611, 685, 390, 337, 390, 838, 500,
    500, 613, 635, 550, 635, 615, 352, 635, 634, 278, 278, 579, 278, 974, 634, 612,
    635, 635, 411, 521, 392, 634, 592, 818, 592, 592, 525, 636, 337, 636, 838,
)  # fmt: skip
_OTHER: Final = 720
BOLD: Final = 1.13


def text_width(text: str, size: float, *, bold: bool = False) -> float:
    """Return the width of ``text`` at ``size``, both in points (an upper estimate for bold)."""
    total = sum(_WIDTHS[ord(char) - 32] if 32 <= ord(char) < 127 else _OTHER for char in text)
    return total * size / 1000 * (BOLD if bold else 1.0)
