"""The laid-out pages as primitives: nothing outside the paper, nothing over anything else."""

from __future__ import annotations

from dataclasses import replace
from itertools import pairwise

import pytest
import sample_result
from sample_result import LONG_TAG, MARKUP_TITLE, sample

from supplycheck.report.build import build_document
from supplycheck.report.document import Column, Document, Row, Section, Table
from supplycheck.report.drawing import Box, Label, Line
from supplycheck.report.figures import plan
from supplycheck.report.layout import lay_out
from supplycheck.report.pdf import FontRuler
from supplycheck.report.sections import rows
from supplycheck.report.sheet import MARGIN, Sheet
from supplycheck.results.records import Result
from supplycheck.units import US

RULER = FontRuler()

VARIANTS: dict[str, Result] = {
    "us tree": sample(lines=8, heads=8),
    "metric, both laws, markup, long tag": sample(
        "metric",
        paper="a4",
        darcy=True,
        second=True,
        verdict="not adequate",
        long_tags=True,
        title=MARKUP_TITLE,
    ),
    "long title": sample(lines=3, heads=3, verdict="undetermined", title="T" * 300),
    "no coordinates, one head": sample(lines=1, heads=1, placed=False),
    "nothing optional": replace(
        sample(),
        path=(),
        hand_check=(),
        curves=(),
        points=(),
        scenarios=(),
        findings=(),
        open_questions=(),
        design_area=replace(sample().design_area, placements=(), runner_up=None, most_favourable=None),
    ),
}


def pages(result: Result) -> list[Sheet]:
    return lay_out(build_document(result), RULER)


def box_of(label: Label) -> tuple[float, float, float, float]:
    wide = RULER.width(label.text, label.size, label.bold)
    left = label.x - {"start": 0.0, "middle": wide / 2, "end": wide}[label.anchor]
    return left, label.y - 0.2 * label.size, left + wide, label.y + 0.7 * label.size


def texts(sheet: Sheet) -> list[Label]:
    return [item for item in sheet.items if isinstance(item, Label)]


@pytest.mark.parametrize("result", VARIANTS.values(), ids=list(VARIANTS))
def test_no_text_leaves_the_margins(result: Result) -> None:
    for number, sheet in enumerate(pages(result), start=1):
        for label in texts(sheet):
            if label.angle:
                continue
            left, low, right, high = box_of(label)
            where = f"page {number}: {label.text!r}"
            assert left >= MARGIN - 1, where
            assert right <= sheet.width - MARGIN + 1, where
            assert low >= 20, where
            assert high <= sheet.height - 20, where


@pytest.mark.parametrize("result", VARIANTS.values(), ids=list(VARIANTS))
def test_no_text_lies_over_another(result: Result) -> None:
    for number, sheet in enumerate(pages(result), start=1):
        boxes = sorted((box_of(label), label.text) for label in texts(sheet) if not label.angle)
        for place, (one, text) in enumerate(boxes):
            for other, other_text in boxes[place + 1 :]:
                if other[0] >= one[2] - 0.6:
                    break
                over = min(one[3], other[3]) - max(one[1], other[1])
                assert over < 0.8, f"page {number}: {text!r} over {other_text!r}"


@pytest.mark.parametrize("result", VARIANTS.values(), ids=list(VARIANTS))
def test_no_figure_leaves_the_paper(result: Result) -> None:
    for sheet in pages(result):
        for item in sheet.items:
            points = item.points if isinstance(item, Line) else ()
            if isinstance(item, Box):
                points = ((item.x, item.y), (item.x + item.width, item.y + item.height))
            for x, y in points:
                assert MARGIN - 3 <= x <= sheet.width - MARGIN + 3
                assert 20 <= y <= sheet.height - 20


def test_every_page_says_what_it_is_and_where_it_stands() -> None:
    sheets = pages(VARIANTS["us tree"])
    for number, sheet in enumerate(sheets, start=1):
        words = [label.text for label in texts(sheet)]
        assert "preliminary engineering aid – not an approval" in words
        assert f"page {number} of {len(sheets)}" in words
        assert "2026-11-20" in words
        assert "Parcel depot (invented)" in words


def test_the_first_page_answers_alone() -> None:
    words = " ".join(label.text for label in texts(pages(VARIANTS["us tree"])[0]))
    for wanted in (
        "Supply adequate – for the values entered",
        "58.3 psi",
        "612.4 gpm",
        "66.1 psi",
        "+7.8 psi",
        "+2.8 psi",
        "head H1.1: density over the area it covers",
        "Which edition and amendments has the authority adopted?",
        "County fire marshal (invented)",
        "NFPA 13 (2022)",
        "preliminary",
    ):
        assert wanted in words


@pytest.mark.parametrize("verdict", ["adequate", "not adequate", "undetermined"])
def test_no_page_calls_anything_approved_or_compliant(verdict: str) -> None:
    for sheet in pages(sample(verdict=verdict)):
        words = " ".join(label.text for label in texts(sheet)).lower()
        for claim in ("complies", "compliant", "approved", "certified by", "passes"):
            assert claim not in words


def test_the_sections_stand_in_the_order_in_which_a_reviewer_reads() -> None:
    titles = [section.title for section in build_document(VARIANTS["us tree"]).sections]
    wanted = (
        "The answer",
        "Basis of design",
        "Water supply analysis",
        "Plan and design area",
        "Where the pressure goes",
        "Node analysis",
        "Pipe information",
        "Hand check of the governing path",
        "Findings",
        "What really flows, and the balance",
        "Assumptions and origins",
        "Cautions and review",
        "Placements one by one",
        "Input as read",
    )
    assert tuple(titles) == wanted


def test_a_long_tag_is_printed_whole_in_the_node_analysis() -> None:
    sheets = pages(VARIANTS["metric, both laws, markup, long tag"])
    words = "".join(label.text for sheet in sheets for label in texts(sheet) if label.bold)
    assert LONG_TAG in words


def test_a_table_of_five_hundred_nodes_repeats_its_header_and_keeps_every_row() -> None:
    result = sample(lines=25, heads=20)
    sheets = pages(result)
    own = [sheet for sheet in sheets if any(label.text == "Discharge" for label in texts(sheet))]
    assert len(own) > 5
    first = [label.text for sheet in own for label in texts(sheet) if abs(label.x - MARGIN - 3) < 0.01]
    for node in result.nodes:
        assert first.count(node.tag) >= 1
    for sheet in own:
        assert "Pressure" in [label.text for label in texts(sheet)]


def test_a_row_taller_than_a_page_goes_on_over_the_next() -> None:
    words = " ".join(f"word{number}" for number in range(3000))
    table = Table("Tall", (Column("No.", right=True), Column("Text", wrap=True)), (Row(("1", words)),))
    document = Document("t", "", "2026-01-01", "letter", "standing", "test", (Section("one", (table,)),))
    sheets = lay_out(document, RULER)
    assert len(sheets) > 2
    printed = " ".join(label.text for sheet in sheets for label in texts(sheet))
    places = [printed.index(f"word{number} ") for number in range(0, 2999, 100)]
    assert all(before < after for before, after in pairwise(places))


def test_the_reviews_lines_are_blank() -> None:
    """Nobody's name, licence or date is filled in: each label is followed by a line and nothing else."""
    sheets = pages(VARIANTS["us tree"])
    for sheet in sheets:
        labels = texts(sheet)
        for label in labels:
            if label.text != "Licence no. and place":
                continue
            beside = [other for other in labels if abs(other.y - label.y) < 3 and other is not label]
            assert beside == []
            return
    pytest.fail("no line for the licence number was found")


def test_sample_numbers_are_marked_as_invented() -> None:
    assert "INVENTED" in (sample_result.__doc__ or "")


def test_of_too_many_rows_the_ones_that_matter_are_printed_and_the_rest_counted(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    monkeypatch.setattr(rows, "MOST_ROWS", 20)
    result = sample(lines=6, heads=6)
    words = " ".join(label.text for sheet in pages(result) for label in texts(sheet))
    left_out = len(result.nodes) - sum(node.in_design_area for node in result.nodes)
    assert f"{left_out} further nodes are not printed here; nodes.csv holds every one." in words
    assert f"{len(result.pipes) - 20} further pipes are not printed here" in words


def test_a_crowded_plan_still_names_the_design_area() -> None:
    view = plan.whole_plan(sample(lines=55, heads=50), US, (522.0, 400.0))
    names = {item.text for item in view.drawing.items if isinstance(item, Label)}
    assert {"H1.1", "S"} <= names
    assert view.tags_shown < 100
