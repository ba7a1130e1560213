"""Words and symbols of the report: one meaning each, on every page."""

from __future__ import annotations

from functools import cache
from pathlib import Path

from supplycheck.check import check_project
from supplycheck.report.build import build_document
from supplycheck.report.document import Document, Paragraph, Table
from supplycheck.results.records import Result

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
