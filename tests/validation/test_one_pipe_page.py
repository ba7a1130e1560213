"""The page that sets computed beside printed is what the program computes, and the two agree."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from one_pipe_page import (
    Row,
    annex_rows,
    chart_rows,
    more_problem_rows,
    page,
    problem_rows,
    trade_rows,
)

PAGE = Path(__file__).parents[2] / "docs" / "validation_parts" / "one_pipe.md"
ROWS = annex_rows() + trade_rows() + chart_rows() + problem_rows() + more_problem_rows()

# What the sources themselves leave open, beyond half a unit of the printed digit: each named on the page
OPEN = {
    "171.9 gpm, 2½ in, psi/ft": 0.0008,  # cut to 0.107, not rounded
    "21 ft of fittings in it, ft": 0.1,  # the sheet multiplies rounded factors
    "K 5.6 gpm/psi½ in L/min/bar½": 0.14,  # 14.4 printed for 14.4163
    "multiplier for C 100": 0.0008,  # 0.713 printed for 0.7137
    "2½ in outlet, c 0.90, pitot 14 psi, gpm": 0.6,  # 627.5 from a constant between 29.81 and 29.82
    "Fox and McDonald 8.7: flow with f 0.031, gpm": 3.3,  # f of two digits
    "Fox and McDonald 8.7: flow with that f, gpm": 3.3,
    "Çengel and Cimbala 8-4: Re": 150.0,  # d rounded to three digits
    "White 6.6: head loss, ft": 0.16,  # f of two digits
    "White 6.6: loss, lbf/ft²": 5.0,  # two digits
    "White 6.7: f": 0.0003,  # read off the chart
    "White 6.7: drop of pressure, kPa": 8.9,  # the difference of two heads of whole metres
    "Çengel and Cimbala 8-2: Re, laminar": 1.4,  # viscosity of four digits
    "Çengel and Cimbala 8-2: loss, lbf/ft²": 1.9,  # f of three digits
}


def test_page_is_up_to_date() -> None:
    assert PAGE.read_text(encoding="utf-8") == page(), (
        "run python tests/validation/one_pipe_page.py docs/validation_parts/one_pipe.md"
    )


@pytest.mark.parametrize("row", ROWS, ids=[row.what for row in ROWS])
def test_computed_agrees_with_printed(row: Row) -> None:
    """Half a unit of the last printed digit, unless the source itself leaves more open."""
    numbers = [text.replace(" ", "") for text in re.split("–", row.printed)]
    half = max(0.5 * 10.0 ** -len(text.partition(".")[2]) for text in numbers)
    allowance = OPEN.get(row.what, 1.000001 * half)
    low, high = float(numbers[0]) - allowance, float(numbers[-1]) + allowance
    assert low <= row.computed <= high


def test_open_rows_exist() -> None:
    assert set(OPEN) <= {row.what for row in ROWS}
