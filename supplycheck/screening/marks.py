"""What can be said about the quality of a hydrant test: one mark each, told in words in the results.

References
----------
.. [1] NFPA 291 (from memory where the catalogue says so): drop, pitot readings, 20 psi in the main.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

PRACTICE: Final = "common practice, no source"


@dataclass(frozen=True, slots=True)
class Mark:
    """A quality finding: ``words`` in the results file, ``meaning`` and ``source`` in the report."""

    words: str
    meaning: str
    source: str


MARKS: Final = (
    Mark("drop under 10 %", "the residual is less than 10 % below the static", "NFPA 291, later editions"),
    Mark(
        "drop under 25 %",
        "the drop is 10 % or more, but less than the 25 % of older editions",
        "NFPA 291 (2010 and before)",
    ),
    Mark("pitot under 10 psi", "a pitot reading below the preferred range", "NFPA 291"),
    Mark("pitot over 30 psi", "a pitot reading above it, outlets smaller than 4 in", "NFPA 291"),
    Mark("pitot above static", "a pitot reading above the static pressure: check the row", PRACTICE),
    Mark(
        "required beyond tested",
        "the required flow is above the flow of the test: the curve is extrapolated",
        PRACTICE,
    ),
    Mark("residual below 20 psi", "the main fell below 20 psi (1.4 bar) during the test", "NFPA 291"),
    Mark("static below 20 psi", "the static is below the rating pressure: no flow at 20 psi", "NFPA 291"),
    Mark("no pitot reading", "a flow is given without the readings behind it", PRACTICE),
    Mark(
        "flow differs from readings",
        "the flow given is more than 2 % off the outlets' readings, which are used",
        PRACTICE,
    ),
    Mark("no date", "the day of the test is not given", PRACTICE),
    Mark("stale test", "the test is older than the limit given", "the limit given with --maximum-age"),
    Mark("test in the future", "the day of the test lies after the day of the screening", PRACTICE),
    Mark(
        "unlikely reading",
        "a static above 300 psi (20.7 bar), or an outlet below 1 in or above 8 in: check the units",
        PRACTICE,
    ),
    Mark("no line end", "the last row has no line end and may be cut short", PRACTICE),
)
BIT: Final = {mark.words: 1 << place for place, mark in enumerate(MARKS)}


def marks_text(bits: int) -> str:
    """Return the marks of ``bits`` in words.

    >>> marks_text(BIT["no date"] | BIT["drop under 10 %"])
    'drop under 10 %; no date'
    """
    return "; ".join(mark.words for mark in MARKS if bits & BIT[mark.words])


def marks_texts(bits: np.ndarray[tuple[int], np.dtype[np.int64]]) -> list[str]:
    """Return the words for every element of ``bits``."""
    each, inverse = np.unique(bits, return_inverse=True)
    words = [marks_text(int(one)) for one in each]
    return [words[place] for place in inverse.tolist()]
