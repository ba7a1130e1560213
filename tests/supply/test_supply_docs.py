"""The pages about the supply show what the command prints and what the rules give."""

from __future__ import annotations

import datetime as dt
import re
import shlex
from pathlib import Path

import pytest
from click.testing import CliRunner

from supplycheck.cli import main
from supplycheck.hydraulics import rated_pump_curve
from supplycheck.model import MarginRule, Outlet
from supplycheck.supply import MarginCase, curve_through, reduce_outlets, required_margin
from supplycheck.supply.pump import Boosted
from supplycheck.supply.storage import needed_volume
from supplycheck.units import GALLON, GPM, INCH, PSI

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


def _gpm(diameter: float, coefficient: float, pitot: float, factor: float = 1.0) -> float:
    flow, _ = reduce_outlets([Outlet(diameter * INCH, coefficient, pitot * PSI, factor)])
    return flow / GPM


def _after(reading: str) -> float:
    curve = curve_through("M", "S", 82 * PSI, [(956 * GPM, 54 * PSI)])
    day = dt.date(2026, 6, 1)
    case = MarginCase(curve, 700 * GPM, 60.3 * PSI, curve.static, day, day)
    rule = MarginRule("percent", percent=0.1, reading=reading)  # type: ignore[arg-type]
    return (curve.pressure_at(700 * GPM) - required_margin(rule, case).required) / PSI


def _figures() -> list[float]:
    """Every figure of the page, in its order."""
    pump = rated_pump_curve(flow=1000 * GPM, pressure=100 * PSI, churn=140 * PSI, overload=65 * PSI)
    city = curve_through("city", "S", 90 * PSI, [(1000 * GPM, 65 * PSI)])
    both = Boosted(city, pump)
    theoretical = [(2.5, 10), (2.5, 20), (2.5, 25), (2.5, 50), (2.5, 100), (4.5, 10)]
    return [
        _gpm(2.5, 0.9, 14),
        _gpm(2.5, 0.9, 40),
        _gpm(4, 0.9, 10, 0.83),
        _gpm(4, 0.9, 10),
        _gpm(2.5, 0.9, 40),
        *(_gpm(diameter, 1.0, pitot) for diameter, pitot in theoretical),
        *(_after(reading) for reading in ("static lowered", "pressure scaled", "flow scaled")),
        *(both.pressure_at(flow * GPM) / PSI for flow in (0, 1000, 1500)),
        city.pressure_at(1500 * GPM) / PSI,
        needed_volume(flow=550 * GPM, duration=3600.0) / GALLON,
    ]


def test_the_validation_page_shows_what_is_computed() -> None:
    page = (DOCS / "validation_parts" / "supply.md").read_text(encoding="utf-8")
    rows = [line.split("|")[3].strip() for line in page.splitlines() if re.match(r"\|.*\|.*\d.*\|", line)]
    figures = _figures()
    assert len(rows) == len(figures)
    for shown, figure in zip(rows, figures, strict=True):
        places = len(shown.partition(".")[2])
        assert f"{figure:.{places}f}" == shown
