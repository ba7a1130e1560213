"""One-pipe problems: round trips, balance, monotone answers, no solution, what may be asked."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from supplycheck.errors import DomainError, NoSolutionError
from supplycheck.hydraulics import (
    ConstantFactor,
    DarcyWeisbach,
    HazenWilliams,
    OnePipe,
    OnePipeResult,
    PipeLaw,
    solve_one_pipe,
)
from supplycheck.model import HW_METRIC, HW_US

US = HazenWilliams(120.0, HW_US.coefficient, HW_US.flow_exponent, HW_US.bore_exponent)
METRIC = HazenWilliams(140.0, HW_METRIC.coefficient, HW_METRIC.flow_exponent, HW_METRIC.bore_exponent)
PIPE = OnePipe(law=US, length=50.0, density=998.2, unit_weight=9789.0, viscosity=1.002e-3)

LAWS = st.one_of(
    st.just(US),
    st.just(METRIC),
    st.builds(DarcyWeisbach, st.one_of(st.just(0.0), st.floats(1e-6, 5e-4))),
    st.builds(ConstantFactor, st.floats(0.005, 0.1)),
)
# 0.01 mL/s to 1 m³/s in 10 to 500 mm: creeping through turbulent, Re 0.025 to 1e8
FLOWS = st.floats(-5, 0).map(lambda power: 10.0**power)
BORES = st.floats(0.01, 0.5)


def balance(result: OnePipeResult) -> float:
    """Return what is left of the balance of energy over its largest term."""
    terms = (result.loss, result.elevation, result.kinetic, -result.drop, -result.pump_pressure)
    return sum(terms) / max(abs(term) for term in terms)


@given(LAWS, FLOWS, BORES, st.floats(0, 1000), st.floats(0, 50))
def test_loss_then_flow_then_diameter(
    law: PipeLaw, flow: float, bore: float, length: float, minor_k: float
) -> None:
    assume(length > 0.1 or minor_k > 0.01)
    known = replace(PIPE, law=law, length=length, minor_k=minor_k)
    loss = solve_one_pipe(replace(known, flow=flow, bore=bore)).loss
    assume(loss > 1e-12)
    # the search stops at the last digits of flow or bore; loss is a power 1 to 5 of them
    assert solve_one_pipe(replace(known, bore=bore, loss=loss)).flow == pytest.approx(flow, rel=1e-9)
    assert solve_one_pipe(replace(known, flow=flow, loss=loss)).bore == pytest.approx(bore, rel=1e-9)


@given(LAWS, FLOWS, BORES, st.floats(-30, 30), st.sampled_from(["pipe", "reservoir", "jet"]))
def test_every_answer_balances(law: PipeLaw, flow: float, bore: float, rise: float, end: str) -> None:
    start = "pipe" if end == "pipe" else "reservoir"
    known = replace(PIPE, law=law, rise=rise, end=end, start=start, minor_k=1.5, pump_pressure=2e4)
    loss = solve_one_pipe(replace(known, flow=flow, bore=bore))
    assert abs(balance(loss)) < 1e-12
    assert loss.loss == pytest.approx(loss.pipe_loss + loss.minor_loss, rel=1e-14)
    back = solve_one_pipe(replace(known, bore=bore, drop=loss.drop))
    assert abs(balance(back)) < 1e-9
    # where lift or pump dwarf the loss, the drop holds the flow only to what its digits leave
    assert back.loss + back.kinetic == pytest.approx(
        loss.loss + loss.kinetic, rel=1e-9, abs=1e-12 * (abs(loss.elevation) + 2e4)
    )


@given(LAWS, BORES, st.floats(-2, 6), st.floats(0.01, 3))
def test_more_pressure_more_flow(law: PipeLaw, bore: float, power: float, more: float) -> None:
    known = replace(PIPE, law=law, bore=bore)
    loss = 10.0**power
    less = solve_one_pipe(replace(known, loss=loss)).flow
    assert solve_one_pipe(replace(known, loss=loss * (1 + more))).flow > less
    assert solve_one_pipe(replace(known, bore=bore * (1 + more), loss=loss)).flow > less


@pytest.mark.parametrize("reynolds", [1999.999, 2000.0, 2000.001, 2500.0, 3999.0, 4000.0, 4001.0])
@pytest.mark.parametrize("rough", [0.0, 0.05])
def test_transition_does_not_break_the_search(reynolds: float, rough: float) -> None:
    bore = 0.05
    flow = reynolds * math.pi * bore * 1.002e-3 / (4 * 998.2)
    known = replace(PIPE, law=DarcyWeisbach(rough * bore))
    there = solve_one_pipe(replace(known, flow=flow, bore=bore))
    back = solve_one_pipe(replace(known, bore=bore, loss=there.loss))
    assert back.flow == pytest.approx(flow, rel=1e-9)
    assert solve_one_pipe(replace(known, flow=flow, loss=there.loss)).bore == pytest.approx(bore, rel=1e-9)
    assert any("uncertain" in remark for remark in back.remarks) is (2000 < back.reynolds < 4000)


@pytest.mark.parametrize("loss", [1e-9, 1e-3, 1.0, 1e9])
def test_any_loss_has_a_flow_and_a_diameter(loss: float) -> None:
    known = replace(PIPE, law=DarcyWeisbach(1e-5))
    assert solve_one_pipe(replace(known, bore=0.1, loss=loss)).loss == pytest.approx(loss, rel=1e-9)
    assert solve_one_pipe(replace(known, flow=0.01, loss=loss)).loss == pytest.approx(loss, rel=1e-9)


def test_steps_are_kept() -> None:
    result = solve_one_pipe(replace(PIPE, bore=0.05, loss=2e4))
    phases = [step.phase for step in result.steps]
    assert phases == sorted(phases) and set(phases) == {"enclose", "narrow"}
    trials = [step.trial for step in result.steps]
    assert len(set(trials)) == len(trials)
    low = max(step.trial for step in result.steps if step.imbalance < -1e-3)
    high = min(step.trial for step in result.steps if step.imbalance > 1e-3)
    assert low < result.flow < high
    assert solve_one_pipe(replace(PIPE, bore=0.05, flow=0.01)).steps == ()


def test_jet_carries_its_velocity_away() -> None:
    # Torricelli: without friction v = √(2·g·h), here with a next to nothing of a pipe
    result = solve_one_pipe(
        OnePipe(
            law=ConstantFactor(1e-12),
            length=1.0,
            density=1000.0,
            unit_weight=9806.65,
            bore=0.1,
            drop=0.0,
            rise=-10.0,
            start="reservoir",
            end="jet",
        )
    )
    assert result.velocity == pytest.approx(math.sqrt(2 * 9.80665 * 10), rel=1e-9)
    assert result.reynolds is None and result.regime is None


def test_pump_by_power_always_finds_a_flow() -> None:
    # lifting 20 m into a still reservoir with 5 kW at 70 %: q·(lift + losses) = 3.5 kW
    known = replace(PIPE, bore=0.1, drop=0.0, rise=20.0, pump_power=5e3, efficiency=0.7)
    result = solve_one_pipe(replace(known, start="reservoir", end="reservoir", minor_k=1.5))
    assert result.flow * result.pump_pressure == pytest.approx(3500, rel=1e-9)
    assert result.pump_pressure == pytest.approx(result.elevation + result.loss, rel=1e-9)
    assert result.pump_power == pytest.approx(5e3, rel=1e-12)


def test_pump_is_found() -> None:
    result = solve_one_pipe(replace(PIPE, bore=0.1, flow=0.02, drop=0.0, rise=30.0, efficiency=0.5))
    assert result.found == "pump"
    assert result.pump_pressure == pytest.approx(result.loss + 30 * 9789.0, rel=1e-14)
    assert result.pump_power == pytest.approx(result.pump_pressure * 0.02 / 0.5, rel=1e-14)


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"bore": 0.1, "drop": 0.0, "rise": 1.0}, "nothing drives the flow"),
        ({"bore": 0.1, "drop": 5e4, "rise": 10.0, "pump_pressure": 1e4}, "nothing drives the flow"),
        ({"flow": 0.01, "drop": 0.0, "rise": 0.0}, "no diameter is large enough"),
        ({"bore": 0.1, "loss": 0.0}, "not above zero"),
        ({"flow": 0.01, "loss": -1.0}, "not above zero"),
        ({"flow": 1e-12, "loss": 1e14}, "no diameter is small enough"),
        ({"bore": 0.1, "flow": 0.01, "drop": 9e5}, "no pump is needed"),
        ({"flow": 1e-3, "loss": 1e4, "law": DarcyWeisbach(5.0)}, "no diameter is small enough"),
    ],
)
def test_no_solution_says_why(changes: dict[str, object], words: str) -> None:
    with pytest.raises(NoSolutionError, match=words):
        solve_one_pipe(replace(PIPE, **changes))


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({}, "both flow and diameter are missing"),
        ({"flow": 0.01}, "to find the diameter, give the loss or the pressures"),
        ({"bore": 0.1}, "to find the flow, give the loss or the pressures"),
        ({"bore": 0.1, "loss": 1e4, "drop": 1e4}, "not both"),
        ({"bore": 0.1, "flow": 0.01, "loss": 1e4}, "nothing is left to find"),
        ({"bore": 0.1, "flow": 0.01, "drop": 1e4, "pump_pressure": 1e4}, "nothing is left to find"),
        ({"bore": 0.1, "loss": 1e4, "length": 0.0}, "nothing resists the flow"),
        ({"bore": 0.1, "loss": 1e4, "length": -1.0}, "length must be 0 m or more"),
        ({"bore": 0.1, "flow": -0.01}, "flow must be above 0"),
        ({"bore": math.nan, "flow": 0.01}, "bore must be above 0"),
        ({"bore": 1e-60, "flow": 0.01}, "bore must be from 1e-05 to 1000 m; found 1e-60 m"),
        ({"bore": 0.1, "flow": 1e-60}, "flow must be from"),
        ({"bore": 0.1, "flow": 0.01, "viscosity": 1e-300}, "viscosity must be from"),
        ({"bore": 0.1, "drop": math.inf}, "pressure drop must be from"),
        ({"bore": 0.1, "loss": math.nan}, "loss must be from"),
        ({"bore": 0.1, "flow": 0.01, "pump_pressure": -5.0}, "pump pressure must be 0 Pa or more"),
        ({"bore": 0.1, "loss": 1e4, "law": DarcyWeisbach(1e-5), "viscosity": None}, "needs the viscosity"),
        ({"bore": 0.1, "loss": 1e4, "pump_power": 1e3}, "needs an efficiency"),
        (
            {"bore": 0.1, "loss": 1e4, "pump_power": 1e3, "pump_pressure": 1e4, "efficiency": 1},
            "not both",
        ),
        ({"bore": 0.1, "flow": 0.01, "end": "reservoir"}, "include the exit"),
        ({"bore": 0.1, "flow": 0.01, "efficiency": 1.5}, "efficiency"),
    ],
)
def test_refused_with_a_reason(changes: dict[str, object], words: str) -> None:
    with pytest.raises(DomainError, match=words):
        solve_one_pipe(replace(PIPE, **changes))


@pytest.mark.parametrize("number", [0.0, -1.0, 1e-300, 1e300, math.nan])
def test_coefficients_are_checked_when_the_law_is_made(number: float) -> None:
    with pytest.raises(DomainError, match="C-factor"):
        HazenWilliams(number, HW_US.coefficient, HW_US.flow_exponent, HW_US.bore_exponent)
    with pytest.raises(DomainError, match="friction factor"):
        ConstantFactor(number)
    if number != 0.0 and number != 1e-300:
        with pytest.raises(DomainError, match="roughness"):
            DarcyWeisbach(number)


def test_remarks() -> None:
    slow = solve_one_pipe(replace(PIPE, bore=0.1, flow=1e-5))
    assert any("not turbulent" in remark for remark in slow.remarks)
    rough = solve_one_pipe(replace(PIPE, law=DarcyWeisbach(0.01), bore=0.1, flow=0.01))
    assert any("0.05" in remark for remark in rough.remarks)
    open_end = solve_one_pipe(replace(PIPE, bore=0.1, flow=0.01, start="reservoir", end="reservoir"))
    assert any("exit" in remark for remark in open_end.remarks)
    syrup = solve_one_pipe(replace(PIPE, bore=0.1, flow=0.05, viscosity=0.02))
    assert any("holds for water" in remark for remark in syrup.remarks)
    assert solve_one_pipe(replace(PIPE, bore=0.1, flow=0.01)).remarks == ()
