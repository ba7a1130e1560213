"""The registry: order, open questions, page; and the rules against published figures."""

from __future__ import annotations

import datetime as dt
import math
from dataclasses import replace
from pathlib import Path

import pytest
from check_factory import QUICK, array_with, built

from supplycheck.checks import RULES, in_display_order, open_questions, run_checks
from supplycheck.checks.area import quick_response, shape
from supplycheck.checks.flow_test_common import last_day
from supplycheck.checks.heads import density, minimum
from supplycheck.checks.limits import published_pumper_factor
from supplycheck.checks.page import findings_page
from supplycheck.checks.pipes import nominal_size
from supplycheck.findings import Finding
from supplycheck.units import FOOT, INCH, PSI

PAGE = Path(__file__).parents[2] / "docs" / "findings.md"


def test_page_is_made_from_the_registry() -> None:
    assert PAGE.read_text(encoding="utf-8") == findings_page(), "write findings_page() to docs/findings.md"


def test_rules_are_named_once_and_say_their_source() -> None:
    names = [rule.about.name for rule in RULES]
    assert len(set(names)) == len(names)
    for rule in RULES:
        assert rule.about.source and rule.about.looks_at and rule.about.states
        assert len(set(rule.about.states)) == len(rule.about.states)
        assert "|" not in rule.about.source + rule.about.looks_at


def test_every_rule_is_run_and_says_what_it_found() -> None:
    found = run_checks(built({}))
    assert sorted(one.check for one in found) == sorted(rule.about.name for rule in RULES)


def test_display_order_puts_what_needs_action_first() -> None:
    context = built(
        {
            "comparison.margin": -PSI,
            "project.supply.submittal_date": None,
            "searched": False,
            "project.supply.tests.0.time": "",
        }
    )
    states = [one.state for one in run_checks(context)]
    order = ["fail", "ask authority", "missing", "ok", "not applicable"]
    assert states == sorted(states, key=order.index)
    assert states[0] == "fail" and "missing" in states
    missing = [one.check for one in run_checks(context) if one.state == "missing"]
    assert missing == ["test age", "time of day of the test"]


def test_open_questions_are_precise_and_weighty_first() -> None:
    context = built(
        {
            "project.supply.tests.0.time": "",
            "project.supply.margin": None,
            "comparison.required": None,
            "project.supply.adjustments": (),
        }
    )
    asked = open_questions(run_checks(context))
    assert asked[0].startswith("Does ") and asked[0].endswith("cover this occupancy: sorting of parcels?")
    assert "margin" in asked[1]
    assert "low-supply" in asked[2]
    assert asked[3] == "Who says that the main can give the demand for the whole duration?"
    assert "freezing" in asked[4]
    assert asked[5] == "At what hour was test T-1 run?"
    assert len(asked) == 6


def test_open_questions_are_asked_once_and_failures_ask_none() -> None:
    one = Finding("margin", "missing", "Not run.", remedy="Which margin?")
    other = Finding("margin", "fail", "Short.", remedy="Enlarge pipes.")
    assert open_questions([one, other, one]) == ("Which margin?",)
    assert in_display_order([one, other]) == (other, one)


@pytest.mark.parametrize(
    ("height", "factor"),
    [(8, 0.60), (10, 0.60), (15, 0.675), (20, 0.75)],
)
def test_quick_response_line(height: float, factor: float) -> None:
    """NFPA 13 (from memory): y = −3x/2 + 55, so 40 % at 10 ft, 32.5 % at 15 ft, 25 % at 20 ft."""
    taken = {
        "project.criteria.modifiers": (replace(QUICK, factor=factor),),
        "project.criteria.required_area": 1500 * factor * FOOT**2,
        "project.criteria.ceiling_height": height * FOOT,
    }
    found = quick_response(built(taken))
    assert found.state == "ok"
    assert found.limit is not None and found.limit.value == pytest.approx(factor, abs=1e-9)
    less = taken | {"project.criteria.modifiers": (replace(QUICK, factor=factor - 0.001),)}
    assert quick_response(built(less)).state == "fail"


def test_heads_along_the_line_of_the_annex_example() -> None:
    """NFPA 13 annex (from memory): 1500 ft², 13 ft on the line: 1.2√1500/13 = 3.58, so 4 heads."""
    change = {f"project.system.nodes.H{n}.x": 13 * n * FOOT for n in range(1, 8)}
    change |= {f"project.system.nodes.H{10 + n}.x": 13 * n * FOOT for n in range(1, 8)}
    found = shape(built(change))
    assert found.values["needed"].value == 4
    assert found.limit is not None
    assert found.limit.value / (13 * FOOT) == pytest.approx(3.58, abs=0.005)


@pytest.mark.parametrize(
    ("psi", "factor"), [(2, 0.97), (3, 0.92), (4, 0.89), (5, 0.86), (6, 0.84), (7, 0.83), (30, 0.83)]
)
def test_pumper_factors_of_the_table(psi: float, factor: float) -> None:
    """NFPA 291 (from memory); 0.83 at 10 psi also in a practitioners' forum example (1127 for 1358 gpm)."""
    assert published_pumper_factor(psi * PSI) == pytest.approx(factor, abs=1e-9)
    assert published_pumper_factor(1.9 * PSI) is None


def test_pumper_factor_of_the_forum_example() -> None:
    """4 in outlet at 10 psi: 1358 gpm without and 1127 gpm with the factor, both rounded to 1 gpm."""
    assert published_pumper_factor(10 * PSI) == pytest.approx(1127 / 1358, abs=1 / 1358)


@pytest.mark.parametrize(
    ("day", "months", "last"),
    [
        (dt.date(2026, 6, 1), 12, dt.date(2027, 6, 1)),
        (dt.date(2024, 2, 29), 12, dt.date(2025, 2, 28)),
        (dt.date(2026, 8, 31), 6, dt.date(2027, 2, 28)),
        (dt.date(2026, 12, 15), 1, dt.date(2027, 1, 15)),
        (dt.date(2026, 1, 1), 60, dt.date(2031, 1, 1)),
        (dt.date(2026, 1, 1), 0.5, dt.date(2026, 1, 16)),
    ],
)
def test_age_runs_by_the_calendar(day: dt.date, months: float, last: dt.date) -> None:
    """Plain calendar arithmetic; half a month is 15 days."""
    assert last_day(day, months) == last


@pytest.mark.parametrize("below", [1e-9, 1e-8, 1e-7])
def test_round_off_never_fails_a_figure_met_on_the_nose(below: float) -> None:
    flow = built({}).outflow("H7") * (1 - below)
    assert density(built({"solution": lambda old: array_with(old, "outflow", "H7", flow)})).state == "ok"
    at_minimum = 7 * PSI * (1 - below)
    low = {"solution": lambda old: array_with(old, "pressure", "H7", at_minimum)}
    assert minimum(built(low)).state == "ok"


@pytest.mark.parametrize("short", [1e-5, 1e-3])
def test_a_real_shortfall_is_never_taken_for_round_off(short: float) -> None:
    flow = built({}).outflow("H7") * (1 - short)
    assert density(built({"solution": lambda old: array_with(old, "outflow", "H7", flow)})).state == "fail"


@pytest.mark.parametrize(
    ("text", "metric", "size"),
    [
        ("1 1/4", False, 1.25 * INCH),
        ("2", False, 2 * INCH),
        ("2.5 in", False, 2.5 * INCH),
        ('1/2"', False, 0.5 * INCH),
        ("DN 50", True, 0.050),
        ("65", True, 0.065),
        ("2 in", True, 2 * INCH),
        ("own", False, None),
        ("", True, None),
        ("1/0", False, None),
    ],
)
def test_nominal_sizes(text: str, metric: bool, size: float | None) -> None:
    found = nominal_size(text, metric=metric)
    assert (found is None) == (size is None)
    if size is not None:
        assert found == pytest.approx(size)


def test_spacing_between_lines_is_measured_square_to_them() -> None:
    """Lines of the factory are 10 ft apart; turning the plan by 30° changes no distance."""
    from supplycheck.checks.geometry import gaps_between

    context = built({})
    turn = math.radians(30)
    turned = [
        replace(
            node,
            x=(node.x or 0) * math.cos(turn) - (node.y or 0) * math.sin(turn),
            y=(node.x or 0) * math.sin(turn) + (node.y or 0) * math.cos(turn),
        )
        for node in context.all_heads
    ]
    for heads in (context.all_heads, turned):
        assert sorted(gap.distance / FOOT for gap in gaps_between(heads)) == pytest.approx([10, 10])


def test_tags_of_any_spelling_print_as_typed() -> None:
    odd = "{measured} <b>"
    context = built({"project.supply.tests.0.tag": odd, "project.supply.tests.0.time": ""})
    found = next(one for one in run_checks(context) if one.check == "time of day of the test")
    assert found.tags == (odd,)


def test_demand_without_sprinklers_and_without_pipes_is_still_looked_at() -> None:
    """A hydrant at the supply node: no head, no pipe; every rule still answers."""
    found = run_checks(built({"case.heads": (), "project.system.pipes": ()}))
    assert len(found) == len(RULES)
    states = {one.check: one.state for one in found}
    assert states["size of the design area"] == states["density at every head"] == "not applicable"
    assert states["test age"] == "ok"


def test_long_descriptions_are_cut_in_a_finding() -> None:
    long = "boxes on pallets " * 10_000
    found = {one.check: one for one in run_checks(built({"project.facts.occupancy": long}))}
    text = found["occupancy behind the hazard"].text
    assert len(text) < 160 and text.endswith("….")
