"""What the checks are given beyond the solved state: figures of the class and the catalogue."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from supplycheck import catalogue
from supplycheck.cases.ground import Solved
from supplycheck.checks import CheckContext, ClassFigures, ComparisonFacts, PumpRating, ScenarioFacts
from supplycheck.demand import Candidates
from supplycheck.demand.heads import all_heads
from supplycheck.demand.lines import inferred_lines
from supplycheck.errors import DomainError, NotInCatalogueError
from supplycheck.model import Project
from supplycheck.model.duty import DutyAnswer
from supplycheck.results.assemble import Tried
from supplycheck.results.records import ScenarioRow
from supplycheck.supply import Comparison
from supplycheck.supply.needed import NeededPump
from supplycheck.supply.pumping import PumpAnswer


@dataclass(frozen=True, slots=True, eq=False)
class CheckGrounds:
    """What was worked out for the whole project, whichever case the checks look at."""

    project: Project
    candidates: Candidates
    tried: Tried
    pumps: tuple[PumpAnswer, ...]
    needed_pump: NeededPump | None
    duties: DutyAnswer
    scenarios: tuple[ScenarioRow, ...]


def check_context(grounds: CheckGrounds, solved: Solved) -> CheckContext:
    """Return everything that the rules may look at for one solved case."""
    project, complete = grounds.project, grounds.candidates.complete
    return CheckContext(
        project=project,
        case=solved.case,
        solution=solved.solution,
        comparison=comparison_facts(solved.comparison),
        operating=solved.operating,
        searched=grounds.candidates.mode == "search" and complete,
        placements_tried=len(grounds.candidates.cases),
        most_favourable_found=grounds.tried.favourable is not None,
        class_figures=class_figures(project),
        catalogue_c=catalogue_c(project),
        reference_bores=reference_bores(project),
        pump_ratings={
            pump.tag: PumpRating(pump.rating.flow, pump.rating.pressure)
            for pump in grounds.pumps
            if pump.rating is not None
        },
        pumps=grounds.pumps,
        needed_pump=grounds.needed_pump,
        duties=grounds.duties,
        scenarios=scenario_facts(grounds.scenarios),
        beyond=tuple((row.name, one) for row in grounds.scenarios for one in row.beyond),
        inferred_lines=lines_by_head(project),
    )


def lines_by_head(project: Project) -> Mapping[str, str]:
    """Return the inferred branch line of each head that is given none; empty where none can be inferred."""
    heads = [node for node in project.system.nodes if node.kind == "sprinkler"]
    if all(node.branch_line is not None for node in heads):
        return {}
    try:
        return inferred_lines(all_heads(project), project.system)
    except DomainError:
        return {}


def scenario_facts(rows: Sequence[ScenarioRow]) -> tuple[ScenarioFacts, ...]:
    """Return what the project's scenarios, all rows but the first, leave their open heads."""
    found = []
    for row in rows[1:]:
        needs = zip(row.head_flows, row.head_needs, strict=True)
        shares = [(flow / need, tag) for (tag, flow, _), need in needs if need]
        share, head = min(shares, default=(None, ""))
        solved = math.isfinite(row.total_flow)
        found.append(ScenarioFacts(row.name, head, share, row.note, solved, row.dry))
    return tuple(found)


def comparison_facts(comparison: Comparison) -> ComparisonFacts:
    """Return ``comparison`` as the plain numbers that the checks read."""
    main = comparison.main_source
    return ComparisonFacts(
        node=comparison.node,
        demand_flow=comparison.demand_flow,
        demand_pressure=comparison.demand_pressure,
        sprinkler_flow=comparison.sprinkler_flow,
        hose_flow=comparison.hose_flow,
        available_pressure=comparison.available_pressure,
        margin=comparison.margin,
        required=comparison.required,
        static_at_compare=comparison.highest_static,
        tested_flow_ratio=main.tested_ratio,
        main_pressure_at_demand=main.available,
        margin_rule=comparison.rule.template,
        limited_at=comparison.floor.node if comparison.floor is not None else "",
    )


def class_figures(project: Project) -> ClassFigures | None:
    """Return what the adopted edition asks of the hazard class; ``None`` for an unknown class."""
    criteria = project.criteria
    try:
        row = catalogue.hazard_class(criteria.hazard, criteria.standard, criteria.edition)
    except NotInCatalogueError:
        return None
    return ClassFigures(
        density=row.density,
        area=row.area,
        hose=row.hose_outside,
        duration=row.duration_min,
        source=row.source,
    )


def catalogue_c(project: Project) -> Mapping[str, float]:
    """Return the catalogue's C-factor by pipe kind for the kind of system at hand."""
    found: dict[str, float] = {}
    criteria = project.criteria
    for kind in project.system.pipe_kinds:
        try:
            found[kind.name] = catalogue.c_factor(kind.material, criteria.system, criteria.standard).value
        except NotInCatalogueError:
            continue
    return found


def reference_bores(project: Project) -> Mapping[str, float]:
    """Return the bores [m] by nominal size for which equivalent lengths are printed."""
    if project.criteria.standard != "NFPA 13":
        return {}
    return {row.nominal: row.bore for row in catalogue.bores("steel schedule 40")}
