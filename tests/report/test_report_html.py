"""The HTML page: well formed, escaped, on its own, the same words as the PDF."""

from __future__ import annotations

from html.parser import HTMLParser

from sample_result import MARKUP_TITLE, sample

from supplycheck.report.build import build_document
from supplycheck.report.html import html_text

VOID = {"meta"}


class Reader(HTMLParser):
    def __init__(self) -> None:
        super().__init__()
        self.open: list[str] = []
        self.words: list[str] = []
        self.links: list[str] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        if tag not in VOID:
            self.open.append(tag)
        self.links += [value or "" for name, value in attrs if name in {"src", "href"}]

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        pass

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        self.words.append(data)


def read(text: str) -> Reader:
    reader = Reader()
    reader.feed(text)
    reader.close()
    assert reader.open == []
    return reader


def test_page_is_well_formed_and_stands_alone() -> None:
    reader = read(html_text(build_document(sample(lines=8))))
    assert reader.links == []
    words = " ".join(reader.words)
    for wanted in ("58.3 psi", "Node analysis", "H8.1", "preliminary engineering aid – not an approval"):
        assert wanted in words


def test_markup_prints_as_typed() -> None:
    text = html_text(build_document(sample(title=MARKUP_TITLE)))
    assert "<b>bold</b>" not in text
    assert r'Depot "North" <b>bold</b> & co. <para>50 % {measured}\x07 Größe' in "".join(read(text).words)


def test_same_page_each_time() -> None:
    assert html_text(build_document(sample())) == html_text(build_document(sample()))
