"""Screening against the time that pandas alone needs to read and write the same columns; memory of it.

Both sides run in one process in turn, libraries loaded, and the quickest of some runs of each counts, so
that other work on the machine falls on both. Pandas reads the columns of the tests and writes the columns
of the results, in chunks as well; it reduces nothing, and makes no map, no workbook and no rejects.
"""

from __future__ import annotations

import datetime as dt
import sys
import time
from collections.abc import Callable, Iterator
from itertools import islice
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from peak_memory import peak_memory

from supplycheck.screening.records import Question
from supplycheck.screening.run import screen

LIMIT = 3.0
MEMORY = 500.0  # MB
QUESTION = Question("us", "us", dt.date(2026, 11, 20), maximum_age=60)
TITLES = (
    "hydrant,date,units,static,residual,diameter,coefficient,pitot,required_flow,longitude,latitude,street"
)
TEXTS = dict.fromkeys(("hydrant", "date", "units", "street", "class", "colour", "findings"), str)


def write_tests(path: Path, count: int) -> Path:
    """Write ``count`` invented tests; one of a thousand is unusable."""
    draw = np.random.default_rng(5)
    with path.open("w", encoding="utf-8") as file:
        file.write(TITLES + "\n")
        for start in range(0, count, 50_000):
            file.writelines(invented(draw, start, min(50_000, count - start)))
    return path


def invented(draw: np.random.Generator, start: int, count: int) -> Iterator[str]:
    static = draw.integers(40, 120, count)
    residual = (static * draw.uniform(0.4, 0.88, count)).round()
    columns = (
        [f"H-{place:08d}" for place in range(start, start + count)],
        [f"2026-{place % 9 + 1:02d}-{place % 28 + 1:02d}" for place in range(count)],
        ["us"] * count,
        static.tolist(),
        np.where(draw.random(count) < 0.001, 130, residual).tolist(),
        ["2.5"] * count,
        ["0.9"] * count,
        draw.integers(5, 40, count).tolist(),
        ["1000"] * count,
        draw.uniform(-84, -83, count).round(6).tolist(),
        draw.uniform(39, 40, count).round(6).tolist(),
        [f"Street {place % 1000}" for place in range(count)],
    )
    return (",".join(map(str, row)) + "\n" for row in zip(*columns, strict=True))


def by_pandas(tests: Path, results: list[pd.DataFrame], out: Path) -> None:
    """Read the columns of the tests and write those of the results; nothing else."""
    whole = iter(results)
    with out.open("w", encoding="utf-8") as file:
        for place, _ in enumerate(pd.read_csv(tests, chunksize=20_000, dtype=TEXTS, keep_default_na=False)):
            for frame in islice(whole, 1):
                frame.to_csv(file, header=place == 0, index=False)


def quickest(runs: int, *jobs: Callable[[], object]) -> list[float]:
    """Return the quickest of ``runs`` runs of each job, run in turn."""
    times = [[0.0] * len(jobs) for _ in range(runs)]
    for run in times:
        for place, job in enumerate(jobs):
            began = time.perf_counter()
            job()
            run[place] = time.perf_counter() - began
    return [min(column) for column in zip(*times, strict=True)]


def ratio(folder: Path, count: int, runs: int) -> float:
    tests = write_tests(folder / "tests.csv", count)
    out = folder / "out"
    screen(tests, out, QUESTION)
    results = list(pd.read_csv(out / "results.csv", chunksize=20_000, dtype=TEXTS, keep_default_na=False))
    assert sum(map(len, results)) > 0.99 * count
    ours, pandas = quickest(
        runs,
        lambda: screen(tests, out, QUESTION),
        lambda: by_pandas(tests, results, folder / "pandas.csv"),
    )
    print(f"{count} rows: screening {ours:.2f} s, pandas {pandas:.2f} s, ratio {ours / pandas:.2f}")
    return ours / pandas


def test_a_hundred_thousand_rows_take_at_most_three_times_pandas(tmp_path: Path) -> None:
    assert ratio(tmp_path, 100_000, runs=3) <= LIMIT


@pytest.mark.slow
def test_a_million_rows_take_at_most_three_times_pandas(tmp_path: Path) -> None:
    assert ratio(tmp_path, 1_000_000, runs=2) <= LIMIT


def peak_of(tests: Path, out: Path) -> float:
    """Return the peak memory [MB] of a whole run of the command with all its files."""
    arguments = ["hydrants", str(tests), "--out", str(out), "--as-of", "2026-11-20"]
    return peak_memory("from supplycheck.cli import main\nmain()", arguments)


@pytest.mark.skipif(sys.platform != "linux", reason="the peak is read from /proc")
def test_memory_is_bounded_and_does_not_grow_with_the_file(tmp_path: Path) -> None:
    small = peak_of(write_tests(tmp_path / "small.csv", 60_000), tmp_path / "small")
    large = peak_of(write_tests(tmp_path / "large.csv", 240_000), tmp_path / "large")
    print(f"peak memory: {small:.0f} MB at 60,000 rows, {large:.0f} MB at 240,000")
    assert large <= MEMORY
    # Four times the rows may add the 24 bytes a row that duplicates are known by, and 40 MB of noise.
    assert large - small <= 180_000 * 24 / 1e6 + 40


@pytest.mark.slow
@pytest.mark.skipif(sys.platform != "linux", reason="the peak is read from /proc")
def test_memory_of_three_million_rows(tmp_path: Path) -> None:
    """Beyond two million rows the known pairs lie in files; no workbook holds so many rows."""
    tests, out = write_tests(tmp_path / "tests.csv", 3_000_000), tmp_path / "out"
    assert peak_of(tests, out) <= MEMORY
    assert not (out / "results.xlsx").exists()
