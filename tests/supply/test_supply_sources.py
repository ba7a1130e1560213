"""Supply curves of a project, facts of a test, reduced outlets."""

from __future__ import annotations

import datetime as dt
from dataclasses import replace

import pytest
from supply_systems import UNIT_WEIGHT, Chain, flow_test, project_of

from supplycheck.errors import DomainError
from supplycheck.model import Adjustment, MarginRule, Outlet, Supply, Tank, TestPoint
from supplycheck.supply import (
    MarginCase,
    flow_test_facts,
    gauge_curve,
    reduce_outlets,
    required_margin,
    rule_words,
    source_curves,
    supply_curves,
)
from supplycheck.units import FOOT, GPM, INCH, PSI, US


def test_a_tank_is_its_water_above_the_node() -> None:
    project = project_of(Chain())
    tank = Tank("T1", "S", 95 * FOOT)
    (found,) = supply_curves(replace(project, supply=Supply((), (tank,), (), None, "S")))
    assert found.curve.static == pytest.approx(UNIT_WEIGHT * 100 * FOOT)  # node at −5 ft
    assert "gravity tank T1" in found.stages[0].words.fill(US.text)
    (source,) = source_curves([found])
    assert (source.node, source.resistance) == ("S", 0.0)


def test_faults_of_a_supply_are_named() -> None:
    project = project_of(Chain())
    tank = Tank("T1", "S", 95 * FOOT)

    def build(**changes: object) -> None:
        supply_curves(replace(project, supply=replace(project.supply, **changes)))  # type: ignore[arg-type]

    with pytest.raises(DomainError, match="tank T1 shares node S"):
        build(tanks=(tank,))
    with pytest.raises(DomainError, match="no flow test and no tank"):
        build(tests=())
    with pytest.raises(DomainError, match="no such node for a supply: Q"):
        build(tanks=(replace(tank, node="Q"),))
    with pytest.raises(DomainError, match="same tag"):
        build(tests=(flow_test(), flow_test()))
    with pytest.raises(DomainError, match="flow test bad: the residual"):
        build(tests=(flow_test("bad", 50, 60),))


def test_two_nodes_are_two_sources() -> None:
    project = project_of(Chain())
    other = replace(flow_test("second", 70, 50, 800), node="B")
    found = supply_curves(replace(project, supply=replace(project.supply, tests=(flow_test(), other))))
    assert [one.node for one in found] == ["S", "B"]


def test_readings_off_one_line_are_said_so() -> None:
    points = (TestPoint(75 * PSI, 400 * GPM), TestPoint(54 * PSI, 956 * GPM))
    straight = flow_test()
    bent = replace(straight, points=points)
    (on_line,) = supply_curves(project_of(Chain(tests=(straight,))))
    assert on_line.notes == ()
    (found,) = supply_curves(project_of(Chain(tests=(bent,))))
    # On the line 400 gpm leaves 82 − 28 (400/956)^1.85 = 76.4 psi, 1.4 psi above the reading.
    assert "up to 1.4 psi from the line" in found.notes[0].fill(US.text)
    close = replace(straight, points=(TestPoint(76 * PSI, 400 * GPM), points[1]))
    (near,) = supply_curves(project_of(Chain(tests=(close,))))
    assert near.notes == ()  # 0.4 psi: closer than a gauge is read


def test_outlets_add_up() -> None:
    small = Outlet(2.5 * INCH, 0.9, 14 * PSI)
    total, each = reduce_outlets([small, small])
    assert total == pytest.approx(2 * each[0].flow)
    # Doubling the diameter gives four times, four times the pitot twice the flow.
    (wide,) = reduce_outlets([replace(small, diameter=5 * INCH)])[1]
    (strong,) = reduce_outlets([replace(small, pitot=56 * PSI)])[1]
    assert wide.flow == pytest.approx(4 * each[0].flow)
    assert strong.flow == pytest.approx(2 * each[0].flow)
    (pumper,) = reduce_outlets([replace(small, pumper_factor=0.83)])[1]
    assert pumper.flow == pytest.approx(0.83 * pumper.before_factor)


@pytest.mark.parametrize(
    ("change", "problem"),
    [
        ({"pitot": 0.0}, "pitot reading"),
        ({"pitot": -1.0}, "pitot reading"),
        ({"diameter": 0.0}, "diameter"),
        ({"coefficient": 1.2}, "coefficient"),
        ({"pumper_factor": 83.0}, "pumper factor"),
        ({"pitot": float("nan")}, "pitot reading"),
    ],
)
def test_readings_out_of_range(change: dict[str, float], problem: str) -> None:
    with pytest.raises(DomainError, match=problem):
        reduce_outlets([replace(Outlet(2.5 * INCH, 0.9, 14 * PSI), **change)])


def test_no_outlet_is_no_test() -> None:
    with pytest.raises(DomainError, match="at least one flowing outlet"):
        reduce_outlets([])


def test_facts_of_a_test() -> None:
    outlets = (
        Outlet(2.5 * INCH, 0.9, 8 * PSI),
        Outlet(2.5 * INCH, 0.9, 31 * PSI),
        Outlet(4.5 * INCH, 0.9, 31 * PSI),
        Outlet(2.5 * INCH, 0.9, 10 * PSI),
    )
    test = replace(
        flow_test(static=80, residual=74, flow=1000),
        points=(TestPoint(74 * PSI, 1000 * GPM, outlets),),
        gauge_range=200 * PSI,
        gauge_accuracy=0.03,
        static_hydrant="H-12",
        flow_hydrant=" h-12",
        conducted_by="A. Person",
    )
    facts = flow_test_facts(test, dt.date(2027, 6, 1), 1500 * GPM)
    assert facts.drop == pytest.approx(6 * PSI)
    assert facts.drop_share == pytest.approx(0.075)
    assert [fact.state for fact in facts.pitots] == ["below", "above", "within", "within"]
    assert facts.pumper_outlets_without_factor == (outlets[2],)
    assert facts.same_hydrant
    # In service within 3 % of full scale: ±6 psi on a 200 psi gauge (published).
    assert facts.gauge_error == pytest.approx(6 * PSI)
    assert facts.age == 1.0
    assert facts.ratio == pytest.approx(1.5)
    assert "Who witnessed the test?" in facts.missing
    assert "Who conducted the test?" not in facts.missing


def test_values_of_a_model_have_no_witness_to_ask_for() -> None:
    assert flow_test_facts(replace(flow_test(), model=True), dt.date(2026, 6, 2)).missing == ()
    assert flow_test_facts(flow_test(), dt.date(2026, 6, 2)).missing != ()


def test_typed_texts_print_as_typed() -> None:
    odd = Adjustment("low supply", pressure=5 * PSI, reason="{pressure} <b>{x}</b>")
    (found,) = supply_curves(project_of(Chain(adjustments=(odd,))))
    words = found.stages[1].words.fill(US.text)
    assert words == "low supply: static and residual lowered by 5.0 psi ({pressure} <b>{x}</b>)"


FIXED = MarginRule("fixed", pressure=5 * PSI)
TENTH = MarginRule("percent", percent=0.1, reading="flow scaled")


@pytest.mark.parametrize(
    ("rule", "words"),
    [
        (None, "no margin rule is given"),
        (MarginRule("none"), "none: the available pressure need only reach the demand"),
        (FIXED, "at least 5.0 psi above the demand"),
        (TENTH, "every flow on the supply curve reduced by 10.0%"),
        (
            MarginRule("larger of", parts=(MarginRule("of demand", percent=0.05), FIXED)),
            "the larger of (5.0% of the demand pressure at the supply; at least 5.0 psi above the demand)",
        ),
        (
            MarginRule("by static", bands=((50 * PSI, FIXED), (float("inf"), TENTH))),
            "by the static pressure of the test (static below 50.0 psi: at least 5.0 psi above the demand; "
            "otherwise: every flow on the supply curve reduced by 10.0%)",
        ),
        (
            MarginRule("by test age", pressure=5 * PSI, free_years=5.0, per_year=PSI),
            "5.0 psi above the demand, and 1.0 psi more for each full year of test age beyond 5.00 years",
        ),
    ],
)
def test_rules_in_words(rule: MarginRule | None, words: str) -> None:
    assert rule_words(rule).fill(US.text) == words


@pytest.mark.parametrize(
    ("rule", "problem"),
    [
        (MarginRule("percent", percent=0.1), "how it is read"),
        (MarginRule("percent", percent=1.0, reading="flow scaled"), "between 0 and 100 %"),
        (MarginRule("larger of"), "needs its parts"),
        (MarginRule("by static", bands=((10 * PSI, FIXED),)), "stop below the static"),
    ],
)
def test_rules_without_their_numbers(rule: MarginRule, problem: str) -> None:
    curve = gauge_curve(flow_test())
    case = MarginCase(curve, 700 * GPM, 50 * PSI, curve.static, dt.date(2026, 1, 1), dt.date(2026, 2, 1))
    with pytest.raises(DomainError, match=problem):
        required_margin(rule, case)


def test_a_rule_by_age_needs_a_test() -> None:
    rule = MarginRule("by test age", pressure=5 * PSI, free_years=5.0, per_year=PSI)
    case = MarginCase(gauge_curve(flow_test()), 700 * GPM, 50 * PSI, 82 * PSI, None, dt.date(2026, 2, 1))
    with pytest.raises(DomainError, match="needs a flow test"):
        required_margin(rule, case)
