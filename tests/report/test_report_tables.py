"""Tables on pages: words apart from numbers, empty columns left out, notes kept with their rows."""

from __future__ import annotations

import pytest

from supplycheck.report.document import (
    BlankLines,
    Block,
    Column,
    Document,
    Facts,
    Figure,
    Heading,
    Listing,
    Paragraph,
    Row,
    Section,
    Table,
)
from supplycheck.report.drawing import Drawing, Label
from supplycheck.report.html import html_text
from supplycheck.report.layout import lay_out
from supplycheck.report.pdf import FontRuler
from supplycheck.report.sheet import Sheet
from supplycheck.report.show import without_empty


def _document(*sections: Section) -> Document:
    return Document("title", "", "2026-11-20", "letter", "standing", "producer", sections)


def _pages(*sections: Section) -> list[Sheet]:
    return lay_out(_document(*sections), FontRuler())


def _rows(count: int, name: str = "row") -> Table:
    return Table("", (Column("A"),), tuple(Row((f"{name} {place}",)) for place in range(count)))


def _texts(sheet: Sheet) -> list[str]:
    return [item.text for item in sheet.items if isinstance(item, Label)]


def test_words_after_numbers_stand_apart() -> None:
    columns = (Column("Pressure", right=True), Column("Head"))
    table = Table("", columns, tuple(Row(("10.5", f"H{place}")) for place in range(3)))
    page = _pages(Section("The answer", (table,)))[0]
    labels = [item for item in page.items if isinstance(item, Label)]
    number = next(item for item in labels if item.text == "10.5")
    word = next(item for item in labels if item.text == "H0")
    assert number.anchor == "end"
    assert word.x - number.x >= 10.0  # a good em of 7 points between the two columns


def test_a_note_never_stands_alone_on_a_page() -> None:
    for count in range(30, 75):
        rows = tuple(Row((f"row {place}",)) for place in range(count))
        for page in _pages(Section("The answer", (Table("T", (Column("A"),), rows, "the note"),))):
            texts = _texts(page)
            assert "the note" not in texts or any(text.startswith("row ") for text in texts)


def test_columns_without_a_value_are_left_out_only_where_named() -> None:
    columns = (Column("A"), Column("B"), Column("C"))
    table = Table("", columns, (Row(("1", "–", "–")), Row(("2", "", "3"))))
    kept = without_empty(table, "B", "C")
    assert [column.title for column in kept.columns] == ["A", "C"]
    assert [row.cells for row in kept.rows] == [("1", "–"), ("2", "3")]
    assert without_empty(table, "C") == table


def test_a_short_section_shares_its_page_and_a_long_one_does_not() -> None:
    def table(count: int) -> Table:
        return Table("", (Column("A"),), tuple(Row((f"row {place}",)) for place in range(count)))

    after = Section("After", (table(3),), fresh=True)
    assert len(_pages(Section("The answer", (table(8),)), after)) == 1
    assert len(_pages(Section("The answer", (table(35),)), after)) == 2


WHAT_FOLLOWS: dict[str, tuple[tuple[Block, ...], str]] = {
    "a short table": ((_rows(3, "own"),), "own 2"),
    "a long table": ((_rows(90, "own"),), "own 2"),
    "a sentence and a table": ((Paragraph("said of it"), _rows(3, "own")), "own 2"),
    "two sentences and a long table": ((Paragraph("one"), Paragraph("two"), _rows(90, "own")), "own 2"),
    "facts": ((Facts((("label", "value"), ("last label", "value"))),), "last label"),
    "a figure": ((Figure("", Drawing(100.0, 160.0, (Label(0, 0, "foot of it"),))),), "foot of it"),
}


@pytest.mark.parametrize("blocks, last", WHAT_FOLLOWS.values(), ids=list(WHAT_FOLLOWS))
def test_a_heading_is_never_parted_from_what_it_heads(blocks: tuple[Block, ...], last: str) -> None:
    """Wherever on the page it falls: the heading stands on the page of the first rows below it."""
    for used in range(2, 70):
        for page in _pages(Section("The answer", (_rows(used), Heading("heading of it"), *blocks))):
            assert ("heading of it" in _texts(page)) == (last in _texts(page))


def test_the_title_of_a_section_is_never_parted_from_its_first_rows() -> None:
    for used in range(2, 70):
        first = Section("The answer", (_rows(used),))
        second = Section("Title of it", (Paragraph("said of it"), _rows(90, "own")))
        for page in _pages(first, second):
            assert ("Title of it" in _texts(page)) == ("own 2" in _texts(page))


def test_no_row_or_two_go_over_to_a_page_alone() -> None:
    for count in range(8, 150):
        pages = [
            [text for text in _texts(page) if text.startswith("row ")]
            for page in _pages(Section("The answer", (_rows(count),)))
        ]
        assert all(len(rows) >= 3 for rows in pages)
        assert [row for rows in pages for row in rows] == [f"row {place}" for place in range(count)]


def test_those_who_sign_do_so_on_one_page() -> None:
    first = BlankLines("For the designer", ("Name", "Date"), remarks=2)
    second = BlankLines("For the authority", ("Name", "Date"), remarks=2)
    for used in range(8, 60):
        pages = [_texts(page) for page in _pages(Section("The answer", (_rows(used), first, second)))]
        assert any({first.title, second.title} <= set(page) for page in pages)


def test_a_table_without_rows_is_one_line_without_a_header() -> None:
    table = Table("Adjustments of the curve", (Column("What it does"),), (), empty="none in the project")
    section = Section("The answer", (table,))
    texts = _texts(_pages(section)[0])
    assert "Adjustments of the curve: none in the project." in texts
    assert "What it does" not in texts
    page = html_text(_document(section))
    assert "Adjustments of the curve: none in the project." in page
    assert "What it does" not in page


def test_a_listing_does_not_end_on_a_page_of_its_own() -> None:
    for count in range(40, 240):
        listing = Listing("file", tuple(f"line {place}" for place in range(count)))
        told = [
            [text for text in _texts(page) if text.startswith("line ")]
            for page in _pages(Section("The answer", (listing,)))
        ]
        assert [text for page in told for text in page] == list(listing.lines)
        assert len(told[-1]) >= 10


def test_a_long_table_starts_with_three_rows_at_least() -> None:
    long = Table("Table of it", (Column("A", "psi"),), tuple(Row((f"own {place}",)) for place in range(60)))
    for used in range(2, 70):
        for page in _pages(Section("The answer", (_rows(used), long))):
            if "Table of it" in _texts(page):
                assert "own 2" in _texts(page)
