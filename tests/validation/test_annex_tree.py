"""The sample calculation of the NFPA 13 annex, "Group I, 1500 ft²", from head to main.

Source: NFPA 13 annex, figures to the section on hydraulic calculation forms (e.g. A.23.3.3 of the
editions 2010 to 2016), from memory; its rows reproduce each other to the printed digit.

The sheet carries pressures to 0.1 psi and flows to 0.1 gpm from row to row, so its own rounding adds
up: each of its ten rows may be off by half a digit before it enters the next. Pressures are compared
within 0.05 psi for each row gone by. Flow within 0.5 gpm: 0.2 gpm is what the sheet lost by rounding
(its unrounded chain gives 260.40 for 260.2), 0.3 gpm what its fixed K of a branch line is worth (see
`test_unrounded_chain`). Loss per foot within one unit of the last printed digit and 0.3 % (0.15 % of flow
to the power 1.85; the printed .107 of the second cross main piece is .1077 when recomputed).
"""

from __future__ import annotations

from pathlib import Path

import pytest

from supplycheck.check import check_project
from supplycheck.results.records import Result
from supplycheck.units import US

PROJECT = """
units = "us"
[project]
title = "Annex sample calculation"
site = "as published"
stage = "preliminary"
date = 2026-01-15
standard = "NFPA 13 (2016)"
authority = "none: a published example"
[criteria]
hazard = "ordinary hazard group 1"
density = 0.15
area = 1500
system = "wet"
design_area = [
  "1.1", "1.2", "1.3", "1.4", "2.1", "2.2", "2.3", "2.4", "3.1", "3.2", "3.3", "3.4",
]
[sprinkler.A]
k_factor = 5.65
minimum_pressure = 7
coverage = [13, 10]
[pipe.steel]
material = "steel schedule 40"
[pipe.copper]
material = "copper type M"
[device.alarm]
equivalent_length = 15
source = "printed in the example"
[network]
nodes = "nodes.csv"
pipes = "pipes.csv"
[supply.flow_test]
static = 90
residual = 60
flow = 1000
date = 2026-01-02
gauge_elevation = -16
[supply.margin]
rule = "none"
source = "published example without a margin"
[hose]
inside = 0
outside = 0
"""


def write(folder: Path) -> Path:
    nodes = ["tag,x,y,elevation,kind,sprinkler,area"]
    pipes = ["tag,from,to,length,kind,size,fittings,devices"]
    for line in (1, 2, 3):
        nodes += [f"{line}.{head},{13 * head},{10 * line},0,sprinkler,A,130" for head in (1, 2, 3, 4)]
        nodes += [f"T{line},72.5,{10 * line},0,junction,,", f"M{line},72.5,{10 * line},-1,junction,,"]
        for head, size in ((1, "1"), (2, "1 1/4"), (3, "1 1/2")):
            pipes.append(f"B{line}.{head},{line}.{head + 1},{line}.{head},13,steel,{size},,")
        pipes.append(f"B{line}.4,T{line},{line}.4,20.5,steel,1 1/2,2 tee,")
        pipes.append(f"N{line},M{line},T{line},1,steel,2,1 elbow 90,")
    nodes += ["BASE,72.5,100,-16,junction,,", "MAIN,72.5,150,-16,supply,,"]
    pipes += [
        "C1,M2,M1,10,steel,2,,",
        "C2,M3,M2,10,steel,2 1/2,,",
        "C3,TOP,M3,70,steel,2 1/2,,",
        "R,BASE,TOP,119,steel,3,1 long elbow 90; 1 gate valve,alarm",
        "U,MAIN,BASE,50,copper,3,1 long elbow 90; 1 gate valve; 1 tee,",
    ]
    nodes.append("TOP,72.5,100,-1,junction,,")
    (folder / "nodes.csv").write_text("\n".join(nodes))
    (folder / "pipes.csv").write_text("\n".join(pipes))
    (folder / "project.toml").write_text(PROJECT)
    return folder / "project.toml"


@pytest.fixture(scope="module")
def result(tmp_path_factory: pytest.TempPathFactory) -> Result:
    return check_project(write(tmp_path_factory.mktemp("annex")))


def psi(value: float) -> float:
    return US.from_si(value, "pressure")


def gpm(value: float) -> float:
    return US.from_si(value, "flow")


# pipe: printed loss per foot, its last digit, flow
ROWS = {
    "B1.1": (0.124, 0.001, 19.5),
    "B1.2": (0.125, 0.001, 40.2),
    "B1.3": (0.132, 0.001, 62.2),
    "B1.4": (0.237, 0.001, 85.4),
    "N1": (0.07, 0.01, 85.4),
    "C1": (0.07, 0.01, 85.4),
    "C2": (0.107, 0.001, 171.9),
    "C3": (0.232, 0.001, 260.2),
    "R": (0.081, 0.001, 260.2),
    "U": (0.061, 0.001, 260.2),
}


@pytest.mark.parametrize("tag", ROWS)
def test_loss_per_foot_and_flow(result: Result, tag: str) -> None:
    printed, digit, flow = ROWS[tag]
    row = next(pipe for pipe in result.pipes if pipe.tag == tag)
    assert US.from_si(row.friction_gradient, "gradient") == pytest.approx(
        printed, abs=digit + 0.003 * printed
    )
    assert gpm(row.flow) == pytest.approx(flow, abs=0.5)


# node: printed total pressure and how many rounded rows stand before it
PRESSURES = {
    "1.1": (11.9, 1),
    "1.2": (13.5, 2),
    "1.3": (15.1, 3),
    "1.4": (16.8, 4),
    "T1": (25.4, 5),
    "M1": (26.2, 6),
    "M2": (26.9, 7),
    "M3": (28.0, 8),
    "TOP": (44.3, 9),
    "BASE": (62.1, 10),
    "MAIN": (66.8, 11),
}


@pytest.mark.parametrize("tag", PRESSURES)
def test_pressures(result: Result, tag: str) -> None:
    printed, rows = PRESSURES[tag]
    row = next(node for node in result.nodes if node.tag == tag)
    assert psi(row.pressure) == pytest.approx(printed, abs=0.05 * rows)


def loss(flow: float, bore: float, length: float, c_factor: float = 120) -> float:
    """Hazen-Williams as the standard prints it [psi]."""
    return 4.52 * flow**1.85 / (c_factor**1.85 * bore**4.87) * length


def sheet_without_rounding() -> tuple[list[float], float, float]:
    """Work the published sheet row by row without rounding: head pressures, flow, pressure."""
    pressure, flow, heads = (0.15 * 130 / 5.65) ** 2, 0.0, []
    for bore, length in ((1.049, 13), (1.38, 13), (1.61, 13), (1.61, 36.5)):
        heads.append(pressure)
        flow += 5.65 * pressure**0.5
        pressure += loss(flow, bore, length)
    pressure += 0.433 + loss(flow, 2.067, 6)
    k_line = flow / pressure**0.5
    pressure += loss(flow, 2.067, 10)
    flow += k_line * pressure**0.5
    pressure += loss(flow, 2.469, 10)
    flow += k_line * pressure**0.5
    pressure += loss(flow, 2.469, 70)
    pressure += 15 * 0.433 + loss(flow, 3.068, 140)
    pressure += loss(flow, 2.981, 50 + 21 * 1.51 * (2.981 / 3.068) ** 4.87, 150)
    return heads, flow, pressure


def test_unrounded_chain(result: Result) -> None:
    """The sheet brings lines 2 and 3 in by a fixed K = Q/√P; the solver works each line from its heads.

    A line with 1 ft of rise and friction that grows with Q^1.85 passes slightly more than K√P. From
    26.4 psi, where K was taken, to 28.2 psi the 0.43 psi of rise changes √(P − 0.43)/√P by
    0.06 %, and friction, 8.6 of 26 psi, by 0.02 %: together within 0.1 %, so 0.3 gpm in all, which costs
    0.2 % of the 35 psi lost downstream.
    """
    heads, flow, pressure = sheet_without_rounding()
    rows = {node.tag: psi(node.pressure) for node in result.nodes}
    assert [rows[f"1.{n}"] for n in (1, 2, 3, 4)] == pytest.approx(heads, rel=1e-6)
    assert heads == pytest.approx([11.91, 13.53, 15.15, 16.87], abs=0.005)
    assert (flow, pressure) == (pytest.approx(260.40, abs=0.01), pytest.approx(66.98, abs=0.01))
    assert gpm(result.demand.flow) == pytest.approx(flow, abs=0.3)
    assert psi(result.demand.pressure) == pytest.approx(pressure, abs=0.07)


def test_equivalent_length_of_the_underground(result: Result) -> None:
    """21 ft × 1.51 × (2.981/3.068)^4.87 is printed as 27.6 ft."""
    row = next(pipe for pipe in result.pipes if pipe.tag == "U")
    assert US.from_si(row.equivalent_length, "length") == pytest.approx(27.6, abs=0.05)
