"""Every placement can be checked on paper, not the governing one and the runner-up alone."""

from __future__ import annotations

from dataclasses import replace

import pytest
from sample_result import sample

from supplycheck.report.build import build_document
from supplycheck.report.document import Section, Table
from supplycheck.report.sections.layout_plan import MOST_PLACEMENTS, placements
from supplycheck.results.records import Placement, Result
from supplycheck.units import GPM, PSI


def tried(count: int) -> Result:
    """Return a result with ``count`` placements, the hardest of which stands in the middle."""
    made = tuple(
        Placement(
            f"place {n}", (f"H{n}.1", f"H{n}.2"), (40 - abs(n - count // 2)) * PSI, 300 * GPM, m, 140, n, 0
        )
        for n in range(count)
        for m in (abs(n - count // 2) * PSI,)
    )
    area = replace(sample().design_area, placements=made, tried=count, governing=made[count // 2])
    return replace(sample(), design_area=replace(area, runner_up=made[count // 2 - 1]))


def table_of(section: Section | None) -> Table:
    assert section is not None
    return next(block for block in section.blocks if isinstance(block, Table))


@pytest.mark.parametrize("count", [3, MOST_PLACEMENTS, MOST_PLACEMENTS + 1])
def test_the_hardest_stand_first_with_their_heads(count: int) -> None:
    table = table_of(placements(tried(count)))
    assert len(table.rows) == min(count, MOST_PLACEMENTS)
    assert table.rows[0].cells[:2] == ("1", f"place {count // 2}")
    margins = [float(row.cells[4]) for row in table.rows]
    assert margins == sorted(margins)
    for row in table.rows:
        name = row.cells[1].removeprefix("place ")
        assert row.cells[7] == f"H{name}.1, H{name}.2" and row.cells[6] == "2"


def test_it_is_said_where_the_rest_is() -> None:
    note = table_of(placements(tried(MOST_PLACEMENTS + 5))).note
    assert f"The {MOST_PLACEMENTS} hardest of {MOST_PLACEMENTS + 5}" in note
    assert "result.json" in note and "tables.xlsx" in note
    assert "All 3 " in table_of(placements(tried(3))).note


def test_two_placements_are_compared_already() -> None:
    assert placements(tried(2)) is None
    titles = [section.title for section in build_document(tried(3)).sections]
    assert titles[-2:] == ["Placements one by one", "Input as read"]
