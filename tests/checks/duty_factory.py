"""Hydrants, standpipes and outflows made by hand for the rules; every number is invented."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Any

from check_factory import sound

from supplycheck.model.duty import (
    ConnectionRow,
    DutyAnswer,
    DutyRow,
    FireFlow,
    Hydrant,
    HydrantDuty,
    HydrantRow,
    OutflowDuty,
    OutletState,
    RegulatingDevice,
    Riser,
    StandpipeDuty,
    StandpipeOutlet,
    StandpipeRow,
)
from supplycheck.units import GPM, INCH, PSI

FIRE_FLOW = FireFlow(1500 * GPM, 7200.0, "given", "fire code")
REDUCED = replace(FIRE_FLOW, table_flow=3000 * GPM, reduction=0.5)
YARD = HydrantDuty(
    hydrants=(Hydrant("A", "H22", "backflow"), Hydrant("B", "T3", "backflow")),
    fire_flow=FIRE_FLOW,
    at_once=2,
    greatest_each=1500 * GPM,
    residual=20 * PSI,
    highest_point=None,
    valves=("C3",),
    maximum_day=(),
    counts=("hydrants", "maximum day"),
    hydrants_asked=1,
)
DEVICE = RegulatingDevice("RV", (100 * PSI, 200 * PSI), (90 * PSI, 120 * PSI), (), (), "maker")
TOWER = StandpipeDuty(
    risers=(Riser("R", (StandpipeOutlet("H22", 2.5 * INCH, 100 * PSI),)),),
    sprinklered=True,
    outlet_flow=250 * GPM,
    greatest_flow=1000 * GPM,
    horizontal_flow=750 * GPM,
    regulating_pressure=175 * PSI,
    devices=(DEVICE,),
    connection=None,
    added_flows=(),
    counts=("risers", "horizontal"),
    source="",
)


def row(
    left: float, *, duty: str = "hydrants", kind: str = "hydrants", counts: bool = True, asked: float = 20
) -> DutyRow:
    """Return a case that leaves ``left`` psi at H22 where ``asked`` psi are asked."""
    outlet = OutletState("hydrant A", "H22", 750 * GPM, left * PSI, asked * PSI)
    margin = (left - asked) * PSI
    return DutyRow(
        duty, kind, "hydrants A + B", counts, 1500 * GPM, 50 * PSI, margin, "H22", "hydrant A", 1, (outlet,)
    )


CUT = replace(
    row(20), margin=math.nan, governing_by="cut off", outlets=(), note="cut off from the supply: H22"
)
HYDRANT = HydrantRow(
    tag="A",
    node="H22",
    location="",
    static=70 * PSI,
    alone=1500 * GPM,
    residual_alone=30 * PSI,
    share=750 * GPM,
    greatest_flow=1800 * GPM,
    greatest_on_maximum_day=None,
    limited_by="hydrant A",
    device_loss=3 * PSI,
    device_in_range=True,
    rank="AA",
    colour="blue",
    source="NFPA 291",
)
OUTLET = StandpipeRow("R", "H22", 2.5 * INCH, 100 * PSI, 100 * PSI, 150 * PSI, "", None, False, None)
CONNECTION = ConnectionRow("B", 150 * PSI, 1000 * GPM, "standpipe R most remote", "H22")


def yard(*rows: DutyRow, hydrants: tuple[HydrantRow, ...] = (HYDRANT,), **changes: Any) -> dict[str, Any]:
    """Return the change of a context to the hydrants of ``YARD`` with ``changes``."""
    return {"project.hydrants": replace(YARD, **changes), "duties": DutyAnswer(rows, hydrants)}


def tower(*rows: DutyRow, outlets: tuple[StandpipeRow, ...] = (OUTLET,), fed: Any = None) -> dict[str, Any]:
    """Return the change of a context to the standpipes of ``TOWER``."""
    return {"project.standpipes": TOWER, "duties": DutyAnswer(rows, (), outlets, fed)}


def outlet(**changes: Any) -> tuple[StandpipeRow, ...]:
    return (replace(OUTLET, **changes),)


def hydrant(**changes: Any) -> tuple[HydrantRow, ...]:
    return (replace(HYDRANT, **changes),)


def asked_at_b(asked: float) -> dict[str, Any]:
    """Return the change of a context to a node B that asks for ``asked`` psi."""
    return {"operating": sound().solution, "project.system.nodes.B.minimum_pressure": asked * PSI}


LISTED = {"counts": False, "kind": "valve shut"}
UNSOLVED = {"greatest_flow": None, "note": "no solution: the network is cut"}
HIGH = {"no_flow": 190 * PSI, "over_limit": True}

DUTY_CASES: list[tuple[Any, ...]] = [
    ("required fire flow", "not applicable"),
    ("required fire flow", "ok", yard(), 1500 * GPM),
    ("required fire flow", "ask authority", yard(fire_flow=REDUCED), 1500 * GPM),
    ("required fire flow", "missing", yard(fire_flow=replace(FIRE_FLOW, duration=None))),
    ("number of hydrants", "not applicable"),
    ("number of hydrants", "ok", yard(), 2, 1),
    ("number of hydrants", "ask authority", yard(hydrants_asked=3), 2, 3),
    ("residual at flowing hydrants", "not applicable"),
    ("residual at flowing hydrants", "not applicable", yard(row(10, **LISTED))),
    ("residual at flowing hydrants", "ok", yard(row(30), row(20)), 20 * PSI, 20 * PSI, ("H22",)),
    ("residual at flowing hydrants", "fail", yard(row(30), row(19)), 19 * PSI, 20 * PSI, ("H22",)),
    ("residual at flowing hydrants", "fail", yard(row(30), CUT)),
    ("hydrants with a valve shut or with sprinklers", "not applicable"),
    ("hydrants with a valve shut or with sprinklers", "not applicable", yard(row(30))),
    ("hydrants with a valve shut or with sprinklers", "ok", yard(row(30, **LISTED)), 1),
    (
        "hydrants with a valve shut or with sprinklers",
        "ask authority",
        yard(row(30, **LISTED), row(10, **LISTED)),
        1,
        0,
    ),
    (
        "hydrants with a valve shut or with sprinklers",
        "ask authority",
        yard(replace(CUT, counts=False, kind="valve shut")),
        1,
    ),
    ("greatest flow of each hydrant", "not applicable"),
    ("greatest flow of each hydrant", "ok", yard(), 1800 * GPM, 750 * GPM, ("A",)),
    ("greatest flow of each hydrant", "ok", yard(hydrants=hydrant(greatest_flow=None))),
    (
        "greatest flow of each hydrant",
        "fail",
        yard(hydrants=(HYDRANT, *hydrant(tag="B", greatest_flow=700 * GPM))),
        700 * GPM,
        750 * GPM,
        ("B",),
    ),
    ("greatest flow of each hydrant", "missing", yard(hydrants=hydrant(**UNSOLVED))),
    ("loss of hydrants", "not applicable"),
    ("loss of hydrants", "ok", yard()),
    (
        "loss of hydrants",
        "missing",
        yard() | {"project.hydrants": replace(YARD, hydrants=(Hydrant("A", "T3"),))},
    ),
    (
        "loss of hydrants",
        "ask authority",
        yard(hydrants=hydrant(device_in_range=False)),
        None,
        None,
        ("A",),
    ),
    ("pressure at hose outlets", "not applicable"),
    ("pressure at hose outlets", "ok", tower(row(101, duty="standpipes", asked=100)), 101 * PSI, 100 * PSI),
    ("pressure at hose outlets", "fail", tower(row(99, duty="standpipes", asked=100)), 99 * PSI, 100 * PSI),
    ("regulating devices at hose outlets", "not applicable"),
    ("regulating devices at hose outlets", "ok", tower(), 150 * PSI, 175 * PSI),
    ("regulating devices at hose outlets", "fail", tower(outlets=outlet(**HIGH)), 190 * PSI, 175 * PSI),
    (
        "regulating devices at hose outlets",
        "ok",
        tower(outlets=outlet(no_flow=190 * PSI, device="RV", after_device=140 * PSI)),
        140 * PSI,
        175 * PSI,
    ),
    (
        "regulating devices at hose outlets",
        "fail",
        tower(outlets=outlet(**HIGH, device="RV", after_device=180 * PSI)),
        180 * PSI,
        175 * PSI,
    ),
    (
        "regulating devices at hose outlets",
        "missing",
        tower(outlets=outlet(**HIGH, device="RV")),
        None,
        None,
        ("H22",),
    ),
    ("fire department connection", "not applicable"),
    ("fire department connection", "missing", tower()),
    ("fire department connection", "missing", tower(fed=replace(CONNECTION, note="no solution: cut"))),
    ("fire department connection", "ask authority", tower(fed=CONNECTION), 150 * PSI, None, ("B",)),
    ("pressure asked at nodes", "not applicable"),
    ("pressure asked at nodes", "ok", asked_at_b(5), None, 5 * PSI, ("B",)),
    ("pressure asked at nodes", "fail", asked_at_b(1000), None, 1000 * PSI, ("B",)),
    ("minimum pressure of outflows", "not applicable"),
    ("minimum pressure of outflows", "ok", {"project.outflows": OutflowDuty(("B", "T"), ())}, 2),
    (
        "minimum pressure of outflows",
        "missing",
        {"project.outflows": OutflowDuty(("B", "T"), ("T",))},
        None,
        None,
        ("T",),
    ),
]
