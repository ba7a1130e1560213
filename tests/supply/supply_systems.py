"""A small chain of pipes whose demand solution is walked back by hand, for the tests of the supply.

S ──(underground, backflow)── B ──(riser)── H: one head at H, hose at S and at B.
"""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, replace

import numpy as np

from supplycheck.model import (
    HW_US,
    Adjustment,
    Criteria,
    Device,
    FlowTest,
    Fluid,
    HoseAllowance,
    MarginRule,
    Node,
    Pipe,
    Project,
    ProjectFacts,
    Supply,
    System,
    TestPoint,
    VelocityPolicy,
)
from supplycheck.network.records import Solution
from supplycheck.supply import NodeSupply, supply_curves
from supplycheck.units import FOOT, GPM, INCH, PSI

UNIT_WEIGHT = 0.433 * PSI / FOOT
WATER = Fluid("water", 998.2, 1.0e-3, UNIT_WEIGHT, None, "test")
DAY = dt.date(2026, 6, 1)


def flow_test(
    tag: str = "T", static: float = 82.0, residual: float = 54.0, flow: float = 956.0, gauge: float = 3.0
) -> FlowTest:
    point = TestPoint(residual * PSI, flow * GPM)
    return FlowTest(tag, "S", DAY, static * PSI, (point,), gauge * FOOT)


BACKFLOW = Device("backflow", "loss", (0.0, 500 * GPM), (0.0, 9 * PSI), "maker")


@dataclass(frozen=True)
class Chain:
    """What is asked of the chain; US units."""

    head_flow: float = 260.0
    head_pressure: float = 30.0
    hose_inside: float = 0.0
    hose_outside: float = 250.0
    outside_node: str = "S"
    datum: float = 0.0
    compare_at: str = "S"
    tests: tuple[FlowTest, ...] = (flow_test(),)
    adjustments: tuple[Adjustment, ...] = ()
    margin: MarginRule | None = None
    submittal: dt.date | None = None
    device: Device = BACKFLOW


def _elevations(chain: Chain) -> dict[str, float]:
    return {tag: (z + chain.datum) * FOOT for tag, z in (("S", -5.0), ("B", 1.0), ("H", 22.0))}


def project_of(chain: Chain) -> Project:
    z = _elevations(chain)
    k = chain.head_flow * GPM / (chain.head_pressure * PSI) ** 0.5
    nodes = (
        Node("S", z["S"], kind="supply"),
        Node("B", z["B"]),
        Node("H", z["H"], kind="sprinkler", k_factor=k),
    )
    pipes = (
        Pipe("U", "S", "B", 200 * FOOT, 6.16 * INCH, "6", "main", 140.0, None, devices=("backflow",)),
        Pipe("R", "H", "B", 60 * FOOT, 4.026 * INCH, "4", "steel", 120.0, None),
    )
    system = System(nodes, pipes, (), (), (chain.device,))
    tests = tuple(replace(t, gauge_elevation=t.gauge_elevation + chain.datum * FOOT) for t in chain.tests)
    supply = Supply(
        tests, (), chain.adjustments, chain.margin, chain.compare_at, submittal_date=chain.submittal
    )
    hose = HoseAllowance(
        chain.hose_inside * GPM, "B", chain.hose_outside * GPM, chain.outside_node, "test", "given"
    )
    facts = ProjectFacts("t", "", "preliminary", dt.date(2026, 11, 20), "NFPA 13 (2022)", "")
    none = VelocityPolicy("off", None, None, "")
    criteria = Criteria(
        "NFPA 13", "2022", "OH2", 0.0, 0.0, (), 0.0, 0, 1.2, ("H",), "wet", 0.0,
        None, None, None, none, None, False, "",
    )  # fmt: skip
    return Project(facts, "us", criteria, system, supply, hose, WATER, HW_US, None, (), (), ())


def friction(flow: float, length: float, bore: float, c: float) -> float:
    """Return the loss [Pa] of flow [gpm] in length [ft], bore [in]: 4.52 Q^1.85 / (C^1.85 d^4.87)."""
    return 4.52 * flow**1.85 / (c**1.85 * bore**4.87) * length * PSI


def solve(
    chain: Chain, device_gain: float | None = None
) -> tuple[Project, Solution, tuple[NodeSupply, ...]]:
    """Return project, walked-back solution and supply curves; ``device_gain`` [Pa] where it is a pump."""
    project = project_of(chain)
    z = _elevations(chain)
    head, inside = chain.head_flow, chain.hose_inside
    at_b = chain.hose_outside if chain.outside_node == "B" else 0.0
    at_s = chain.hose_outside - at_b
    through_u = head + inside + at_b
    friction_u, friction_r = friction(through_u, 200, 6.16, 140), friction(head, 60, 4.026, 120)
    device = 9 * PSI * through_u / 500 if device_gain is None else -device_gain
    p_h = chain.head_pressure * PSI
    p_b = p_h + friction_r + UNIT_WEIGHT * (z["H"] - z["B"])
    p_s = p_b + friction_u + device + UNIT_WEIGHT * (z["B"] - z["S"])
    curves = supply_curves(project)
    total = (through_u + at_s) * GPM
    zero = np.zeros(2)
    solution = Solution(
        node_tags=("S", "B", "H"),
        pipe_tags=("U", "R"),
        pressure=np.array([p_s, p_b, p_h]),
        outflow=np.array([at_s, inside + at_b, head]) * GPM,
        pipe_flow=np.array([through_u, -head]) * GPM,
        friction=np.array([friction_u, -friction_r]),
        elevation_loss=UNIT_WEIGHT * np.array([z["B"] - z["S"], z["B"] - z["H"]]),
        device_loss=np.array([device, 0.0]),
        velocity=zero,
        friction_factor=zero,
        reynolds=zero,
        velocity_pressure=zero,
        source_tags=("S",),
        source_flow=np.array([total]),
        source_pressure=np.array([p_s]),
        shift=curves[0].curve.pressure_at(total) - p_s,
        governing="H",
        iterations=1,
        mass_residual=0.0,
        energy_residual=0.0,
    )
    return project, solution, curves
