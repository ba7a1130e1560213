"""Computed beside printed: hydrant tests, margins, pumps, design areas and whole systems."""

from __future__ import annotations

import datetime as dt
import tempfile
from pathlib import Path

from one_pipe_page import Row
from test_annex_tree import PRESSURES, write
from test_density_at_every_head import solved
from test_design_area import array, modifier, search, step

from supplycheck.check import check_project
from supplycheck.hydraulics import rated_pump_curve
from supplycheck.model import Fluid, FrictionLaw, MarginRule, Node, Outlet, Pipe, System
from supplycheck.network import LoadCase, SourceCurve, build_network, solve_operating
from supplycheck.supply import MarginCase, curve_through, reduce_outlets, required_margin
from supplycheck.supply.pump import Boosted
from supplycheck.supply.storage import needed_volume
from supplycheck.units import FOOT, GALLON, GPM, INCH, PSI, US

HOUR = 3600.0
FORM_US = 4.52 * (PSI / FOOT) / GPM**1.85 * INCH**4.87


def gpm(diameter: float, coefficient: float, pitot: float, factor: float = 1.0) -> float:
    """Return the flow of one outlet [gpm]; diameter [in], pitot [psi]."""
    flow, _ = reduce_outlets([Outlet(diameter * INCH, coefficient, pitot * PSI, factor)])
    return flow / GPM


def hydrant_rows() -> list[Row]:
    """Discharge of hydrant outlets."""
    lost = "**disagrees**: 1178 is about what c 1.00 gives (1179.5); the source left its coefficient out"
    rows = [
        Row(
            "2½ in, c 0.90, 14 psi, gpm",
            "627.5",
            gpm(2.5, 0.9, 14),
            1,
            "slides; 627.8 with their own constant 29.83",
        ),
        Row("2½ in, c 0.90, 40 psi, gpm", "1061", gpm(2.5, 0.9, 40), 1, "forum; 1061.2 with 29.83"),
        Row(
            "4 in pumper outlet, c 0.90, 10 psi, factor 0.83, gpm",
            "1127",
            gpm(4, 0.9, 10, 0.83),
            1,
            "forum; 1127.5 with 29.83",
        ),
        Row("the same without its factor, gpm", "1358", gpm(4, 0.9, 10), 1, "forum; 1358.4 with 29.83"),
        Row("2½ in, 40 psi, printed for c 0.90, gpm", "1178", gpm(2.5, 0.9, 40), 1, lost),
    ]
    table = {
        (2.5, 10): 590,
        (2.5, 20): 834,
        (2.5, 25): 932,
        (2.5, 50): 1319,
        (2.5, 100): 1865,
        (4.5, 10): 1911,
    }
    for (diameter, pitot), printed in table.items():
        size = {2.5: "2½", 4.5: "4½"}[diameter]
        rows.append(
            Row(f"theoretical, {size} in, {pitot} psi, gpm", str(printed), gpm(diameter, 1, pitot), 1)
        )
    return rows


def drop_rows() -> list[Row]:
    """The printed table of drops to the power 0.54, against the exponent of the curve, 1/1.85."""
    table = {10: "3.47", 20: "5.04", 30: "6.28", 50: "8.27", 60: "9.12", 80: "10.66", 100: "12.02"}
    return [
        Row(f"{drop} psi to the power 0.54", printed, drop ** (1 / 1.85), 3, "exponent 1/1.85 = 0.5405")
        for drop, printed in table.items()
    ]


def margin_rows() -> list[Row]:
    """One percentage read in three ways."""
    curve = curve_through("M", "S", 82 * PSI, [(956 * GPM, 54 * PSI)])
    day = dt.date(2026, 6, 1)
    case = MarginCase(curve, 700 * GPM, 60.3 * PSI, curve.static, day, day)

    def after(rule: MarginRule) -> float:
        return (curve.pressure_at(700 * GPM) - required_margin(rule, case).required) / PSI

    return [
        Row(
            "static lowered, psi",
            "58.1",
            after(MarginRule("percent", percent=0.1, reading="static lowered")),
            2,
            "short of 60.3",
        ),
        Row(
            "pressures scaled, psi",
            "59.6",
            after(MarginRule("percent", percent=0.1, reading="pressure scaled")),
            2,
            "short of 60.3",
        ),
        Row(
            "flows scaled, psi",
            "62.9",
            after(MarginRule("percent", percent=0.1, reading="flow scaled")),
            2,
            "enough",
        ),
    ]


def pump_rows() -> list[Row]:
    """A city main with a pump behind it, and a tank for an hour."""
    pump = rated_pump_curve(flow=1000 * GPM, pressure=100 * PSI, churn=140 * PSI, overload=65 * PSI)
    city = curve_through("city", "S", 90 * PSI, [(1000 * GPM, 65 * PSI)])
    both = Boosted(city, pump)
    volume = needed_volume(flow=550 * GPM, duration=HOUR) / GALLON
    return [
        Row("no flow, psi", "230", both.pressure_at(0.0) / PSI, 1),
        Row("1000 gpm, psi", "165", both.pressure_at(1000 * GPM) / PSI, 1),
        Row("1500 gpm, psi", "102.1", both.pressure_at(1500 * GPM) / PSI, 2),
        Row("suction at 1500 gpm, psi", "37.1", city.pressure_at(1500 * GPM) / PSI, 2),
        Row("(300 + 250) gpm for 60 min, gal", "33000", volume, 0),
    ]


def area_rows() -> list[Row]:
    """Size of the design area and what each head needs."""
    course = search(array(9, 9, 12, 10, 5.6), density=0.20, area=3000)
    annex = search(array(10, 6, 13, 10, 5.65), density=0.15, area=1500)
    dry = search(
        array(12, 12, 13, 10, 5.6),
        density=0.10,
        area=1500,
        modifiers=(modifier("area factor, dry"), modifier("area factor, slope over 1 in 6")),
    )
    square = FOOT**2
    length = step(annex, "Length along the lines") / (13 * FOOT)
    flow = step(dry, "Required area") * step(dry, "Density") * 1.2 / GPM
    first = course.cases[0]
    return [
        Row("course page: area per head, ft²", "120", step(course, "Area per head") / square, 1),
        Row("course page: heads", "25", step(course, "Heads in the area"), 0),
        Row("course page: flow of a head, gpm", "24", first.required_flow[0] / GPM, 2),
        Row("course page: pressure at K 5.6, psi", "18.4", first.required_pressure[0] / PSI, 2),
        Row("annex: 1500 ft² ÷ 130 ft²", "11.54", 1500 / (step(annex, "Area per head") / square), 3),
        Row("annex: heads", "12", step(annex, "Heads in the area"), 0),
        Row("annex: 1.2√1500 ÷ 13", "3.58", length, 3),
        Row("annex: heads along a line", "4", step(annex, "Heads along a line"), 0),
        Row("trade page: dry and sloped, ft²", "2535", step(dry, "Required area") / square, 1),
        Row("trade page: flow with 20 % more, gpm", "304–305", flow, 1, "2535 × 0.10 × 1.20 = 304.2"),
    ]


def head_rows() -> list[Row]:
    """No head below density times area: the lowest discharge of solved systems."""
    rows = []
    for shape in ("tree", "grid"):
        for policy in (False, True):
            with tempfile.TemporaryDirectory() as folder:
                result = solved(Path(folder), shape, policy, 5.6)
            lowest = min(node.discharge for node in result.nodes if node.in_design_area) / GPM
            used = "with" if policy else "without"
            rows.append(Row(f"lowest head, {shape}, {used} velocity pressure, gpm", "26.0", lowest, 2))
    return rows


def tree_rows() -> list[Row]:
    """The whole annex tree, from the end head to the main."""
    with tempfile.TemporaryDirectory() as folder:
        result = check_project(write(Path(folder)))
    pressure = {node.tag: US.from_si(node.pressure, "pressure") for node in result.nodes}
    names = {
        "1.1": "head 1",
        "1.2": "head 2",
        "1.3": "head 3",
        "1.4": "head 4",
        "T1": "top of riser nipple 1",
        "M1": "cross main, line 1",
        "M2": "cross main, line 2",
        "M3": "cross main, line 3",
        "TOP": "end of cross main",
        "BASE": "base of riser",
        "MAIN": "street main",
    }
    remarks = {
        "MAIN": "66.98 where the sheet is worked without rounding",
        "BASE": "the sheet carries 0.1 psi from row to row",
    }
    rows = [
        Row(f"{names[tag]}, psi", f"{printed}", pressure[tag], 2, remarks.get(tag, ""))
        for tag, (printed, _) in PRESSURES.items()
    ]
    flow = US.from_si(result.demand.flow, "flow")
    return [
        *rows,
        Row("total flow, gpm", "260.2", flow, 2, "260.40 where the sheet is worked without rounding"),
    ]


def two_loop_rows() -> list[Row]:
    """Alperovits and Shamir (1977) with the diameters of Savic and Walters (1997)."""
    weight = 9800.0
    law = FrictionLaw("hazen-williams", "head form", 10.667 * weight, 1.852, 4.871, "as published")
    heights = {"1": 210.0, "2": 150.0, "3": 160.0, "4": 155.0, "5": 150.0, "6": 165.0, "7": 160.0}
    bores = {
        "1-2": 457.2,
        "2-3": 254.0,
        "2-4": 406.4,
        "4-5": 101.6,
        "4-6": 406.4,
        "6-7": 254.0,
        "3-5": 254.0,
        "5-7": 25.4,
    }
    nodes = tuple(Node(tag, height) for tag, height in heights.items())
    pipes = tuple(
        Pipe(tag, tag[0], tag[2], 1000.0, bore / 1000, "", "pipe", 130.0, None)
        for tag, bore in bores.items()
    )
    made = build_network(
        System(nodes, pipes, (), (), ()), law=law, fluid=Fluid("water", 998.2, 1e-3, weight, None, "")
    )
    drawn = {"2": 100.0, "3": 100.0, "4": 120.0, "5": 270.0, "6": 330.0, "7": 200.0}
    load = LoadCase((), {tag: flow / HOUR for tag, flow in drawn.items()})
    solution = solve_operating(made, load, [SourceCurve("1", 0.0)])
    printed = {"2": "53.25", "3": "30.46", "4": "43.45", "5": "33.80", "6": "30.45", "7": "30.55"}
    return [
        Row(f"node {tag}, m", text, float(solution.pressure[solution.node(tag)]) / weight, 3)
        for tag, text in printed.items()
    ]


def two_path_rows() -> list[Row]:
    """200 ft of 3 in beside 350 ft of 4 in at 400 gpm: closed form."""
    law = FrictionLaw("hazen-williams", "US form", FORM_US, 1.85, 4.87, "as published")
    pipes = tuple(
        Pipe(tag, "A", "B", length * FOOT, bore * INCH, "", "pipe", 120.0, None)
        for tag, length, bore in (("3 in", 200, 3.068), ("4 in", 350, 4.026))
    )
    made = build_network(
        System((Node("A", 0.0), Node("B", 0.0)), pipes, (), (), ()),
        law=law,
        fluid=Fluid("water", 998.2, 1e-3, 0.433 * PSI / FOOT, None, ""),
    )
    solution = solve_operating(made, LoadCase((), {"B": 400 * GPM}), [SourceCurve("A", 100 * PSI)])
    three, four = (float(flow) / GPM for flow in solution.pipe_flow)
    losses = [float(loss) / PSI for loss in solution.friction]
    return [
        Row("flow in 3 in over flow in 4 in", "0.66175", three / four, 5),
        Row("3 in, gpm", "159.29", three, 3),
        Row("4 in, gpm", "240.71", four, 3),
        Row("loss of 3 in, psi", "6.498", losses[0], 4),
        Row("loss of 4 in, psi", "6.498", losses[1], 4),
    ]
