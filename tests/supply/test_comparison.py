"""Demand against supply on a chain walked back by hand."""

from __future__ import annotations

import datetime as dt
from dataclasses import replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from supply_systems import UNIT_WEIGHT, Chain, flow_test, friction, solve

from supplycheck.errors import DomainError
from supplycheck.hydraulics import Curve
from supplycheck.model import Adjustment, Device, MarginRule, Outlet, TestPoint
from supplycheck.supply import Comparison, compare, curve_points, hose_loads
from supplycheck.supply.narration import pitot_steps
from supplycheck.units import FOOT, GPM, INCH, PSI, US


def compared(chain: Chain) -> Comparison:
    return compare(*solve(chain))


def test_every_number_by_hand() -> None:
    at_s = compared(Chain())
    # Demand at S: 30 psi at the head, riser, 27 ft from S to H, 260 gpm underground and backflow 9·260/500.
    loss = friction(260, 200, 6.16, 140) + friction(260, 60, 4.026, 120)
    demand = 30 * PSI + loss + 9 * PSI * 260 / 500 + UNIT_WEIGHT * 27 * FOOT
    assert at_s.demand_pressure == pytest.approx(demand, rel=1e-12)
    assert at_s.demand_flow == pytest.approx(510 * GPM)
    # Supply: gauge at 3 ft, node at −5 ft: 8 ft of water more at the node.
    available = (82 - 28 * (510 / 956) ** 1.85) * PSI + UNIT_WEIGHT * 8 * FOOT
    assert at_s.available_pressure == pytest.approx(available, rel=1e-12)
    assert at_s.margin == pytest.approx(available - demand, rel=1e-12)
    assert (at_s.required, at_s.after_rule) == (None, None)
    assert at_s.static == pytest.approx(82 * PSI + UNIT_WEIGHT * 8 * FOOT)


def test_hose_is_counted_once_and_where_it_joins() -> None:
    at_s = compared(Chain(hose_inside=50.0))
    assert at_s.sprinkler_flow == pytest.approx(260 * GPM)
    assert (at_s.hose_inside, at_s.hose_outside) == pytest.approx((50 * GPM, 250 * GPM))
    assert at_s.other_flow == pytest.approx(0.0, abs=1e-12)
    assert at_s.demand_flow == pytest.approx(560 * GPM)
    assert at_s.carried_flow == pytest.approx(560 * GPM)
    at_b = compared(Chain(hose_inside=50.0, compare_at="B"))
    assert at_b.demand_flow == pytest.approx(560 * GPM)
    assert at_b.carried_flow == pytest.approx(310 * GPM)  # the outside hose leaves upstream
    # Outside hose drawn behind the backflow costs pressure; at the main it does not.
    assert compared(Chain(outside_node="B")).margin < compared(Chain()).margin - 4 * PSI


def test_a_fixed_outflow_that_is_no_hose_is_other_flow() -> None:
    project, solution, curves = solve(Chain(hose_inside=50.0))
    project = replace(project, hose=replace(project.hose, inside=0.0))
    comparison = compare(project, solution, curves)
    assert comparison.other_flow == pytest.approx(50 * GPM)
    assert comparison.hose_flow == pytest.approx(250 * GPM)


def test_hose_loads_add_at_one_node() -> None:
    project, _, _ = solve(Chain(hose_inside=50.0, outside_node="B"))
    assert dict(hose_loads(project)) == pytest.approx({"B": 300 * GPM})
    lost = replace(project, hose=replace(project.hose, outside_node=None))
    with pytest.raises(DomainError, match="outside hose allowance joins at no known node"):
        hose_loads(lost)


RULES = [
    None,
    MarginRule("none"),
    MarginRule("fixed", pressure=5 * PSI),
    MarginRule("percent", percent=0.1, reading="static lowered"),
    MarginRule("percent", percent=0.1, reading="pressure scaled"),
    MarginRule("percent", percent=0.1, reading="flow scaled"),
    MarginRule(
        "larger of", parts=(MarginRule("of demand", percent=0.1), MarginRule("fixed", pressure=1.0))
    ),
    MarginRule("by test age", pressure=5 * PSI, free_years=0.0, per_year=PSI),
]


@settings(max_examples=40, deadline=None)
@given(
    rule=st.sampled_from(RULES),
    datum=st.floats(-500.0, 5000.0),
    place=st.sampled_from(["S", "B", "H"]),
    head=st.floats(50.0, 700.0),
    hose=st.floats(0.0, 500.0),
)
def test_the_margin_does_not_move_with_datum_or_point_of_comparison(
    rule: MarginRule | None, datum: float, place: str, head: float, hose: float
) -> None:
    chain = Chain(head_flow=head, hose_outside=hose, margin=rule, outside_node="B")
    first = compared(chain)
    moved = compared(replace(chain, datum=datum, compare_at=place))
    # 5000 ft of datum is 15 MPa of head with 1e-9 Pa in its last digit; 1e-3 Pa is far below any display.
    assert moved.margin == pytest.approx(first.margin, abs=1e-3)
    assert moved.required == (None if first.required is None else pytest.approx(first.required, abs=1e-3))
    assert moved.demand_flow == pytest.approx(first.demand_flow)
    assert moved.available_pressure - moved.demand_pressure == pytest.approx(first.margin, abs=1e-3)


@pytest.mark.parametrize("place", ["S", "B"])
def test_available_flow_lies_on_the_carried_curve(place: str) -> None:
    chain = Chain(compare_at=place)
    comparison = compared(chain)
    flow = comparison.available_flow
    assert flow is not None and flow > comparison.demand_flow
    assert comparison.carried.pressure_at(flow) == pytest.approx(comparison.demand_pressure, rel=1e-9)
    share = flow / (510 * GPM)
    supply = (82 - 28 * (flow / (956 * GPM)) ** 1.85) * PSI + UNIT_WEIGHT * 8 * FOOT
    if place == "B":
        supply -= friction(260 * share, 200, 6.16, 140) + 9 * PSI * 260 * share / 500
        supply -= UNIT_WEIGHT * 6 * FOOT
    assert supply == pytest.approx(comparison.demand_pressure, rel=1e-9)


def test_the_same_answer_with_more_demand_than_the_supply_has() -> None:
    short = compared(Chain(head_flow=600, head_pressure=60))
    assert short.margin < 0.0
    assert short.available_flow is not None and short.available_flow < short.demand_flow


def test_adjustments_count_in_their_order_and_are_kept() -> None:
    low = Adjustment("low supply", pressure=10 * PSI, reason="summer")
    cap = Adjustment("static cap", pressure=70 * PSI)
    tenth = Adjustment("percent", factor=0.9)
    plain = 82 - 28 * (510 / 956) ** 1.85
    height = UNIT_WEIGHT * 8 * FOOT
    one = compared(Chain(adjustments=(low, tenth)))
    assert one.available_pressure == pytest.approx((plain - 10) * 0.9 * PSI + height)
    two = compared(Chain(adjustments=(tenth, low)))
    assert two.available_pressure == pytest.approx((plain * 0.9 - 10) * PSI + height)
    assert one.unadjusted_pressure == pytest.approx(plain * PSI + height)
    three = compared(Chain(adjustments=(cap,)))
    assert three.available_pressure == pytest.approx(70 * PSI + height)
    assert three.static == pytest.approx(70 * PSI + height)
    assert three.highest_static == pytest.approx(82 * PSI + height)
    _, _, (supply,) = solve(Chain(adjustments=(low, cap, tenth)))
    assert [stage.adjustment for stage in supply.stages] == [None, low, cap, tenth]


def test_margin_before_and_after_the_rule_in_words_and_numbers() -> None:
    rule = MarginRule("percent", percent=0.1, reading="static lowered", source="county code")
    comparison = compared(Chain(margin=rule))
    assert comparison.required == pytest.approx(8.2 * PSI)  # of the static as read, 82 psi
    assert comparison.after_rule == pytest.approx(comparison.margin - 8.2 * PSI)
    assert comparison.rule.fill(US.text) == "the whole supply curve lowered by 10.0% of its static pressure"
    assert comparison.rule_source == "county code"
    texts = [step.formula.fill(US.text) for step in (*comparison.supply_steps, *comparison.margin_steps)]
    assert "82.0 psi − (82.0 psi − 54.0 psi) × (510.0 gpm / 956.0 gpm)^1.85" in texts
    assert "sprinklers 260.0 gpm + outside hose 250.0 gpm" in texts
    assert "10.0% × static 82.0 psi" in texts
    assert comparison.supply_steps[0].value == pytest.approx(comparison.demand_flow)
    assert comparison.supply_steps[-2].value == pytest.approx(comparison.available_pressure)
    scaled = comparison.supply_steps[-1]
    assert scaled.step == "Flow at the demand pressure" and scaled.value == comparison.available_flow
    assert "scaled alike" in scaled.note
    assert not [text for text in texts if "{" in text]
    assert comparison.margin_steps[0].value == comparison.margin
    assert comparison.margin_steps[-1].value == comparison.after_rule


def test_the_age_of_the_test_counts_to_submittal_or_to_the_project() -> None:
    rule = MarginRule("by test age", pressure=5 * PSI, free_years=5.0, per_year=PSI)
    old = (replace(flow_test(), date=dt.date(2019, 12, 1)),)
    assert compared(Chain(tests=old, margin=rule)).required == pytest.approx(6 * PSI)  # to 2026-11-20
    later = Chain(tests=old, margin=rule, submittal=dt.date(2027, 12, 2))
    assert compared(later).required == pytest.approx(8 * PSI)


def test_several_tests_of_one_main_give_the_lowest_at_each_flow() -> None:
    winter = flow_test("winter", 80, 70, 900)
    summer = flow_test("summer", 70, 65, 900)
    _, _, (supply,) = solve(Chain(tests=(winter, summer)))
    assert [curve.name for curve in supply.measured] == ["winter", "summer"]
    for flow in (0.0, 300.0, 900.0, 1500.0, 2500.0):
        lowest = min(curve.pressure_at(flow * GPM) for curve in supply.measured)
        assert supply.curve.pressure_at(flow * GPM) == pytest.approx(lowest, rel=1e-12)
    assert supply.curve.member_at(0.0) == "summer"
    assert supply.curve.member_at(2500 * GPM) == "winter"
    comparison = compared(Chain(tests=(winter, summer)))
    assert comparison.main_source.governing == "summer"
    assert any("2 flow tests" in note.fill(US.text) for note in comparison.notes)


def test_extrapolation_is_said() -> None:
    comparison = compared(Chain(head_flow=900.0))
    share = comparison.main_source
    assert share.extrapolated
    assert share.tested_ratio == pytest.approx(1150 / 956)
    assert any("beyond the tested 956.0 gpm" in note.fill(US.text) for note in comparison.notes)


def test_a_fixed_loss_stays_fixed_on_the_carried_curve() -> None:
    fixed = Device("backflow", "loss", (0.0,), (9 * PSI * 260 / 500,), "maker")
    follows, stays = compared(Chain(compare_at="B")), compared(Chain(compare_at="B", device=fixed))
    assert stays.margin == pytest.approx(follows.margin)
    assert stays.carried.pressure_at(0.0) < follows.carried.pressure_at(0.0) - 4 * PSI


def test_graph_points_lie_on_their_lines() -> None:
    chain = Chain(compare_at="B", adjustments=(Adjustment("low supply", pressure=5 * PSI),))
    project, solution, curves = solve(chain)
    comparison = compare(project, solution, curves)
    graph = curve_points(project, solution, curves, comparison)
    assert [line.style for line in graph.lines] == ["measured", "adjusted", "demand"]
    points = {point.style: point for point in graph.points}
    assert points["demand"].flow == pytest.approx(260 * GPM)
    assert points["demand with hose"].flow == pytest.approx(510 * GPM)
    available = points["available"]
    assert comparison.carried.pressure_at(available.flow) == pytest.approx(available.pressure)
    for line in graph.lines:
        assert len(line.flows) == len(line.pressures) >= 2
        assert list(line.flows) == sorted(line.flows)
        assert min(line.pressures) >= -1.0
    tested = [point for point in graph.points if point.style == "test"]
    assert [point.flow for point in tested] == [0.0, pytest.approx(956 * GPM)]
    for point in tested:
        assert comparison.carried_unadjusted.pressure_at(point.flow) == pytest.approx(point.pressure)
    demand = graph.lines[-1]
    # At no flow the demand line starts at the height of the governing head above B, 21 ft.
    assert demand.pressures[0] == pytest.approx(UNIT_WEIGHT * 21 * FOOT)
    assert graph.lines[0].extrapolated_from == pytest.approx(956 * GPM)


def test_a_pump_on_the_way_shows_as_supply_pump_and_both() -> None:
    flows, gains = (0.0, 500 * GPM, 750 * GPM), (70 * PSI, 50 * PSI, 32.5 * PSI)
    pump = Device("backflow", "pump", flows, gains, "maker")
    gain = float(Curve(flows, gains).at(260 * GPM)[0])
    project, solution, curves = solve(Chain(compare_at="B", device=pump), device_gain=gain)
    comparison = compare(project, solution, curves)
    graph = curve_points(project, solution, curves, comparison)
    assert [line.style for line in graph.lines] == ["measured", "pump", "combined", "demand"]
    measured, alone, combined = graph.lines[:3]
    # The pump ends at 750 gpm through it, when 260 of 510 gpm pass: beyond the reach of the graph.
    assert combined.flows[-1] == pytest.approx(min(750 / 260 * 510, 1.1 * 956) * GPM)
    assert alone.pressures[0] == pytest.approx(70 * PSI)
    assert combined.pressures[0] == pytest.approx(measured.pressures[0] + alone.pressures[0])
    height = UNIT_WEIGHT * 6 * FOOT
    assert comparison.static == pytest.approx((82 + 70) * PSI + UNIT_WEIGHT * 8 * FOOT - height)
    available = (82 - 28 * (510 / 956) ** 1.85) * PSI + UNIT_WEIGHT * 8 * FOOT
    available += gain - height - friction(260, 200, 6.16, 140)
    assert comparison.available_pressure == pytest.approx(available)


def test_only_a_demand_solution_can_be_compared() -> None:
    project, solution, curves = solve(Chain())
    with pytest.raises(DomainError, match="only a demand solution"):
        compare(project, replace(solution, shift=float("nan")), curves)
    with pytest.raises(DomainError, match="point of comparison X"):
        compare(replace(project, supply=replace(project.supply, compare_at="X")), solution, curves)


def test_flow_at_20_psi_is_read_at_the_gauge() -> None:
    """NFPA 291: Qr = Qf (hr/hf)^0.54 with the drops as read at the gauge, whatever the height of the node.

    82 psi static, 54 psi at 956 gpm: 956 × (62/28)^0.54 = 1469 gpm. The curve uses 1/1.85, the handbook
    0.54 (0.1 % apart in the exponent): 5e-4 covers (62/28)^(1/1.85 − 0.54) = 1.00043.
    """
    by_hand = 956 * (62 / 28) ** 0.54
    for gauge in (3.0, -5.0, 60.0):
        rated = compared(Chain(tests=(flow_test(gauge=gauge),))).flow_at_20_psi
        assert rated is not None and rated / GPM == pytest.approx(by_hand, rel=5e-4)
    adjusted = compared(Chain(adjustments=(Adjustment("low supply", pressure=10 * PSI),)))
    assert adjusted.flow_at_20_psi is not None and adjusted.adjusted_flow_at_20_psi is not None
    assert adjusted.flow_at_20_psi / GPM == pytest.approx(by_hand, rel=5e-4)
    assert adjusted.adjusted_flow_at_20_psi / GPM == pytest.approx(956 * (52 / 28) ** 0.54, rel=5e-4)
    poorer = flow_test("U", static=70.0, residual=45.0, flow=700.0, gauge=12.0)
    lower = compared(Chain(tests=(flow_test(), poorer))).flow_at_20_psi
    assert lower is not None and lower / GPM == pytest.approx(700 * (50 / 25) ** 0.54, rel=5e-4)


def test_the_pitot_law_is_told_with_its_numbers() -> None:
    """NFPA 291: Q = 29.84 c d² √p; 29.84 × 0.9 × 6.25 × √27 = 872.2 gpm, by hand to the last digit.

    In L/min, mm and bar its factor is 0.6668 (29.84 × 3.785412 / 25.4² / √0.0689476, by hand).
    """
    flow = 29.84 * 0.9 * 6.25 * 27**0.5
    outlet = Outlet(2.5 * INCH, 0.9, 27 * PSI, hydrant="C-12")
    pumper = Outlet(4.0 * INCH, 0.9, 10 * PSI, 0.83)
    both = flow + 29.84 * 0.9 * 16 * 10**0.5 * 0.83
    test = replace(flow_test(), points=(TestPoint(54 * PSI, both * GPM, (outlet, pumper)),))
    steps = {step.step: step for step in compared(Chain(tests=(test,))).supply_steps}
    first = steps["T: flow of outlet 1 of C-12"]
    assert first.formula.fill(US.text) == "29.84 × 0.900 × (2.500 in)² × √(27.0 psi)"
    assert first.value / GPM == pytest.approx(872.2, abs=0.05)
    second = steps["T: flow of outlet 2"]
    assert second.formula.fill(US.text) == "29.84 × 0.900 × (4.000 in)² × √(10.0 psi) × 0.830"
    assert steps["T: flow of the test"].value / GPM == pytest.approx(both, rel=1e-9)
    metric = pitot_steps(test, "metric")[0]
    assert metric.formula.template.startswith("0.6668 × ") and metric.value == first.value


def test_a_test_without_outlets_has_no_pitot_step_and_a_tank_no_rating() -> None:
    assert pitot_steps(flow_test(), "us") == ()
    titles = [step.step for step in compared(Chain()).supply_steps]
    assert "Flow of T at 20 psi (1.38 bar), as measured" in titles
    assert not [title for title in titles if title.endswith("adjusted")]
