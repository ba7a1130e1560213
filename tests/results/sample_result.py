"""A rich `Result` put together by hand. EVERY NUMBER HERE IS INVENTED: it only looks like a calculation.

It exercises the report and the tables: both unit sets, both laws, long tags, markup and control
characters in titles, nodes without coordinates, every state of a finding.
"""

from __future__ import annotations

import datetime as dt
from itertools import pairwise
from types import MappingProxyType

from supplycheck.findings import Finding, Measure
from supplycheck.model import (
    DARCY,
    HW_METRIC,
    HW_US,
    Adjustment,
    AreaModifier,
    Assumption,
    Criteria,
    Fitting,
    FlowTest,
    Fluid,
    HoseAllowance,
    InputFile,
    MarginRule,
    Outlet,
    Project,
    ProjectFacts,
    Sprinkler,
    Supply,
    System,
    Tank,
    TestPoint,
    VelocityPolicy,
)
from supplycheck.results.records import (
    BalanceRecord,
    CurvePoints,
    DemandRecord,
    DesignAreaRecord,
    Favourable,
    GraphPoint,
    HandStep,
    MarginRecord,
    NodeRow,
    PathStep,
    PipeRow,
    Placement,
    Result,
    ScenarioRow,
    SupplyRecord,
)
from supplycheck.units import GPM, INCH, METRIC, PSI, US, UnitSet

MARKUP_TITLE = 'Depot "North" <b>bold</b> & co. <para>50 % {measured}\x07 Größe'
LONG_TAG = "a-node-tag-of-sixty-letters-that-somebody-really-did-write-1"
FT = 0.3048


class Maker:
    """Invents the rows of a tree: ``lines`` branch lines of ``heads`` heads, a cross main, a riser."""

    def __init__(self, units: UnitSet, lines: int, heads: int, *, long_tags: bool, placed: bool) -> None:
        self.units, self.lines, self.heads = units, lines, heads
        self.long_tags, self.placed = long_tags, placed
        self.area = {(line, head) for line in range(min(lines, 3)) for head in range(min(heads, 4))}

    def tag(self, line: int, head: int) -> str:
        if self.long_tags and line == 0 and head == 1:
            return LONG_TAG
        return f"H{line + 1}.{head + 1}"

    def nodes(self) -> tuple[NodeRow, ...]:
        rows = [
            self._node(self.tag(line, head), "sprinkler", (head * 12 * FT, line * 10 * FT), 20, line, head)
            for line in range(self.lines)
            for head in range(self.heads)
        ]
        far = (self.heads * 12 + 6) * FT
        rows += [
            self._node(f"J{line + 1}", "junction", (far, line * 10 * FT), 21, line, None)
            for line in range(self.lines)
        ]
        rows.append(self._node("TOR", "junction", (far, self.lines * 10 * FT), 21, None, None))
        rows.append(self._node("BOR", "junction", (far, self.lines * 10 * FT), 2, None, None))
        rows.append(self._node("S", "supply", (far + 40 * FT, self.lines * 10 * FT), -4, None, None))
        rows.append(self._node("TEST", "hydrant", None, 0, None, None))
        return tuple(rows)

    def _node(self, tag, kind, at, elevation, line, head) -> NodeRow:
        inside = (line, head) in self.area
        is_head = kind == "sprinkler"
        level = (line or 0) + 2 * (head or 0)
        place = at if self.placed and at is not None else (None, None)
        return NodeRow(
            tag=tag,
            kind=kind,
            x=place[0],
            y=place[1],
            elevation=elevation * FT,
            pressure=(11.37 + 1.713 * level) * PSI,
            discharge=(19.513 + 0.713 * level) * GPM if inside else 0.0,
            k_factor=5.6 * GPM / PSI**0.5 if is_head else None,
            required_discharge=19.5 * GPM if inside else None,
            required_pressure=12.125 * PSI if inside else None,
            required_by="density × area" if inside else "",
            area=130 * FT**2 if is_head else None,
            branch_line=f"BL{line + 1}" if line is not None else None,
            sprinkler="A" if is_head else None,
            in_design_area=inside,
            velocity_pressure=None,
        )

    def pipes(self, *, darcy: bool, second: bool) -> tuple[PipeRow, ...]:
        sizes = (("1", 1.049), ("1 1/4", 1.38), ("1 1/2", 1.61), ("2", 2.067))
        rows = []
        for line in range(self.lines):
            for head in range(self.heads):
                last = head == self.heads - 1
                start = f"J{line + 1}" if last else self.tag(line, head + 1)
                size = sizes[min(head, 3)]
                rows.append(
                    self._pipe(start, self.tag(line, head), size, "branch line", line, (darcy, second))
                )
            start = f"J{line + 2}" if line + 1 < self.lines else "TOR"
            rows.append(
                self._pipe(start, f"J{line + 1}", ("4", 4.026), "cross main", line, (darcy, second))
            )
        rows.append(self._pipe("BOR", "TOR", ("4", 4.026), "riser", 0, (darcy, second)))
        rows.append(self._pipe("S", "BOR", ("6 cement-lined", 6.275), "underground", 0, (darcy, second)))
        return tuple(rows)

    def _pipe(self, start, end, size, role, line, laws) -> PipeRow:
        darcy, second = laws
        fittings = (
            Fitting("elbow 90", 2, 7 * FT, 14 * FT, 0.0, "inferred", "table of equivalent lengths"),
        )
        devices = ("backflow",) if role == "riser" else ()
        return PipeRow(
            tag=f"P-{start}-{end}",
            start=start,
            end=end,
            role=role,
            flow=(19.53 + 3.7 * line) * GPM,
            flow_added=19.53 * GPM,
            velocity=(7.31 + 0.2 * line) * FT,
            nominal=size[0],
            material="steel schedule 40",
            bore=size[1] * INCH,
            c_factor=None if darcy else 120.0,
            roughness=1.5e-4 * FT if darcy else None,
            friction_factor=0.0213 if darcy else None,
            reynolds=81234.5 if darcy else None,
            length=12.0 * FT,
            equivalent_length=14.0 * FT,
            total_length=26.0 * FT,
            fittings=fittings,
            devices=devices,
            friction_gradient=0.1241 * PSI / FT,
            friction_loss=3.2266 * PSI,
            elevation_loss=8.227 * PSI if role == "riser" else 0.0,
            device_loss=6.2 * PSI if devices else 0.0,
            second_law_friction_loss=3.1 * PSI if second else None,
            start_pressure=25.113 * PSI,
            end_pressure=(21.8864 - (14.427 if devices else 0.0)) * PSI,
            valve="open",
            fittings_text="2 elbow 90",
        )


def path() -> tuple[PathStep, ...]:
    names = ("H1.1", "H1.2", "H1.3", "H1.4", "J1", "J2", "J3", "TOR", "BOR", "S")
    at = 12.125
    steps = []
    for place, (start, end) in enumerate(pairwise(names)):
        riser, device = start == "TOR", start == "BOR"
        friction, fitting = 1.4875 + 0.1 * place, 0.62 * (place % 3)
        elevation, loss = (8.227 if riser else 0.0), (6.2 if device else 0.0)
        rise = friction + fitting + elevation + loss
        steps.append(
            PathStep(
                start=start,
                end=end,
                pipe=f"P-{end}-{start}",
                nominal="1 1/4",
                bore=1.38 * INCH,
                c_factor=120.0,
                friction_factor=None,
                flow_added=19.53 * GPM,
                flow=19.53 * (place + 1) * GPM,
                length=12 * FT,
                equivalent_length=5 * FT,
                total_length=17 * FT,
                fittings_text="1 tee" if place % 3 else "",
                friction_gradient=0.1241 * PSI / FT,
                pressure_start=at * PSI,
                friction=friction * PSI,
                fitting_friction=fitting * PSI,
                elevation=elevation * PSI,
                device=loss * PSI,
                pressure_end=(at + rise) * PSI,
                k_at_start=5.6 * GPM / PSI**0.5 if place < 4 else None,
            )
        )
        at += rise
    return tuple(steps)


def hand_check() -> tuple[HandStep, ...]:
    return (
        HandStep(
            "Flow asked of the head", "0.150 gpm/ft² × 130.0 ft²", 19.5 * GPM, "flow", "density governs"
        ),
        HandStep("Pressure at the head", "(19.5 / 5.60)²", 12.125 * PSI, "pressure"),
        HandStep(
            "Loss per foot H1.1 to H1.2",
            "4.52 × 19.5^1.85 / (120^1.85 × 1.049^4.87)",
            0.1241 * PSI / FT,
            "gradient",
        ),
        HandStep("Loss H1.1 to H1.2", "0.1241 psi/ft × 12.00 ft", 1.489 * PSI, "pressure"),
    )


def findings() -> tuple[Finding, ...]:
    return (
        Finding(
            "minimum pressure at heads",
            "ok",
            "The lowest head of the design area has {measured}; the least allowed is {limit}.",
            Measure(12.125 * PSI, "pressure"),
            Measure(7 * PSI, "pressure"),
            "NFPA 13, minimum operating pressure (from memory)",
            ("H1.1",),
        ),
        Finding(
            "age of the flow test",
            "fail",
            "The test was {measured} old at submittal; the limit in the project is {limit} "
            "({unknown} stays).",
            Measure(1.52, "age"),
            Measure(1.0, "age"),
            "limit given in the project",
            remedy="Have the test repeated, or ask the authority to accept {measured}.",
        ),
        Finding(
            "drop in the flow test",
            "ask authority",
            "The pressure fell by {measured}; some editions ask for {limit}.",
            Measure(0.08, "percent"),
            Measure(0.25, "percent"),
            "NFPA 291, by edition (from memory)",
            ("TEST",),
            "Flow more water, or ask which edition applies.",
        ),
        Finding(
            "gauge calibration",
            "missing",
            "Not run: the project gives no calibration date for the gauge.",
            remedy="Write supply.flow_test.gauge_calibrated.",
        ),
        Finding("storage", "not applicable", "No tank in the project."),
    )


def placements(units: UnitSet, lines: int) -> tuple[Placement, ...]:
    return tuple(
        Placement(
            f"lines {line + 1} to {line + 3}, position {column + 1}",
            tuple(f"H{line + 1}.{column + head + 1}" for head in range(4)),
            (58.3 - 1.31 * line - 0.77 * column) * PSI,
            (612.4 - 0.5 * line) * GPM,
            (5.8 + 1.31 * line) * PSI,
            1560 * FT**2,
            (18 + 12 * column) * FT,
            (10 + 10 * line) * FT,
        )
        for line in range(max(lines - 2, 1))
        for column in range(3)
    )


def criteria(standard: str) -> Criteria:
    return Criteria(
        standard=standard,
        edition="2022" if standard == "NFPA 13" else "2015",
        hazard="ordinary hazard group 1",
        density=0.15 * GPM / FT**2,
        base_area=1500 * FT**2,
        modifiers=(AreaModifier("quick response under a 12 ft ceiling", 0.63, "NFPA 13 (from memory)"),),
        required_area=945 * FT**2,
        minimum_heads=5,
        shape_factor=1.2,
        design_area="search",
        system="wet",
        minimum_pressure=7 * PSI,
        duration=3600.0,
        maximum_coverage=130 * FT**2,
        maximum_spacing=15 * FT,
        velocity=VelocityPolicy("off", None, None, "project"),
        maximum_pressure=175 * PSI,
        velocity_pressure=False,
        source="NFPA 13, density and area (from memory)",
        ceiling_height=12 * FT,
    )


def water_supply() -> Supply:
    test = FlowTest(
        tag="T1",
        node="TEST",
        date=dt.date(2026, 6, 1),
        static=80 * PSI,
        points=(TestPoint(60 * PSI, 1000 * GPM, (Outlet(2.5 * INCH, 0.9, 35.2 * PSI, shape="smooth"),)),),
        gauge_elevation=0.0,
        time="10:40",
        static_hydrant="hydrant 118, corner of Mill Lane",
        flow_hydrant="hydrant 119",
        conducted_by="the utility",
        gauge_range=200 * PSI,
        gauge_accuracy=0.01,
    )
    tank = Tank("tank 1", "S", 6.0, 60.0, 100 * GPM, "suction")
    adjustment = Adjustment("low supply", pressure=4 * PSI, reason="summer evening, letter of the utility")
    rule = MarginRule("fixed", 5 * PSI, source="invented county amendment")
    return Supply((test,), (tank,), (adjustment,), rule, "BOR")


def project(units: UnitSet, title: str, *, paper: str, darcy: bool, second: bool) -> Project:
    is_us = units is US
    standard = "NFPA 13 (2022)" if is_us else "EN 12845 (2015)"
    law = DARCY if darcy else (HW_US if is_us else HW_METRIC)
    return Project(
        facts=ProjectFacts(
            title,
            "14 Mill Lane <i>rear</i>",
            "preliminary",
            dt.date(2026, 11, 20),
            standard,
            "County fire marshal (invented)",
            "Owner & Sons",
            "",
            "Building 4",
            "parcel sorting",
            paper,
        ),
        units=units.name,
        criteria=criteria("NFPA 13" if is_us else "EN 12845"),
        system=System(
            (),
            (),
            (
                Sprinkler(
                    "A",
                    5.6 * GPM / PSI**0.5,
                    7 * PSI,
                    130 * FT**2,
                    175 * PSI,
                    "quick",
                    341.5,
                    "data sheet 7",
                ),
            ),
            (),
            (),
        ),
        supply=water_supply(),
        hose=HoseAllowance(0.0, None, 250 * GPM, "S", "hazard class table (from memory)", "catalogue"),
        fluid=Fluid("water", 998.2, 1.002e-3, 0.433 * PSI / FT, 293.15, "property table"),
        law=law,
        second_law=DARCY if second else None,
        scenarios=(),
        assumptions=(
            Assumption("hose.outside_node", "S", "assumed", "outside hose joins at the supply node"),
            Assumption("pipe.branch.c_factor", "120", "catalogue", "steel, wet (from memory)"),
        ),
        files=(
            InputFile(
                "project.toml", "ab" * 32, 53, 'units = "us"\n[project]\ntitle = "<b>x</b>"\n\ta\x07b\n'
            ),
        ),
        origins=(Assumption("criteria.density", "0.15 gpm/ft²", "catalogue", "hazard class table"),),
    )


def curves() -> tuple[CurvePoints, ...]:
    flows = [GPM * 1500 * place / 30 for place in range(31)]

    def falling(static: float) -> tuple[float, ...]:
        return tuple((static - 20 * (flow / (1000 * GPM)) ** 1.85) * PSI for flow in flows)

    sloped = tuple((21.0 + 37.3 * (flow / (612.4 * GPM)) ** 1.85) * PSI for flow in flows[:13])
    return (
        CurvePoints("measured supply", "measured", tuple(flows), falling(80.0), 1000 * GPM),
        CurvePoints("adjusted, at BOR", "adjusted", tuple(flows), falling(74.0), 1000 * GPM),
        CurvePoints("system demand", "demand", tuple(flows[:13]), sloped),
    )


def points() -> tuple[GraphPoint, ...]:
    return (
        GraphPoint("static", "test", 0.0, 80 * PSI),
        GraphPoint("residual", "test", 1000 * GPM, 60 * PSI),
        GraphPoint("sprinklers", "demand", 362.4 * GPM, 58.3 * PSI),
        GraphPoint("with hose", "demand with hose", 612.4 * GPM, 58.3 * PSI),
        GraphPoint("available", "available", 612.4 * GPM, 66.07 * PSI),
    )


def scenarios() -> tuple[ScenarioRow, ...]:
    heads = tuple((f"H1.{place}", 21.3 * GPM, 14.5 * PSI) for place in range(1, 6))
    return (
        ScenarioRow(
            "design area, supply as it is",
            655.1 * GPM,
            63.3 * PSI,
            405.1 * GPM,
            12,
            "H1.1",
            14.47 * PSI,
            1.09,
            0.164 * GPM / FT**2,
            0.118,
            22.0,
            "",
            heads,
        ),
        ScenarioRow(
            "section valve shut",
            501.0 * GPM,
            66.0 * PSI,
            251.0 * GPM,
            12,
            "H1.1",
            5.1 * PSI,
            0.65,
            0.098 * GPM / FT**2,
            None,
            None,
            "the design area is fed from one side only",
        ),
    )


def sample(
    units: str = "us",
    *,
    lines: int = 6,
    heads: int = 6,
    title: str = "Parcel depot (invented)",
    verdict: str = "adequate",
    paper: str = "letter",
    darcy: bool = False,
    second: bool = False,
    long_tags: bool = False,
    placed: bool = True,
) -> Result:
    """Return an invented result; see the arguments for what it can hold."""
    unit_set = US if units == "us" else METRIC
    maker = Maker(unit_set, lines, heads, long_tags=long_tags, placed=placed)
    spots = placements(unit_set, lines)
    sign = 1.0 if verdict == "adequate" else -1.0
    return Result(
        project=project(unit_set, title, paper=paper, darcy=darcy, second=second),
        version="0.0.test",
        verdict=verdict,
        verdict_text="The supply carries the demand with the margin that the project's rule asks for, as "
        "calculated from the inputs in this report.",
        governs="head H1.1: density over the area it covers",
        demand=DemandRecord(
            "BOR", 612.4 * GPM, 58.3 * PSI, 362.4 * GPM, 250 * GPM, 12, "H1.1", "density × area"
        ),
        supply=SupplyRecord(
            80 * PSI,
            60 * PSI,
            1000 * GPM,
            66.07 * PSI,
            880.2 * GPM,
            70.1 * PSI,
            1610.4 * GPM,
            74 * PSI,
            0.6124,
            (HandStep("Resistance of the curve", "(80.0 − 60.0) / 1000.0^1.85", 20 * PSI, "pressure"),),
            "One flow test, lowered by the adjustment, carried from the test hydrant to BOR.",
        ),
        margin=MarginRecord(
            7.77 * PSI * sign,
            5 * PSI,
            2.77 * PSI * sign,
            "a fixed 5.0 psi on top of the demand",
            (HandStep("Margin before the rule", "66.1 − 58.3", 7.77 * PSI, "pressure"),),
            "invented county amendment",
        ),
        balance=BalanceRecord(3.1e-14, 2.2e-6, 612.4 * GPM, "J2", "P-J3-J2", 6),
        design_area=DesignAreaRecord(
            "search",
            (
                HandStep("Area required", "1500.0 ft² × 0.63", 945 * FT**2, "area"),
                HandStep("Heads needed", "945.0 / 130.0, rounded up", 8, "count"),
            ),
            spots,
            spots[0],
            spots[1] if len(spots) > 1 else None,
            Favourable(
                spots[-1].label, spots[-1].heads, 1.2 * spots[-1].flow, spots[-1].required_pressure, 9
            ),
            len(spots),
            f"Searched: {len(spots)} placements tried, {spots[0].label} needs the most pressure.",
        ),
        nodes=maker.nodes(),
        pipes=maker.pipes(darcy=darcy, second=second),
        path=path(),
        hand_check=hand_check(),
        curves=curves(),
        points=points(),
        scenarios=scenarios(),
        findings=findings(),
        open_questions=(
            "Which edition and amendments has the authority adopted?",
            "Who witnessed the flow test of 2026-06-01, and when was the gauge calibrated?",
        ),
        library_versions=MappingProxyType({"numpy": "0", "reportlab": "0"}),
    )
