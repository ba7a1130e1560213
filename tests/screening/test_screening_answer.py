"""The files of the answer: one number everywhere, a map that hides no poor hydrant, pairs met again."""

from __future__ import annotations

import collections
import io
import json
import sys
from pathlib import Path

import numpy as np
import openpyxl
import pypdf
import pytest
from hypothesis import given
from hypothesis import strategies as st
from screening_files import HEAD, SLIDE, rejects, rows, run, screened

from supplycheck.commands import hydrants
from supplycheck.screening import statistics
from supplycheck.screening.records import months_before
from supplycheck.screening.seen import SeenPairs
from supplycheck.screening.statistics import BINS, Kept, MapPoints, Statistics

EXAMPLE = Path(__file__).parents[2] / "examples" / "hydrant-tests" / "tests.csv"
DAY = ("--as-of", "2026-11-20", "--maximum-age", "60")


@pytest.fixture(scope="module")
def example(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, dict[str, object]]:
    folder = tmp_path_factory.mktemp("example")
    result = run(str(EXAMPLE), *DAY, "--out", str(folder / "out"), "--json")
    assert result.exit_code == 1
    return folder, json.loads(result.output)


def test_forty_tests_each_done_or_rejected(example: tuple[Path, dict[str, object]]) -> None:
    folder, answer = example
    done, bad = rows(folder / "out" / "results.csv"), rejects(folder)
    assert answer["read"] == 40
    assert (answer["done"], answer["rejected"]) == (len(done), len(bad))
    assert sorted([int(row["row"]) for row in done] + list(bad)) == list(range(2, 42))
    found = {words for row in done for words in row["findings"].split("; ") if words}
    assert found == {mark for mark, count in dict(answer["findings"]).items() if count}  # type: ignore[call-overload]
    assert len(found) == 14
    assert len({reason.split(" ")[0] for reason in bad.values()}) >= 8


def test_workbook_map_and_table_tell_the_same(example: tuple[Path, dict[str, object]]) -> None:
    folder, _ = example
    table = rows(folder / "out" / "results.csv")
    sheet = openpyxl.load_workbook(folder / "out" / "results.xlsx").active
    assert sheet is not None
    head, *lines = sheet.values
    assert list(head) == list(table[0])
    for row, line in zip(table, lines, strict=True):
        for (name, text), cell in zip(row.items(), line, strict=True):
            if "[" in name or name in ("longitude", "latitude", "row"):
                assert (float(text) if text else None) == cell
            else:
                assert text.removeprefix("'") == (cell or "")
    place = json.loads((folder / "out" / "results.geojson").read_text(encoding="utf-8"))
    assert place["type"] == "FeatureCollection"
    for row, feature in zip(table, place["features"], strict=True):
        shown = feature["properties"]
        assert shown["hydrant"] == row["hydrant"].removeprefix("'")
        assert shown["flow_at_20_psi"] == float(row["flow_at_20_psi [gpm]"])
        if row["longitude"]:
            point = [float(row["longitude"]), float(row["latitude"])]
            assert feature["geometry"] == {"type": "Point", "coordinates": point}
        else:
            assert feature["geometry"] is None


def test_the_report_holds_the_numbers_of_the_answer(example: tuple[Path, dict[str, object]]) -> None:
    folder, answer = example
    data = (folder / "out" / "report.pdf").read_bytes()
    text = "\n".join(page.extract_text() for page in pypdf.PdfReader(io.BytesIO(data)).pages)
    whole = " ".join(text.split())
    assert "31 done + 9 rejected" in whole
    assert f"of {answer['judged']} that were judged" in whole
    assert str(answer["sha256"]) in whole.replace(" ", "")
    table = rows(folder / "out" / "results.csv")
    for name, count in collections.Counter(row["class"] for row in table).items():
        assert dict(answer["classes"])[name] == count  # type: ignore[call-overload]
    poorest = sorted(table, key=lambda row: float(row["flow_at_20_psi [gpm]"]))[1]
    assert f"{float(poorest['flow_at_20_psi [gpm]']):.0f}" in whole
    for row, reason in rejects(folder).items():
        assert f"{row} {reason[:30]}".split(" ", 1)[1] in whole
    again = run(str(EXAMPLE), *DAY, "--out", str(folder / "again"))
    assert again.exit_code == 1
    assert (folder / "again" / "report.pdf").read_bytes() == data


def test_plane_coordinates_and_none(tmp_path: Path) -> None:
    _, _ = screened(tmp_path, f"{HEAD},x,y\n{SLIDE},1000.5,2000.25\n")
    place = json.loads((tmp_path / "out" / "results.geojson").read_text(encoding="utf-8"))
    assert place["features"][0]["geometry"]["coordinates"] == [1000.5, 2000.25]
    assert "not WGS 84" in place["coordinates"]
    for name, cells, reason in (
        ("longitude,latitude", "-83,", "only one of longitude and latitude"),
        ("longitude,latitude", "39,-183", "latitude: allowed"),
        ("longitude,latitude", "west,39", '"west" is not a number'),
    ):
        screened(tmp_path, f"{HEAD},{name}\n{SLIDE},{cells}\n")
        assert reason in rejects(tmp_path)[2]


def test_metric_report_and_an_empty_answer(tmp_path: Path) -> None:
    for text, code in ((SLIDE, 0), ("H-1,bad", 3)):
        (tmp_path / "tests.csv").write_text(f"{HEAD}\n{text}\n")
        result = run(str(tmp_path / "tests.csv"), "--units", "us", "--out", str(tmp_path / "out"))
        assert result.exit_code == code
        pages = pypdf.PdfReader(tmp_path / "out" / "report.pdf").pages
        assert "There is no map" in "".join(page.extract_text() for page in pages)


class Screen(io.StringIO):
    def isatty(self) -> bool:
        return True


def test_progress_is_shown_on_a_screen_after_a_second(monkeypatch: pytest.MonkeyPatch) -> None:
    screen = Screen()
    monkeypatch.setattr(sys, "stderr", screen)
    clock = iter((0.0, 0.5, 2.0, 3.0))
    monkeypatch.setattr(hydrants.time, "monotonic", lambda: next(clock))
    with hydrants._Bar() as bar:
        bar(1, 10)
        assert screen.getvalue() == ""
        bar(5, 10)
        assert "50 %, about 2 s left" in screen.getvalue()
        bar(10, 10)
    assert "100 %" in screen.getvalue()


def kept(x: list[float], y: list[float], rated: list[float], first: int = 2) -> Kept:
    count = len(x)
    whole, nothing = np.arange(first, first + count), np.zeros(count, dtype=np.int64)
    numbers = np.array(rated)
    tags = [f"H{row}" for row in whole]
    return Kept(
        whole,
        tags,
        [""] * count,
        numbers,
        numbers,
        numbers,
        numbers,
        nothing,
        nothing,
        nothing,
        np.array(x),
        np.array(y),
    )


def test_the_map_shows_the_poorest_of_each_square(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(statistics, "MOST_POINTS", 50)
    draw = np.random.default_rng(3)
    x, y, rated = draw.uniform(-90, -80, 2000), draw.uniform(30, 40, 2000), draw.uniform(0, 0.1, 2000)
    points = MapPoints()
    for start in range(0, 2000, 130):
        part = slice(start, start + 130)
        points.add(kept(list(x[part]), list(y[part]), list(rated[part]), start + 2))
    expected: dict[tuple[int, int], float] = {}
    for at in range(2000):
        cell = (int(np.floor(x[at] / points.size)), int(np.floor(y[at] / points.size)))
        expected[cell] = min(expected.get(cell, np.inf), rated[at])
    assert {cell: spot.rated for cell, spot in points.points.items()} == expected
    assert len(expected) <= 50
    # The squares are the smallest that do: half their size leaves more than 50.
    half = {(np.floor(2 * x[at] / points.size), np.floor(2 * y[at] / points.size)) for at in range(2000)}
    assert len(half) > 50
    other = MapPoints()
    for start in reversed(range(0, 2000, 77)):
        part = slice(start, start + 77)
        other.add(kept(list(x[part]), list(y[part]), list(rated[part]), start + 2))
    assert other.points == points.points
    assert points.placed == 2000


def test_statistics_count_every_test_once() -> None:
    draw = np.random.default_rng(4)
    rated = draw.exponential(0.05, 1000)
    gathered = Statistics(step=0.01)
    for start in range(0, 1000, 300):
        part = list(rated[start : start + 300])
        gathered.add(kept([0.0] * len(part), [0.0] * len(part), part, start + 2))
    bars, _ = np.histogram(rated, bins=[*(0.01 * place for place in range(BINS + 1)), np.inf])
    assert gathered.bars.tolist() == bars.tolist()
    assert gathered.total_rated == pytest.approx(rated.sum())
    assert [spot.rated for spot in gathered.poorest] == sorted(rated)[: statistics.MOST_LISTED]


@given(st.lists(st.integers(0, 60), max_size=200), st.integers(1, 30), st.integers(1, 40))
def test_pairs_are_known_again_whatever_lies_in_memory(
    tmp_path_factory: pytest.TempPathFactory, values: list[int], block: int, held: int
) -> None:
    seen = SeenPairs(tmp_path_factory.mktemp("seen"), most_held=held)
    found: dict[int, int] = {}
    for start in range(0, len(values), block):
        part = np.array(values[start : start + block], dtype=np.uint64)
        found |= seen.add(part, np.arange(start, start + len(part)))
    expected = {at: values.index(value) for at, value in enumerate(values) if values.index(value) < at}
    assert found == expected


@pytest.mark.parametrize(
    ("day", "months", "before"),
    [("2026-11-20", 60, "2021-11-20"), ("2024-02-29", 12, "2023-02-28"), ("2026-01-31", 2, "2025-11-30")],
)
def test_months_before(day: str, months: int, before: str) -> None:
    import datetime as dt

    assert months_before(dt.date.fromisoformat(day), months).isoformat() == before
