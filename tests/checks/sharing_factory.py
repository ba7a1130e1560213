"""The sound project with a second, weaker main or tank at W."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np

from supplycheck.model import Device, Tank, TestPoint
from supplycheck.network.records import Solution
from supplycheck.units import FOOT, GPM, INCH, PSI


def two_sources(*, gives: float = 100 * GPM, kept: bool = True) -> dict[str, Any]:
    """A second, weaker main at W feeds B, through a check valve where ``kept``; S gives the rest."""
    keeper = Device("keeper", "check valve", (0.0, 1000 * GPM), (0.0, PSI), "maker", one_way=True)

    def nodes(old: Any) -> Any:
        return (*old, replace(next(one for one in old if one.tag == "S"), tag="W", elevation=4 * FOOT))

    def pipes(old: Any) -> Any:
        lead = next(one for one in old if one.tag == "U")
        held = ("keeper",) if kept else ()
        return (*old, replace(lead, tag="V", start="W", end="B", devices=held))

    def more(state: Solution) -> Solution:
        total = float(state.source_flow[0])
        return replace(
            state,
            source_tags=("S", "W"),
            source_flow=np.array([total - gives, gives]),
            source_pressure=np.array([float(state.source_pressure[0])] * 2),
        )

    def tests(old: Any) -> Any:
        weak = replace(old[0], tag="T-2", node="W", static=60 * PSI, gauge_elevation=4 * FOOT)
        return (*old, replace(weak, points=(TestPoint(50 * PSI, 125 * GPM),)))

    return {
        "project.system.devices": lambda old: (*old, keeper),
        "project.system.nodes": nodes,
        "project.system.pipes": pipes,
        "project.supply.tests": tests,
        "solution": more,
    }


def fed(flow: float, *, tank: bool = False) -> dict[str, Any]:
    """``flow`` [m³/s] runs into W, a main or a ``tank``."""
    changes = two_sources(gives=-flow, kept=False)
    if tank:
        changes.pop("project.supply.tests")
        changes["project.supply.tanks"] = (Tank("high", "W", 100 * FOOT, 40000 * 231 * INCH**3),)
    return changes
