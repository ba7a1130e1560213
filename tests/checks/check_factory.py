"""A small sound project with its demand state worked out by hand, and a way to change one thing in it.

Two branch lines of seven heads, 12 ft apart and 10 ft between lines, leave a cross main at T; a third line
with two heads stays shut. Both open lines are alike, so the walk from the end head is the whole answer:
Hazen-Williams in its printed US form (4.52), 0.433 psi/ft, K 5.6.
"""

from __future__ import annotations

import dataclasses
import datetime as dt
import itertools
import math
from types import MappingProxyType
from typing import Any

import numpy as np

from supplycheck.checks import CheckContext, ClassFigures, ComparisonFacts
from supplycheck.model import (
    HW_US,
    Adjustment,
    AreaModifier,
    Criteria,
    DemandCase,
    Device,
    Fitting,
    FlowTest,
    Fluid,
    HoseAllowance,
    MarginRule,
    Node,
    Outlet,
    Pipe,
    PipeKind,
    Project,
    ProjectFacts,
    Sprinkler,
    Supply,
    System,
    TestPoint,
    VelocityPolicy,
)
from supplycheck.network.records import Solution
from supplycheck.units import FOOT, GPM, INCH, PSI

WEIGHT = 0.433 * PSI / FOOT
K = 5.6 * GPM / math.sqrt(PSI)
HEADS = 7
LINE = {1: [f"H{n}" for n in range(1, 8)], 2: [f"H{n}" for n in range(11, 18)]}
OPEN = tuple(LINE[1] + LINE[2])
TEE = Fitting("tee", 1, 10 * FOOT, 10 * FOOT, 0.0, "inferred", "NFPA 13 equivalent lengths", "T")


def head(tag: str, line: str, row: int, across: float) -> Node:
    return Node(tag, 20 * FOOT, row * 12 * FOOT, across * FOOT, "sprinkler", "A", K, 120 * FOOT**2, line)


def nodes() -> tuple[Node, ...]:
    z = 20 * FOOT
    plain = [
        Node("S", 0.0, -100 * FOOT, 0.0, "supply"),
        Node("B", 0.0, 0.0, 0.0),
        Node("T", z, 0.0, 0.0),
        Node("T1", z, 0.0, 5 * FOOT),
        Node("T2", z, 0.0, -5 * FOOT),
        Node("T3", z, 0.0, 15 * FOOT),
    ]
    first = [head(tag, "L1", row, 5) for row, tag in enumerate(LINE[1], 1)]
    second = [head(tag, "L2", row, -5) for row, tag in enumerate(LINE[2], 1)]
    shut = [head(f"H{n}", "L3", n - 20, 15) for n in (21, 22)]
    return tuple(plain + first + second + shut)


def steel(tag: str, start: str, end: str, length: float, size: str, role: Any, *fittings: Fitting) -> Pipe:
    bore = {"2": 2.067, "4": 4.026}[size] * INCH
    return Pipe(
        tag, start, end, length * FOOT, bore, size, "steel", 120.0, None, fittings, (), "open", role
    )


def pipes() -> tuple[Pipe, ...]:
    buried = Pipe(
        "U",
        "S",
        "B",
        100 * FOOT,
        6.16 * INCH,
        "6",
        "ductile",
        140.0,
        None,
        (),
        ("backflow",),
        "open",
        "underground",
    )
    found = [
        buried,
        steel("R", "B", "T", 20, "4", "riser"),
        steel("C1", "T", "T1", 5, "2", "cross main", TEE),
        steel("C2", "T", "T2", 5, "2", "cross main", TEE),
        steel("C3", "T1", "T3", 10, "2", "cross main"),
    ]
    for number, start in ((1, "T1"), (2, "T2")):
        ends = [start, *LINE[number]]
        found += [
            steel(f"P{end}", one, end, 12, "2", "branch line") for one, end in itertools.pairwise(ends)
        ]
    found += [
        steel("PH21", "T3", "H21", 12, "2", "branch line"),
        steel("PH22", "H21", "H22", 12, "2", "branch line"),
    ]
    return tuple(found)


def friction_psi(flow: float, c_factor: float, bore: float, length: float) -> float:
    """NFPA 13, printed US form: gpm, in, ft."""
    return 4.52 * flow**1.85 / (c_factor**1.85 * bore**4.87) * length


def backflow_psi(flow: float) -> float:
    return float(np.interp(flow, [0, 500, 1000], [4, 6, 10]))


def walk_back() -> tuple[dict[str, float], dict[str, float], dict[str, float]]:
    """Return pressures [psi] and outflows [gpm] by node and flows [gpm] by pipe."""
    pressure, outflow, flow = {}, {}, {}
    for tags in LINE.values():
        here, carried = (24 / 5.6) ** 2, 0.0
        for tag in reversed(tags):
            pressure[tag], outflow[tag] = here, 5.6 * math.sqrt(here)
            carried += outflow[tag]
            flow[f"P{tag}"] = carried
            here += friction_psi(carried, 120, 2.067, 12)
        number = "1" if tags is LINE[1] else "2"
        pressure[f"T{number}"], flow[f"C{number}"] = here, carried
        pressure["T"] = here + friction_psi(carried, 120, 2.067, 15)
    total = flow["C1"] + flow["C2"]
    flow["R"] = flow["U"] = total
    pressure["B"] = pressure["T"] + friction_psi(total, 120, 4.026, 20) + 0.433 * 20
    pressure["S"] = pressure["B"] + friction_psi(total, 140, 6.16, 100) + backflow_psi(total)
    for tag in ("T3", "H21", "H22"):
        pressure[tag] = pressure["T1"]
    outflow["S"] = 250.0
    return pressure, outflow, flow


def solution(system: System) -> Solution:
    pressure, outflow, flow = walk_back()
    level = {node.tag: node.elevation for node in system.nodes}
    p = np.array([pressure[node.tag] * PSI for node in system.nodes])
    q = np.array([flow.get(pipe.tag, 0.0) * GPM for pipe in system.pipes])
    rise = np.array([WEIGHT * (level[pipe.end] - level[pipe.start]) for pipe in system.pipes])
    device = np.array([backflow_psi(flow["U"]) * PSI if pipe.devices else 0.0 for pipe in system.pipes])
    drop = np.array([(pressure[pipe.start] - pressure[pipe.end]) * PSI for pipe in system.pipes])
    bores = np.array([pipe.bore for pipe in system.pipes])
    speed = q / (np.pi / 4 * bores**2)
    nothing = np.full(len(system.pipes), np.nan)
    return Solution(
        node_tags=tuple(node.tag for node in system.nodes),
        pipe_tags=tuple(pipe.tag for pipe in system.pipes),
        pressure=p,
        outflow=np.array([outflow.get(node.tag, 0.0) * GPM for node in system.nodes]),
        pipe_flow=q,
        friction=drop - rise - device,
        elevation_loss=rise,
        device_loss=device,
        velocity=speed,
        friction_factor=nothing,
        reynolds=nothing,
        velocity_pressure=999.0 * speed**2 / 2,
        source_tags=("S",),
        source_flow=np.array([(flow["U"] + 250) * GPM]),
        source_pressure=np.array([pressure["S"] * PSI]),
        shift=0.0,
        governing="H7",
        iterations=1,
        mass_residual=0.0,
        energy_residual=0.0,
    )


TESTED = 2 * 0.9 * 834 * GPM
"""Two 2½ in outlets at 20 psi with coefficient 0.9; NFPA 291 prints 834 gpm for one (from memory)."""

FLOW_TEST = FlowTest(
    tag="T-1",
    node="S",
    date=dt.date(2026, 6, 1),
    static=80 * PSI,
    points=(TestPoint(58 * PSI, TESTED, (Outlet(2.5 * INCH, 0.9, 20 * PSI, 1.0, "smooth"),) * 2),),
    gauge_elevation=2 * FOOT,
    time="09:30",
    static_hydrant="A 12",
    flow_hydrant="A 13",
    conducted_by="Mill Road Waterworks",
    witnessed_by="fire marshal",
    main="8 in, Mill Road",
    gauge_range=200 * PSI,
    gauge_accuracy=0.01,
    gauge_calibrated=dt.date(2026, 2, 1),
    outlet_diameter_measured=True,
)


def sound() -> CheckContext:
    """Return the context of the sound project: nothing fails and nothing is missing in it."""
    system = System(
        nodes(),
        pipes(),
        (Sprinkler("A", K, 7 * PSI, 130 * FOOT**2, 175 * PSI, "quick", 341.5, "listed"),),
        (
            PipeKind(
                "steel", "steel schedule 40", (("2", 2.067 * INCH),), 120.0, None, "chart", "NFPA 13", ""
            ),
            PipeKind(
                "ductile", "ductile iron lined", (("6", 6.16 * INCH),), 140.0, None, "chart", "NFPA 13", ""
            ),
        ),
        (
            Device(
                "backflow",
                "loss",
                (0.0, 500 * GPM, 1000 * GPM),
                (4 * PSI, 6 * PSI, 10 * PSI),
                "maker's sheet",
                title="backflow preventer",
            ),
        ),
    )
    criteria = Criteria(
        standard="NFPA 13",
        edition="2022",
        hazard="ordinary hazard group 2",
        density=0.20 * GPM / FOOT**2,
        base_area=1500 * FOOT**2,
        modifiers=(),
        required_area=1500 * FOOT**2,
        minimum_heads=13,
        shape_factor=1.2,
        design_area="search",
        system="wet",
        minimum_pressure=7 * PSI,
        duration=3600.0,
        maximum_coverage=130 * FOOT**2,
        maximum_spacing=15 * FOOT,
        velocity=VelocityPolicy("NFPA practice", None, None, ""),
        maximum_pressure=175 * PSI,
        velocity_pressure=False,
        source="NFPA 13",
        ceiling_height=None,
    )
    supply = Supply(
        tests=(FLOW_TEST,),
        tanks=(),
        adjustments=(Adjustment("low supply", 5 * PSI, reason="summer"),),
        margin=MarginRule("fixed", 5 * PSI, source="county rule"),
        compare_at="S",
        maximum_test_age_months=12.0,
        submittal_date=dt.date(2026, 11, 20),
        main_floor_pressure=20 * PSI,
    )
    project = Project(
        facts=ProjectFacts(
            "Depot",
            "Mill Road",
            "preliminary",
            dt.date(2026, 11, 20),
            "NFPA 13 (2022)",
            "county",
            occupancy="sorting of parcels",
            designer="Ann Reyes",
        ),
        units="us",
        criteria=criteria,
        system=system,
        supply=supply,
        hose=HoseAllowance(0.0, None, 250 * GPM, "S", "NFPA 13", "catalogue"),
        fluid=Fluid("water", 999.0, 1.1e-3, WEIGHT, None, "NFPA 13"),
        law=HW_US,
        second_law=None,
        scenarios=(),
        assumptions=(),
        files=(),
    )
    case = DemandCase(
        "area 1",
        OPEN,
        (24 * GPM,) * 14,
        ((24 / 5.6) ** 2 * PSI,) * 14,
        ("density",) * 14,
        1680 * FOOT**2,
        2,
        7,
    )
    state = solution(system)
    total = float(state.source_flow[0])
    return CheckContext(
        project=project,
        case=case,
        solution=state,
        comparison=ComparisonFacts(
            node="S",
            demand_flow=total,
            demand_pressure=float(state.source_pressure[0]),
            sprinkler_flow=total - 250 * GPM,
            hose_flow=250 * GPM,
            available_pressure=float(state.source_pressure[0]) + 9 * PSI,
            margin=9 * PSI,
            required=5 * PSI,
            static_at_compare=80 * PSI,
            main_pressure_at_demand=62 * PSI,
        ),
        searched=True,
        placements_tried=9,
        class_figures=ClassFigures(
            0.20 * GPM / FOOT**2, 1500 * FOOT**2, 250 * GPM, 3600.0, "NFPA 13 (from memory)"
        ),
        catalogue_c=MappingProxyType({"steel": 120.0, "ductile": 140.0}),
        reference_bores=MappingProxyType({"2": 2.067 * INCH, "4": 4.026 * INCH, "6": 6.065 * INCH}),
    )


def changed(thing: Any, path: str, value: Any) -> Any:
    """Return ``thing`` with the value at ``path`` replaced: ``project.supply.tests.0.date``."""
    first, _, rest = path.partition(".")

    def inner(old: Any) -> Any:
        return changed(old, rest, value) if rest else (value(old) if callable(value) else value)

    if isinstance(thing, tuple):
        rows = range(len(thing)) if first == "*" else [_row(thing, first)]
        return tuple(inner(one) if row in rows else one for row, one in enumerate(thing))
    return dataclasses.replace(thing, **{first: inner(getattr(thing, first))})


def _row(items: tuple[Any, ...], name: str) -> int:
    tags = [getattr(one, "tag", getattr(one, "name", None)) for one in items]
    return tags.index(name) if name in tags else int(name)


def built(changes: dict[str, Any]) -> CheckContext:
    """Return the sound context with every change made."""
    context = sound()
    for path, value in changes.items():
        context = changed(context, path, value)
    return context


def array_with(state: Solution, field: str, tag: str, value: float) -> Solution:
    """Return ``state`` with the entry of node or pipe ``tag`` in array ``field`` replaced."""
    old = getattr(state, field)
    tags = (
        state.node_tags if len(old) == len(state.node_tags) and tag in state.node_tags else state.pipe_tags
    )
    new = old.copy()
    new[tags.index(tag)] = value
    return dataclasses.replace(state, **{field: new})


DRY = AreaModifier("dry pipe", 1.3, "NFPA 13")
QUICK = AreaModifier("quick response", 0.675, "NFPA 13")
EN = {
    "project.criteria.standard": "EN 12845",
    "project.criteria.edition": "2015",
    "project.criteria.hazard": "OH3",
    "project.facts.standard": "EN 12845 (2015)",
    "project.criteria.velocity": VelocityPolicy("EN 12845", 10.0, 6.0, "EN 12845 13.2.3"),
}
