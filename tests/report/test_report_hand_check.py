"""The hand check as a reviewer follows it: from the printed page alone, with a pocket calculator.

Tolerance: a line is worked from printed numbers. Each of them that is itself a result (or a length) may
be off by half a unit of its last digit, and the printed result by half a unit more; nothing else may
differ. Bores, K-factors, C, exponents and points of curves are printed as they were given.
"""

from __future__ import annotations

import math
import re
import shutil
from pathlib import Path

import pytest

from supplycheck.check import check_project
from supplycheck.report.document import Table
from supplycheck.report.sections.pressure import hand_check
from supplycheck.results.records import Result

FOLDER = Path(__file__).parents[2] / "examples"
EXAMPLES = sorted(path.parent for path in FOLDER.glob("*/project.toml"))
NUMBER = re.compile(r"(?<![\d.])\d+(?:\.\d+)?(?:e\d+)?")
ONLY = re.compile(r"[\d.e+−×/^√() ]+")
Line = tuple[str, str, str]


def value_of(formula: str) -> float:
    """Work ``formula`` as a calculator does."""
    assert ONLY.fullmatch(formula), formula
    text = formula.replace("×", "*").replace("−", "-").replace("^", "**")
    text = re.sub(r"√([\d.]+)", r"sqrt(\1)", text)
    return float(eval(text, {"__builtins__": {}}, {"sqrt": math.sqrt}))


def half_unit(number: str) -> float:
    return 0.5 * 10.0 ** -len(number.partition(".")[2])


def slack(formula: str, uncertain: set[str]) -> float:
    """Return by how much the result may move when the uncertain numbers move by half a unit each."""
    nominal, total = value_of(formula), 0.0
    for match in NUMBER.finditer(formula):
        if match[0] in uncertain:
            moved = f"{float(match[0]) + half_unit(match[0]):.12f}"
            total += abs(value_of(formula[: match.start()] + moved + formula[match.end() :]) - nominal)
    return total


def numbers(text: str) -> list[str]:
    return NUMBER.findall(text)


CHANGED = {
    "Darcy-Weisbach": (
        "parcel-depot",
        {"[criteria]": 'friction_law = "darcy-weisbach"', "[pipe.street]": "roughness = 0.0004"},
    ),
    "metric, Darcy-Weisbach": ("office-floor", {"[criteria]": 'friction_law = "darcy-weisbach"'}),
    "head form": ("parcel-depot", {"[criteria]": 'friction_law = "hazen-williams 10.67 head"'}),
    "metric, head form": ("office-floor", {"[criteria]": 'friction_law = "hazen-williams 10.67 head"'}),
    "US form in metric": ("office-floor", {"[criteria]": 'friction_law = "hazen-williams 4.52 us"'}),
    "metric form in US": ("parcel-depot", {"[criteria]": 'friction_law = "hazen-williams 6.05e5 metric"'}),
    "velocity pressure": ("parcel-depot", {"[criteria]": "velocity_pressure = true"}),
}


@pytest.fixture(scope="module", params=[*(path.name for path in EXAMPLES), *CHANGED])
def result(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> Result:
    """Return every example, and some with another law or policy written into the criteria."""
    if request.param not in CHANGED:
        return check_project(FOLDER / request.param / "project.toml")
    name, lines = CHANGED[request.param]
    folder = tmp_path_factory.mktemp("changed") / name
    shutil.copytree(FOLDER / name, folder)
    file = folder / "project.toml"
    text = re.sub(r"(?m)^second_law.*$", "", file.read_text(encoding="utf-8"))
    for header, line in lines.items():
        assert header in text
        text = text.replace(header, f"{header}\n{line}", 1)
    file.write_text(text, encoding="utf-8")
    return check_project(file)


def lines_of(result: Result) -> list[Line]:
    """Return step, formula behind the last equals sign, and printed result, from the page."""
    tables = [block for block in hand_check(result).blocks if isinstance(block, Table)]
    rows = next(table for table in tables if table.title == "Line by line").rows
    return [(row.cells[0], row.cells[1], row.cells[2]) for row in rows]


def test_every_line_gives_its_result(result: Result) -> None:
    known: set[str] = set()
    for step, formula, printed in lines_of(result):
        worked = formula.rpartition("= ")[2]
        uncertain = known | (set(numbers(worked)[1:3]) if formula.startswith("Pf =") else set())
        found = numbers(printed)[0]
        sign = -1.0 if printed.startswith("−") else 1.0
        off = abs(value_of(worked) - sign * float(found))
        assert off <= slack(worked, uncertain) + 1.0001 * half_unit(found), (step, formula, printed)
        known.add(found)


def test_sums_close_within_two_units_of_the_last_digit(result: Result) -> None:
    """At most four terms, each off by half a unit."""
    for step, formula, printed in lines_of(result):
        worked = formula.rpartition("= ")[2]
        if not re.search(r"[×/^]", worked):
            found = numbers(printed)[0]
            sign = -1.0 if printed.startswith("−") else 1.0
            assert abs(value_of(worked) - sign * float(found)) < 4.001 * half_unit(found), (step, formula)


def test_nothing_comes_from_nowhere(result: Result) -> None:
    """Flows of a friction line and terms of every sum were printed as results before."""
    flows: set[str] = set()
    pressures: set[str] = set()
    gradients: set[str] = set()
    for step, formula, printed in lines_of(result):
        symbol, found = formula.partition(" ")[0], numbers(printed)[0]
        worked = formula.rpartition("= ")[2]
        if symbol == "pf":
            place = 3 if "^5" in worked else 1
            assert numbers(worked)[place] in flows, (step, formula)
            gradients.add(found)
        elif symbol == "Pf" and "×" in worked:
            assert numbers(worked)[0] in gradients, (step, formula)
        elif symbol == "P" and " at " in formula:
            assert set(numbers(worked)) <= pressures, (step, formula)
        elif symbol == "Q" and step.startswith("at "):
            assert set(numbers(worked)) <= flows, (step, formula)
        (flows if symbol in {"q", "Q"} else pressures).add(found)


def test_the_walk_ends_at_the_supply_with_all_that_it_gives(result: Result) -> None:
    """The last pressure is that of the node table; the last flow what the balance has there."""
    pressures = [(f, p) for _, f, p in lines_of(result) if f.startswith("P at ")]
    last = result.path[-1].end
    assert pressures[-1][0].startswith(f"P at {last} =")
    row = next(node for node in result.nodes if node.tag == last)
    gone = sum(p.flow for p in result.pipes if p.start == last) + row.discharge
    gone -= sum(p.flow for p in result.pipes if p.end == last)
    flows = [line for line in result.hand_check if line.kind == "flow"]
    assert flows[-1].value == pytest.approx(gone, rel=1e-9)
    assert result.hand_check[-1].kind == "flow" or result.hand_check[-1].value == row.pressure
