"""Bad files and bad rows: a clear reason for each, and no row lost."""

from __future__ import annotations

import csv
import json
import os
import random
from pathlib import Path

import openpyxl
import pytest
from screening_files import HEAD, SLIDE, rejects, rows, run, screened

from supplycheck.screening import lines
from supplycheck.screening import run as screening_run

EXAMPLE = Path(__file__).parents[2] / "examples" / "hydrant-tests" / "tests.csv"


def refused(path: Path, *options: str) -> str:
    result = run(str(path), "--as-of", "2026-11-20", "--out", str(path.parent / "out"), *options)
    assert result.exit_code == 3, result.output
    assert not (path.parent / "out" / "results.csv").exists()
    return " ".join(result.output.split())


def test_a_missing_file_a_folder_and_an_empty_file(tmp_path: Path) -> None:
    assert "there is no such file" in refused(tmp_path / "none.csv")
    assert "is a folder" in refused(tmp_path)
    (tmp_path / "empty.csv").write_bytes(b"")
    assert "the file is empty" in refused(tmp_path / "empty.csv")
    (tmp_path / "head.csv").write_text(HEAD + "\n")
    assert "no row below the heading" in refused(tmp_path / "head.csv", "--units", "us")


def test_a_file_that_may_not_be_read(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def closed(self: Path, mode: str = "r") -> None:
        raise PermissionError(13, "Permission denied")

    path = tmp_path / "tests.csv"
    path.write_text(f"{HEAD}\n{SLIDE}\n")
    monkeypatch.setattr(Path, "open", closed)
    assert "may not be read with your rights" in refused(path)


@pytest.mark.skipif(os.name != "posix", reason="a file stands where the folder should")
def test_a_folder_that_cannot_be_written(tmp_path: Path) -> None:
    path = tmp_path / "tests.csv"
    path.write_text(f"{HEAD}\n{SLIDE}\n")
    (tmp_path / "file").write_text("")
    result = run(str(path), "--units", "us", "--out", str(tmp_path / "file" / "out"))
    assert result.exit_code == 3
    assert "cannot be written" in " ".join(result.output.split())


@pytest.mark.parametrize(
    ("data", "problem"),
    [
        (HEAD.encode("utf-16"), "UTF-16"),
        (b"PK\x03\x04rest\n", "is a workbook or an archive"),
        (f"{HEAD}\r{SLIDE}\r".encode(), "bare carriage return"),
        (HEAD.replace("hydrant", "hydr\xe9").encode("latin-1") + b"\n", "the heading is not UTF-8"),
        (HEAD.replace("static", "statics").encode() + b"\n", "'static' is missing; is it 'statics'?"),
        (HEAD.replace("pitot", "pitott").encode() + b"\n", "'pitott' is not known; did you mean 'pitot'?"),
        ((HEAD + ",required_flw").encode() + b"\n", "did you mean 'required_flow'?"),
        ((HEAD + ",static").encode() + b"\n", "'static' stands 2 times"),
        (HEAD.replace("static", "static [gpm]").encode() + b"\n", "no unit of pressure"),
        (b"hydrant,static,residual\n", "neither a column 'flow' nor"),
    ],
)
def test_headings_and_files_of_another_kind(tmp_path: Path, data: bytes, problem: str) -> None:
    path = tmp_path / "tests.csv"
    path.write_bytes(data)
    assert problem in refused(path, "--units", "us")


def test_units_are_never_guessed(tmp_path: Path) -> None:
    path = tmp_path / "tests.csv"
    path.write_text(f"{HEAD}\n{SLIDE}\n")
    assert "nothing tells the units" in refused(path)
    result = run(str(path), "--units", "us", "--required-flow", "1000", "--no-pdf")
    assert result.exit_code == 1
    result = run(str(path), "--required-flow", "1000")
    assert result.exit_code == 2
    assert "has no unit" in result.output


def test_results_never_overwrite_the_tests(tmp_path: Path) -> None:
    path = tmp_path / "results.csv"
    path.write_text(f"{HEAD}\n{SLIDE}\n")
    result = run(str(path), "--units", "us", "--out", str(tmp_path))
    assert result.exit_code == 3
    assert path.read_text().startswith("hydrant,")


@pytest.mark.parametrize(
    ("row", "reason"),
    [
        ("H-1,2026-06-01,47,80,2.5,0.9,14", "residual 80.0 psi is not below static 47.0 psi"),
        ("H-1,2026-06-01,80,80,2.5,0.9,14", "is not below static"),
        ("H-1,2026-06-01,-80,47,2.5,0.9,14", "static is negative; allowed: above 0"),
        ("H-1,2026-06-01,80,-1,2.5,0.9,14", "residual is negative; allowed: zero or more"),
        ("H-1,2026-06-01,80,47,2.5,0.9,0", "pitot is zero; allowed: above 0"),
        ("H-1,2026-06-01,80,47,2.5,0.9,-3", "pitot is negative"),
        ("H-1,2026-06-01,80,47,2.5,1.2,14", "coefficient is 1.2; allowed: above 0 and at most 1"),
        ("H-1,2026-06-01,80,47,2.5,,14", "coefficient: the cell is empty"),
        ("H-1,2026-06-01,80,47,2.5,round,14", "'round' is no outlet shape"),
        ("H-1,2026-06-01,80,47,,,", "neither a flow nor an outlet"),
        ("H-1,2026-06-01,,47,2.5,0.9,14", "static: the cell is empty"),
        ("H-1,2026-06-01,eighty,47,2.5,0.9,14", '"eighty" cannot be read as a pressure'),
        ("H-1,2026-06-01,80 gpm,47,2.5,0.9,14", "the unit gpm is a flow"),
        ("H-1,2026-06-01,nan,47,2.5,0.9,14", "static"),
        ("H-1,2026-06-01,1e400,47,2.5,0.9,14", "is not a finite number"),
        ("H-1,2026-06-01,True,47,2.5,0.9,14", '"True" cannot be read'),
        ("H-1,01/06/2026,80,47,2.5,0.9,14", "'01/06/2026' is not a day; allowed: YYYY-MM-DD"),
        ("H-1,2026-02-30,80,47,2.5,0.9,14", "is not a day"),
        (",2026-06-01,80,47,2.5,0.9,14", "hydrant: the tag is empty"),
        ("H-1,2026-06-01,80,47,4,0.9,14", "empty for an outlet of 4 in or more"),
        ("H-1,2026-06-01,80,47,2.5,0.9", "6 cells where the heading has 7"),
        ("H-1,2026-06-01,80,47,2.5,0.9,14,9", "8 cells where the heading has 7"),
        ('"H-1,2026-06-01,80,47,2.5,0.9,14', "a quote is opened and not closed"),
        ("H-1\0,2026-06-01,80,47,2.5,0.9,14", "NUL byte"),
        (",,,,,,", "hydrant: the tag is empty; static: the cell is empty; residual: the cell is empty"),
    ],
)
def test_a_bad_row_is_rejected_with_its_reason_and_the_others_stay(
    tmp_path: Path, row: str, reason: str
) -> None:
    good = SLIDE.replace("H-1", "good")
    result, done = screened(tmp_path, f"{HEAD}\n{good}\n{row}\n{good.replace('good', 'last')}\n")
    assert [one["hydrant"] for one in done] == ["good", "last"]
    assert reason in rejects(tmp_path)[3]
    assert "3 read = 2 done + 1 rejected" in result.output
    assert result.exit_code == 0  # no flow is required of any


def test_rejected_rows_were_not_judged(tmp_path: Path) -> None:
    result, _ = screened(tmp_path, f"{HEAD}\n{SLIDE}\nH-2,bad\n", "--required-flow", "100")
    assert result.exit_code == 1
    assert "Rejected and not judged: 1." in " ".join(result.output.split())
    result, _ = screened(tmp_path, f"{HEAD}\nH-2,bad\n")
    assert result.exit_code == 3


def test_all_reasons_of_a_row_are_told(tmp_path: Path) -> None:
    screened(tmp_path, f"{HEAD}\nH-1,yesterday,-1,47,2.5,round,0\n")
    reason = rejects(tmp_path)[2]
    told = ("date:", "static is negative", "no outlet shape", "pitot is zero")
    assert all(words in reason for words in told)


def test_half_a_last_row_and_a_missing_line_end(tmp_path: Path) -> None:
    _, done = screened(tmp_path, f"{HEAD}\n{SLIDE}\nH-2,2026-06-01,80")
    assert len(done) == 1
    assert "the last row is half written: 3 of 7 cells" in rejects(tmp_path)[3]
    _, done = screened(tmp_path, f"{HEAD}\n{SLIDE}\n{SLIDE.replace('H-1', 'H-2')}")
    assert [row["findings"] for row in done] == ["", "no line end"]


def test_wrong_bytes_reject_their_row_alone(tmp_path: Path) -> None:
    head = f"{HEAD},street"
    good = f"{SLIDE},Café".encode()
    bad = SLIDE.replace("H-1", "H-2").encode() + b",Caf\xe9"
    _, done = screened(tmp_path, b"\n".join([head.encode(), good, bad, b""]))
    assert [row["street"] for row in done] == ["Café"]
    assert "byte 0xE9 at place" in rejects(tmp_path)[3]
    assert rows(tmp_path / "out" / "rejects.csv")[0]["text"].endswith("Caf\\xe9")


@pytest.mark.parametrize("sign", [",", ";", "\t"])
def test_byte_order_mark_line_ends_and_signs_between_cells(tmp_path: Path, sign: str) -> None:
    text = f"{HEAD}\r\n{SLIDE}\r\n\r\n".replace(",", sign)
    result, done = screened(tmp_path, b"\xef\xbb\xbf" + text.encode())
    assert float(done[0]["flow [gpm]"]) == pytest.approx(628.0, abs=0.05)
    assert "1 read = 1 done + 0 rejected, and 1 blank lines" in result.output


def test_tags_stay_as_typed(tmp_path: Path) -> None:
    tags = ["001", "1", "NA", "null", "1e5", "TRUE", "nan", "H–7 ü"]
    text = "\n".join([f"{HEAD},street", *(f"{SLIDE.replace('H-1', tag)},007" for tag in tags), ""])
    _, done = screened(tmp_path, text)
    assert [row["hydrant"] for row in done] == tags
    assert {row["street"] for row in done} == {"007"}


def test_quoted_cells_inch_signs_and_line_ends_in_cells(tmp_path: Path) -> None:
    cells = ['"Mill Road, ""north"""', '8" main', '"two\nlines"', '5" and 6" mains', '12"']
    text = "\n".join(
        [
            f"{HEAD},note",
            *(f"{SLIDE.replace('H-1', f'H-{at}')},{cell}" for at, cell in enumerate(cells)),
            "",
        ]
    )
    result, done = screened(tmp_path, text)
    assert "5 read = 5 done" in result.output
    expected = ['Mill Road, "north"', '8" main', "two\\nlines", '5" and 6" mains', '12"']
    assert [row["note"] for row in done] == expected
    assert [row["row"] for row in done] == ["2", "3", "4", "5", "6"]


def test_an_open_quote_swallows_no_other_row(tmp_path: Path) -> None:
    text = "\n".join(
        [
            f"{HEAD},note",
            f'{SLIDE},"open',
            f"{SLIDE.replace('H-1', 'H-2')},a",
            f'{SLIDE.replace("H-1", "H-3")},8" main',
            "",
        ]
    )
    result, done = screened(tmp_path, text)
    assert [row["hydrant"] for row in done] == ["H-2", "H-3"]
    assert "a quote is opened and not closed" in rejects(tmp_path)[2]
    assert "3 read = 2 done + 1 rejected" in result.output


def test_no_file_of_an_earlier_screening_is_left(tmp_path: Path) -> None:
    screened(tmp_path, f"{HEAD},x,y\n{SLIDE},1,2\n")
    run(str(tmp_path / "tests.csv"), "--units", "us", "--out", str(tmp_path / "out"))
    assert {path.name for path in (tmp_path / "out").iterdir()} == {
        *("results.csv", "rejects.csv", "results.xlsx", "results.geojson", "report.pdf")
    }
    screened(tmp_path, f"{HEAD}\n{SLIDE}\n")
    assert {path.name for path in (tmp_path / "out").iterdir()} == {
        "results.csv",
        "rejects.csv",
        "results.xlsx",
    }


def test_the_same_hydrant_and_day_twice(tmp_path: Path) -> None:
    other_day = SLIDE.replace("2026-06-01", "2026-06-02")
    _, done = screened(tmp_path, f"{HEAD}\n{SLIDE}\n{other_day}\n{SLIDE}\n{SLIDE}\n")
    assert [row["row"] for row in done] == ["2", "3"]
    found = rejects(tmp_path)
    assert set(found) == {4, 5}
    assert all("the same hydrant and day as row 2" in reason for reason in found.values())


def test_a_rejected_row_does_not_count_as_the_first_of_a_pair(tmp_path: Path) -> None:
    _, done = screened(tmp_path, f"{HEAD}\n{SLIDE.replace('80,47', '47,80')}\n{SLIDE}\n")
    assert [row["row"] for row in done] == ["3"]


FORMULAS = ("=1+1", "+1", "-1", "@SUM(A1)", " =2", "=HYPERLINK(1)")


def test_formulas_are_never_executed(tmp_path: Path) -> None:
    lines_ = [f"{SLIDE.replace('H-1', tag)},{tag}" for tag in FORMULAS]
    bad = [f"{tag},bad" for tag in FORMULAS]
    _, done = screened(tmp_path, "\n".join([f"{HEAD},=note", *lines_, *bad, ""]))
    assert len(done) == len(FORMULAS)
    for path in (tmp_path / "out" / "results.csv", tmp_path / "out" / "rejects.csv"):
        with path.open(encoding="utf-8", newline="") as file:
            for row in csv.reader(file):
                for name, cell in enumerate(row):
                    number = cell.lstrip("-").replace(".", "", 1).isdigit() and name > 0
                    assert number or not cell.lstrip(" ").startswith(("=", "+", "-", "@")), cell
    sheet = openpyxl.load_workbook(tmp_path / "out" / "results.xlsx").active
    assert sheet is not None
    for row in sheet.iter_rows(min_row=2):
        assert all(cell.data_type != "f" for cell in row)
        assert row[0].data_type == "s"
        assert row[0].quotePrefix
    assert [row[0].value for row in sheet.iter_rows(min_row=2)] == [tag.strip() for tag in FORMULAS]


def test_markup_and_control_characters(tmp_path: Path) -> None:
    tag = "<b>&\x07]]>"
    _, (row,) = screened(tmp_path, f"{HEAD},longitude,latitude\n{SLIDE.replace('H-1', tag)},-83,39\n")
    assert row["hydrant"] == "<b>&\\x07]]>"
    sheet = openpyxl.load_workbook(tmp_path / "out" / "results.xlsx").active
    assert sheet is not None
    assert sheet.cell(2, 1).value == "<b>&\\x07]]>"
    place = json.loads((tmp_path / "out" / "results.geojson").read_text(encoding="utf-8"))
    assert place["features"][0]["properties"]["hydrant"] == "<b>&\\x07]]>"


def test_no_row_is_lost_in_a_damaged_file(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A thousand rows with bytes changed at random, in blocks of some rows: each is done or rejected."""
    monkeypatch.setattr(lines, "BLOCK", 700)
    draw = random.Random(7)
    head = f"{HEAD},note,longitude,latitude"
    data = [f'{SLIDE.replace("H-1", f"H-{at}")},a "b" c,-83.1,39.{at}'.encode() for at in range(1000)]
    for place in range(0, 1000, 3):
        row = bytearray(data[place])
        for _ in range(3):
            row[draw.randrange(len(row))] = draw.choice(b'\x00\x80\xff",;x-=9 \t\r')
        data[place] = bytes(row)
    result, done = screened(tmp_path, head.encode() + b"\n" + b"\n".join(data) + b"\n", "--json")
    answer = json.loads(result.output)
    bad = rejects(tmp_path)
    assert answer["read"] == answer["done"] + answer["rejected"]
    assert (answer["done"], answer["rejected"]) == (len(done), len(bad))
    numbers = sorted([int(row["row"]) for row in done] + list(bad))
    assert len(set(numbers)) == len(numbers) == answer["read"]
    assert numbers == list(range(2, 1002))
    assert {row["hydrant"] for row in done} >= {f"H-{at}" for at in range(1000) if at % 3}


def sheet_of(path: Path) -> list[tuple[object, ...]]:
    sheet = openpyxl.load_workbook(path).active
    assert sheet is not None
    return list(sheet.values)


def test_blocks_and_processes_change_nothing(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    day = ("--as-of", "2026-11-20", "--no-pdf")
    for name in ("one", "blocks", "jobs"):
        if name != "one":
            monkeypatch.setattr(lines, "BLOCK", 611)
        jobs = ("--jobs", "2") if name == "jobs" else ()
        run(str(EXAMPLE), *day, *jobs, "--out", str(tmp_path / name))
    for file in ("results.csv", "rejects.csv", "results.geojson", "results.xlsx"):
        one = (tmp_path / "one" / file).read_bytes()
        for name in ("blocks", "jobs"):
            other = (tmp_path / name / file).read_bytes()
            if file.endswith("xlsx"):
                assert sheet_of(tmp_path / "one" / file) == sheet_of(tmp_path / name / file)
            else:
                assert one == other, (name, file)


def test_a_sheet_that_would_be_too_long_is_left_out_and_said(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(screening_run, "MOST_ROWS", 2)
    monkeypatch.setattr(lines, "BLOCK", 200)
    text = "\n".join([HEAD, *(SLIDE.replace("H-1", f"H-{at}") for at in range(20)), ""])
    result, done = screened(tmp_path, text)
    assert len(done) == 20
    assert not (tmp_path / "out" / "results.xlsx").exists()
    assert "No results.xlsx: a sheet holds" in result.output
