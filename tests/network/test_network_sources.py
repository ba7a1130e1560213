"""Supplies: one and several, shift, velocity pressure, and the search over many cases."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
from network_systems import K_US, network, node, random_system, supply, system, us_pipe

from supplycheck.errors import NotConvergedError
from supplycheck.network import LoadCase, SourceCurve, demand_many, solve_demand, solve_operating
from supplycheck.units import GPM, PSI

K56 = 5.6 * K_US


def campus():  # type: ignore[no-untyped-def]
    heads = [node(f"h{i}", 3.0, K56) for i in range(5)]
    ends = ["S", "h0", "h1", "h2", "h3", "h4", "T"]
    pipes = [us_pipe(a + b, a, b, 30, 2.067) for a, b in pairwise(ends)]
    return network(system([node("S"), *heads, node("T", 1.0)], pipes))


HEADS = tuple(f"h{i}" for i in range(5))
TWO = [supply("S"), supply("T", 5.5e5, 3e5)]


def test_operating_point_lies_on_every_curve() -> None:
    solution = solve_operating(campus(), LoadCase(HEADS, {"S": 0.005}), TWO)
    for source, flow, pressure in zip(TWO, solution.source_flow, solution.source_pressure, strict=True):
        assert pressure == pytest.approx(source.static - source.resistance * flow**1.85, rel=1e-10)
    assert solution.source_flow.sum() == pytest.approx(solution.outflow.sum(), rel=1e-12)


def test_shift_of_two_supplies_is_what_both_can_lose() -> None:
    made = campus()
    required = dict.fromkeys(HEADS, 10 * PSI)
    demand = solve_demand(made, LoadCase(HEADS), required, TWO)
    lowered = [SourceCurve(s.node, s.static - demand.shift, s.resistance) for s in TWO]
    check = solve_operating(made, LoadCase(HEADS), lowered)
    assert check.pipe_flow == pytest.approx(demand.pipe_flow, abs=1e-11)
    at = check.pressure[check.node(demand.governing)]
    assert at == pytest.approx(10 * PSI, abs=1e-3)
    assert min(check.pressure[check.node(tag)] for tag in HEADS) == pytest.approx(at)


def test_shift_of_one_supply_is_curve_less_demand() -> None:
    made, source = campus(), supply("S")
    demand = solve_demand(made, LoadCase(HEADS), dict.fromkeys(HEADS, 10 * PSI), [source])
    curve = source.static - source.resistance * demand.source_flow[0] ** 1.85
    assert demand.shift == pytest.approx(curve - demand.source_pressure[0], rel=1e-12)


def test_two_equal_supplies_at_one_place_are_one_with_half_the_flow() -> None:
    made = campus()
    one = solve_operating(made, LoadCase(HEADS), [SourceCurve("S", 6e5, 1e8)])
    joined = network(
        system(
            [node("S1"), node("S2"), node("S"), *(node(t, 3.0, K56) for t in HEADS)],
            [us_pipe("1", "S1", "S", 0, 8), us_pipe("2", "S2", "S", 0, 8)]
            + [us_pipe(a + b, a, b, 30, 2.067) for a, b in zip(("S", *HEADS), HEADS, strict=False)],
        )
    )
    pair = [SourceCurve("S1", 6e5, 1e8 * 2**1.85), SourceCurve("S2", 6e5, 1e8 * 2**1.85)]
    both = solve_operating(joined, LoadCase(HEADS), pair)
    assert both.source_flow.sum() == pytest.approx(one.source_flow[0], rel=1e-8)


def test_a_stronger_supply_runs_into_a_weaker_one_and_says_so() -> None:
    solution = solve_operating(campus(), LoadCase(("h0",)), [SourceCurve("S", 2e5), SourceCurve("T", 6e5)])
    assert solution.source_flow[0] < 0
    assert "runs into the supply at S" in solution.notes[0]


def test_normal_pressure_in_closed_form() -> None:
    """Two K 5.6 heads on a 1 in line: the end head by total pressure, the other by normal pressure.

    Pv = 0.001123 Q²/d⁴ [psi] (trade form, printed to 4 digits; here ½ρv² of the same water exactly).
    """
    made = network(
        system(
            [node("S"), node("A", 0.0, K56), node("B", 0.0, K56)],
            [us_pipe("SA", "S", "A", 10, 1.049), us_pipe("AB", "A", "B", 10, 1.049)],
        )
    )
    load, required = LoadCase(("A", "B")), {"A": 7 * PSI, "B": 7 * PSI}
    solution = solve_demand(made, load, required, [supply()], velocity_pressure=True)
    at_a = solution.outlet_velocity_pressure[solution.node("A")]
    total = solution.pipe_flow[0]
    assert at_a / PSI == pytest.approx(0.001123 * (total / GPM) ** 2 / 1.049**4, rel=2e-3)
    assert solution.outlet_velocity_pressure[solution.node("B")] == 0.0
    normal = solution.pressure[solution.node("A")] - at_a
    assert solution.outflow[solution.node("A")] == pytest.approx(K56 * normal**0.5, rel=1e-9)
    drives = [normal, solution.pressure[solution.node("B")]]
    assert min(drives) == pytest.approx(7 * PSI, abs=1e-3)
    plain = solve_demand(made, load, required, [supply()])
    assert not plain.outlet_velocity_pressure.any()
    assert plain.velocity_pressure[0] == pytest.approx(0.5 * 998.2 * plain.velocity[0] ** 2)


@pytest.mark.parametrize("law", ["hazen-williams", "darcy"])
@pytest.mark.parametrize("sources", [[supply()], [supply(), supply("n9", 5e5, 3e5)]], ids=["one", "two"])
def test_many_cases_equal_each_on_its_own(law: str, sources: list[SourceCurve]) -> None:
    rng = np.random.default_rng(3)
    made_system = random_system(rng, "grid", 90, heads=0.9)
    made = network(made_system, law)
    tags = [n.tag for n in made_system.nodes if n.k_factor is not None]
    cases = []
    for first in range(len(tags) - 6):
        open_ = tuple(tags[first : first + 6])
        shut = ("p40",) if first % 9 == 0 else ()
        cases.append((LoadCase(open_, {"n9": 0.003}, shut), dict.fromkeys(open_, 1e5)))
    seen: list[tuple[int, int]] = []
    many = demand_many(made, cases, sources, progress=lambda done, count: seen.append((done, count)))
    assert seen[-1] == (len(cases), len(cases))
    for (load, required), summary in list(zip(cases, many, strict=True))[::7]:
        alone = solve_demand(made, load, required, sources)
        assert summary.source_pressure == pytest.approx(alone.source_pressure[0], abs=1.0)
        assert summary.total_flow == pytest.approx(alone.source_flow.sum(), rel=1e-5)
        assert summary.shift == pytest.approx(alone.shift, abs=1.0)
        assert summary.governing == alone.governing
        assert summary.pressure_at == pytest.approx(alone.pressure[alone.node(sources[0].node)], abs=1.0)


def test_pressure_at_the_node_that_is_asked_about() -> None:
    """Also where the node lies in a chain or a dead end that the reduction would take away."""
    rng = np.random.default_rng(8)
    made_system = random_system(rng, "grid", 60, heads=0.5)
    made = network(made_system)
    tags = [n.tag for n in made_system.nodes if n.k_factor is not None]
    cases = [(LoadCase(tuple(tags[i : i + 3])), dict.fromkeys(tags[i : i + 3], 1e5)) for i in range(8)]
    for at in ("n7", "n31", "n40"):
        for (load, required), summary in zip(
            cases, demand_many(made, cases, [supply()], at=at), strict=True
        ):
            alone = solve_demand(made, load, required, [supply()])
            assert summary.pressure_at == pytest.approx(alone.pressure[alone.node(at)], abs=1.0)


def test_normal_pressure_that_no_supply_can_give_is_said_so() -> None:
    """K 25.2 heads on a ½ in line: the velocity pressure rises faster than the pressure."""
    big = 25.2 * K_US
    made = network(
        system(
            [node("S"), node("A", 0.0, big), node("B", 0.0, big)],
            [us_pipe("SA", "S", "A", 1, 0.622), us_pipe("AB", "A", "B", 1, 0.622)],
        )
    )
    with pytest.raises(NotConvergedError, match="velocity pressures") as caught:
        solve_demand(made, LoadCase(("A", "B")), {"A": 1e5, "B": 1e5}, [supply()], velocity_pressure=True)
    assert "A" in caught.value.tags


def test_many_cases_with_normal_pressure() -> None:
    made = campus()
    cases = [(LoadCase((tag,)), {tag: 1e5}) for tag in HEADS]
    for summary, (load, required) in zip(
        demand_many(made, cases, TWO, velocity_pressure=True), cases, strict=True
    ):
        alone = solve_demand(made, load, required, TWO, velocity_pressure=True)
        assert summary.shift == pytest.approx(alone.shift, rel=1e-12)
