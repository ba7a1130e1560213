"""Which slip of writing a length that does not fit its coordinates looks like."""

from __future__ import annotations

import math
from typing import Final

FOOT, INCH = 0.3048, 0.0254
ABOUT: Final = 0.04
"""Share by which a slipped length may miss: coordinates and lengths are rounded (common practice)."""

_UNITS: Final = (
    (FOOT, "metres", "feet"),
    (INCH, "metres", "inches"),
    (INCH / FOOT, "feet", "inches"),
)


def likely_slip(ratio: float) -> str:
    """Return the likely cause of a length that is ``ratio`` [-] times the distance, as a question.

    Empty where none is at hand. Factors are exact (NIST SP 811: foot and inch).

    >>> likely_slip(3.28)
    'the length in feet, the coordinates in metres?'
    >>> likely_slip(0.1), likely_slip(1.7)
    ('a slip of the decimal point?', '')
    """
    if not (ratio > 0 and math.isfinite(ratio)):
        return ""
    power = round(math.log10(ratio))
    if power and abs(ratio / 10.0**power - 1) <= ABOUT:
        return "a slip of the decimal point?"
    for factor, large, small in _UNITS:
        if abs(ratio / factor - 1) <= ABOUT:
            return f"the length in {large}, the coordinates in {small}?"
        if abs(ratio * factor - 1) <= ABOUT:
            return f"the length in {small}, the coordinates in {large}?"
    return ""
