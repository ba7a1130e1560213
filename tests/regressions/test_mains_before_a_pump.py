"""A main cannot be lowered below nothing, however strong the pump behind it.

The margin of a boosted main once counted pressure below zero before the pump. The expected figures are
worked here from the laws alone: Hazen-Williams in the printed US form of NFPA 13 (4.52), 0.433 psi/ft,
q = K√P and P = Ps − (Ps − Pr)(Q/Qt)^1.85.
"""

from __future__ import annotations

from pathlib import Path

import pytest
from project_texts import ONE_HEAD, write

from supplycheck.check import check_project
from supplycheck.results.records import Result
from supplycheck.units import PSI

BOOSTER = """
[device.booster]
kind = "pump"
curve = [[0, 90], [100, 85], [200, 60]]
rated_flow = 100
rated_pressure = 85
source = "invented for this test"
"""
TEST = """
[supply.flow_test]
static = 30
residual = 20
flow = 100
date = 2026-06-01
gauge_elevation = 0
"""
TANK = """
[[supply.tank]]
tag = "T"
node = "S"
water_level = 46.2
volume = 20000
"""
NODES = "tag,elevation,kind,sprinkler\nS,0,supply,\nP,8,,\nQ,8,,\nH,20,sprinkler,A\n"
PIPES = """\
tag,from,to,length,kind,size,devices
lead,S,P,120,p,1 1/4,
station,P,Q,4,p,2,booster
up,Q,H,30,p,2,
"""
FLOW = 0.15 * 130  # gpm: density of ordinary hazard group 1 times the area of the one head


def checked(folder: Path, supply: str, rule: str) -> Result:
    return check_project(write(folder, ONE_HEAD + BOOSTER + supply + rule, NODES, PIPES))


def lost(flow: float, length: float, bore: float) -> float:
    """Return the loss [psi] of a pipe of C 120; ft, in, gpm."""
    return length * 4.52 * flow**1.85 / (120**1.85 * bore**4.87)


def left_before_the_pump() -> float:
    """Return what the main leaves at the suction at the demand flow [psi]."""
    main = 30 - 10 * (FLOW / 100) ** 1.85
    return main - lost(FLOW, 120, 1.380) - 8 * 0.433


@pytest.mark.parametrize(("asked", "verdict"), [(5, "adequate"), (28, "not adequate")])
def test_what_is_left_before_the_pump_is_all_the_margin(tmp_path: Path, asked: float, verdict: str) -> None:
    rule = f'[supply.margin]\nrule = "fixed"\npressure = {asked}\nsource = "invented for this test"\n'
    result = checked(tmp_path, TEST, rule)
    # 0.433 of the printed form stands for 0.43352 of the unit weight used: 8 ft of it are 0.004 psi
    assert result.margin.pressure / PSI == pytest.approx(left_before_the_pump(), abs=0.01)
    assert result.margin.limited_at == "P"
    assert result.demand.pressure < 0
    assert result.verdict == verdict
    assert result.margin.after_rule == pytest.approx(result.margin.pressure - asked * PSI)
    assert sum(step.step == "Margin before the rule" for step in result.margin.steps) == 1


def test_a_tank_is_not_lowered_by_a_bad_day(tmp_path: Path) -> None:
    """Behind a tank what the pump has to spare is margin: 20 psi of water, the pump, less the way up."""
    result = checked(tmp_path, TANK, '[supply.margin]\nrule = "none"\n')
    assert result.margin.limited_at is None
    pump = 90 - 5 * FLOW / 100  # straight between the first two points of its curve
    losses = lost(FLOW, 120, 1.380) + lost(FLOW, 4, 2.067) + lost(FLOW, 30, 2.067) + 20 * 0.433
    head = (FLOW / 5.6) ** 2
    assert result.margin.pressure / PSI == pytest.approx(46.2 * 0.433 + pump - losses - head, abs=0.05)


@pytest.mark.parametrize("where", ["lead,S,P,120,p,1 1/4,meter\nstation,P,Q,4,p,2,booster", ""])
def test_what_stands_before_the_pump_in_its_pipe_counts_before_it(tmp_path: Path, where: str) -> None:
    """A meter of 6 psi before the pump, in the lead or in the pump's own pipe, leaves 6 psi less."""
    old = "lead,S,P,120,p,1 1/4,\nstation,P,Q,4,p,2,booster"
    pipes = PIPES.replace(old, where or old.replace("booster", "meter;booster"))
    meter = '[device.meter]\nloss = 6\nsource = "invented for this test"\n'
    text = ONE_HEAD + BOOSTER + meter + TEST + '[supply.margin]\nrule = "none"\n'
    result = check_project(write(tmp_path, text, NODES, pipes))
    assert result.margin.pressure / PSI == pytest.approx(left_before_the_pump() - 6, abs=0.01)
    assert result.margin.limited_at == "P"


def test_an_idle_tank_elsewhere_does_not_lift_the_main(tmp_path: Path) -> None:
    """A roof tank behind a check valve gives nothing while the pump runs."""
    tank = '[[supply.tank]]\ntag = "R"\nnode = "R"\nwater_level = 30\nvolume = 5000\n'
    nodes = NODES + "R,30,supply,\n"
    pipes = PIPES.replace("devices\n", "devices,valve\n").replace("1/4,\n", "1/4,,\n")
    pipes = pipes.replace("booster\n", "booster,\n").replace("30,p,2,\n", "30,p,2,,\n")
    pipes += "drop,R,Q,40,p,2,,check\n"
    test = TEST.replace("static", 'node = "S"\nstatic')
    supply = f'[supply]\ncompare_at = "S"\n{test}{tank}[supply.margin]\nrule = "none"\n'
    result = check_project(write(tmp_path, ONE_HEAD + BOOSTER + supply, nodes, pipes))
    assert result.margin.pressure / PSI == pytest.approx(left_before_the_pump(), abs=0.01)
    assert result.margin.limited_at == "P"


def test_placements_are_ranked_by_the_margin_that_counts(tmp_path: Path) -> None:
    """By the numbers the high head leaves less; of the weak main the low and thirsty one does."""
    nodes = NODES + "L,12,sprinkler,B\n"
    pipes = PIPES + "side,Q,L,10,p,2,\n"
    low = "[sprinkler.B]\nk_factor = 14\nminimum_pressure = 25\ncoverage_area = 130\n"
    found = {}
    for head in ("H", "L"):
        text = ONE_HEAD.replace('design_area = ["H"]', f'design_area = ["{head}"]')
        text += BOOSTER + low + TEST + '[supply.margin]\nrule = "none"\n'
        folder = tmp_path / head
        folder.mkdir()
        found[head] = check_project(write(folder, text, nodes, pipes))
    margins = {head: result.margin.pressure for head, result in found.items()}
    assert margins["L"] < margins["H"]
    for head, result in found.items():
        assert result.design_area.placements[0].margin == pytest.approx(margins[head], abs=10.0)
