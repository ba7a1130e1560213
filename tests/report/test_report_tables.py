"""Tables on pages: words apart from numbers, empty columns left out, notes kept with their rows."""

from __future__ import annotations

from supplycheck.report.document import Column, Document, Row, Section, Table
from supplycheck.report.drawing import Label
from supplycheck.report.layout import lay_out
from supplycheck.report.pdf import FontRuler
from supplycheck.report.sheet import Sheet
from supplycheck.report.show import without_empty


def _pages(*sections: Section) -> list[Sheet]:
    document = Document("title", "", "2026-11-20", "letter", "standing", "producer", sections)
    return lay_out(document, FontRuler())


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
