"""The whole process against the time of importing its libraries alone; ratios within one run."""

from __future__ import annotations

import statistics
import subprocess
import sys
import time
from pathlib import Path

import pytest

EXAMPLE = Path(__file__).parents[2] / "examples" / "parcel-depot"
IMPORTS = "import numpy, scipy.sparse, pandas, pydantic, click, reportlab"
MAIN = "from supplycheck.cli import main; main()"


def seconds(*command: str) -> float:
    began = time.perf_counter()
    done = subprocess.run([sys.executable, *command], capture_output=True, check=False)
    took = time.perf_counter() - began
    assert done.returncode == 0, done.stderr.decode()
    return took


def ratio(*command: str, runs: int = 5) -> float:
    """Return the median over pairs of runs, taken in turn so that a drift of the machine falls on both."""
    seconds("-c", IMPORTS), seconds(*command)
    return statistics.median(seconds(*command) / seconds("-c", IMPORTS) for _ in range(runs))


@pytest.mark.slow
def test_check_with_pdf_takes_at_most_two_and_a_half_imports(tmp_path: Path) -> None:
    assert ratio("-c", MAIN, "check", str(EXAMPLE), "--out", str(tmp_path)) <= 2.5


def test_help_takes_less_than_a_third_of_the_imports() -> None:
    assert ratio("-c", MAIN, "--help") <= 0.3
