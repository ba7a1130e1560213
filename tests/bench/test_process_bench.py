"""The whole process against the time of importing its libraries alone; ratios within one run.

Both as installed by pip: with the modules compiled, whatever the environment says about writing them.
"""

from __future__ import annotations

import os
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

import pytest

EXAMPLE = Path(__file__).parents[2] / "examples" / "parcel-depot"
IMPORTS = "import numpy, scipy.sparse, pandas, pydantic, click, reportlab"
MAIN = "from supplycheck.cli import run; run()"


@pytest.fixture(scope="module")
def environment(tmp_path_factory: pytest.TempPathFactory) -> dict[str, str]:
    """Return the environment in which the first run leaves its compiled modules for the others."""
    made = {name: value for name, value in os.environ.items() if name != "PYTHONDONTWRITEBYTECODE"}
    return made | {"PYTHONPYCACHEPREFIX": str(tmp_path_factory.mktemp("compiled"))}


def seconds(environment: dict[str, str], *command: str) -> float:
    began = time.perf_counter()
    done = subprocess.run([sys.executable, *command], env=environment, capture_output=True, check=False)
    took = time.perf_counter() - began
    assert done.returncode == 0, done.stderr.decode()
    return took


def ratio(environment: dict[str, str], *command: str, runs: int = 7) -> float:
    """Return the least time over the least of the imports, taken in turn.

    Other work on the machine only ever adds, so the least of several is the fairest of each.
    """
    seconds(environment, "-c", IMPORTS), seconds(environment, *command)
    pairs = [(seconds(environment, *command), seconds(environment, "-c", IMPORTS)) for _ in range(runs)]
    return min(ours for ours, _ in pairs) / min(imports for _, imports in pairs)


@pytest.mark.slow
def test_check_with_pdf_takes_at_most_two_and_a_half_imports(
    environment: dict[str, str], tmp_path: Path, record_property: Callable[..., None]
) -> None:
    found = ratio(environment, "-c", MAIN, "check", str(EXAMPLE), "--out", str(tmp_path))
    record_property("ratio", found)
    assert found <= 2.5


def test_help_takes_less_than_a_third_of_the_imports(environment: dict[str, str]) -> None:
    assert ratio(environment, "-c", MAIN, "--help") <= 0.3
