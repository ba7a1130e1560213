"""Fire pumps and tanks through the whole pipeline, against published limits and hand-worked figures.

Sources
-------
E1: NFPA 20 as quoted by Huggins: churn ≤ 140 %, ≥ 65 % of rated pressure at 150 % of rated flow; suction no
    less than 0 psi at 150 %, −3 psi from a tank.
E2: constructed from E1: city 90/65 psi at 1000 gpm, pump 1000 gpm at 100 psi, churn 140, 65 at 1500 gpm:
    230 psi at no flow, 165 at 1000 gpm, 102.1 at 1500 gpm where the suction is 37.1 psi.
E3: (300 + 250) gpm for 60 min are 33 000 gal (demand × duration, UFC 3-600-01 of 2006).
C14: White, Fluid Mechanics, ch. 6, reservoirs joined by a pumped pipe (from memory): 0.2 ft³/s, 400 ft of
    2 in, ε/d 0.001, lift 100 ft, ΣK 13.2, ν 1.1e-5 ft²/s: 184.7 ft, 4.2 hp.
"""

from __future__ import annotations

from pathlib import Path

import pytest

from supplycheck.check import check_project
from supplycheck.findings import Finding
from supplycheck.model import DARCY, Device, Fitting, Fluid, Node, Pipe, System
from supplycheck.network import LoadCase, SourceCurve, build_network, solve_operating
from supplycheck.results.records import Result
from supplycheck.units import FOOT, GALLON, GPM, GRAVITY, INCH, POUND, PSI

PROJECT = """\
units = "us"
[project]
title = "Pump"
date = 2026-11-20
standard = "NFPA 13 (2022)"
[criteria]
hazard = "ordinary hazard group 1"
system = "wet"
design_area = ["H"]
duration = 60
maximum_pressure = 175
[sprinkler.A]
k_factor = {k_factor}
minimum_pressure = {minimum}
coverage_area = 100
[pipe.wide]
material = "steel schedule 40"
[device.pump]
kind = "pump"
source = "made up"
{pump}
[network]
nodes = "nodes.csv"
pipes = "pipes.csv"
[supply]
node = "S"
{supply}
[supply.margin]
rule = "none"
[hose]
outside = {hose}
outside_node = "S"
"""
NODES = """\
tag,x,y,elevation,kind,sprinkler,area
S,0,0,0,supply,,
B,1,0,0,junction,,
D,2,0,0,junction,,
H,3,0,0,sprinkler,A,100
"""
# 12 in pipe of 0.01 ft: nothing is lost on the way, so that the hand figures stand alone.
PIPES = """\
from,to,length,kind,bore,fittings,devices
S,B,0.01,wide,11.938,none,
B,D,0.01,wide,11.938,none,pump
D,H,0.01,wide,11.938,none,
"""
CITY = """\
[supply.flow_test]
static = 90
residual = 65
flow = 1000
date = 2026-06-01
gauge_elevation = 0
"""
RATED = "rated_flow = 1000\nrated_pressure = 100\nchurn_pressure = 140\npressure_at_150 = 65"
POINTS = "rated_flow = 1000\nrated_pressure = 100\ncurve = [[0, 140], [1000, 100], [1500, 65]]"
LIMITS = "rated_flow = 1000\nrated_pressure = 100\ncurve_from_limits = true"


def checked(folder: Path, **parts: object) -> Result:
    given = {"k_factor": 10, "minimum": 100, "pump": RATED, "supply": CITY, "hose": 0, **parts}
    (folder / "project.toml").write_text(PROJECT.format(**given), encoding="utf-8")
    (folder / "nodes.csv").write_text(NODES, encoding="utf-8")
    (folder / "pipes.csv").write_text(PIPES, encoding="utf-8")
    return check_project(folder)


def finding(result: Result, check: str) -> Finding:
    return next(one for one in result.findings if one.check == check)


@pytest.mark.parametrize("pump", [RATED, POINTS, LIMITS])
def test_e2_city_and_pump_through_the_pipeline(tmp_path: Path, pump: str) -> None:
    """One pump told in three ways; printed to 0.1 psi, so half a digit is allowed."""
    facts = checked(tmp_path, pump=pump).pumps[0].facts
    assert facts.highest_discharge / PSI == pytest.approx(230.0, abs=0.05)
    overload = facts.state("150 % of rated flow")
    assert overload is not None
    assert overload.flow / GPM == pytest.approx(1500.0, rel=1e-9)
    assert overload.suction / PSI == pytest.approx(37.1, abs=0.05)
    assert overload.discharge is not None and overload.discharge / PSI == pytest.approx(102.1, abs=0.05)
    both = next(line for line in facts.lines if line.style == "combined")
    at = dict(zip((round(flow / GPM, 6) for flow in both.flows), both.pressures, strict=True))
    assert at[0.0] / PSI == pytest.approx(230.0, abs=0.05)
    assert at[1000.0] / PSI == pytest.approx(165.0, abs=0.05)
    assert at[1500.0] / PSI == pytest.approx(102.1, abs=0.05)
    assert (facts.churn_share, facts.overload_share) == (pytest.approx(1.40), pytest.approx(0.65))


def test_e1_limits_are_told_as_findings(tmp_path: Path) -> None:
    assert finding(checked(tmp_path), "pump curve").state == "ok"
    strong = checked(tmp_path, pump=RATED.replace("140", "141"))
    assert finding(strong, "pump curve").state == "fail"
    weak = checked(tmp_path, pump=RATED.replace("= 65", "= 64"))
    assert finding(weak, "pump curve").state == "fail"
    assert finding(strong, "pump pressure without flow").state == "fail"  # 231 psi on 175 psi parts


def test_e1_suction_floors(tmp_path: Path) -> None:
    """90 psi falls to 37.1 at 1500 gpm and stays above 20 psi; 60/35 falls to 7.1: 0 holds, 20 does not."""
    good = checked(tmp_path)
    assert finding(good, "pump suction").state == "ok"
    assert finding(good, "main at the greatest pump flow").state == "ok"
    low = CITY.replace("= 90", "= 60").replace("= 65", "= 35")
    main = finding(checked(tmp_path, supply=low), "main at the greatest pump flow")
    assert main.state == "ask authority" and main.measured is not None
    assert main.measured.value / PSI == pytest.approx(60 - 25 * 1.5**1.85, abs=0.01)
    assert finding(checked(tmp_path, supply=low), "pump suction").state == "ok"
    dry = CITY.replace("= 90", "= 50").replace("= 65", "= 25")  # −2.9 psi: a tank may, a main may not
    assert finding(checked(tmp_path, supply=dry), "pump suction").state == "fail"
    floor = checked(tmp_path, supply="main_floor_pressure = 20\n" + low)
    assert finding(floor, "main at the greatest pump flow").state == "fail"


def test_curve_from_limits_is_an_assumption_and_a_question(tmp_path: Path) -> None:
    result = checked(tmp_path, pump=LIMITS)
    assert any(one.key == "device.pump.curve" for one in result.project.assumptions)
    assert finding(result, "pump curve from limits").state == "ask authority"
    assert result.pumps[0].facts.from_limits


def test_e3_storage_with_hose_at_the_tank(tmp_path: Path) -> None:
    """K 30 at 100 psi gives 300 gpm; with 250 gpm of hose for 60 min 33 000 gal."""
    tank = (
        '[[supply.tank]]\ntag = "T"\nnode = "S"\nkind = "suction"\nwater_level = 10\nvolume = 40000\n'
        "refill = 50\n"
    )
    result = checked(tmp_path, k_factor=30, supply=tank, hose=250)
    time = result.tanks[0].time
    assert time.nominal_flow / GPM == pytest.approx(550.0, rel=1e-6)
    assert time.nominal_volume is not None
    assert time.nominal_volume / GALLON + 50 * 60 == pytest.approx(33000.0, rel=1e-6)
    assert result.tanks[0].credit == pytest.approx(3000 * GALLON)
    assert time.lasts == pytest.approx(40000 / 500 * 60, rel=1e-6)
    assert time.refill_time == pytest.approx(40000 / 50 * 60, rel=1e-12)
    # What really runs is more than the demand, so the tank is empty sooner.
    assert time.actual_flow is not None and time.actual_flow > time.nominal_flow
    assert time.actual_lasts is not None and time.lasts is not None and time.actual_lasts < time.lasts
    assert result.pumps[0].facts.from_tank


def test_low_level_of_a_tank_is_what_counts(tmp_path: Path) -> None:
    """At 0.433 psi/ft, 8 ft between levels are 3.464 psi; the highest pressure counts the full tank."""
    tank = '[[supply.tank]]\ntag = "T"\nnode = "S"\nkind = "suction"\nwater_level = 10\n'
    full = checked(tmp_path, supply=tank).pumps[0].facts
    low = checked(tmp_path, supply=tank + "low_level = 2\n").pumps[0].facts
    at_full, at_low = full.state("150 % of rated flow"), low.state("150 % of rated flow")
    assert at_full is not None and at_low is not None
    assert (at_full.suction - at_low.suction) / PSI == pytest.approx(8 * 0.433, abs=1e-6)
    assert low.highest_suction / PSI == pytest.approx(10 * 0.433, abs=1e-9)


def test_the_pump_that_would_be_needed(tmp_path: Path) -> None:
    """K 30 at 130 psi needs 300√1.3 = 342.05 gpm. The pump in place: 10 psi, so the city gives the rest."""
    weak = "curve = [[0, 10], [500, 10], [600, 10]]\nrated_flow = 400\nrated_pressure = 10"
    result = checked(tmp_path, k_factor=30, minimum=130, pump=weak)
    needed = result.needed_pump
    assert needed is not None and needed.instead_of == "pump"
    flow = 30 * 130**0.5
    city = 90 - 25 * (flow / 1000) ** 1.85
    assert needed.flow / GPM == pytest.approx(flow, rel=1e-6)
    assert needed.suction / PSI == pytest.approx(city, abs=0.01)  # the suction line is sampled
    assert needed.net / PSI == pytest.approx(130 - city, abs=1e-4)
    by_flow = {round(one.rating.flow / GPM): one.rating.pressure / PSI for one in needed.options}
    # 342 gpm is beyond 250 gpm: there the least pump has 100 % at 100 % and 65 % at 150 % flow.
    share = 1 - 0.35 * (flow / 250 - 1) / 0.5
    assert by_flow[250] == pytest.approx((130 - city) / share, abs=0.02)
    assert by_flow[400] == pytest.approx(130 - city, abs=0.01)
    again = checked(tmp_path, k_factor=30, minimum=130, pump=chosen(400, by_flow[400] + 0.02))
    assert again.verdict == "adequate" and again.margin.pressure >= 0 and again.needed_pump is None


def test_without_standard_sizes_the_pump_is_rated_at_the_demand(tmp_path: Path) -> None:
    """EN 12845 has no list of sizes: rated at the demand flow, at exactly the pressure that is missing."""
    weak = "curve = [[0, 10], [500, 10], [600, 10]]\nrated_flow = 400\nrated_pressure = 10"
    checked(tmp_path, k_factor=30, minimum=130, pump=weak)
    text = (tmp_path / "project.toml").read_text(encoding="utf-8")
    text = text.replace("NFPA 13 (2022)", "EN 12845 (2015)").replace("hazard group 1", "hazard 1")
    (tmp_path / "project.toml").write_text(text, encoding="utf-8")
    needed = check_project(tmp_path).needed_pump
    assert needed is not None and len(needed.options) == 1
    option = needed.options[0]
    assert option.rating.flow == pytest.approx(needed.flow)
    assert option.rating.pressure == pytest.approx(needed.net)
    assert option.demand_share == pytest.approx(1.0)


def chosen(flow: float, pressure: float) -> str:
    """Return a pump exactly at the limits of its rating, the weakest that may be delivered."""
    return f"rated_flow = {flow}\nrated_pressure = {pressure}\ncurve_from_limits = true"


def test_two_pumps_side_by_side_in_pipes_of_their_own(tmp_path: Path) -> None:
    """Both run: when one gives 150 % of 500 gpm so does the other, and the main gives 1500 gpm."""
    half = RATED.replace("1000", "500")
    second = '\n[device.second]\nkind = "pump"\nsource = "made up"\n' + half
    (tmp_path / "project.toml").write_text(
        PROJECT.format(k_factor=10, minimum=100, pump=half + second, supply=CITY, hose=0), encoding="utf-8"
    )
    (tmp_path / "nodes.csv").write_text(NODES, encoding="utf-8")
    pipes = PIPES.replace("from,to,", "tag,from,to,").replace("\nS,", "\nP,S,").replace("\nD,", "\nR,D,")
    pipes = pipes.replace("\nB,D,0.01,wide,11.938,none,pump", "\nQ,B,D,0.01,wide,11.938,none,pump")
    pipes += "T,B,D,0.01,wide,11.938,none,second\n"
    (tmp_path / "pipes.csv").write_text(pipes, encoding="utf-8")
    both = check_project(tmp_path).pumps
    assert [pump.facts.tag for pump in both] == ["pump", "second"]
    for pump in both:
        state = pump.facts.state("150 % of rated flow")
        assert state is not None
        assert state.flow / GPM == pytest.approx(750, rel=2e-6)
        assert state.suction / PSI == pytest.approx(37.1, abs=0.05)


def test_a_pump_that_the_main_cannot_feed(tmp_path: Path) -> None:
    """A pump of 5000 gpm on this main: 150 % would need −949 psi, which is told, not hidden."""
    pump = RATED.replace("1000", "5000")
    facts = checked(tmp_path, pump=pump).pumps[0].facts
    state = facts.state("150 % of rated flow")
    assert state is not None
    assert state.suction / PSI == pytest.approx(90 - 25 * 7.5**1.85, rel=1e-3)
    assert finding(checked(tmp_path, pump=pump), "pump suction").state == "fail"


def white(gain: float) -> tuple[float, float]:
    """Return flow [ft³/s] and power given to the water [hp] with a pump that adds ``gain`` [ft]."""
    density = 1.94 * POUND * GRAVITY / FOOT / FOOT**3  # slug/ft³
    weight = density * GRAVITY
    fluid = Fluid("water", density, density * 1.1e-5 * FOOT**2, weight, None, "White")
    losses = Fitting("all", 1, 0.0, 0.0, 13.2, "given", "White")
    bore = 2 * INCH
    pipe = Pipe("P", "low", "high", 400 * FOOT, bore, "2", "any", None, 0.001 * bore, (losses,), ("pump",))
    pump = Device("pump", "pump", (0.0, 1.0), (gain * FOOT * weight,) * 2, "constant")
    system = System((Node("low", 0.0), Node("high", 0.0)), (pipe,), (), (), (pump,))
    network = build_network(system, law=DARCY, fluid=fluid)
    sources = (SourceCurve("low", 20 * FOOT * weight), SourceCurve("high", 120 * FOOT * weight))
    solution = solve_operating(network, LoadCase(()), sources)
    flow = float(solution.pipe_flow[0])
    return flow / FOOT**3, flow * gain * FOOT * weight / (550 * FOOT * POUND * GRAVITY)


def test_c14_two_reservoirs_and_a_pump() -> None:
    """White reads f = 0.0216 (±0.00005 is 0.16 ft) and prints 184.7 ft: 0.3 ft, or 0.2 % of the flow."""
    flow, power = white(184.7)
    assert flow == pytest.approx(0.2, rel=2e-3)
    assert power == pytest.approx(4.2, abs=0.05)
