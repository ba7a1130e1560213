"""Check valves, shut pipes, pressure-reducing valves, devices with a curve, pumps, heads that run dry."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from network_systems import K_METRIC, network, node, pipe, supply, system

from supplycheck.errors import NotConvergedError
from supplycheck.model import Device, System
from supplycheck.network import LoadCase, Solution, SourceCurve, solve_demand, solve_operating

K80 = 80 * K_METRIC
FIXED = [SourceCurve("S", 6e5)]


def prv(setting: float) -> Device:
    return Device("prv", "pressure-reducing valve", (), (), "", setting=setting)


def line(known: tuple[Device, ...] = (), **middle: object) -> System:
    """S –a– A –b– B, heads at A and B; ``middle`` are settings of pipe b."""
    return system(
        [node("S"), node("A", 3.0, K80), node("B", 3.0, K80)],
        [pipe("a", "S", "A", 20, 0.053), replace(pipe("b", "A", "B", 20, 0.0419), **middle)],  # type: ignore[arg-type]
        known,
    )


def behind(solution: Solution, tag: str) -> float:
    """Return the pressure [Pa] at the start of pipe ``tag``, behind what stands there."""
    row, end = solution.pipe_tags.index(tag), solution.node("B")
    return float(solution.pressure[end] + solution.friction[row] + solution.elevation_loss[row])


def test_check_valve_lets_flow_pass_and_holds_it_back() -> None:
    forward = network(line(valve="check"))
    plain = network(line())
    load = LoadCase(("A", "B"))
    assert solve_operating(forward, load, FIXED).pipe_flow == pytest.approx(
        solve_operating(plain, load, FIXED).pipe_flow, rel=1e-12
    )
    two = [SourceCurve("S", 4e5), SourceCurve("B", 6e5)]
    solution = solve_operating(forward, LoadCase(("A",)), two)
    row = solution.pipe_tags.index("b")
    assert solution.pipe_flow[row] == 0.0
    assert solution.device_loss[row] == pytest.approx(
        solution.pressure[solution.node("A")] - solution.pressure[solution.node("B")]
    )
    assert solution.device_loss[row] < 0
    assert any("closed" in note for note in solution.notes)
    assert solution.source_flow[1] == pytest.approx(0.0, abs=1e-15)


def test_check_valve_the_wrong_way_is_a_structure_error() -> None:
    made = network(line(start="B", end="A", valve="check"))
    with pytest.raises(NotConvergedError, match="one-way") as caught:
        solve_demand(made, LoadCase(("B",)), {"B": 1e5}, FIXED)
    assert caught.value.cause == "structure"
    assert caught.value.tags == ("B",)


def test_shut_pipe_takes_no_flow_and_cuts_off() -> None:
    made = network(line())
    solution = solve_operating(made, LoadCase(("A",), {}, ("b",)), FIXED)
    row = solution.pipe_tags.index("b")
    assert solution.pipe_flow[row] == 0.0
    assert np.isnan(solution.friction[row])
    assert np.isnan(solution.pressure[solution.node("B")])
    assert "b" in solution.notes[-1]
    with pytest.raises(NotConvergedError, match="not joined") as caught:
        solve_operating(made, LoadCase(("B",), {}, ("b",)), FIXED)
    assert caught.value.cause == "structure"


def test_reducing_valve_holds_its_setting() -> None:
    made = network(line((prv(2e5),), devices=("prv",)))
    solution = solve_operating(made, LoadCase(("A", "B")), FIXED)
    row = solution.pipe_tags.index("b")
    assert behind(solution, "b") == pytest.approx(2e5, abs=1e-3)
    assert solution.device_loss[row] > 0
    assert "holds" in solution.notes[0]


def test_reducing_valve_set_above_its_inlet_is_open_and_said_so() -> None:
    made, plain = network(line((prv(20e5),), devices=("prv",))), network(line())
    load = LoadCase(("A", "B"))
    solution = solve_operating(made, load, FIXED)
    assert solution.pipe_flow == pytest.approx(solve_operating(plain, load, FIXED).pipe_flow, rel=1e-9)
    assert "set above its inlet" in solution.notes[0]


def test_reducing_valve_shuts_against_a_stronger_supply() -> None:
    made = network(line((prv(2e5),), devices=("prv",)))
    solution = solve_operating(made, LoadCase(("A",)), [SourceCurve("S", 6e5), SourceCurve("B", 5e5)])
    assert solution.pipe_flow[1] == pytest.approx(0.0, abs=1e-12)
    assert "shut" in solution.notes[0]


def test_reducing_valve_at_a_dead_end_limits_the_pressure() -> None:
    made = network(line((prv(2e5),), devices=("prv",)))
    solution = solve_operating(made, LoadCase(("A",)), FIXED)
    assert solution.pressure[solution.node("B")] == pytest.approx(2e5, abs=1e-3)
    assert solution.pipe_flow[1] == pytest.approx(0.0, abs=1e-12)


def test_demand_behind_a_reducing_valve() -> None:
    made, plain = network(line((prv(3e5),), devices=("prv",))), network(line())
    load = LoadCase(("A", "B"))
    fed = solve_demand(made, load, {"A": 1e5, "B": 1e5}, FIXED)
    without = solve_demand(plain, load, {"A": 1e5, "B": 1e5}, FIXED)
    assert fed.source_pressure == pytest.approx(without.source_pressure, abs=1e-3)
    ahead = solve_demand(made, load, {"A": 5e5, "B": 1e5}, FIXED)
    assert ahead.governing == "A"
    assert behind(ahead, "b") == pytest.approx(3e5, abs=1e-3)


def test_demand_above_the_setting_is_an_input_error_that_names_the_valve() -> None:
    made = network(line((prv(1e5),), devices=("prv",)))
    with pytest.raises(NotConvergedError, match="set too low") as caught:
        solve_demand(made, LoadCase(("A", "B")), {"A": 1e5, "B": 2e5}, FIXED)
    assert caught.value.cause == "input"
    assert caught.value.tags == ("prv",)


def test_reducing_valve_stands_at_the_start_of_its_pipe() -> None:
    """Set to 3 bar at the foot of 20 m of riser: on top stands that less 20 m of water and friction."""
    levels = [node("S"), node("A", 0.0), node("B", 20.0, K80)]
    pipes = [pipe("a", "S", "A", 20, 0.053), replace(pipe("b", "A", "B", 30, 0.0419), devices=("prv",))]
    made = network(system(levels, pipes, (prv(3e5),)))
    solution = solve_operating(made, LoadCase(("B",)), FIXED)
    top = solution.pressure[solution.node("B")]
    assert top == pytest.approx(3e5 - 20 * made.fluid.unit_weight - solution.friction[1], abs=1e-3)
    assert solution.device_loss[1] == pytest.approx(solution.pressure[1] - 3e5, abs=1e-3)
    assert "holds" in solution.notes[0]
    shut = solve_operating(made, LoadCase(()), FIXED)
    assert shut.pressure[shut.node("B")] == pytest.approx(3e5 - 20 * made.fluid.unit_weight, abs=1e-3)


@pytest.mark.parametrize("order", [("bf", "prv"), ("prv", "bf"), ("high", "bf", "prv")])
def test_devices_beside_a_reducing_valve_keep_their_order(order: tuple[str, ...]) -> None:
    """What stands behind the valve takes its loss off the setting, what stands before it does not."""
    known = (
        prv(2e5),
        Device("bf", "loss", (0.0, 0.01), (3e4, 3e4), ""),
        Device("high", "pressure-reducing valve", (), (), "", setting=4e5),
    )
    made = network(line(known, devices=order))
    solution = solve_operating(made, LoadCase((), {"B": 0.002}), FIXED)
    after = 3e4 if order[-1] == "bf" else 0.0
    assert behind(solution, "b") == pytest.approx(2e5 - after, abs=1e-3)
    assert any("prv in pipe b holds" in note for note in solution.notes)


@pytest.mark.parametrize("setting", [1.5e5, 3e5, 4e5, 9e5])
def test_a_pump_before_a_reducing_valve_in_one_pipe_is_as_in_two(setting: float) -> None:
    """The supply alone is too weak for the heads: only with the pump's gain does the valve have to act."""
    pump = Device("boost", "pump", (0.0, 0.004, 0.008), (4e5, 3e5, 1e5), "")
    weak = [SourceCurve("S", 1e5)]
    levels = (node("A", 0.0), node("B", 20.0, K80))
    one = system(
        [node("S"), *levels],
        [
            replace(pipe("a", "S", "A", 5, 0.053), devices=("boost", "prv")),
            pipe("b", "A", "B", 25, 0.0419),
        ],
        (pump, prv(setting)),
    )
    two = system(
        [node("S"), node("M"), *levels],
        [
            replace(pipe("p", "S", "M", 0.0, 0.053), devices=("boost",)),
            replace(pipe("a", "M", "A", 5, 0.053), devices=("prv",)),
            pipe("b", "A", "B", 25, 0.0419),
        ],
        (pump, prv(setting)),
    )
    ours, expected = (solve_operating(network(made), LoadCase(("B",)), weak) for made in (one, two))
    assert ours.outflow[ours.node("B")] == pytest.approx(expected.outflow[expected.node("B")], rel=1e-6)
    assert ours.pressure[ours.node("A")] == pytest.approx(expected.pressure[expected.node("A")], abs=1.0)
    if setting > 2.2e5:  # 20 m of water are 1.96 bar
        assert ours.outflow[ours.node("B")] > 0
        need = {"B": 0.2e5}
        lowest = [solve_demand(network(made), LoadCase(("B",)), need, weak) for made in (one, two)]
        assert lowest[0].source_pressure == pytest.approx(lowest[1].source_pressure, abs=1.0)
        assert lowest[0].outflow[lowest[0].node("B")] == pytest.approx(K80 * 0.2e5**0.5, rel=1e-6)


def test_device_curve_is_exact_and_refused_beyond_its_range() -> None:
    curve = Device("bf", "loss", (0.0, 0.002, 0.004), (2e4, 3e4, 5e4), "")
    made = network(line((curve,), devices=("bf",)))
    inside = solve_operating(made, LoadCase((), {"B": 0.002}), FIXED)
    assert inside.device_loss[1] == pytest.approx(3e4, rel=1e-12)
    assert inside.out_of_range == ()
    edge = solve_operating(made, LoadCase((), {"B": 0.004}), FIXED)
    assert edge.device_loss[1] == pytest.approx(5e4, rel=1e-12)
    assert edge.out_of_range == ()
    beyond = solve_operating(made, LoadCase((), {"B": 0.005}), FIXED)
    assert beyond.out_of_range == (("b", "bf", pytest.approx(0.005)),)


def test_device_that_needs_less_at_more_flow_still_settles() -> None:
    """Loss curves of backflow preventers dip: high at a trickle, lowest at a middle flow."""
    dip = Device("bf", "loss", (0.0, 0.002, 0.01), (8e4, 5e4, 9e4), "", one_way=True)
    made = network(line((dip,), devices=("bf",)))
    solution = solve_demand(made, LoadCase(("A", "B")), {"A": 5e4, "B": 5e4}, FIXED)
    assert solution.energy_residual < 1e-3
    assert 5e4 <= solution.device_loss[1] <= 8e4


def test_fixed_loss_and_pump_in_closed_form() -> None:
    fixed = Device("fix", "loss", (0.0,), (3e4,), "")
    pump = Device("boost", "pump", (0.0, 0.004, 0.006), (4e5, 3e5, 1e5), "")
    for device, change in ((fixed, -3e4), (pump, 3e5)):
        made = network(line((device,), devices=(device.tag,)))
        solution = solve_operating(made, LoadCase((), {"B": 0.004}), FIXED)
        a, b = solution.pressure[solution.node("A")], solution.pressure[solution.node("B")]
        assert b - a == pytest.approx(change - solution.friction[1], rel=1e-12)


def test_pump_at_no_flow_gives_its_churn() -> None:
    pump = Device("boost", "pump", (0.0, 0.004), (4e5, 3e5), "")
    solution = solve_operating(
        network(line((pump,), devices=("boost",))), LoadCase((), {"A": 0.001}), FIXED
    )
    a, b = solution.pressure[solution.node("A")], solution.pressure[solution.node("B")]
    assert b - a == pytest.approx(4e5)


def test_heads_that_run_dry_discharge_nothing() -> None:
    made = network(
        system(
            [node("S"), node("A", 0.0, K80), node("B", 30.0, K80)],
            [pipe("a", "S", "A", 20, 0.053), pipe("b", "A", "B", 30, 0.0419)],
        )
    )
    solution = solve_operating(made, LoadCase(("A", "B")), [SourceCurve("S", 2e5)])
    assert solution.outflow[solution.node("B")] == 0.0
    assert solution.pipe_flow[1] == pytest.approx(0.0, abs=1e-13)
    assert any("run dry: B" in note for note in solution.notes)
    assert solution.outflow[solution.node("A")] == pytest.approx(
        K80 * solution.pressure[solution.node("A")] ** 0.5, rel=1e-9
    )


def test_everything_dry_is_a_state_too() -> None:
    made = network(line())
    solution = solve_operating(made, LoadCase(("A", "B")), [supply(static=1e4, residual=5e3)])
    assert not solution.outflow.any()
    assert solution.pressure[solution.node("A")] == pytest.approx(1e4 - 3 * made.fluid.unit_weight)
