"""The PDF file: the same bytes each time, text that reads back, numbers equal to result.json."""

from __future__ import annotations

import hashlib
import io
import re
import subprocess
import sys
import time

import pypdf
import pytest
from sample_result import MARKUP_TITLE, sample

from supplycheck.report.build import build_document
from supplycheck.report.pdf import FontRuler, pdf_bytes
from supplycheck.results.json import result_record
from supplycheck.results.records import Result


def read(result: Result) -> list[str]:
    reader = pypdf.PdfReader(io.BytesIO(pdf_bytes(build_document(result))))
    return [page.extract_text() for page in reader.pages]


def squeezed(text: str) -> str:
    return re.sub(r"\s+", " ", text)


def test_identical_input_gives_identical_bytes() -> None:
    first = pdf_bytes(build_document(sample()))
    pdf_bytes(build_document(sample("metric", darcy=True)))
    assert pdf_bytes(build_document(sample())) == first


def test_identical_bytes_in_another_process() -> None:
    code = (
        "import sys, hashlib; sys.path.insert(0, sys.argv[1]); from sample_result import sample;"
        "from supplycheck.report.build import build_document; from supplycheck.report.pdf import pdf_bytes;"
        "sys.stdout.write(hashlib.sha256(pdf_bytes(build_document(sample()))).hexdigest())"
    )
    folder = next(path for path in sys.path if path.endswith("results"))
    ran = subprocess.run(
        [sys.executable, "-c", code, folder], capture_output=True, text=True, check=True, timeout=120
    )
    assert ran.stdout == hashlib.sha256(pdf_bytes(build_document(sample()))).hexdigest()


def test_markup_and_control_characters_print_as_typed() -> None:
    first = squeezed(read(sample(title=MARKUP_TITLE, paper="a4"))[0])
    assert r'Depot "North" <b>bold</b> & co. <para>50 % {measured}\x07 Größe' in first


def test_signs_outside_the_font_are_written_out_and_never_dropped() -> None:
    ruler = FontRuler()
    assert ruler.clean("½ ² ³ √ ≥ ≤ − × ° ≈") == "½ ² ³ √ ≥ ≤ − × ° ≈"
    for text in ("Łódź", "Ждановичи", "Αθήνα", "5′-6″ → ⅛ ε μ", "Příbor", "Győr", "İzmir"):
        assert ruler.clean(text) == text
    assert ruler.clean("\u00b5") == "μ"
    assert ruler.clean("中") == r"\u4e2d"
    assert ruler.clean("\ud800") == r"\ud800"
    assert ruler.clean("safe\u202eevil") == r"safe\u202eevil"
    assert pdf_bytes(build_document(sample(title="\ud800 中文 \x00")))
    assert "Łódź, Αθήνα" in read(sample(title="Łódź, Αθήνα"))[0]


@pytest.mark.parametrize(("paper", "size"), [("letter", (612.0, 792.0)), ("a4", (595.276, 841.89))])
def test_paper(paper: str, size: tuple[float, float]) -> None:
    """Letter 8.5 × 11 in; A4 210 × 297 mm (ISO 216), at 72 points to the inch."""
    reader = pypdf.PdfReader(io.BytesIO(pdf_bytes(build_document(sample(paper=paper)))))
    box = reader.pages[0].mediabox
    assert (float(box.width), float(box.height)) == pytest.approx(size, abs=0.01)


def test_landscape_pages_are_wide() -> None:
    reader = pypdf.PdfReader(io.BytesIO(pdf_bytes(build_document(sample()))))
    wide = [page for page in reader.pages if page.mediabox.width > page.mediabox.height]
    assert wide
    assert "Pipe information" in wide[0].extract_text()


def test_outline_lists_the_sections() -> None:
    reader = pypdf.PdfReader(io.BytesIO(pdf_bytes(build_document(sample()))))
    titles = [entry["/Title"] for entry in reader.outline]
    assert titles == [section.title for section in build_document(sample()).sections]


@pytest.mark.parametrize("units", ["us", "metric"])
def test_numbers_are_those_of_the_result_file(units: str) -> None:
    """Every number of the answer, the nodes and the pipes, rounded as displayed, is in the text."""
    result = sample(units)
    record = result_record(result)
    pages = read(result)
    decimals = {"us": 1, "metric": 2}[units]

    def shown(number: float, places: int) -> str:
        return f"{number:.{places}f}".replace("-", "−")

    first = squeezed(pages[0])
    for block, key in (
        ("demand", "pressure"),
        ("supply", "available_pressure"),
        ("margin", "pressure"),
        ("margin", "after_rule"),
    ):
        assert shown(record[block][key], decimals) in first
    assert shown(record["demand"]["flow"], 1) in first

    text = squeezed(" ".join(pages))
    for node in record["nodes"]:
        row = re.search(
            rf"(?<!\S){re.escape(node['tag'])} (?:sprinkler A|junction|supply|hydrant) ([^A-Za-z]*)", text
        )
        assert row, node["tag"]
        assert shown(node["pressure"], decimals + 2) in row.group(1).split()
        if node["discharge"]:
            assert shown(node["discharge"], 2) in row.group(1).split()
    for pipe in record["pipes"]:
        row = re.search(rf"{pipe['from']} {pipe['to']} (.*?) {pipe['tag']}", text)
        assert row, pipe["tag"]
        numbers = row.group(1).split()
        fine = {"us": 2, "metric": 3}[units]
        assert shown(pipe["flow"], 1) in numbers
        for key in ("friction_loss", "elevation_loss", "device_loss", "start_pressure", "end_pressure"):
            assert shown(pipe[key], fine) in numbers, key


def test_a_hundred_pipes_take_well_under_half_a_second() -> None:
    result = sample(lines=10, heads=9)
    assert len(result.pipes) >= 100
    pdf_bytes(build_document(result))
    times = []
    for _ in range(3):
        start = time.process_time()
        pdf_bytes(build_document(result))
        times.append(time.process_time() - start)
    assert min(times) < 0.45


def test_only_the_writer_imports_reportlab() -> None:
    code = "import sys, supplycheck.report.build; sys.exit('reportlab' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False, timeout=120).returncode == 0
