"""Words and digits that a reviewer stumbled over: what passes where, sums that close, no bare zeros."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest
from duty_projects import supply, written
from sample_result import sample

from supplycheck.check import check_project
from supplycheck.report.build import build_document
from supplycheck.report.document import Facts, Paragraph, Table, Verdict
from supplycheck.report.sections.basis import basis
from supplycheck.report.sections.judged import flows
from supplycheck.report.sections.rows import node_analysis
from supplycheck.report.sections.water import water
from supplycheck.results.display import demand_text, passing, residual_text, value_text
from supplycheck.results.records import Result
from supplycheck.results.screen import screen_text
from supplycheck.units import BAR, METRIC, PSI, UNIT_SETS, US

FOLDER = Path(__file__).parents[2] / "examples"


def test_the_demand_says_how_much_of_it_passes_the_point_of_comparison() -> None:
    """The street hose of the store leaves at the hydrant, before BASE: 150 gpm never get there."""
    result = check_project(FOLDER / "spreadsheet-store" / "project.toml")
    assert result.demand.node == "BASE"
    street = US.to_si(150.0, "flow")
    assert passing(result) == pytest.approx(result.demand.flow - street, rel=1e-9)
    here = US.text(result.demand.flow - street, "flow")
    assert f"gpm in all, of which {here} pass BASE" in demand_text(result, US)
    assert f"pass {result.demand.node}" in screen_text(result)


def test_where_all_passes_nothing_is_added() -> None:
    result = check_project(FOLDER / "parcel-depot" / "project.toml")
    assert demand_text(result, US) == f"{US.text(result.demand.flow, 'flow')} in all"


@pytest.mark.parametrize("name", ["parcel-depot", "office-floor", "spreadsheet-store"])
def test_the_margin_closes_in_its_steps(name: str) -> None:
    """available − demand as printed gives the margin as printed, within one unit of the last digit."""
    result = check_project(FOLDER / name / "project.toml")
    units = UNIT_SETS[result.project.units]
    tables = [one for one in water(result, 500.0).blocks if isinstance(one, Table)]
    rows = next(one for one in tables if one.title == "The margin, step by step").rows
    places = {"us": 2, "metric": 3}[units.name]
    least = f"{result.margin.pressure / {'us': PSI, 'metric': BAR}[units.name]:.{places}f}"
    assert any(row.cells[2].startswith(least) for row in rows)


def test_what_is_not_zero_never_prints_as_zero() -> None:
    assert value_text(1e-9 * PSI, "pressure", US) == "< 0.1 psi"
    assert value_text(100.0, "pressure", METRIC) == "< 0.01 bar"
    assert value_text(0.0, "pressure", US) == "0.0 psi"
    assert residual_text(3e-15 * PSI, "pressure", US) == "< 1e-9 psi"
    assert residual_text(0.02 * PSI, "pressure", US) == "0.020 psi"


def test_the_balance_is_told_of_unrounded_numbers() -> None:
    words = " ".join(one.text for one in flows(sample()).blocks if isinstance(one, Paragraph))
    assert "unrounded numbers of result.json" in words


def test_the_verdict_does_not_read_like_a_stamp() -> None:
    blocks = build_document(sample()).sections[0].blocks
    verdict = next(one for one in blocks if isinstance(one, Verdict))
    assert verdict.title == "Supply adequate – for the values entered"


def test_no_heading_of_the_node_table_stands_twice() -> None:
    table = next(one for one in node_analysis(sample()).blocks if isinstance(one, Table))
    titles = [column.title for column in table.columns]
    assert len(set(titles)) == len(titles)


def test_hose_that_does_not_flow_is_none() -> None:
    result = sample()
    project = replace(result.project, hose=replace(result.project.hose, inside=0.0, inside_node=None))
    blocks = basis(replace(result, project=project)).blocks
    pairs = dict(pair for one in blocks if isinstance(one, Facts) for pair in one.pairs)
    assert pairs["Hose inside"] == "none"


def test_nominal_sizes_of_a_metric_project_are_named() -> None:
    """EN 10255 names its sizes DN; a street main in inches must not read as DN 4."""
    result = check_project(FOLDER / "office-floor" / "project.toml")
    sizes = [
        row.cells[2]
        for section in build_document(result).sections
        for one in section.blocks
        if isinstance(one, Table) and one.title == "The path"
        for row in one.rows
    ]
    assert sizes[0] == "DN 25"
    assert all(size.startswith("DN ") or size.endswith(" in") for size in sizes)


def _numbers(result: Result) -> dict[str, str]:
    facts = next(one for one in water(result, 500.0).blocks if isinstance(one, Facts))
    return dict(facts.pairs)


def test_of_several_tests_the_readings_say_which_one_they_are() -> None:
    result = check_project(FOLDER / "two-supply-campus" / "project.toml")
    tests = {test.tag: test for test in result.project.supply.tests}
    assert len(tests) == 2
    read = tests[result.supply.governing]
    named = f"({read.tag} at {read.node}, {read.date.isoformat()})"
    assert _numbers(result)["Static"] == f"{US.text(read.static, 'pressure')} {named}"
    assert _numbers(result)["Residual"].endswith(f" {named}")
    assert f"{named[:-1]}: static" in " ".join(screen_text(result).split())


def test_of_a_single_test_the_readings_stand_alone() -> None:
    result = check_project(FOLDER / "parcel-depot" / "project.toml")
    assert _numbers(result)["Static"] == US.text(result.supply.static, "pressure")
    assert "(test: static" in screen_text(result)


def test_the_flow_at_20_psi_is_that_at_the_gauge() -> None:
    """Both are told, and both are past the test, whose residual is above 20 psi."""
    result = check_project(FOLDER / "office-floor" / "project.toml")
    numbers = _numbers(result)
    found = [numbers[f"Flow at 20 psi (1.38 bar), {how}"] for how in ("as measured", "adjusted")]
    assert all(text.endswith(" L/min at the gauge, beyond the tested flow") for text in found)
    flows = [float(text.split()[0]) for text in found]
    assert result.supply.residual is not None and result.supply.residual > 20 * PSI
    low = next(one for one in result.project.supply.adjustments if one.kind == "low supply").pressure
    assert low is not None and result.supply.test_flow is not None
    # The published law Qt × (drop to 20 psi / drop of the test)^(1/1.85), static and residual both lowered.
    static, drop = result.supply.static, result.supply.static - result.supply.residual
    for flow, lowered in zip(flows, (0.0, low), strict=True):
        share = ((static - lowered - 20 * PSI) / drop) ** (1 / 1.85)
        assert flow == pytest.approx(METRIC.from_si(result.supply.test_flow, "flow") * share, abs=0.06)


@pytest.mark.parametrize("name", ["parcel-depot", "boosted-warehouse", "office-floor", "yard-main"])
def test_the_headline_says_what_is_left_after_the_rule(name: str) -> None:
    result = check_project(FOLDER / name / "project.toml")
    units, margin = UNIT_SETS[result.project.units], result.margin
    assert margin.required is not None
    left = units.text(margin.pressure - margin.required, "pressure")
    assert result.verdict_text.startswith(
        f"The supply carries the demand with {units.text(margin.pressure, 'pressure')} to spare, {left} "
        f"more than the rule asks for ({units.text(margin.required, 'pressure')})."
    )


SITE = ["S,0,supply", "B,0,outlet,,500"], ["x,S,B,100,6"]


def _said(folder: Path, static: float, asked: str) -> Result:
    """A main that falls by 10 psi at 500 gpm, and a pipe that takes little."""
    rule = supply(static, static - 10, 500).replace('rule = "none"', asked)
    return check_project(written(folder, "", *SITE, test=rule))


def test_a_margin_below_the_rule_says_how_much_is_wanting(tmp_path: Path) -> None:
    result = _said(tmp_path, 20.0, 'rule = "fixed"\npressure = 15')
    wanting = US.text(15 * PSI - result.margin.pressure, "pressure")
    assert result.verdict == "not adequate"
    assert f"{wanting} less than the rule asks for (15.0 psi)." in result.verdict_text


def test_a_supply_that_is_short_says_what_the_rule_wants_as_well(tmp_path: Path) -> None:
    result = _said(tmp_path, 10.0, 'rule = "fixed"\npressure = 15')
    short = -result.margin.pressure
    assert short > 0
    assert result.verdict_text == (
        f"The supply falls short of the demand by {US.text(short, 'pressure')}, and of what the "
        f"rule asks for by {US.text(short + 15 * PSI, 'pressure')}."
    )


def test_where_no_margin_is_asked_it_says_so(tmp_path: Path) -> None:
    result = _said(tmp_path, 40.0, 'rule = "none"')
    assert result.verdict_text.endswith(" to spare; no margin is asked.")
