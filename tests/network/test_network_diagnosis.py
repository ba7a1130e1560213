"""What cannot be solved is diagnosed with cause, tags and remedy; what looks hard is solved."""

from __future__ import annotations

import numpy as np
import pytest
from network_systems import K_METRIC, network, node, pipe, supply, system

from supplycheck.errors import NotConvergedError
from supplycheck.model import Device
from supplycheck.network import LoadCase, SourceCurve, solve_demand, solve_operating
from supplycheck.units import PSI

K80 = 80 * K_METRIC


def ring(bore: float = 0.05, length: float = 10.0, *, near: float = 0.05):  # type: ignore[no-untyped-def]
    """S – A, then a ring A B C D."""
    nodes = [node("S"), *(node(tag, 2.0, K80) for tag in "ABCD")]
    pipes = [pipe("s", "S", "A", 10, 0.1)]
    for a, b in zip("ABCD", "BCDA", strict=True):
        pipes.append(pipe(a + b, a, b, length, bore if a != "C" else near))
    return system(nodes, pipes)


def test_floating_loop_without_supply_is_named() -> None:
    loop = [pipe("xy", "X", "Y", 5, 0.05), pipe("yz", "Y", "Z", 5, 0.05), pipe("zx", "Z", "X", 5, 0.05)]
    made = ring()
    floating = network(
        system([*made.nodes, node("X"), node("Y", 0.0, K80), node("Z")], [*made.pipes, *loop])
    )
    with pytest.raises(NotConvergedError, match="no supply") as caught:
        solve_operating(floating, LoadCase(("A",)), [supply()])
    assert caught.value.cause == "structure"
    assert set(caught.value.tags) == {"X", "Y", "Z"}
    with pytest.raises(NotConvergedError, match="not joined") as caught:
        solve_demand(floating, LoadCase(("Y",)), {"Y": 1e5}, [supply()])
    assert caught.value.tags == ("Y",)


def test_two_fixed_pressures_joined_by_nothing_are_named() -> None:
    made = ring()
    short = network(system(made.nodes, [*made.pipes, pipe("0", "S", "C", 0.0, 0.1)]))
    with pytest.raises(NotConvergedError, match="no length") as caught:
        solve_operating(short, LoadCase(("B",)), [SourceCurve("S", 5e5), SourceCurve("C", 4e5)])
    assert caught.value.cause == "input"
    assert set(caught.value.tags) == {"S", "C"}


def test_supplies_are_checked() -> None:
    made = network(ring())
    with pytest.raises(NotConvergedError, match="no supply"):
        solve_operating(made, LoadCase(("A",)), [])
    with pytest.raises(NotConvergedError, match="do not exist"):
        solve_operating(made, LoadCase(("A",)), [supply("nowhere")])
    with pytest.raises(NotConvergedError, match="two supplies"):
        solve_operating(made, LoadCase(("A",)), [supply("S"), supply("S")])


def test_demand_met_by_a_pump_alone_is_said_to_have_no_lowest_supply() -> None:
    """A requirement that no fall of the supply can break: water is drawn through a fixed outflow only."""
    made = network(
        system(
            [node("S"), node("A"), node("T"), node("B")],
            [
                pipe("a", "S", "A", 10, 0.05),
                pipe("b", "T", "B", 10, 0.05),
                pipe("c", "A", "B", 5, 0.05, valve="check"),
            ],
        )
    )
    solution = solve_demand(
        made, LoadCase((), {"B": 0.01}), {"B": 2e5}, [supply("S"), SourceCurve("T", 5e5)]
    )
    assert solution.shift < 4e5


@pytest.mark.parametrize("ratio", [1e-6, 1e-3, 1e3, 1e6])
def test_stiff_resistances(ratio: float) -> None:
    bore = 0.05 * ratio ** (-1 / 4.87)
    made = network(ring(near=bore))
    solution = solve_demand(made, LoadCase(tuple("BCD")), dict.fromkeys("BCD", 1e5), [supply()])
    assert solution.mass_residual <= 1e-9 * solution.source_flow[0]
    assert solution.energy_residual <= 1e-6 * PSI


def test_nearly_closed_loop_and_pipes_without_flow() -> None:
    """A ring whose two ways to C are equal: the far pipe carries almost nothing."""
    for law in ("hazen-williams", "darcy"):
        nodes = [node("S"), *(node(tag, 0.0, K80) for tag in "ABCDEF")]
        ends = ["SA", "AB", "BC", "CF", "AD", "DE", "EF", "BD"]
        made = network(system(nodes, [pipe(e, e[0], e[1], 10, 0.05) for e in ends]), law)
        solution = solve_demand(made, LoadCase(("F",)), {"F": 1e5}, [supply()])
        bridge = solution.pipe_flow[solution.pipe_tags.index("BD")]
        assert bridge == pytest.approx(0.0, abs=1e-12)
        assert solution.energy_residual <= 1e-6 * PSI


def test_pipe_of_no_length_joins_two_nodes_to_one_pressure() -> None:
    made = ring()
    zero = network(
        system([*made.nodes, node("E", 2.0, K80)], [*made.pipes, pipe("0", "C", "E", 0.0, 0.05)])
    )
    solution = solve_demand(zero, LoadCase(("E",)), {"E": 1e5}, [supply()])
    c, e = solution.pressure[solution.node("C")], solution.pressure[solution.node("E")]
    assert c - e == pytest.approx(0.0, abs=1e-3)
    assert solution.source_flow[0] == pytest.approx(K80 * 1e5**0.5)


def test_damped_and_bracketed_way_gives_the_same(monkeypatch: pytest.MonkeyPatch) -> None:
    from supplycheck.network import find

    made = network(ring())
    load, required = LoadCase(tuple("BCD")), dict.fromkeys("BCD", 1e5)
    quick = solve_demand(made, load, required, [supply()])
    monkeypatch.setattr(find, "FAST_LIMIT", 0)
    sure = solve_demand(made, load, required, [supply()])
    assert sure.source_pressure == pytest.approx(quick.source_pressure, abs=1e-4)
    assert sure.pipe_flow == pytest.approx(quick.pipe_flow, abs=1e-10)


def test_failure_names_pipes(monkeypatch: pytest.MonkeyPatch) -> None:
    from supplycheck.network import find

    monkeypatch.setattr(find, "FAST_LIMIT", 0)
    monkeypatch.setattr(find, "SURE_LIMIT", 1)
    with pytest.raises(NotConvergedError, match="did not settle") as caught:
        solve_operating(network(ring()), LoadCase(tuple("BCD")), [supply()])
    assert caught.value.cause == "numbers"
    assert caught.value.tags
    assert "bore" in caught.value.remedy


def test_pump_beyond_its_curve_is_listed() -> None:
    pump = Device("boost", "pump", (0.0, 0.002), (2e5, 1e5), "")
    made = ring()
    pipes = [pipe("s", "S", "A", 10, 0.1, devices=("boost",)), *made.pipes[1:]]
    solution = solve_operating(
        network(system(made.nodes, pipes, [pump])), LoadCase(tuple("ABCD")), [supply()]
    )
    assert solution.out_of_range[0][:2] == ("s", "boost")
    assert solution.out_of_range[0][2] > 0.002
    assert np.isfinite(solution.pressure).all()
