"""The pages about the supply show what the command prints and what the rules give."""

from __future__ import annotations

import datetime as dt
import re
import shlex
from pathlib import Path

import pytest
from click.testing import CliRunner

from supplycheck.cli import main
from supplycheck.model import MarginRule
from supplycheck.supply import MarginCase, curve_through, required_margin
from supplycheck.units import GPM, PSI

DOCS = Path(__file__).parents[2] / "docs"
FLOWTEST = (DOCS / "flowtest.md").read_text(encoding="utf-8")
COMMANDS = [line for line in FLOWTEST.splitlines() if line.startswith("supplycheck ")]


def test_there_are_commands_to_run() -> None:
    assert len(COMMANDS) >= 3


@pytest.mark.parametrize("line", COMMANDS)
def test_each_command_runs(line: str) -> None:
    result = CliRunner().invoke(main, shlex.split(line)[1:])
    assert result.exit_code == 0, result.output
    assert "Supply curve" in result.output


def test_the_printed_answer_is_the_answer() -> None:
    shown = re.search(r"```text\n(.*?)```", FLOWTEST, re.DOTALL)
    assert shown is not None
    assert CliRunner().invoke(main, shlex.split(COMMANDS[0])[1:]).output == shown.group(1)


def test_the_table_of_three_answers() -> None:
    page = (DOCS / "supply.md").read_text(encoding="utf-8")
    curve = curve_through("M", "S", 82 * PSI, [(956 * GPM, 54 * PSI)])
    day = dt.date(2026, 6, 1)
    case = MarginCase(curve, 700 * GPM, 60.3 * PSI, curve.static, day, day)
    before = curve.pressure_at(700 * GPM)
    assert f"| {before / PSI:.2f} psi |" in page
    for reading in ("static lowered", "pressure scaled", "flow scaled"):
        rule = MarginRule("percent", percent=0.1, reading=reading)  # type: ignore[arg-type]
        after = before - required_margin(rule, case).required
        assert f"| {after / PSI:.2f} |" in page
