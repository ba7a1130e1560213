"""Tables that were once read wrongly, or buried their one fault under thousands that followed from it."""

from __future__ import annotations

import re
import zipfile
from pathlib import Path

import openpyxl
import pytest
from click.testing import CliRunner
from project_texts import HEAD, NODES, PIPES, TABLE_PROJECT, faults, read, write

from supplycheck.cli import main
from supplycheck.findings import Fault, Place
from supplycheck.project.faults import MOST_SHOWN, grouped
from supplycheck.units import FOOT

BOOK = TABLE_PROJECT.replace("nodes.csv", "book.xlsx#Nodes")


def book(folder: Path, change: dict[str, object], merge: str = "", sheet: str = "Nodes") -> None:
    made = openpyxl.Workbook()
    page = made.create_sheet(sheet)
    for line in NODES.splitlines():
        page.append(
            [float(cell) if cell.isdigit() and cell[0] != "0" else cell for cell in line.split(",")]
        )
    for cell, value in change.items():
        page[cell] = value
    if merge:
        page.merge_cells(merge)
    made.save(folder / "book.xlsx")


def long_tables(count: int) -> tuple[str, str]:
    """Return ``count`` sprinklers on one line to the supply."""
    nodes = ["tag,x,y,elevation,kind,sprinkler,area", "S,0,0,0,supply,,"]
    pipes = ["from,to,length,kind,size"]
    for number in range(1, count + 1):
        nodes.append(f"N{number},{number * 10},0,0,sprinkler,A,100")
        pipes.append(f"{'S' if number == 1 else f'N{number - 1}'},N{number},10,lines,2")
    return "\n".join(nodes) + "\n", "\n".join(pipes) + "\n"


@pytest.mark.parametrize("column", [("F", "sprinkler"), ("B", "x"), ("D", "elevation")])
def test_a_formula_without_a_result_is_not_an_empty_cell(tmp_path: Path, column: tuple[str, str]) -> None:
    """openpyxl writes formulas and no results, as other programs that export workbooks do."""
    letter, name = column
    book(tmp_path, {f"{letter}3": "=1+1"})
    (fault,) = faults(tmp_path, BOOK)
    assert (fault.place.file, fault.place.where) == ("book.xlsx#Nodes", f"row 3, column {name}")
    assert "formula without a stored result" in fault.problem
    assert "save it" in fault.remedy


def test_a_formula_outside_the_table_does_not_matter(tmp_path: Path) -> None:
    book(tmp_path, {"J3": "=1+1", "B9": "=SUM(B2:B5)"})
    (fault,) = faults(tmp_path, BOOK)  # the sum stands in the column x, the other in none
    assert fault.place.where == "row 9, column x"


def test_a_stored_result_counts_even_if_it_is_an_empty_text(tmp_path: Path) -> None:
    """Spreadsheet programs store the result of `=IF(A9="","",A9)` as a text without characters."""
    book(tmp_path, {"G4": "=1+1", "D4": "=5+5"})
    part = "xl/worksheets/sheet2.xml"
    with zipfile.ZipFile(tmp_path / "book.xlsx") as archive:
        parts = {name: archive.read(name) for name in archive.namelist()}
    sheet = parts[part].decode()
    for cell, before, after in (
        ("G4", '"G4"', '"G4" t="str"'),
        ("D4", "<f>5+5</f><v", "<f>5+5</f><v>10</v><v"),
    ):
        assert before in sheet, cell
        sheet = sheet.replace(before, after)
    sheet = sheet.replace("<v>10</v><v />", "<v>10</v>").replace("<v>10</v><v></v>", "<v>10</v>")
    parts[part] = sheet.replace("<v>10</v><v/>", "<v>10</v>").encode()
    with zipfile.ZipFile(tmp_path / "book.xlsx", "w") as archive:
        for name, content in parts.items():
            archive.writestr(name, content)
    assert faults(tmp_path, BOOK) == []
    assert read(tmp_path, BOOK).system.nodes[2].elevation == pytest.approx(10 * FOOT)


def test_a_huge_merged_range_costs_nothing(tmp_path: Path) -> None:
    book(tmp_path, {}, merge="E2:E3")
    with zipfile.ZipFile(tmp_path / "book.xlsx") as archive:
        parts = {name: archive.read(name) for name in archive.namelist()}
    with zipfile.ZipFile(tmp_path / "book.xlsx", "w") as archive:
        for name, content in parts.items():
            archive.writestr(name, content.replace(b"E2:E3", b"E2:XFD1048576"))
    assert faults(tmp_path, BOOK)[0].found == "E2:XFD1048576"


def test_merged_cells_are_named(tmp_path: Path) -> None:
    book(tmp_path, {}, merge="E2:F3")
    (fault,) = faults(tmp_path, BOOK)
    assert (fault.place.where, fault.found) == ("cells E2:F3", "E2:F3")
    book(tmp_path, {}, merge="J2:K9")
    assert faults(tmp_path, BOOK) == []


def test_a_sheet_of_a_text_file(tmp_path: Path) -> None:
    (fault,) = faults(tmp_path, TABLE_PROJECT.replace("nodes.csv", "nodes.csv#A"))
    assert fault.place.where == "network.nodes"
    assert "sheet" in fault.problem and '"nodes.csv" alone' in fault.remedy


def test_an_unbalanced_quote_is_one_fault(tmp_path: Path) -> None:
    nodes, pipes = long_tables(300)
    (fault,) = faults(tmp_path, TABLE_PROJECT, nodes.replace("N20,", '"N20,'), pipes)
    assert (fault.place.file, fault.place.where) == ("nodes.csv", "row 22")
    assert "N20" in fault.found


def test_an_over_long_cell_is_one_fault(tmp_path: Path) -> None:
    nodes, pipes = long_tables(300)
    (fault,) = faults(tmp_path, TABLE_PROJECT, nodes.replace("N20,", "N20" + "x" * 20_000 + ","), pipes)
    assert fault.place.where == "row 22"


def test_many_unjoined_nodes_are_one_fault(tmp_path: Path) -> None:
    nodes, _ = long_tables(3000)
    pipes = "from,to,length,kind,size\nS,N1,10,lines,2\n"
    (fault,) = faults(tmp_path, TABLE_PROJECT, nodes, pipes)
    assert "2999 nodes are not joined" in fault.problem
    assert "N2, N3" in fault.found and "2987 more" in fault.found


def test_a_type_without_k_factor_is_one_fault(tmp_path: Path) -> None:
    nodes, pipes = long_tables(40)
    text = TABLE_PROJECT.replace("k_factor = 5.6\n", "")
    (fault,) = faults(tmp_path, text, nodes, pipes)
    assert fault.place.where == "sprinkler.A.k_factor"


def test_a_missing_elevation_leaves_directions_alone(tmp_path: Path) -> None:
    text = TABLE_PROJECT + 'fittings = "from geometry"\n'
    (fault,) = faults(tmp_path, text, NODES.replace("T,10,0,10,", "T,10,0,,"))
    assert (fault.place.file, fault.place.where) == ("nodes.csv", "row 4, column elevation")


def german(text: str) -> str:
    """Write every number with a decimal comma, and semicolons between the cells."""
    rows = [re.sub(r"(?<=;)(-?\d+)(?=;)", r"\1,5", line) for line in text.replace(",", ";").splitlines()]
    return "\n".join(rows) + "\n"


def test_decimal_commas_between_semicolons(tmp_path: Path) -> None:
    nodes = "tag;x;y;elevation;kind;sprinkler;area\n001;0;10,25;9,5;sprinkler;A;130,0\n"
    nodes += "002;0;0;9,5;sprinkler;A;130\nT;10;0;9,5;;;\nS;10;0;-0,5;supply;;\n"
    pipes = "from;to;length;kind;size;bore\n001;002;10,25;lines;1;\n002;T;10;lines;1 1/4;\n"
    pipes += "T;S;10,5 ft;lines;2;2,067 in\n"
    project = read(tmp_path, TABLE_PROJECT, nodes, pipes)
    assert project.system.nodes[0].y == pytest.approx(10.25 * FOOT)
    assert project.system.nodes[3].elevation == pytest.approx(-0.5 * FOOT)
    assert project.system.pipes[2].length == pytest.approx(10.5 * FOOT)
    assert project.system.pipes[2].bore == pytest.approx(2.067 * FOOT / 12)
    assert [entry.value for entry in project.assumptions if entry.key == "network.pipes"] == [
        "decimal commas"
    ]


@pytest.mark.parametrize("number", ["1.234,5", "1,234,567", "10,5,2"])
def test_thousands_are_never_guessed(tmp_path: Path, number: str) -> None:
    pipes = PIPES.replace(",", ";").replace("T;S;10", f"T;S;{number}")
    (fault,) = faults(tmp_path, TABLE_PROJECT, NODES.replace(",", ";"), pipes)
    assert fault.place.where == "row 4, column length"


def test_a_comma_in_a_file_with_commas_is_no_decimal(tmp_path: Path) -> None:
    (fault,) = faults(tmp_path, TABLE_PROJECT, pipes=PIPES.replace("T,S,10", 'T,S,"10,5"'))
    assert "with a point" in fault.remedy


@pytest.mark.parametrize("tag", ["T;1", "a;"])
def test_a_tag_holds_no_separator(tmp_path: Path, tag: str) -> None:
    nodes, pipes = NODES.replace("T,10", f"{tag},10"), PIPES.replace("T,", f"{tag},")
    found = faults(tmp_path, TABLE_PROJECT, nodes, pipes)
    assert found[0].place.where == "row 4, column tag" and ";" in found[0].allowed


@pytest.mark.parametrize(
    ("row", "column"),
    [("S,10,0,0,supply,A,", "sprinkler"), ("S,10,0,0,supply,A,130", "sprinkler")],
)
def test_a_supply_is_no_sprinkler(tmp_path: Path, row: str, column: str) -> None:
    (fault,) = faults(tmp_path, TABLE_PROJECT, NODES.replace("S,10,0,0,supply,,", row))
    assert fault.place.where == f"row 5, column {column}"


def test_a_reversed_check_valve_is_named_with_its_row(tmp_path: Path) -> None:
    pipes = PIPES.replace("fittings\n", "fittings,valve\n").replace("1 elbow 90\n", "1 elbow 90,check\n")
    (fault,) = faults(tmp_path, TABLE_PROJECT, pipes=pipes)
    assert (fault.place.file, fault.place.where) == ("pipes.csv", "row 4")
    assert "wrong way" in fault.problem and "001, 002" in fault.found
    assert faults(tmp_path, TABLE_PROJECT, pipes=pipes.replace("T,S,", "S,T,")) == []


@pytest.mark.parametrize(
    ("keys", "name"),
    [
        ('kind = "check valve"\nloss = 1', "check valve cv"),
        ('kind = "pressure-reducing valve"\nsetting = 40', "pressure-reducing valve cv"),
        ('kind = "pump"\ncurve = [[0, 50], [100, 40]]', "pump cv"),
    ],
)
def test_a_reversed_one_way_device(tmp_path: Path, keys: str, name: str) -> None:
    text = HEAD + f'[device.cv]\n{keys}\nsource = "sheet"\n'
    text += '[network]\nnodes = "nodes.csv"\npipes = "pipes.csv"\n'
    pipes = PIPES.replace("fittings\n", "fittings,devices\n").replace("1 elbow 90\n", "1 elbow 90,cv\n")
    (fault,) = faults(tmp_path, text, pipes=pipes)
    assert fault.place.where == "row 4" and f"the {name} in" in fault.problem
    assert faults(tmp_path, text, pipes=pipes.replace("T,S,", "S,T,")) == []


def test_a_check_valve_in_a_loop_that_is_fed_from_both_sides(tmp_path: Path) -> None:
    pipes = "from,to,length,kind,size,valve\n001,002,10,lines,1,\n002,T,10,lines,1,check\n"
    pipes += "T,S,10,lines,2,\n001,T,20,lines,1,\n"
    assert faults(tmp_path, TABLE_PROJECT, pipes=pipes) == []


def test_like_faults_are_taken_together() -> None:
    alike = [Fault(Place("a.csv", f"row {row}, column size"), "is empty") for row in range(3, 330)]
    other = [Fault(Place("a.csv", "row 9"), "is empty"), Fault(Place("p.toml", "x"), "is missing")]
    first, *rest = grouped([*alike, *other])
    assert first.fault == alike[0] and len(first.rows) == 326
    assert first.also.startswith("326 more rows: 4, 5, 6,") and first.also.endswith("…")
    assert [group.fault for group in rest] == other


def test_a_few_faults_of_one_kind_with_other_values_are_told_one_by_one() -> None:
    few = [Fault(Place("a.csv", f"row {row}, column to"), "no such node", str(row)) for row in (2, 3)]
    assert [group.fault for group in grouped(few)] == few


def test_the_screen_stays_short_and_json_holds_all(tmp_path: Path) -> None:
    nodes, pipes = long_tables(900)
    rows = pipes.splitlines()
    spoilt = [
        row.replace(",10,lines", f",{'x' * (number % 7)}?,line{number}") for number, row in enumerate(rows)
    ]
    path = write(tmp_path, TABLE_PROJECT, nodes, "\n".join(spoilt) + "\n")
    short = CliRunner().invoke(main, ["check", str(path)])
    assert short.exit_code == 3
    assert short.stderr.startswith("The project has 1800 faults")
    assert len(short.stderr.splitlines()) < 7 * MOST_SHOWN
    whole = CliRunner().invoke(main, ["check", str(path), "--json"])
    assert whole.stdout.count('"problem"') == 1800


def test_more_kinds_of_faults_than_are_shown_are_counted(tmp_path: Path) -> None:
    text = TABLE_PROJECT + "".join(f"[key{number}]\n" for number in range(70))
    printed = CliRunner().invoke(main, ["check", str(write(tmp_path, text))])
    assert printed.stderr.count("unknown key") == MOST_SHOWN
    assert "and 30 more faults" in printed.stderr


@pytest.mark.parametrize(
    ("old", "new", "where", "remedy"),
    [
        ("T,S,10", "T,S,0", "row 4, column length", "leave it out"),
        ("T,S,10", "T,T,10", "row 4, column to", "correct one of the two tags"),
    ],
)
def test_what_to_do_is_said_for_pipes_that_lead_nowhere(
    tmp_path: Path, old: str, new: str, where: str, remedy: str
) -> None:
    found = faults(tmp_path, TABLE_PROJECT, pipes=PIPES.replace(old, new))
    assert found[0].place.where == where and remedy in found[0].remedy
    assert all(fault.remedy for fault in found)
