"""Puts the solved stages together into the one `Result`; nothing is solved here."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Final

from supplycheck.checks import open_questions
from supplycheck.demand import Candidates
from supplycheck.findings import Finding
from supplycheck.model import DemandCase, Project
from supplycheck.model.duty import DutyAnswer
from supplycheck.model.words import Show, Step
from supplycheck.network import Solution
from supplycheck.results.balance import balance_of
from supplycheck.results.display import remedy_text, step_text, value_text
from supplycheck.results.path import hand_check, path_to_supply
from supplycheck.results.records import (
    CurvePoints,
    DemandRecord,
    DesignAreaRecord,
    Favourable,
    GraphPoint,
    HandStep,
    MarginRecord,
    NeededPump,
    NodeRow,
    Placement,
    PumpAnswer,
    PumpRecord,
    Result,
    ScenarioRow,
    SecondLaw,
    SupplyRecord,
    TankRecord,
    Verdict,
)
from supplycheck.results.rows import fitting_rows, node_rows, pipe_rows
from supplycheck.supply import Comparison, CurveLine, GraphData, MarkedPoint
from supplycheck.units import UNIT_SETS, UnitSet

STORAGE: Final = "water storage"
"""The check whose failure means that the supply does not carry the demand for its duration."""

TIE: Final = 10.0
"""Margins [Pa] closer than this count as equal (0.0015 psi); the search itself is good to 1 Pa."""


@dataclass(frozen=True, slots=True, eq=False)
class Tried:
    """All placements in their order; ``hardest`` and ``runner_up`` are rows of them.

    Placements that leave the same margin as the hardest (mirror images, say) are counted in ``equal``;
    the runner-up is the next one that differs.
    """

    placements: tuple[Placement, ...]
    hardest: int | None
    runner_up: int | None
    equal: int
    favourable: Favourable | None


@dataclass(frozen=True, slots=True, eq=False)
class Stages:
    """Everything that was worked out for one project, ready to be put together."""

    project: Project
    candidates: Candidates
    tried: Tried
    case: DemandCase
    solution: Solution
    comparison: Comparison
    graph: GraphData
    scenarios: tuple[ScenarioRow, ...]
    findings: tuple[Finding, ...]
    version: str
    library_versions: Mapping[str, str]
    pumps: tuple[PumpAnswer, ...] = ()
    tanks: tuple[TankRecord, ...] = ()
    needed_pump: NeededPump | None = None
    duties: DutyAnswer = field(default_factory=DutyAnswer)
    second_law: SecondLaw | None = None


def assemble(stages: Stages) -> Result:
    """Return the result of ``stages``."""
    project, solution, comparison = stages.project, stages.solution, stages.comparison
    units = UNIT_SETS[project.units]

    def show(value: float, kind: str) -> str:
        return value_text(value, kind, units)

    def fine(value: float, kind: str) -> str:
        return step_text(value, kind, units)

    nodes = node_rows(project, stages.case, solution)
    pipes = pipe_rows(project, solution)
    path = path_to_supply(nodes, pipes, solution.governing, solution.source_tags)
    drawn = dict(zip(solution.source_tags, solution.source_flow.tolist(), strict=True))
    balance = balance_of(project, nodes, pipes, drawn, solution.iterations)
    fails = [one.check for one in stages.findings if one.state == "fail"]
    verdict = _verdict(comparison, solution, fails)
    words = _verdict_text(verdict, comparison, solution, show)
    return Result(
        project=project,
        version=stages.version,
        verdict=verdict,
        verdict_text=_with_fails(words, verdict, fails),
        governs=_governs(nodes, solution.governing, stages.case, show),
        demand=_demand(comparison, nodes, solution, stages.case),
        supply=_supply(comparison, show, fine),
        margin=_margin(comparison, show, fine),
        balance=balance,
        design_area=_design_area(stages, show),
        nodes=nodes,
        pipes=pipes,
        path=path,
        hand_check=hand_check(project, nodes, pipes, path),
        curves=_lines(stages.graph.lines),
        points=_points(stages.graph.points),
        scenarios=stages.scenarios,
        findings=stages.findings,
        open_questions=_questions(stages.findings, units),
        library_versions=stages.library_versions,
        pumps=tuple(PumpRecord(one, _lines(one.lines), _points(one.points)) for one in stages.pumps),
        tanks=stages.tanks,
        needed_pump=stages.needed_pump,
        duties=stages.duties,
        fittings=fitting_rows(project),
        second_law=stages.second_law,
    )


def _lines(lines: Iterable[CurveLine]) -> tuple[CurvePoints, ...]:
    return tuple(
        CurvePoints(one.name, one.style, one.flows, one.pressures, one.extrapolated_from) for one in lines
    )


def _points(points: Iterable[MarkedPoint]) -> tuple[GraphPoint, ...]:
    return tuple(GraphPoint(one.name, one.style, one.flow, one.pressure) for one in points)


def _verdict(comparison: Comparison, solution: Solution, fails: Sequence[str]) -> Verdict:
    if solution.out_of_range:
        return "undetermined"
    if comparison.margin < 0 or STORAGE in fails:
        return "not adequate"
    if comparison.after_rule is None:
        return "undetermined"
    return "adequate" if comparison.after_rule >= 0 else "not adequate"


def _with_fails(text: str, verdict: Verdict, fails: Sequence[str]) -> str:
    """Return the verdict in words with what is outside a limit beside it, so that nobody reads past it."""
    if verdict != "adequate" or not fails:
        return text
    return f"{text} But outside a limit: {', '.join(fails)}; read that first."


def _verdict_text(verdict: Verdict, comparison: Comparison, solution: Solution, show: Show) -> str:
    if solution.out_of_range:
        pipe, tag, flow = solution.out_of_range[0]
        return (
            f"No verdict: {show(abs(flow), 'flow')} pass device {tag} in pipe {pipe}, beyond its loss "
            "curve. Enter its curve up to that flow; the numbers shown carry its last line on."
        )
    margin = show(abs(comparison.margin), "pressure")
    if comparison.margin < 0:
        return f"The supply falls short of the demand by {margin}{_and_of_the_rule(comparison, show)}."
    if verdict == "not adequate" and (comparison.after_rule or 0.0) >= 0:
        return f"The pressure suffices, with {margin} to spare, but the stored water does not last."
    if comparison.required is None or comparison.after_rule is None:
        return (
            f"The supply carries the demand with {margin} to spare, but no margin rule is given: "
            'ask the authority, then write it under [supply.margin] (rule = "none" if it asks for none).'
        )
    if comparison.required == 0.0:
        return f"The supply carries the demand with {margin} to spare; no margin is asked."
    asked, left = show(comparison.required, "pressure"), show(abs(comparison.after_rule), "pressure")
    more = "more" if verdict == "adequate" else "less"
    return (
        f"The supply carries the demand with {margin} to spare, {left} {more} than the rule asks for "
        f"({asked})."
    )


def _and_of_the_rule(comparison: Comparison, show: Show) -> str:
    """Return by how much a supply that is short is short of the margin rule as well."""
    if not comparison.required or comparison.after_rule is None:
        return ""
    return f", and of what the rule asks for by {show(-comparison.after_rule, 'pressure')}"


def _questions(findings: Iterable[Finding], units: UnitSet) -> tuple[str, ...]:
    """Return the open questions of ``findings`` with their numbers."""
    return open_questions(replace(one, remedy=remedy_text(one, units)) for one in findings)


def _governs(nodes: tuple[NodeRow, ...], governing: str, case: DemandCase, show: Show) -> str:
    head = next(node for node in nodes if node.tag == governing)
    needs = f"{show(head.discharge, 'flow')} at {show(head.pressure, 'pressure')}"
    if governing not in case.heads:
        return f"{head.required_by} ({needs}) in {case.label}"
    return f"head {head.tag} ({needs}, set by {head.required_by}) in {case.label}"


def _demand(
    comparison: Comparison, nodes: tuple[NodeRow, ...], solution: Solution, case: DemandCase
) -> DemandRecord:
    head = next(node for node in nodes if node.tag == solution.governing)
    return DemandRecord(
        node=comparison.node,
        flow=comparison.demand_flow,
        pressure=comparison.demand_pressure,
        sprinkler_flow=comparison.sprinkler_flow,
        hose_flow=comparison.hose_flow,
        heads=len(case.heads),
        governing_head=solution.governing,
        governing_by=head.required_by,
        outlet_flow=comparison.other_flow,
        governing_is_head=solution.governing in case.heads,
    )


def _supply(comparison: Comparison, show: Show, fine: Show) -> SupplyRecord:
    main = comparison.main_source
    static = main.test_static if main.test_static is not None else comparison.static
    return SupplyRecord(
        static=static,
        residual=main.test_residual,
        test_flow=main.test_flow,
        available_pressure=comparison.available_pressure,
        available_flow=comparison.available_flow,
        unadjusted_pressure=comparison.unadjusted_pressure,
        flow_at_20_psi=comparison.flow_at_20_psi,
        static_at_comparison=comparison.static,
        tested_range_ratio=main.tested_ratio,
        steps=_filled(comparison.supply_steps, fine),
        statement=" ".join(note.fill(show) for note in comparison.notes),
        governing=main.governing,
    )


def _margin(comparison: Comparison, show: Show, fine: Show) -> MarginRecord:
    return MarginRecord(
        pressure=comparison.margin,
        required=comparison.required,
        after_rule=comparison.after_rule,
        rule=comparison.rule.fill(show),
        steps=_filled(comparison.margin_steps, fine),
        source=comparison.rule_source,
        limited_at=comparison.floor.node if comparison.floor is not None else None,
    )


def _filled(steps: Iterable[Step], show: Show) -> tuple[HandStep, ...]:
    return tuple(
        HandStep(step.step, step.formula.fill(show), step.value, step.kind, step.note) for step in steps
    )


def _design_area(stages: Stages, show: Show) -> DesignAreaRecord:
    candidates, tried = stages.candidates, stages.tried
    placements = tried.placements
    governing = placements[tried.hardest or 0]
    return DesignAreaRecord(
        mode=candidates.mode,
        steps=_filled(candidates.steps, show),
        placements=placements,
        governing=governing,
        runner_up=None if tried.runner_up is None else placements[tried.runner_up],
        most_favourable=tried.favourable,
        tried=len(placements),
        statement=_search_statement(candidates, tried, governing, show),
        equal=tried.equal,
    )


def _search_statement(candidates: Candidates, tried: Tried, governing: Placement, show: Show) -> str:
    if candidates.mode == "given" or len(tried.placements) < 2:
        return candidates.statement
    hardest = max(tried.placements, key=lambda one: one.required_pressure)
    text = (
        f"{candidates.statement} All {len(tried.placements)} placements were solved; {governing.label} "
        f"leaves the least margin, {show(governing.margin, 'pressure')}."
    )
    if tried.equal:
        text += f" {tried.equal} more, such as its mirror images, ask the same."
    if hardest.required_pressure > governing.required_pressure + TIE:
        text += (
            f" {hardest.label} needs more pressure, {show(hardest.required_pressure, 'pressure')}, but "
            "less flow, at which the supply has more to give."
        )
    else:
        text += " No other placement needs more pressure."
    if tried.favourable is not None:
        best = tried.favourable
        text += (
            f" Most favourable, of the {best.solved} that resist least: {best.label}, through which "
            f"{show(best.flow, 'flow')} really flows at {show(best.pressure, 'pressure')}."
        )
    return text
