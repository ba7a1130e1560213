"""Words and symbols of the report: one meaning each, on every page."""

from __future__ import annotations

from functools import cache
from pathlib import Path

from supplycheck.check import check_project
from supplycheck.report.build import build_document
from supplycheck.report.document import Document, Paragraph, Table
from supplycheck.report.drawing import Box, Label, Line
from supplycheck.report.figures.bars import pressure_bars
from supplycheck.report.show import Show, told_apart
from supplycheck.results.records import Result
from supplycheck.units import PSI, US

EXAMPLES = Path(__file__).parents[2] / "examples"


@cache
def result_of(name: str) -> Result:
    return check_project(EXAMPLES / name)


@cache
def document_of(name: str) -> Document:
    return build_document(result_of(name))


def table_of(name: str, title: str) -> Table:
    blocks = (block for section in document_of(name).sections for block in section.blocks)
    return next(block for block in blocks if isinstance(block, Table) and block.title == title)


def told(name: str) -> str:
    blocks = (block for section in document_of(name).sections for block in section.blocks)
    return " ".join(block.text for block in blocks if isinstance(block, Paragraph))


def test_a_small_pf_is_a_loss_per_length_in_every_table() -> None:
    tables = [table_of("office-floor", title) for title in ("Pipes with flow", "The path")]
    for table in tables:
        named = [column for column in table.columns if column.title.startswith("pf")]
        assert [column.unit for column in named] == ["mbar/m"]
    whole = next(column for column in tables[0].columns if column.title == "Pf")
    assert whole.unit == "bar"
    assert told("office-floor").count("pf loss per length") == 2


def test_the_margin_of_the_list_is_the_one_before_the_rule() -> None:
    assert table_of("gridded-cold-store", "By margin before the rule").rows


def test_over_discharge_and_average_density_are_defined() -> None:
    table = table_of("looped-workshop", "Scenarios")
    titles = [column.title for column in table.columns]
    assert "Average density" in titles and "Density" not in titles
    assert "÷ sum of their required flows − 1" in table.note and "÷ the area" in table.note


def test_no_sum_takes_away_a_negative_number() -> None:
    """The pump of the warehouse adds pressure on the way: its term is added, not taken away twice."""
    for name in ("boosted-warehouse", "looped-workshop", "office-floor"):
        result = result_of(name)
        for step in (*result.supply.steps, *result.margin.steps, *result.hand_check):
            assert not any(f"− {word} −" in step.formula for word in ("devices", "height", "friction")), (
                step
            )
    steps = result_of("boosted-warehouse").supply.steps
    assert any("+ devices with pump" in step.formula for step in steps)


def test_the_most_favourable_area_shows_what_its_placement_asked() -> None:
    for name in ("looped-workshop", "office-floor"):
        area = result_of(name).design_area
        assert area.most_favourable is not None
        row = table_of(name, "Placements compared").rows[-1]
        same = [one for one in area.placements if set(one.heads) == set(area.most_favourable.heads)]
        show = Show.of(result_of(name))
        assert row.cells[0] == "most favourable"
        assert row.cells[3] == show.n(same[0].flow, "flow") and row.cells[5] == show.n(same[0].area, "area")
        assert "–" not in row.cells[2:6]
        assert row.note.endswith("with the actual supply")


def test_pressures_that_differ_are_not_printed_alike() -> None:
    """51.04 and 51.01 psi are both 51.0 to one decimal; two that are the same stay as they are."""
    assert told_apart([51.04 * PSI, 51.01 * PSI], US) == 2
    assert told_apart([51.0 * PSI, 51.0 * PSI], US) == 1
    assert told_apart([51.1 * PSI, 51.0 * PSI], US) == 1


def test_a_gain_is_hatched_and_its_number_stands_where_its_value_lies() -> None:
    """The pump takes the need from 38.7 psi, and 12.75 more, down to what its suction must have."""
    result = result_of("boosted-warehouse")
    drawing = pressure_bars(result.path, 0, result, US, 522.0)
    pump = next(step for step in result.path if step.device < 0)
    label = next(
        item
        for item in drawing.items
        if isinstance(item, Label) and item.text == US.text(pump.pressure_end, "pressure")
    )
    box = next(
        item
        for item in drawing.items
        if isinstance(item, Box) and item.fill == "#ffffff" and abs(item.y - label.y) < 8
    )
    assert label.anchor == "end" and 0 < box.x - label.x < 6
    slants = [item for item in drawing.items if isinstance(item, Line) and item.width == 0.5]
    assert sum(box.x <= item.points[0][0] <= box.x + box.width for item in slants) > 10
    over = [item for item in drawing.items if isinstance(item, Box) and item.fill not in {None, "#ffffff"}]
    assert not any(
        one.x < box.x + box.width
        and box.x < one.x + one.width
        and one.y < box.y + box.height - 0.01
        and box.y < one.y + one.height - 0.01
        for one in over
    )
