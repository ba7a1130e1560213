"""Pumps on a main, alone, at another speed and in pairs, against scipy roots of formulas written out here.

The city is P = Ps − (Ps − Pr)(Q/Qt)^1.85 (NFPA 291), the pipe 4.52 Q^1.85/(C^1.85 d^4.87) psi/ft (NFPA 13,
printed US form), the outlet Q = K√P, the pump a spline of degree one by scipy. All in gpm, psi, ft.
"""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from scipy.interpolate import make_interp_spline
from scipy.optimize import brentq

from supplycheck.check import check_project
from supplycheck.results.records import Result
from supplycheck.units import GPM, PSI

FLOWS, NETS = (0.0, 300.0, 600.0, 900.0), (78.0, 74.0, 60.0, 38.0)
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
[sprinkler.A]
k_factor = 50
minimum_pressure = 20
coverage_area = 100
[pipe.lines]
material = "steel schedule 40"
[device.pump]
kind = "pump"
source = "made up"
rated_flow = 600
rated_pressure = 60
curve = [[0, 78], [300, 74], [600, 60], [900, 38]]
{more}
[network]
nodes = "nodes.csv"
pipes = "pipes.csv"
[supply.flow_test]
static = 55
residual = 40
flow = 1100
date = 2026-06-01
gauge_elevation = 0
[supply.margin]
rule = "none"
[hose]
outside = 100
outside_node = "S"
"""
NODES = """\
tag,x,y,elevation,kind,sprinkler,area
S,0,0,0,supply,,
B,100,0,0,junction,,
D,101,0,0,junction,,
H,178,0,20,sprinkler,A,100
"""
PIPES = """\
from,to,length,kind,bore,c_factor,fittings,devices
S,B,100,lines,6.065,120,none,
B,D,1,lines,6.065,120,none,pump
D,H,80,lines,4.026,120,none,
"""
Gain = Callable[[float], float]


def checked(folder: Path, more: str) -> Result:
    (folder / "project.toml").write_text(PROJECT.format(more=more), encoding="utf-8")
    (folder / "nodes.csv").write_text(NODES, encoding="utf-8")
    (folder / "pipes.csv").write_text(PIPES, encoding="utf-8")
    return check_project(folder)


def friction(flow: float, feet: float, bore: float) -> float:
    return float(4.52 * flow**1.85 / (120**1.85 * bore**4.87) * feet)


def suction(flow: float) -> float:
    return float(55 - 15 * ((flow + 100) / 1100) ** 1.85 - friction(flow, 100, 6.065))


def operating(gain: Gain, end: float) -> float:
    """Return the flow at which supply and pump meet pipe, height and outlet."""

    def gap(flow: float) -> float:
        lost = friction(flow, 1, 6.065) + friction(flow, 80, 4.026) + 20 * 0.433
        return suction(flow) + gain(flow) - lost - (flow / 50) ** 2

    return float(brentq(gap, 1.0, end, xtol=1e-10))


ONE = make_interp_spline(FLOWS, NETS, k=1)


def alone(flow: float) -> float:
    return float(ONE(flow))


def slower(flow: float) -> float:
    """Affinity laws: flow with the speed, pressure with its square."""
    ratio = 1600 / 1750
    return float(ratio**2 * ONE(flow / ratio))


def parallel(flow: float) -> float:
    """Each gives the flow that makes both pressures equal; found without using that they are alike."""
    share = brentq(lambda part: float(ONE(part) - ONE(flow - part)), flow - 900 if flow > 900 else 0, 900)
    return float(ONE(share))


def series(flow: float) -> float:
    return 2 * float(ONE(flow))


@pytest.mark.parametrize(
    ("more", "gain", "end"),
    [
        ("", alone, 900.0),
        ("speed = 1600\nrated_speed = 1750", slower, 900.0 * 1600 / 1750),
        ('count = 2\narrangement = "parallel"', lambda flow: float(ONE(flow / 2)), 1800.0),
        ('count = 2\narrangement = "series"', series, 900.0),
    ],
)
def test_operating_point(tmp_path: Path, more: str, gain: Gain, end: float) -> None:
    result = checked(tmp_path, more)
    state = result.pumps[0].facts.state("actual supply")
    assert state is not None and state.net is not None and state.discharge is not None
    flow = operating(gain, end)
    # The coefficient of the US form is exact here and there; the root is good to 1e-10 gpm.
    assert state.flow / GPM == pytest.approx(flow, rel=1e-7)
    assert state.suction / PSI == pytest.approx(suction(flow), abs=1e-5)
    assert state.net / PSI == pytest.approx(gain(flow), abs=1e-5)
    assert state.main / PSI == pytest.approx(55 - 15 * ((flow + 100) / 1100) ** 1.85, abs=1e-5)


def test_like_pumps_share_the_flow_of_a_parallel_set(tmp_path: Path) -> None:
    facts = checked(tmp_path, 'count = 2\narrangement = "parallel"').pumps[0].facts
    pump = next(line for line in facts.lines if line.style == "pump")
    for flow, net in zip(pump.flows[1:-1], pump.pressures[1:-1], strict=True):
        assert net / PSI == pytest.approx(parallel(flow / GPM), abs=1e-6)


@pytest.mark.parametrize("more", ["", "speed = 1600\nrated_speed = 1750"])
def test_combined_line_at_every_flow(tmp_path: Path, more: str) -> None:
    """With the hose drawn in the street and the pump's own flow through the lead-in."""
    facts = checked(tmp_path, more).pumps[0].facts
    gain = slower if more else alone
    assert facts.drawn_before / GPM == pytest.approx(100, rel=1e-9)
    below, pump, both = facts.lines
    for row, flow in enumerate(np.array(both.flows) / GPM):
        assert below.pressures[row] / PSI == pytest.approx(suction(flow), abs=1e-6)
        assert pump.pressures[row] / PSI == pytest.approx(gain(min(flow, facts.curve_end / GPM)), abs=1e-6)
        assert both.pressures[row] == pytest.approx(below.pressures[row] + pump.pressures[row])


def test_suction_at_the_demand_is_what_the_supply_gives_there(tmp_path: Path) -> None:
    """The demand is 50√20 = 223.6 gpm; the suction at that flow does not depend on what the demand asks."""
    result = checked(tmp_path, "")
    state = result.pumps[0].facts.state("demand")
    assert state is not None
    flow = 50 * 20**0.5
    assert state.flow / GPM == pytest.approx(flow, rel=1e-9)
    assert state.suction / PSI == pytest.approx(suction(flow), abs=1e-6)
    inlet = next(node for node in result.nodes if node.tag == "B")
    # by the numbers the demand leaves less than nothing before the pump; what is left over by them lifts it
    assert inlet.pressure < 0 and result.margin.limited_at == "B"
    assert state.suction == pytest.approx(inlet.pressure + result.margin.steps[0].value, abs=1e-3)
    assert state.suction == pytest.approx(result.margin.pressure, abs=1e-3)
