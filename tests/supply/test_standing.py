"""Pressures without flow and curves on both sides of no flow, each by hand."""

from __future__ import annotations

from dataclasses import replace

import pytest
from supply_systems import UNIT_WEIGHT, Chain, flow_test, project_of, solve

from supplycheck.model import Device, Pipe, System
from supplycheck.supply import compare, curve_through
from supplycheck.supply.point import start_of
from supplycheck.supply.route import holding_pipes
from supplycheck.supply.standing import standing_pressures
from supplycheck.supply.states import States
from supplycheck.units import FOOT, GPM, PSI

FLOWS = (0.0, 500 * GPM)


def with_device(kind: str, values: tuple[float, ...], **more: float) -> System:
    """S (−5 ft) – device – B (1 ft) – H (22 ft)."""
    device = Device("backflow", kind, FLOWS, values, "maker", **more)  # type: ignore[arg-type]
    return project_of(Chain(device=device)).system


def at(height: float) -> float:
    """Weight of water [Pa] from S up to ``height`` [ft]."""
    return UNIT_WEIGHT * (height + 5) * FOOT


def test_a_loss_counts_nothing_and_height_counts() -> None:
    found = standing_pressures(with_device("loss", (5 * PSI, 9 * PSI)), {"S": 80 * PSI}, UNIT_WEIGHT)
    assert found["B"] == pytest.approx(80 * PSI - at(1))
    assert found["H"] == pytest.approx(80 * PSI - at(22))


def test_a_pump_adds_its_churn_once_even_round_an_open_bypass() -> None:
    system = with_device("pump", (70 * PSI, 50 * PSI))
    first = system.pipes[0]
    bypass = replace(first, tag="BY", devices=())
    found = standing_pressures(replace(system, pipes=(*system.pipes, bypass)), {"S": 80 * PSI}, UNIT_WEIGHT)
    assert found["B"] == pytest.approx(150 * PSI - at(1))
    assert found["S"] == pytest.approx(80 * PSI)


def test_a_regulating_valve_holds_its_setting_at_the_start_of_its_pipe() -> None:
    system = with_device("pressure-reducing valve", (PSI, 2 * PSI), setting=60 * PSI)
    found = standing_pressures(system, {"S": 80 * PSI}, UNIT_WEIGHT)
    assert found["B"] == pytest.approx(60 * PSI - at(1))
    low = standing_pressures(system, {"S": 40 * PSI}, UNIT_WEIGHT)
    assert low["B"] == pytest.approx(40 * PSI - at(1))


def test_nothing_passes_a_one_way_pipe_backwards_and_the_strongest_stands_behind_it() -> None:
    system = with_device("check valve", (PSI, 2 * PSI))
    both = standing_pressures(system, {"S": 80 * PSI, "H": 90 * PSI}, UNIT_WEIGHT)
    assert both["S"] == pytest.approx(80 * PSI)
    assert both["B"] == pytest.approx(90 * PSI + at(22) - at(1))
    behind = standing_pressures(system, {"B": 50 * PSI}, UNIT_WEIGHT)
    assert "S" not in behind


def test_closed_pipes_and_pipes_shut_in_a_case_are_not_passed() -> None:
    system = with_device("loss", (0.0, PSI))
    assert set(standing_pressures(system, {"S": PSI}, UNIT_WEIGHT, ("R",))) == {"S", "B"}
    shut = tuple(replace(pipe, valve="closed") for pipe in system.pipes)
    assert set(standing_pressures(replace(system, pipes=shut), {"S": PSI}, UNIT_WEIGHT)) == {"S"}


def test_a_curve_rises_above_static_as_it_falls_below_it() -> None:
    """82 psi static, 54 psi at 956 gpm: 28 psi above static where 956 gpm run in."""
    curve = curve_through("T", "S", 82 * PSI, [(956 * GPM, 54 * PSI)])
    assert curve.either_way(-956 * GPM) == pytest.approx(110 * PSI)
    assert curve.either_way(956 * GPM) == pytest.approx(54 * PSI)
    assert curve.either_way(0.0) == pytest.approx(82 * PSI)


def test_the_source_at_the_point_comes_first_then_the_one_that_gives_most() -> None:
    project, solution, _ = solve(Chain())
    pipe = Pipe("V", "X", "B", 10.0, 0.1, "4", "main", 140.0, None, valve="check")
    nodes = (*project.system.nodes, replace(project.system.nodes[0], tag="X"))
    system = replace(project.system, nodes=nodes, pipes=(*project.system.pipes, pipe))
    names = {"pipe_tags": (*solution.pipe_tags, "V"), "node_tags": (*solution.node_tags, "X")}
    wider = replace(
        solution,
        **names,  # type: ignore[arg-type]
        pipe_flow=_and(solution.pipe_flow, 1e-3),
        friction=_and(solution.friction, 0.0),
        device_loss=_and(solution.device_loss, 0.0),
    )
    assert holding_pipes(system, wider) == set()
    assert start_of(system, wider, {"S": 1.0, "X": 2.0}, "B") == "X"
    assert start_of(system, wider, {"S": 1.0, "X": 2.0}, "S") == "S"
    assert start_of(system, wider, {"S": 1.0, "X": 2.0}, "X") == "X"


def _and(values, more: float):  # type: ignore[no-untyped-def]
    import numpy as np

    return np.append(values, more)


@pytest.mark.parametrize("place", ["S", "B", "H"])
def test_the_solved_state_shows_what_the_sum_along_the_route_gives(place: str) -> None:
    """One source, no valve that holds a pressure: both ways lead to the same figures."""
    project, solution, curves = solve(Chain(compare_at=place, hose_inside=50.0, tests=(flow_test(),)))
    comparison = compare(project, solution, curves)
    states = States.of(project, solution, curves, None)
    assert states.pressure() == pytest.approx(comparison.available_pressure, abs=1.0)
    flow, sure = states.flow_at(comparison.demand_pressure, comparison.static)
    assert sure and flow == pytest.approx(comparison.available_flow, rel=1e-6)
    assert states.shown(states.at_rest()) == pytest.approx(comparison.static, abs=1.0)
