"""The comparison on solutions of the network solver: one source, two sources, datum and place moved."""

from __future__ import annotations

from dataclasses import replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from supply_systems import Chain, flow_test, project_of, solve

from supplycheck.errors import DomainError
from supplycheck.model import Adjustment, Device, MarginRule, Pipe, Project
from supplycheck.network import LoadCase, Solution, build_network, solve_demand
from supplycheck.supply import compare, curve_points, hose_loads, source_curves, supply_curves
from supplycheck.supply.route import route
from supplycheck.units import FOOT, GPM, INCH, PSI


def solved(project: Project, pressure: float) -> Solution:
    network = build_network(project.system, law=project.law, fluid=project.fluid)
    load = LoadCase(("H",), hose_loads(project))
    return solve_demand(network, load, {"H": pressure}, source_curves(supply_curves(project)))


def test_the_solver_gives_the_walked_back_comparison() -> None:
    chain = Chain(hose_inside=50.0, adjustments=(Adjustment("low supply", pressure=5 * PSI),))
    project, by_hand, curves = solve(chain)
    expected = compare(project, by_hand, curves)
    found = compare(project, solved(project, chain.head_pressure * PSI), curves)
    # The solver's own tolerance is far below 1 Pa (0.00015 psi).
    for name in ("demand_pressure", "available_pressure", "margin", "static"):
        assert getattr(found, name) == pytest.approx(getattr(expected, name), abs=1.0), name
    for name in ("demand_flow", "sprinkler_flow", "hose_flow", "available_flow", "carried_flow"):
        assert getattr(found, name) == pytest.approx(getattr(expected, name), rel=1e-6), name


@pytest.mark.parametrize(
    "adjustments",
    [
        (),
        (Adjustment("static cap", pressure=70 * PSI),),
        (Adjustment("percent", factor=0.9), Adjustment("low supply", pressure=3 * PSI)),
    ],
)
def test_the_margin_is_what_the_solver_calls_shift(adjustments: tuple[Adjustment, ...]) -> None:
    project = project_of(Chain(adjustments=adjustments))
    solution = solved(project, 30 * PSI)
    comparison = compare(project, solution, supply_curves(project))
    assert comparison.margin == pytest.approx(solution.shift, abs=1.0)


def two_supplies(chain: Chain) -> Project:
    """A second, weaker connection at X feeds the riser base by its own lead-in."""
    project = project_of(chain)
    nodes = project.system.nodes
    second = replace(nodes[0], tag="X", elevation=nodes[0].elevation + 2 * FOOT)
    pipe = Pipe("V", "X", "B", 300 * FOOT, 4.1 * INCH, "4", "main", 140.0, None)
    system = replace(project.system, nodes=(*nodes, second), pipes=(*project.system.pipes, pipe))
    weaker = replace(project.supply.tests[0], tag="W", node="X", static=75 * PSI)
    return replace(
        project, system=system, supply=replace(project.supply, tests=(*project.supply.tests, weaker))
    )


def test_two_supplies_share_one_margin() -> None:
    project = two_supplies(Chain(compare_at="B"))
    solution = solved(project, 30 * PSI)
    comparison = compare(project, solution, supply_curves(project))
    assert comparison.principal == "S"
    assert len(comparison.sources) == 2
    assert comparison.margin == solution.shift
    # Every source that gives water has the same pressure to spare.
    for share in comparison.sources:
        assert share.flow > 0.0
        assert share.available - share.demand_pressure == pytest.approx(solution.shift, abs=1.0)
    assert comparison.demand_flow == pytest.approx(510 * GPM, rel=1e-6)
    # Steps tell the share of each, its curve at its own flow, and that all are lowered alike.
    steps = {step.step: step for step in comparison.supply_steps}
    assert steps["Given by the sources"].value == pytest.approx(510 * GPM, rel=1e-6)
    by_node = {share.node: share for share in comparison.sources}
    weaker = 75 - 21 * (by_node["X"].flow / (956 * GPM)) ** 1.85  # 75 psi static, 54 psi at 956 gpm
    assert steps["Curve of W at the demand flow"].value == pytest.approx(weaker * PSI, rel=1e-9)
    for node in ("S", "X"):
        assert steps[f"Left over at {node}"].value == pytest.approx(solution.shift, abs=1.0)
    assert any("lowered alike" in note.template for note in comparison.notes)
    assert comparison.margin_steps[0].note == "all supplies lowered alike"
    # Lowering both tests by the margin leaves nothing to spare.
    low = Adjustment("low supply", pressure=comparison.margin)
    lowered = replace(project, supply=replace(project.supply, adjustments=(low,)))
    again = compare(lowered, solved(lowered, 30 * PSI), supply_curves(lowered))
    assert again.margin == pytest.approx(0.0, abs=2.0)


@settings(max_examples=15, deadline=None)
@given(
    datum=st.floats(-300.0, 3000.0),
    place=st.sampled_from(["S", "B", "H", "X"]),
    two=st.booleans(),
    hose=st.floats(0.0, 400.0),
)
def test_the_margin_stays_when_datum_or_place_moves(
    datum: float, place: str, two: bool, hose: float
) -> None:
    rule = MarginRule("percent", percent=0.1, reading="pressure scaled")
    make = two_supplies if two else project_of
    chain = Chain(hose_outside=hose, margin=rule, tests=(flow_test(),))
    here = make(chain)
    there = make(replace(chain, datum=datum, compare_at=place if two or place != "X" else "B"))
    first = compare(here, solved(here, 30 * PSI), supply_curves(here))
    second = compare(there, solved(there, 30 * PSI), supply_curves(there))
    # The solver stops within its own tolerance: 2 Pa is 0.0003 psi.
    assert second.margin == pytest.approx(first.margin, abs=2.0)
    assert second.required == pytest.approx(first.required, abs=2.0)


def test_every_source_has_its_lines_and_points_at_its_own_flow() -> None:
    """A check valve in the first lead-in keeps the second source from its test node."""
    project = two_supplies(Chain(compare_at="S"))
    pipes = tuple(
        replace(pipe, valve="check") if pipe.tag == "U" else pipe for pipe in project.system.pipes
    )
    project = replace(project, system=replace(project.system, pipes=pipes))
    solution, curves = solved(project, 30 * PSI), supply_curves(project)
    comparison = compare(project, solution, curves)
    graph = curve_points(project, solution, curves, comparison)
    # The gauge of T stands at 3 ft, node S at −5 ft, X elsewhere again: neither reading is shown as read.
    assert {line.name for line in graph.lines} == {"T, carried to S", "W, carried to X", "demand"}
    marked = {point.name: point for point in graph.points}
    for share in comparison.sources:
        available, demand = marked[f"available at {share.node}"], marked[f"demand at {share.node}"]
        assert available.flow == demand.flow == share.flow
        # The marker lies on the curve of its own source, within the solver's tolerance.
        assert available.pressure == pytest.approx(share.available, abs=1.0)
        assert available.pressure - demand.pressure == pytest.approx(comparison.margin, rel=1e-9)
    demand_line = next(line for line in graph.lines if line.style == "demand")
    assert demand_line.flows[-1] == comparison.main_source.flow


@pytest.mark.parametrize(
    ("gauge", "place", "named"),
    [(-5.0, "S", "T, as measured"), (3.0, "S", "T, carried to S"), (-5.0, "B", "T, carried to B")],
)
def test_a_reading_that_is_carried_says_so(gauge: float, place: str, named: str) -> None:
    """Node S stands at −5 ft, B at 1 ft behind a preventer; a foot of height is 0.433 psi."""
    project = project_of(Chain(tests=(flow_test(gauge=gauge),), compare_at=place))
    solution, curves = solved(project, 30 * PSI), supply_curves(project)
    graph = curve_points(project, solution, curves, compare(project, solution, curves))
    assert graph.lines[0].name == named
    static = next(point for point in graph.points if point.name.startswith("T static"))
    assert static.name.endswith("carried to " + place) == (named != "T, as measured")
    lifted = 82 - 0.433 * ((1.0 if place == "B" else -5.0) - gauge)
    assert static.pressure / PSI == pytest.approx(lifted, abs=0.01)


def test_no_route_passes_a_check_valve_backwards() -> None:
    valve = Device("backflow", "check valve", (0.0, 500 * GPM), (0.0, 9 * PSI), "maker")
    system = project_of(Chain(device=valve)).system
    assert [pipe.tag for pipe, _ in route(system, "S", "B")] == ["U"]
    with pytest.raises(DomainError, match="no open pipe leads"):
        route(system, "B", "S")
