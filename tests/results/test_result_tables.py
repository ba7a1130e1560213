"""CSV and XLSX tables: values, units, the same bytes each time, nothing that a spreadsheet executes."""

from __future__ import annotations

import csv
import io
import time
from dataclasses import replace

import openpyxl
import pytest
from sample_result import sample

from supplycheck.results.json import result_record
from supplycheck.results.records import Result
from supplycheck.results.tables import csv_files, csv_text, disarmed, frames, xlsx_file

ATTACKS = ("=1+1", "+1", "-1", "@SUM(A1)", "\t=1", "\r=1", " =1+1", '=HYPERLINK("http://x","y")')


def armed() -> Result:
    result = sample()
    nodes = tuple(replace(node, tag=text) for node, text in zip(result.nodes, ATTACKS, strict=False))
    return replace(result, nodes=nodes)


def test_tables_hold_what_the_result_file_holds() -> None:
    result = sample()
    record = result_record(result)
    tables = frames(result)
    assert list(tables["nodes"]["pressure [psi]"]) == [node["pressure"] for node in record["nodes"]]
    assert list(tables["pipes"]["friction_loss [psi]"]) == [p["friction_loss"] for p in record["pipes"]]
    assert list(tables["path"]["pressure_end [psi]"]) == [p["pressure_end"] for p in record["path"]]
    assert len(tables["sprinklers"]) == sum(node["in_design_area"] for node in record["nodes"])
    assert set(tables["findings"]["state"]) == {f["state"] for f in record["findings"]}


def test_metric_columns_name_metric_units() -> None:
    assert {"pressure [bar]", "discharge [L/min]", "elevation [m]"} <= set(
        frames(sample("metric"))["nodes"]
    )


def test_csv_reads_back() -> None:
    rows = list(csv.DictReader(io.StringIO(csv_files(sample())["nodes.csv"])))
    assert rows[0]["node"] == "H1.1"
    assert float(rows[0]["pressure [psi]"]) == pytest.approx(11.37, rel=1e-12)


@pytest.mark.parametrize("text", ATTACKS)
def test_csv_cells_never_start_with_a_formula_sign(text: str) -> None:
    assert disarmed(text) == f"'{text}"


def test_csv_file_is_disarmed() -> None:
    for row in csv.reader(io.StringIO(csv_text(frames(armed())["nodes"]))):
        assert not row[0].lstrip().startswith(("=", "+", "-", "@"))


def test_negative_numbers_stay_numbers() -> None:
    row = list(csv.DictReader(io.StringIO(csv_files(sample())["nodes.csv"])))[-2]
    assert row["node"] == "S"
    assert float(row["elevation [ft]"]) == pytest.approx(-4.0)


def test_workbook_keeps_text_as_text() -> None:
    book = openpyxl.load_workbook(io.BytesIO(xlsx_file(armed())))
    cells = [row[0] for row in book["nodes"].iter_rows(min_row=2)]
    assert len(cells) == len(ATTACKS)
    for cell in cells:
        assert cell.data_type == "s"
    assert cells[0].value == "=1+1"
    assert isinstance(book["nodes"]["G2"].value, float)


def test_workbook_is_the_same_bytes_later() -> None:
    first = xlsx_file(sample())
    time.sleep(1.1)
    assert xlsx_file(sample()) == first


def test_workbook_survives_control_characters() -> None:
    result = sample()
    odd = replace(result, nodes=(replace(result.nodes[0], tag="a\x07b\x00"),))
    book = openpyxl.load_workbook(io.BytesIO(xlsx_file(odd)))
    assert book["nodes"]["A2"].value == r"a\x07b\x00"
