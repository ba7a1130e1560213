"""A writer cannot compute: it sees the document and nothing that a number could be made from."""

from __future__ import annotations

import ast
import io
from dataclasses import replace
from math import inf, nan
from pathlib import Path
from xml.etree import ElementTree as ET

import pypdf
import pytest
from sample_result import sample

from supplycheck.report.build import build_document
from supplycheck.report.document import Figure
from supplycheck.report.html import html_text
from supplycheck.report.pdf import pdf_bytes
from supplycheck.report.svg import svg

REPORT = Path(__file__).parents[2] / "supplycheck" / "report"
WRITERS = ("pdf.py", "html.py", "svg.py", "layout.py", "sheet.py", "sheet_table.py", "wrapping.py")
SEEN = {"document", "drawing", "theme", "svg", "wrapping", "sheet", "sheet_table", "layout"}


@pytest.mark.parametrize("name", WRITERS)
def test_writers_import_no_results_and_no_units(name: str) -> None:
    tree = ast.parse((REPORT / name).read_text(encoding="utf-8"))
    for node in ast.walk(tree):
        if not isinstance(node, ast.ImportFrom) or not (node.module or "").startswith("supplycheck"):
            continue
        if node.module == "supplycheck.results.display":
            assert [alias.name for alias in node.names] == ["visible"]
        else:
            assert (node.module or "").startswith("supplycheck.report.")
            assert (node.module or "").split(".")[2] in SEEN


def test_figures_are_well_formed_svg() -> None:
    document = build_document(sample(lines=8, title="<&>"))
    figures = [
        block for section in document.sections for block in section.blocks if isinstance(block, Figure)
    ]
    assert len(figures) > 5
    for figure in figures:
        root = ET.fromstring(svg(figure.drawing))
        assert root.tag.endswith("svg")
        assert len(root) > 3


def test_numbers_that_do_not_exist_neither_stop_nor_spoil_the_report() -> None:
    result = sample()
    broken = replace(
        result,
        demand=replace(result.demand, pressure=nan),
        supply=replace(result.supply, available_pressure=nan, available_flow=inf, residual=None),
        margin=replace(result.margin, pressure=nan, required=None, after_rule=None),
        path=tuple(replace(step, friction=nan, pressure_end=nan) for step in result.path),
        nodes=tuple(replace(node, pressure=nan) for node in result.nodes),
        pipes=tuple(replace(pipe, friction_loss=nan, flow=nan) for pipe in result.pipes),
        curves=tuple(replace(curve, pressures=(nan,) * len(curve.flows)) for curve in result.curves),
    )
    document = build_document(broken)
    for page in pypdf.PdfReader(io.BytesIO(pdf_bytes(document))).pages:
        contents = page.get_contents()
        assert contents is not None
        assert b"nan" not in contents.get_data()
    text = html_text(document)
    assert "nan" not in text
