"""The HTML page: well formed, escaped, on its own, the same words as the PDF, open to everybody.

The rules of access are those of WCAG 2.2 (W3C, 2023) named beside each check.
"""

from __future__ import annotations

import itertools
import re
from dataclasses import replace
from html.parser import HTMLParser
from typing import Any

import pytest
from sample_result import MARKUP_TITLE, sample

from supplycheck.report.build import STANDING, build_document
from supplycheck.report.document import Block, Column, Document, Paragraph, Row, Section, Table
from supplycheck.report.html import html_text

VOID = {"meta"}


class Reader(HTMLParser):
    """Reads a page into its tags in order, with what is open, and into its words."""

    def __init__(self) -> None:
        super().__init__()
        self.open: list[str] = []
        self.words: list[str] = []
        self.tags: list[tuple[str, dict[str, str | None]]] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        if tag not in VOID:
            self.open.append(tag)
        self.tags.append((tag, dict(attrs)))

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append((tag, dict(attrs)))

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        self.words.append(data)

    def of(self, *names: str) -> list[dict[str, str | None]]:
        return [attrs for tag, attrs in self.tags if tag in names]


def read(text: str) -> Reader:
    reader = Reader()
    reader.feed(text)
    reader.close()
    assert reader.open == []
    return reader


@pytest.fixture(scope="module")
def page() -> str:
    return html_text(build_document(sample(lines=8)))


def only(*blocks: Block, **facts: Any) -> Document:
    section = Section("The answer", blocks)
    return Document("T", "", "2026-11-20", "a4", "standing", "producer", (replace(section, **facts),))


def test_page_is_well_formed_and_says_what_the_report_says(page: str) -> None:
    words = " ".join(read(page).words)
    for wanted in ("58.3 psi", "Node analysis", "H8.1"):
        assert wanted in words


def test_page_stands_alone(page: str) -> None:
    """No script, no file, no address: every link leads to a place on the page itself."""
    reader = read(page)
    places = {attrs["id"] for _, attrs in reader.tags if attrs.get("id")}
    links = [attrs["href"] or "" for attrs in reader.of("a")]
    assert len(links) > 10
    assert all(link.startswith("#") and link[1:] in places for link in links)
    assert not reader.of(
        "script", "link", "img", "iframe", "object", "embed", "video", "audio", "base", "use"
    )
    for _, attrs in reader.tags:
        assert not {"src", "srcset", "data", "background", "xlink:href"} & set(attrs)
        assert not any(name.startswith("on") for name in attrs)
    assert "url(" not in page and "@import" not in page
    assert set(re.findall(r"\w+://[^\s\"<]+", page)) == {"http://www.w3.org/2000/svg"}
    policy = next(a["content"] for a in reader.of("meta") if a.get("http-equiv"))
    assert policy is not None and policy.startswith("default-src 'none'")


def test_safety_notices_are_there_from_the_first_line(page: str) -> None:
    """What the result is not stands above the answer, and all cautions stand on the page."""
    from supplycheck.report.sections.closing import CAUTIONS

    words = " ".join(" ".join(read(page).words).split())
    standing = STANDING[0].upper() + STANDING[1:]
    assert words.index(standing) < words.index("Supply adequate")
    assert words.rstrip().rpartition(standing)[0]
    for caution in CAUTIONS:
        assert " ".join(caution.split()) in words
    assert "licensed designer" in words


def test_headings_form_one_outline(page: str) -> None:
    """One h1, no level left out on the way down (WCAG 1.3.1, 2.4.6)."""
    levels = [int(tag[1]) for tag, _ in read(page).tags if re.fullmatch("h[1-6]", tag)]
    assert levels.count(1) == 1 and levels[0] == 1
    assert all(after <= before + 1 for before, after in itertools.pairwise(levels))


def test_every_table_names_its_columns_and_rows(page: str) -> None:
    """Header cells carry their scope (WCAG 1.3.1, technique H63)."""
    reader = read(page)
    heads = reader.of("th")
    assert {attrs.get("scope") for attrs in heads} == {"col", "row"}
    body: list[str] = re.findall(r"<tbody>(.*?)</tbody>", page, re.DOTALL)
    assert len(body) > 5
    for row in itertools.chain.from_iterable(re.findall(r"<tr.*?</tr>", part) for part in body):
        assert ' scope="row"' in row or 'class="note"' in row


def test_what_scrolls_can_be_reached_by_keyboard(page: str) -> None:
    """WCAG 2.1.1: a region that scrolls takes the focus and has a name."""
    regions = [attrs for attrs in read(page).of("div") if attrs.get("class") == "wide"]
    assert regions
    assert all(attrs["tabindex"] == "0" and attrs["aria-label"] for attrs in regions)


def test_figures_shrink_to_the_width_of_a_small_screen(page: str) -> None:
    """The bars of the first page stand in view: no rule gives a figure a width of its own."""
    rules = re.findall(r"svg \{([^}]*)\}", page)
    assert "max-width: 100%" in rules[0]
    assert not any("max-width: none" in rule or re.search(r"(?<!-)width: \d", rule) for rule in rules)


def test_every_figure_tells_what_it_shows(page: str) -> None:
    """WCAG 1.1.1: a text alternative, and the words of the figure where they are few."""
    figures = read(page).of("svg")
    assert len(figures) >= 4
    for attrs in figures:
        assert attrs["role"] == "img"
        assert len(attrs["aria-label"] or "") > 10
    told = re.search(r'aria-label="supply and demand.*?<desc>(.*?)</desc>', page, re.DOTALL)
    assert told is not None and "psi" in told[1]


def test_identities_are_given_once(page: str) -> None:
    places = [attrs["id"] for _, attrs in read(page).tags if attrs.get("id")]
    assert len(places) == len(set(places))
    assert read(page).of("html")[0]["lang"] == "en"


def luminance(colour: str) -> float:
    """Return the relative luminance of ``#rrggbb`` by WCAG 2.2."""
    parts = [int(colour[place : place + 2], 16) / 255 for place in (1, 3, 5)]
    linear = [one / 12.92 if one <= 0.04045 else ((one + 0.055) / 1.055) ** 2.4 for one in parts]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def test_letters_stand_out_from_their_ground() -> None:
    """WCAG 1.4.3: contrast of at least 4.5 for text."""
    from supplycheck.report import theme

    def contrast(one: str, other: str) -> float:
        light, dark = sorted((luminance(one), luminance(other)), reverse=True)
        return (light + 0.05) / (dark + 0.05)

    assert contrast("#ffffff", "#000000") == pytest.approx(21.0)  # WCAG 2.2, its own extreme
    for text in (theme.INK, theme.SLATE, theme.PETROL):
        for ground in (theme.PAPER, theme.MIST):
            assert contrast(text, ground) >= 4.5
    for ground in theme.VERDICT_COLOURS.values():
        assert contrast(theme.PAPER, ground) >= 4.5


def test_paper_follows_the_project_and_wide_sections_are_turned() -> None:
    table = Table("", (Column("A"), Column("B", "psi", right=True)), (Row(("x", "1"), "why"),))
    text = html_text(only(table, landscape=True))
    assert "@page { size: A4 portrait;" in text and "@page turned { size: A4 landscape; }" in text
    assert '<section id="s0" class="turned"' in text
    letter = html_text(replace(only(table), paper="letter"))
    assert "@page { size: letter portrait;" in letter
    assert '<th scope="row">x</th><td class="n">1</td>' in text
    assert '<tr class="note"><td colspan="2">why</td></tr>' in text


def test_verdict_is_legible_where_a_printer_leaves_out_grounds() -> None:
    """Browsers print no background colour unless asked: white letters would vanish."""
    style = html_text(build_document(sample()))
    print_part = style[style.index("@media print") : style.index("</style>")]
    rule = re.search(r"\.verdict \{([^}]*)\}", print_part)
    assert rule is not None and "background: none" in rule[1] and "color: #16262e" in rule[1]


def test_points_that_follow_each_other_make_one_list() -> None:
    blocks = (Paragraph("a", bullet="1."), Paragraph("b", bullet="2."), Paragraph("c"))
    text = html_text(only(*blocks))
    assert text.count("<ul") == 1
    assert "<li><b>1.</b> a</li>\n<li><b>2.</b> b</li>\n</ul>\n<p>c</p>" in text


def test_a_hostile_standing_cannot_leave_the_style_sheet() -> None:
    document = replace(only(Paragraph("x")), standing='no "} </style><b> \\0')
    text = html_text(document)
    assert text.count("</style>") == 1
    assert 'content: "no } /styleb 0"' in text


def test_markup_prints_as_typed() -> None:
    text = html_text(build_document(sample(title=MARKUP_TITLE)))
    assert "<b>bold</b>" not in text
    assert r'Depot "North" <b>bold</b> & co. <para>50 % {measured}\x07 Größe' in "".join(read(text).words)


def test_same_page_each_time() -> None:
    assert html_text(build_document(sample())) == html_text(build_document(sample()))
