"""Several supplies, and a regulating valve before the point of comparison.

A project with two mains once ran or not by which of them gave more, water that ran into a source ended the
calculation, and pressures at the point of comparison were added along a way that no water takes. The
expected figures are worked here from the laws alone: Hazen-Williams in the printed US form of NFPA 13
(4.52), 0.433 psi/ft, q = K√P and P = Ps − (Ps − Pr)(Q/Qt)^1.85.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from pathlib import Path

import pytest
from project_texts import ONE_HEAD
from scipy.optimize import brentq

from supplycheck.check import check_project
from supplycheck.errors import DomainError
from supplycheck.findings import Finding
from supplycheck.results.display import demand_text
from supplycheck.results.records import Result
from supplycheck.units import GPM, PSI, US

NEED = 0.15 * 130  # gpm: density of ordinary hazard group 1 times the area of the one head
HEAD = (NEED / 5.6) ** 2  # psi
BRANCH = (10, 1.049)  # ft, in: from J up to the head H
LEFT, RIGHT = (200, 3.068), (150, 2.067)  # ft, in: from E and from W to J

RULE = '[supply.margin]\nrule = "fixed"\npressure = 5\n'
NODES = "tag,elevation,kind,sprinkler\nE,0,supply,\nW,0,supply,\nJ,12,,\nH,20,sprinkler,A\n"


@dataclass(frozen=True)
class Main:
    """A tested main: psi and gpm."""

    node: str
    static: float
    residual: float
    flow: float

    def at(self, flow: float) -> float:
        """Pressure at ``flow``; below 0 it runs in, and the curve is odd about static."""
        fall = (self.static - self.residual) * math.pow(abs(flow) / self.flow, 1.85)
        return self.static - fall if flow >= 0 else self.static + fall

    @property
    def table(self) -> str:
        return (
            f'[[supply.flow_test]]\ntag = "{self.node} main"\nnode = "{self.node}"\n'
            f"static = {self.static}\nresidual = {self.residual}\nflow = {self.flow}\n"
            "date = 2026-06-01\ngauge_elevation = 0\n"
        )


STRONG, WEAK = Main("E", 80, 60, 1000), Main("W", 40, 25, 600)


def friction(flow: float, pipe: tuple[float, float]) -> float:
    length, bore = pipe
    loss = 4.52 * length * math.pow(abs(flow), 1.85) / math.pow(120, 1.85) / math.pow(bore, 4.87)
    return loss if flow >= 0 else -loss


AT_J = HEAD + friction(NEED, BRANCH) + 0.433 * 8


def run(
    folder: Path, supplies: str, left: str = "open", right: str = "open", at: str = "E", more: str = ""
) -> Result:
    """Return the answer where E and W feed J through pipes with these valves, compared ``at``."""
    pipes = (
        "tag,from,to,length,kind,bore,c_factor,devices,valve\n"
        f"e,E,J,{LEFT[0]},p,{LEFT[1]},120,,{left}\nw,W,J,{RIGHT[0]},p,{RIGHT[1]},120,,{right}\n"
        f"h,J,H,{BRANCH[0]},p,{BRANCH[1]},120,,open\n"
    )
    (folder / "nodes.csv").write_text(NODES, encoding="utf-8")
    (folder / "pipes.csv").write_text(pipes, encoding="utf-8")
    text = f'{ONE_HEAD}[supply]\ncompare_at = "{at}"\n{supplies}{RULE}'
    (folder / "project.toml").write_text(text + more, encoding="utf-8")
    return check_project(folder / "project.toml")


def step(result: Result, title: str) -> float:
    return next(one.value for one in result.supply.steps if one.step == title)


def finding(result: Result, check: str) -> Finding:
    return next(one for one in result.findings if one.check == check)


def shared(strong: Main, weak: Main, drawn: float = NEED) -> tuple[float, float]:
    """Return what the strong main gives [gpm] and what is left at J when both are as tested [psi]."""

    def gap(flow: float) -> float:
        one = strong.at(flow) - friction(flow, LEFT)
        return one - weak.at(drawn - flow) + friction(drawn - flow, RIGHT)

    given = float(brentq(gap, 0.0, 1000.0, xtol=1e-12))
    return given, strong.at(given) - friction(given, LEFT) - 0.433 * 12 - AT_J


@pytest.mark.parametrize("at", ["E", "W", "J", "H"])
@pytest.mark.parametrize("stronger", ["E", "W"])
def test_the_node_compared_at_does_not_decide_whether_a_project_runs(
    tmp_path: Path, at: str, stronger: str
) -> None:
    """Check valves in both connections; either main may be the one that gives more."""
    less = 0.3 if stronger == "W" else 0.0
    east, west = Main("E", 60 - less, 52 - less, 900), Main("W", 60, 52, 900)
    result = run(tmp_path, east.table + west.table, "check", "check", at)
    given, left = shared(east, west)
    assert (0 < given < NEED / 2) if stronger == "W" else (NEED / 2 < given < NEED)
    assert result.margin.pressure / PSI == pytest.approx(left, abs=1e-3)
    kept = result.supply.available_pressure - result.demand.pressure
    assert kept / PSI == pytest.approx(left, abs=1e-3)
    here = {"E": east.at(given), "W": west.at(NEED - given), "J": AT_J + left, "H": HEAD + left}
    assert result.supply.available_pressure / PSI == pytest.approx(here[at], abs=1e-3)
    assert finding(result, "water running into a supply").state == "ok"


def test_a_main_held_back_by_its_check_valve_can_be_compared_at(tmp_path: Path) -> None:
    """W at 40 psi gives nothing: a gauge there shows its static, whatever flows."""
    result = run(tmp_path, STRONG.table + WEAK.table, "check", "check", "W")
    left = STRONG.at(NEED) - friction(NEED, LEFT) - 0.433 * 12 - AT_J
    assert result.margin.pressure / PSI == pytest.approx(left, abs=1e-3)
    assert result.supply.available_pressure / PSI == pytest.approx(40, abs=1e-3)
    assert result.supply.static_at_comparison / PSI == pytest.approx(40, abs=1e-3)
    assert "W gives no water to this demand" in result.supply.statement
    assert "compare at E" in result.supply.statement
    assert finding(result, "pressure without flow").tags == ("E",)


def test_a_point_that_no_water_reaches_is_told_with_the_valve(tmp_path: Path) -> None:
    """W without a supply stands behind the check valve that lets water out of it alone."""
    (tmp_path / "x").mkdir()
    with pytest.raises(DomainError) as raised:
        run(tmp_path / "x", STRONG.table, "open", "check", "W")
    told = str(raised.value)
    assert "E" in told and "W" in told and "w is one-way against it" in told and "compare_at" in told


def test_a_tank_may_be_filled_by_a_higher_one(tmp_path: Path) -> None:
    """Levels of 180 and 110 ft: 77.94 and 47.63 psi at the nodes, whatever runs."""

    def tank(tag: str, node: str, level: float) -> str:
        return f'[[supply.tank]]\ntag = "{tag}"\nnode = "{node}"\nwater_level = {level}\nvolume = 9000\n'

    result = run(tmp_path, tank("high", "E", 180) + tank("low", "W", 110))
    high, low = 180 * 0.433, 110 * 0.433

    def gap(flow: float) -> float:
        return high - friction(flow, LEFT) - low + friction(NEED - flow, RIGHT)

    given = float(brentq(gap, 0.0, 1000.0, xtol=1e-12))
    left = high - friction(given, LEFT) - 0.433 * 12 - AT_J
    assert given > NEED  # what the test is about: the rest runs into the lower tank
    assert result.margin.pressure / PSI == pytest.approx(left, abs=1e-3)
    assert result.supply.available_pressure / PSI == pytest.approx(high, abs=1e-3)
    assert result.supply.available_flow is None  # at its own node a tank holds its pressure at every flow
    found = finding(result, "water running into a supply")
    assert found.state == "ask authority" and found.tags == ("W",) and "overflow" in found.remedy
    assert found.measured is not None and found.measured.value / GPM >= given - NEED - 1e-6
    names = [curve.name for curve in result.curves]
    assert any(name.startswith("low") and name.endswith("water runs into it") for name in names)
    given_step = next(one for one in result.supply.steps if one.step == "Given by the sources")
    assert given_step.formula == f"E {given:.1f} gpm − {given - NEED:.1f} gpm that run into W"


def test_a_main_that_takes_water_is_read_at_what_runs_into_it(tmp_path: Path) -> None:
    result = run(tmp_path, STRONG.table + WEAK.table)
    given, left = shared(STRONG, WEAK)
    back = given - NEED
    assert back > 50  # gpm: what the test is about
    assert result.margin.pressure / PSI == pytest.approx(left, abs=1e-3)
    fed = 40 + (40 - 25) * (back / 600) ** 1.85
    assert step(result, "Curve of W main at the demand flow") / PSI == pytest.approx(fed, abs=1e-3)
    for node in ("E", "W"):
        assert step(result, f"Left over at {node}") == pytest.approx(result.margin.pressure, abs=1.0)
    found = finding(result, "water running into a supply")
    assert found.state == "ask authority" and found.tags == ("W",)
    assert "check valve" in found.remedy and found.remedy.endswith("?")
    told = demand_text(result, US)
    assert f"{given:.1f} gpm pass E, more than is drawn" in told and "of which" not in told


@pytest.mark.parametrize("at", ["E", "W", "J", "H"])
def test_the_margin_is_the_same_wherever_it_is_read_though_water_runs_into_a_main(
    tmp_path: Path, at: str
) -> None:
    result = run(tmp_path, STRONG.table + WEAK.table, at=at)
    given, left = shared(STRONG, WEAK)
    here = {"E": STRONG.at(given), "W": WEAK.at(NEED - given), "J": AT_J + left, "H": HEAD + left}
    assert result.supply.available_pressure / PSI == pytest.approx(here[at], abs=1e-3)
    assert result.margin.pressure / PSI == pytest.approx(left, abs=1e-3)


def test_without_flow_two_open_mains_settle_between_their_statics(tmp_path: Path) -> None:
    """The strong main runs into the weak one though nothing is drawn: E shows what is left at that flow."""
    given, _ = shared(STRONG, WEAK, drawn=0.0)
    result = run(tmp_path, STRONG.table + WEAK.table)
    assert result.supply.static_at_comparison / PSI == pytest.approx(STRONG.at(given), abs=1e-3)
    kept = run(tmp_path, STRONG.table + WEAK.table, "check", "check")
    assert kept.supply.static_at_comparison / PSI == pytest.approx(80, abs=1e-3)


def test_the_flow_at_the_demand_pressure_counts_all_that_the_sources_give(tmp_path: Path) -> None:
    """Everything drawn grows alike until no more than the demand pressure stands at J."""
    result = run(tmp_path, STRONG.table + WEAK.table, "check", "check", "J")

    def left(flow: float) -> float:
        one = STRONG.at(flow) - friction(flow, LEFT) - 0.433 * 12 - AT_J

        def gap(given: float) -> float:
            other = WEAK.at(flow - given) - friction(flow - given, RIGHT)
            return STRONG.at(given) - friction(given, LEFT) - other

        if one > WEAK.static - 0.433 * 12 - AT_J:
            return one  # W cannot give
        given = float(brentq(gap, 0.0, flow, xtol=1e-12))
        return STRONG.at(given) - friction(given, LEFT) - 0.433 * 12 - AT_J

    most = float(brentq(left, NEED, 2000.0, xtol=1e-10))
    assert result.supply.available_flow is not None
    assert result.supply.available_flow / GPM == pytest.approx(most, rel=1e-6)


def test_before_adjustments_every_source_is_as_it_was_tested(tmp_path: Path) -> None:
    """All tests 6 psi lower: with as much drawn, every pressure was 6 psi higher before."""
    low = '[[supply.adjustment]]\nkind = "low supply"\npressure = 6\nreason = "summer"\n'
    result = run(tmp_path, low + STRONG.table + WEAK.table, at="J")
    shift = result.supply.unadjusted_pressure - result.supply.available_pressure
    assert shift / PSI == pytest.approx(6, abs=1e-3)


# --- behind a regulating valve --------------------------------------------------------------------------

VALVE = """
[device.v]
kind = "pressure-reducing valve"
setting = {setting}
curve = [[0, 1], [100, 2], [300, 9], [2000, 300]]
source = "invented for this test"
"""


def regulated(folder: Path, at: str, setting: float, supplies: str, *, second: bool = False) -> Result:
    """Return the answer where E feeds C through a valve, C feeds H, and W feeds H too where ``second``."""
    nodes = "tag,elevation,kind,sprinkler\nE,0,supply,\nB,0,,\nC,12,,\nH,20,sprinkler,A\n"
    nodes += "W,0,supply,\n" if second else ""
    pipes = (
        "tag,from,to,length,kind,bore,c_factor,devices,valve\ne,E,B,50,p,4.026,120,,open\n"
        f"v,B,C,{LEFT[0]},p,{LEFT[1]},120,v,open\nh,C,H,{BRANCH[0]},p,{BRANCH[1]},120,,open\n"
    )
    pipes += f"w,W,H,{RIGHT[0]},p,{RIGHT[1]},120,,open\n" if second else ""
    (folder / "nodes.csv").write_text(nodes, encoding="utf-8")
    (folder / "pipes.csv").write_text(pipes, encoding="utf-8")
    text = f'{ONE_HEAD}[supply]\ncompare_at = "{at}"\n{supplies}{RULE}'
    (folder / "project.toml").write_text(text + VALVE.format(setting=setting), encoding="utf-8")
    return check_project(folder / "project.toml")


def test_behind_a_regulating_valve_a_gauge_shows_its_setting_less_the_losses(tmp_path: Path) -> None:
    """110 psi static before a valve set to 60: nobody finds 90 psi at C, 12 ft higher up."""
    main = Main("E", 110, 95, 800)
    result = regulated(tmp_path, "C", 60, main.table)
    shown = 60 - 0.433 * 12 - friction(NEED, LEFT)
    assert result.supply.available_pressure / PSI == pytest.approx(shown, abs=1e-3)
    assert step(result, "Carried to C") / PSI == pytest.approx(shown, abs=1e-3)
    assert result.supply.static_at_comparison / PSI == pytest.approx(60 - 0.433 * 12, abs=1e-3)
    assert result.demand.pressure / PSI == pytest.approx(AT_J, abs=1e-3)
    # The margin is by how much the supply can be lowered: with the valve fully open, 1.195 psi at 19.5 gpm.
    open_loss = 1 + NEED / 100
    asked = AT_J + 0.433 * 12 + friction(NEED, LEFT) + open_loss + friction(NEED, (50, 4.026))
    assert result.margin.pressure / PSI == pytest.approx(main.at(NEED) - asked, abs=1e-3)
    assert step(result, "Left at C") / PSI == pytest.approx(shown - AT_J, abs=1e-3)
    assert "regulating valve" in result.supply.statement
    assert finding(result, "pressure without flow").tags[0] in ("E", "B")
    line = next(one for one in result.curves if one.style == "combined")
    assert max(line.pressures) / PSI <= 60 - 0.433 * 12 + 1e-3

    def left(flow: float) -> float:  # of the valve fully open: 9 psi at 300 gpm and more beyond
        loss = 9 + (flow - 300) * (300 - 9) / 1700 if flow > 300 else 2 + (flow - 100) * 7 / 200
        behind = min(60, main.at(flow) - friction(flow, (50, 4.026)) - loss)
        return behind - friction(flow, LEFT) - 0.433 * 12 - AT_J

    most = float(brentq(left, 100.0, 1500.0, xtol=1e-10))
    assert result.supply.available_flow is not None
    assert result.supply.available_flow / GPM == pytest.approx(most, rel=1e-6)


def test_before_the_valve_nothing_of_this_shows(tmp_path: Path) -> None:
    main = Main("E", 110, 95, 800)
    result = regulated(tmp_path, "E", 60, main.table)
    assert result.supply.available_pressure / PSI == pytest.approx(main.at(NEED), abs=1e-3)
    kept = result.supply.available_pressure - result.demand.pressure
    assert kept == pytest.approx(result.margin.pressure, abs=1e-3)


def test_a_shut_valve_is_no_loss_on_the_way(tmp_path: Path) -> None:
    """W keeps the valve of E shut: E shows its 60 psi, and W's 90 psi cannot pass the valve backwards."""
    supplies = Main("E", 60, 50, 800).table + Main("W", 90, 80, 1200).table
    result = regulated(tmp_path, "E", 30, supplies, second=True)
    assert result.supply.static_at_comparison / PSI == pytest.approx(60, abs=1e-3)
    assert result.supply.available_pressure / PSI == pytest.approx(60, abs=1e-3)
    assert not [one for one in result.supply.steps if one.step.startswith("Carried to E")]
    assert finding(result, "pressure without flow").tags[0] == "W"
