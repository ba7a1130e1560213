"""The first page: the whole answer in one look."""

from __future__ import annotations

from typing import Final

from supplycheck.report.document import Block, Facts, Figure, Heading, Paragraph, Section, Tile, Verdict
from supplycheck.report.figures.bars import answer_bars
from supplycheck.report.figures.graph import supply_graph
from supplycheck.report.show import Show, given
from supplycheck.results.display import (
    VERDICT_TITLES,
    area_text,
    counts_text,
    demand_parts,
    demand_text,
    duties_text,
    finding_text,
    second_law_text,
)
from supplycheck.results.records import Result

MOST_QUESTIONS: Final = 6
MOST_FAILS: Final = 5


def answer(result: Result, width: float) -> Section:
    """Return the first page."""
    show = Show.of(result)
    blocks: list[Block] = [
        Verdict(result.verdict, VERDICT_TITLES[result.verdict], result.verdict_text, _tiles(result, show)),
        Figure("", answer_bars(result, show.units, width)),
        Facts(_reasons(result, show)),
        Facts(_standing(result, show), columns=2),
        *_fails(result, show),
        *_questions(result),
        Paragraph(
            "This page says whether the supply carries the demand as calculated from the inputs listed in "
            "this report. It is a preliminary aid, neither a design nor an approval: a licensed designer "
            "checks and takes responsibility, and the authority having jurisdiction decides.",
            "small",
        ),
        Figure(
            "Supply and demand",
            supply_graph(result.curves, result.points, show.units, (width, 158.0)),
            if_room=True,
            smaller=supply_graph(result.curves, result.points, show.units, (width, 118.0)),
        ),
    ]
    return Section("The answer", tuple(blocks))


def _tiles(result: Result, show: Show) -> tuple[Tile, ...]:
    demand, supply, margin = result.demand, result.supply, result.margin
    hose = "sprinklers, no hose"
    if demand.hose_flow > 0:
        hose = (
            f"{show.n(demand.sprinkler_flow, 'flow')} sprinklers + {show.t(demand.hose_flow, 'flow')} hose"
        )
    if demand.outlet_flow > 0:
        hose = demand_parts(demand, show.units)
    beyond = ", which the supply cannot give" if supply.available_pressure < 0 else ""
    asked = "no rule given" if margin.required is None else show.t(margin.required, "pressure")
    after = "cannot be judged" if margin.after_rule is None else show.signed(margin.after_rule, "pressure")
    return (
        Tile(
            "Demand",
            show.t(demand.pressure, "pressure"),
            f"at {demand.node}; {demand_text(result, show.units)} ({hose})",
        ),
        Tile(
            "Available",
            "none" if supply.available_pressure < 0 else show.t(supply.available_pressure, "pressure"),
            f"at {demand.node} at that flow{beyond}; static there "
            f"{show.t(supply.static_at_comparison, 'pressure')}",
        ),
        Tile(
            "Margin before the rule",
            show.signed(margin.pressure, "pressure"),
            "available − demand, before rounding",
        ),
        Tile("Left after the rule", after, f"the rule asks {asked}"),
    )


def _reasons(result: Result, show: Show) -> tuple[tuple[str, str], ...]:
    return (
        ("What governs", result.governs),
        *_asked(result),
        ("Margin rule", result.margin.rule),
        *([("Second law", second_law_text(result, show.units))] if result.second_law else []),
        *_pump(result, show),
        ("Findings", counts_text(result.findings)),
    )


def _asked(result: Result) -> list[tuple[str, str]]:
    sprinklers = result.project.criteria.has_sprinklers
    lines = [("Design area", area_text(result.design_area))] if sprinklers else []
    return lines + ([("Cases", duties_text(result.duties))] if result.duties.rows else [])


def _standing(result: Result, show: Show) -> tuple[tuple[str, str], ...]:
    facts, criteria = result.project.facts, result.project.criteria
    hazard = [
        ("Hazard, system", f"{criteria.hazard}, {criteria.system}"),
        (
            "Density, area",
            f"{show.t(criteria.density, 'density')} over {show.t(criteria.required_area, 'area')}",
        ),
    ]
    return (
        *(hazard if criteria.has_sprinklers else [("Sprinklers", "none in this project")]),
        ("Standard, edition", facts.standard),
        ("Authority", given(facts.authority)),
        ("Stage", given(facts.stage)),
        ("Designer", given(facts.designer)),
    )


def _pump(result: Result, show: Show) -> tuple[tuple[str, str], ...]:
    """Return the pump that would close the gap, where the supply falls short."""
    needed = result.needed_pump
    if needed is None or not needed.options:
        return ()
    one = next((option for option in needed.options if option.suction_holds), needed.options[0])
    where = f"in place of {needed.instead_of}" if needed.instead_of else f"behind {needed.node}"
    rating = f"{show.t(one.rating.flow, 'flow')} at {show.t(one.rating.pressure, 'pressure')}"
    left = show.left_t(one.suction_at_overload)
    text = f"rated {rating}, {where}; {left} left at its suction at 150 % of the flow"
    return (("A pump that would do", text),)


def _fails(result: Result, show: Show) -> list[Block]:
    fails = [finding for finding in result.findings if finding.state == "fail"]
    if not fails:
        return []
    blocks: list[Block] = [Heading("Outside a limit")]
    blocks += [
        Paragraph(f"{one.check}: {finding_text(one, show.units)}", bullet="×") for one in fails[:MOST_FAILS]
    ]
    if len(fails) > MOST_FAILS:
        blocks.append(Paragraph(f"{len(fails) - MOST_FAILS} more are listed under Findings.", "small"))
    return blocks


def _questions(result: Result) -> list[Block]:
    questions = result.open_questions
    if not questions:
        return [
            Heading("Open questions"),
            Paragraph("None was recorded. Assumptions are listed in the report."),
        ]
    blocks: list[Block] = [Heading("Open questions")]
    blocks += [
        Paragraph(question, bullet=f"{place}.")
        for place, question in enumerate(questions[:MOST_QUESTIONS], start=1)
    ]
    if len(questions) > MOST_QUESTIONS:
        rest = len(questions) - MOST_QUESTIONS
        blocks.append(Paragraph(f"{rest} more are listed at the end of the findings.", "small"))
    return blocks
