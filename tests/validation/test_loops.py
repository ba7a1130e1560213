"""Published looped networks, and one that can be worked out in closed form."""

from __future__ import annotations

import numpy as np
import pytest
from network_systems import WATER_METRIC, network, node, pipe, system, us_pipe

from supplycheck.model import FrictionLaw
from supplycheck.network import LoadCase, SourceCurve, build_network, solve_operating
from supplycheck.units import GPM, PSI

HOUR = 3600.0


def test_two_loop_network_of_alperovits_and_shamir() -> None:
    """Alperovits and Shamir (1977), Water Resour. Res. 13, 885, with the diameters of Savic and Walters.

    Savic and Walters (1997), J. Water Resour. Plann. Manage. 123, 67 (both from memory). Hazen-Williams
    10.667 Q^1.852/(C^1.852 D^4.871), C 130. The pressures are printed to 0.01 m, so the tolerance is
    one unit of that digit.
    """
    law = FrictionLaw("hazen-williams", "head form", 10.667 * 9800.0, 1.852, 4.871, "see the test")
    elevations = {"1": 210.0, "2": 150.0, "3": 160.0, "4": 155.0, "5": 150.0, "6": 165.0, "7": 160.0}
    rows = [
        "1-2 457.2",
        "2-3 254.0",
        "2-4 406.4",
        "4-5 101.6",
        "4-6 406.4",
        "6-7 254.0",
        "3-5 254.0",
        "5-7 25.4",
    ]
    pipes = []
    for row in rows:
        ends, bore = row.split()
        a, b = ends.split("-")
        pipes.append(pipe(ends, a, b, 1000.0, float(bore) * 1e-3, c_factor=130.0))
    made = build_network(
        system([node(tag, z) for tag, z in elevations.items()], pipes), law=law, fluid=WATER_METRIC
    )
    demands = {"2": 100.0, "3": 100.0, "4": 120.0, "5": 270.0, "6": 330.0, "7": 200.0}
    load = LoadCase((), {tag: flow / HOUR for tag, flow in demands.items()})
    solution = solve_operating(made, load, [SourceCurve("1", 0.0)])
    printed = {"2": 53.25, "3": 30.46, "4": 43.45, "5": 33.80, "6": 30.45, "7": 30.55}
    for tag, metres in printed.items():
        assert solution.pressure[solution.node(tag)] / 9800.0 == pytest.approx(metres, abs=0.01)
    last = solution.pipe_flow[solution.pipe_tags.index("5-7")]
    assert last < 0, "the last pipe runs from 7 to 5, against the drawing"
    assert solution.source_flow[0] * HOUR == pytest.approx(1120.0, rel=1e-12)


def test_two_paths_in_closed_form() -> None:
    """200 ft of 3 in beside 350 ft of 4 in, C 120, 400 gpm: constructed; the split follows from the law.

    Q1/Q2 = [(L2/L1)(d1/d2)^4.87]^(1/1.85) = 0.66175, so 159.29 and 240.71 gpm, 6.498 psi each (rounded).
    """
    made = network(
        system(
            [node("A"), node("B")],
            [us_pipe("three", "A", "B", 200, 3.068), us_pipe("four", "A", "B", 350, 4.026)],
        )
    )
    solution = solve_operating(made, LoadCase((), {"B": 400 * GPM}), [SourceCurve("A", 100 * PSI)])
    ratio = ((350 / 200) * (3.068 / 4.026) ** 4.87) ** (1 / 1.85)
    assert solution.pipe_flow / GPM == pytest.approx(
        [400 * ratio / (1 + ratio), 400 / (1 + ratio)], rel=1e-11
    )
    assert ratio == pytest.approx(0.66175, abs=5e-6)
    assert solution.pipe_flow / GPM == pytest.approx([159.29, 240.71], abs=0.005)
    assert solution.friction / PSI == pytest.approx([6.498, 6.498], abs=5e-4)


def test_square_with_diagonal_by_hardy_cross() -> None:
    """A square with a diagonal, worked by the method of Hardy Cross in this test.

    H. Cross (1936), Analysis of flow in networks of conduits or conductors, Univ. of Illinois Bull. 286:
    method of balancing heads, correction −Σ r Q|Q| / Σ 2 r |Q| for each loop. Loss = r Q² as in the
    textbook exercises; the resistances and flows are constructed.
    """
    resistance = {"AB": 2.0, "BC": 1.0, "CD": 2.0, "DA": 1.0, "AC": 1.0}
    law = FrictionLaw("hazen-williams", "square law", 1.0, 2.0, 4.87, "constructed")
    pipes = [
        pipe(tag, tag[0], tag[1], 1.0, r ** (-1 / 4.87), c_factor=1.0) for tag, r in resistance.items()
    ]
    made = build_network(system([node(tag) for tag in "ABCD"], pipes), law=law, fluid=WATER_METRIC)
    load = LoadCase((), {"B": 20.0, "C": 30.0, "D": 50.0})
    solution = solve_operating(made, load, [SourceCurve("A", 1e6)])
    flow = dict(zip(solution.pipe_tags, solution.pipe_flow, strict=True))
    cross = _hardy_cross(resistance, {"AB": 40.0, "BC": 20.0, "CD": 10.0, "DA": -40.0, "AC": 20.0})
    assert flow == pytest.approx(cross, abs=1e-9)


def _hardy_cross(resistance: dict[str, float], flow: dict[str, float]) -> dict[str, float]:
    """Return the flows after the loop corrections of Cross, −Σ r Q|Q| / Σ 2 r |Q|, until they vanish."""
    loops = ({"AB": 1, "BC": 1, "AC": -1}, {"AC": 1, "CD": 1, "DA": 1})
    for _ in range(500):
        for loop in loops:
            turn = sum(sign * resistance[tag] * flow[tag] * abs(flow[tag]) for tag, sign in loop.items())
            correction = -turn / sum(2 * resistance[tag] * abs(flow[tag]) for tag in loop)
            for tag, sign in loop.items():
                flow[tag] += sign * correction
    return flow


def test_parallel_pipes_of_the_same_length_share_by_bore() -> None:
    """Equivalent-pipe rule of the handbooks: at equal loss and C, flows go as bore^(4.87/1.85) = d^2.63."""
    bores = (2.067, 3.068, 4.026, 6.065)
    pipes = [us_pipe(f"{bore}", "A", "B", 100, bore) for bore in bores]
    made = network(system([node("A"), node("B")], pipes))
    solution = solve_operating(made, LoadCase((), {"B": 1000 * GPM}), [SourceCurve("A", 100 * PSI)])
    share = np.array(bores) ** (4.87 / 1.85)
    assert solution.pipe_flow / GPM == pytest.approx(1000 * share / share.sum(), rel=1e-10)
