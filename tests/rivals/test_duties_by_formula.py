"""Hydrant cases against formulas in closed form and a general root finder, written without the package.

Hazen-Williams in its printed US form (4.52; gpm, psi, in, ft), 0.433 psi/ft. Two parallel pipes of
resistances R1, R2 act as (R1^-1/1.85 + R2^-1/1.85)^-1.85. Tolerance: the package computes the same
formula in SI by exact factors; 1e-4 allows for the four digits of 0.433 and of schedule 40 bores.
"""

from __future__ import annotations

import math
from pathlib import Path

import pytest
from duty_projects import supply, written
from scipy.optimize import brentq

from supplycheck.check import check_project
from supplycheck.model.duty import DutyRow, HydrantRow
from supplycheck.results.records import Result
from supplycheck.units import GPM, PSI

BORE = {"4": 4.026, "6": 6.065, "8": 7.981}
N = 1.85
RISE = 0.433
STATIC, RESIDUAL, TESTED = 80.0, 60.0, 1200.0
TEST = (STATIC - RESIDUAL) / TESTED**N


def pipe(length: float, size: str) -> float:
    """Resistance [psi/gpm^1.85] of schedule 40 pipe, C 120."""
    return 4.52 * length / (120**N * BORE[size] ** 4.87)


def side_by_side(first: float, second: float) -> float:
    return float((first ** (-1 / N) + second ** (-1 / N)) ** -N)


COMMON, LEFT, RIGHT = pipe(150, "8"), pipe(400, "6"), pipe(700, "6")
RING = side_by_side(LEFT, RIGHT)
NODES = ["S,0,supply", "T,5,junction", "A,8,hydrant", "B,20,hydrant"]
PIPES = [
    "common,S,T,150,8,,,underground",
    "left,T,B,400,6,,,underground",
    "right,T,B,700,6,,,underground",
    "lateral,T,A,30,6",
]
DUTY = """
[fire_flow]
flow = 1000
duration = 120
hydrants_at_once = 2
highest_point = "T"
valves = ["left"]
maximum_day = { T = 200 }
[[hydrant]]
tag = "A"
node = "A"
[[hydrant]]
tag = "B"
node = "B"
"""


@pytest.fixture(scope="module")
def yard(tmp_path_factory: pytest.TempPathFactory) -> Result:
    folder = tmp_path_factory.mktemp("yard")
    return check_project(written(folder, DUTY, NODES, PIPES, test=supply(STATIC, RESIDUAL, TESTED)))


def row_of(result: Result, label: str) -> DutyRow:
    return next(row for row in result.duties.rows if row.label == label)


def hydrant(result: Result, tag: str) -> HydrantRow:
    return next(row for row in result.duties.hydrants if row.tag == tag)


def test_greatest_flow_through_a_ring_in_closed_form(yard: Result) -> None:
    most = ((STATIC - 20 * RISE - 20) / (TEST + COMMON + RING)) ** (1 / N)
    found = hydrant(yard, "B").greatest_flow
    assert found is not None
    assert found / GPM == pytest.approx(most, rel=1e-4)


def test_greatest_flow_on_the_day_of_greatest_use_by_a_root_finder(yard: Result) -> None:
    def left(flow: float) -> float:
        fed = flow + 200
        return STATIC - 20 * RISE - 20 - (TEST + COMMON) * fed**N - RING * flow**N

    found = hydrant(yard, "B").greatest_on_maximum_day
    assert found is not None
    assert found / GPM == pytest.approx(brentq(left, 0, 5000), rel=1e-4)


def test_greatest_flow_leaves_exactly_twenty_psi_by_a_scan(yard: Result) -> None:
    """Brute force on the formula: of all whole gallons the last that keeps 20 psi at hydrant A."""
    last = max(
        flow
        for flow in range(1, 5000)
        if STATIC - 8 * RISE - (TEST + COMMON + pipe(30, "6")) * flow**N >= 20
    )
    found = hydrant(yard, "A").greatest_flow
    assert found is not None
    assert last - 0.5 < found / GPM < last + 1.5


@pytest.mark.parametrize(
    ("label", "ring"), [("hydrants A + B", RING), ("hydrants A + B, left shut", RIGHT)]
)
def test_two_hydrants_at_once_with_and_without_a_shut_valve(yard: Result, label: str, ring: float) -> None:
    """500 gpm each: B at 20 ft behind the ring asks most."""
    needed = 20 + 20 * RISE + COMMON * 1000**N + ring * 500**N
    row = row_of(yard, label)
    assert row.required_pressure / PSI == pytest.approx(needed, rel=1e-4)
    assert row.margin / PSI == pytest.approx(STATIC - TEST * 1000**N - needed, abs=0.01)
    outlets = {one.node: one.pressure / PSI for one in row.outlets}
    assert outlets["A"] == pytest.approx(
        STATIC - (TEST + COMMON) * 1000**N - 8 * RISE - pipe(30, "6") * 500**N, abs=0.01
    )
    assert row.counts == (label == "hydrants A + B")


def test_alone_and_on_the_day_of_greatest_use(yard: Result) -> None:
    alone = row_of(yard, "hydrant B alone")
    assert alone.required_pressure / PSI == pytest.approx(
        20 + 20 * RISE + (COMMON + RING) * 1000**N, rel=1e-4
    )
    day = row_of(yard, "hydrants A + B, at maximum-day demand")
    assert day.flow / GPM == pytest.approx(1200)
    assert day.required_pressure / PSI == pytest.approx(
        20 + 20 * RISE + COMMON * 1200**N + RING * 500**N, rel=1e-4
    )


def test_a_valve_that_cuts_a_hydrant_off_is_said(tmp_path: Path) -> None:
    text = DUTY.replace('valves = ["left"]', 'valves = ["lateral"]')
    result = check_project(written(tmp_path, text, NODES, PIPES, test=supply(STATIC, RESIDUAL, TESTED)))
    row = row_of(result, "hydrants A + B, lateral shut")
    assert row.governing_by == "cut off" and "A" in row.note and math.isnan(row.margin)
    finding = next(one for one in result.findings if one.check.startswith("hydrants with a valve shut"))
    assert finding.state == "ask authority"


SPRINKLERS = """
[criteria]
hazard = "light hazard"
system = "wet"
density = 0.10
area = 150
design_area = ["H"]
[sprinkler.K]
k_factor = 5.6
minimum_pressure = 7
coverage_area = 150
[hose]
outside = 100
[fire_flow]
flow = 600
duration = 60
hydrants_at_once = 1
highest_point = "T"
counts = ["hydrants", "with sprinklers"]
[[hydrant]]
tag = "A"
node = "A"
"""


def test_sprinklers_and_hydrant_at_once(tmp_path: Path) -> None:
    """0.10 gpm/ft² on 150 ft²: 15 gpm, (15/5.6)² = 7.17 psi at one head 25 ft up; the hydrant draws 600.

    The hose allowance does not flow beside the hydrant; in the sprinklers' own case it does.
    """
    nodes = ["S,0,supply", "T,5,junction", "A,8,hydrant", "H,25,sprinkler,K"]
    pipes = ["common,S,T,150,4,,,underground", "lateral,T,A,30,4", "branch,T,H,50,1"]
    test = supply(STATIC, RESIDUAL, TESTED)
    result = check_project(written(tmp_path, SPRINKLERS, nodes, pipes, test=test))
    common, lateral = pipe(150, "4"), pipe(30, "4")
    branch = 4.52 * 50 / (120**N * 1.049**4.87)
    for_head = (15 / 5.6) ** 2 + branch * 15**N + 25 * RISE
    for_hydrant = 20 + lateral * 600**N + 8 * RISE
    row = row_of(result, "hydrant A alone, with sprinklers")
    assert for_hydrant > for_head  # the head then gets more than it needs
    at_tee = for_hydrant - 5 * RISE

    def surplus(flow: float) -> float:
        return at_tee + 5 * RISE - 25 * RISE - branch * flow**N - (flow / 5.6) ** 2

    head = brentq(surplus, 1, 100)
    assert row.flow / GPM == pytest.approx(600 + head, rel=1e-4)
    needed = for_hydrant + common * (600 + head) ** N
    assert row.required_pressure / PSI == pytest.approx(needed, rel=1e-4)
    assert row.counts and row.label in result.governs
    own = result.design_area.governing
    assert own.flow / GPM == pytest.approx(115, rel=1e-4)
    assert own.required_pressure / PSI == pytest.approx(for_head + common * 15**N, rel=1e-4)
    states = {one.check: one.state for one in result.findings}
    assert states["density at every head"] == "ok" and states["hose counted once"] == "ok"


def test_of_very_many_cases_the_hardest_of_each_kind_are_listed(tmp_path: Path) -> None:
    """14 hydrants on one tee, 91 pairs: every one alone, and of the pairs the hardest with their number."""
    names = [f"Y{number:02d}" for number in range(14)]
    nodes = [*NODES[:2], *(f"{name},{8 + place},hydrant" for place, name in enumerate(names))]
    pipes = [PIPES[0], *(f"to {name},T,{name},30,6" for name in names)]
    text = DUTY.split("valves")[0] + "".join(
        f'[[hydrant]]\ntag = "{name}"\nnode = "{name}"\n' for name in names
    )
    result = check_project(written(tmp_path, text, nodes, pipes, test=supply(STATIC, RESIDUAL, TESTED)))
    rows = result.duties.rows
    assert len(rows) == 14 + 1
    pair = rows[-1]
    assert pair.tried == 91 and "Y13" in pair.label  # the highest of all hydrants is in the hardest pair
    needed = 20 + 21 * RISE + COMMON * 1000**N + pipe(30, "6") * 500**N
    assert pair.required_pressure / PSI == pytest.approx(needed, rel=1e-4)


def test_the_case_that_is_short_of_the_margin_rule_governs(tmp_path: Path) -> None:
    """Under 8 % of the demand pressure, sprinklers at high pressure are short where a hydrant is not.

    The hydrant leaves less before the rule, but the rule asks less of it: the sprinklers must govern.
    """
    nodes = ["S,0,supply", "T,5,junction", "A,33,hydrant", "H,130,sprinkler,K"]
    pipes = ["common,S,T,150,8,,,underground", "lateral,T,A,30,8", "branch,T,H,140,1"]
    text = SPRINKLERS.replace("flow = 600", "flow = 1900").replace("outside = 100", "outside = 0")
    text = text.replace('"hydrants", "with sprinklers"', '"hydrants"')
    rule = 'rule = "of demand"\npercent = 8\nsource = "invented"'
    test = supply(80, 60, 1375).replace('rule = "none"', rule)
    branch = 4.52 * 140 / (120**N * 1.049**4.87)
    sprinklers = (15 / 5.6) ** 2 + branch * 15**N + 130 * RISE + pipe(150, "8") * 15**N
    yard = 20 + 33 * RISE + pipe(180, "8") * 1900**N
    resistance = 20 / 1375**N
    before = {"sprinklers": 80 - resistance * 15**N - sprinklers, "yard": 80 - resistance * 1900**N - yard}
    after = {"sprinklers": before["sprinklers"] - 0.08 * sprinklers, "yard": before["yard"] - 0.08 * yard}
    assert 0 < before["yard"] < before["sprinklers"]
    assert after["sprinklers"] < 0 < after["yard"]
    result = check_project(written(tmp_path, text, nodes, pipes, test=test))
    assert result.verdict == "not adequate"
    assert result.demand.governing_head == "H"
    assert result.margin.after_rule is not None
    assert result.margin.after_rule / PSI == pytest.approx(after["sprinklers"], abs=0.02)


def test_needed_pressure_is_told_where_it_is_compared(tmp_path: Path) -> None:
    """At T, 5 ft up and behind the common pipe, instead of at the supply node."""
    test = '[supply]\ncompare_at = "T"\n' + supply(STATIC, RESIDUAL, TESTED)
    result = check_project(written(tmp_path, DUTY, NODES, PIPES, test=test))
    row = row_of(result, "hydrants A + B")
    assert row.required_pressure / PSI == pytest.approx(20 + 15 * RISE + RING * 500**N, rel=1e-4)
    day = row_of(result, "hydrants A + B, at maximum-day demand")
    assert result.demand.pressure == pytest.approx(day.required_pressure, rel=1e-6)
