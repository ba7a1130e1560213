"""Tables as spreadsheets leave them."""

from __future__ import annotations

import hashlib
from pathlib import Path

import openpyxl
import pytest
from project_texts import NODES, PIPES, TABLE_PROJECT, faults, read, write

from supplycheck.project import read_project
from supplycheck.units import FOOT


def test_tags_stay_texts(tmp_path: Path) -> None:
    tags = [node.tag for node in read(tmp_path, TABLE_PROJECT).system.nodes]
    assert tags == ["001", "002", "T", "S"]


@pytest.mark.parametrize("separator", [",", ";", "\t"])
@pytest.mark.parametrize("end", ["\n", "\r\n"])
@pytest.mark.parametrize("mark", ["", "\ufeff"])
def test_exports_of_all_kinds_read_alike(tmp_path: Path, separator: str, end: str, mark: str) -> None:
    path = write(tmp_path)
    plain = read_project(path).system
    for name, text in (("nodes.csv", NODES), ("pipes.csv", PIPES)):
        changed = (mark + text).replace(",", separator).replace("\n", end)
        (tmp_path / name).write_bytes(changed.encode())
    path.write_bytes((mark + TABLE_PROJECT).replace("\n", end).encode())
    assert read_project(path).system == plain


def test_columns_in_any_order_and_case(tmp_path: Path) -> None:
    rows = [line.split(",") for line in NODES.splitlines()]
    rows[0] = [name.upper() for name in rows[0]]
    turned = "\n".join(",".join(reversed(row)) for row in rows)
    assert read(tmp_path, TABLE_PROJECT, turned).system == read(tmp_path, TABLE_PROJECT).system


def test_blank_rows_count_but_hold_nothing(tmp_path: Path) -> None:
    nodes = NODES.replace("T,10", "\n,,,\nT,10") + "Z,1,1,1,,,\n"
    found = faults(tmp_path, TABLE_PROJECT, nodes)
    assert [fault.place.where for fault in found] == ["row 8"]


def test_a_heading_may_state_its_unit(tmp_path: Path) -> None:
    nodes = NODES.replace("elevation", "Elevation (m)").replace("area", "Area [m2]")
    pipes = PIPES.replace("T,S,10", "T,S,40")
    node = read(tmp_path, TABLE_PROJECT, nodes, pipes).system.nodes[0]
    assert node.elevation == pytest.approx(10)
    assert node.area == pytest.approx(130)


def test_a_heading_with_a_wrong_unit(tmp_path: Path) -> None:
    found = faults(tmp_path, TABLE_PROJECT, NODES.replace("elevation", "elevation (psi)"))
    assert "does not fit" in found[0].problem
    assert len(found) == 1


def test_a_cell_may_carry_its_unit(tmp_path: Path) -> None:
    pipes = PIPES.replace("001,002,10", '001,002,"10\'-6"""')
    assert read(tmp_path, TABLE_PROJECT, pipes=pipes).system.pipes[0].length == pytest.approx(10.5 * FOOT)


def test_length_from_coordinates_is_listed(tmp_path: Path) -> None:
    project = read(tmp_path, TABLE_PROJECT, pipes=PIPES.replace("001,002,10", "001,002,"))
    assert project.system.pipes[0].length == pytest.approx(10 * FOOT)
    assert any(entry.key == "network.pipes.length" for entry in project.assumptions)


def test_pipes_without_a_tag_are_named_by_their_ends(tmp_path: Path) -> None:
    pipes = PIPES + "T,S,12,lines,2,\n"
    tags = [pipe.tag for pipe in read(tmp_path, TABLE_PROJECT, pipes=pipes).system.pipes]
    assert tags == ["001-002", "002-T", "T-S", "T-S (2)"]


def book_of(folder: Path) -> Path:
    book = openpyxl.Workbook()
    for title, text in (("Nodes", NODES), ("Pipes", PIPES)):
        sheet = book.create_sheet(title)
        for line in text.splitlines():
            cells = line.split(",")
            sheet.append([float(cell) if cell.isdigit() and cell[0] != "0" else cell for cell in cells])
    path = folder / "book.xlsx"
    book.save(path)
    return path


def test_workbooks_read_like_csv(tmp_path: Path) -> None:
    book_of(tmp_path)
    text = TABLE_PROJECT.replace("nodes.csv", "book.xlsx#Nodes").replace("pipes.csv", "book.xlsx#Pipes")
    read_from_book, plain = read(tmp_path, text).system, read(tmp_path, TABLE_PROJECT).system
    assert [node.tag for node in read_from_book.nodes] == [node.tag for node in plain.nodes]
    assert [pipe.length for pipe in read_from_book.pipes] == [pipe.length for pipe in plain.pipes]


def test_a_missing_sheet_names_the_near_one(tmp_path: Path) -> None:
    book_of(tmp_path)
    found = faults(tmp_path, TABLE_PROJECT.replace("nodes.csv", "book.xlsx#Node"))
    assert len(found) == 1
    assert 'did you mean "Nodes"?' in found[0].remedy


def test_a_cut_workbook_is_a_fault(tmp_path: Path) -> None:
    path = book_of(tmp_path)
    data = path.read_bytes()
    for length in (0, 10, len(data) // 2, len(data) - 10):
        path.write_bytes(data[:length])
        found = faults(tmp_path, TABLE_PROJECT.replace("nodes.csv", "book.xlsx#Nodes"))
        assert "XLSX" in found[0].problem


def test_a_formula_is_never_run(tmp_path: Path) -> None:
    book = openpyxl.load_workbook(book_of(tmp_path))
    book["Nodes"]["D2"] = "=1+1"
    book.save(tmp_path / "book.xlsx")
    found = faults(tmp_path, TABLE_PROJECT.replace("nodes.csv", "book.xlsx#Nodes"))
    assert [fault.place.where for fault in found] == ["row 2, column elevation"]  # no stored value


def test_input_files_are_echoed_with_their_digest(tmp_path: Path) -> None:
    project = read(tmp_path, TABLE_PROJECT)
    assert [file.name for file in project.files] == ["project.toml", "nodes.csv", "pipes.csv"]
    for file in project.files:
        data = (tmp_path / file.name).read_bytes()
        assert (file.sha256, file.size) == (hashlib.sha256(data).hexdigest(), len(data))
        assert file.text == data.decode()
