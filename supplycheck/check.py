"""The pipeline: from a project file to the `Result`. Each step returns a new frozen value."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from importlib.metadata import version as installed
from pathlib import Path
from types import MappingProxyType
from typing import Final

from supplycheck import __version__, catalogue
from supplycheck.cases.duties import solve_duties, without_hose
from supplycheck.cases.greatest_flow import Ground
from supplycheck.cases.loads import load_of, required_of
from supplycheck.cases.placements import Progress, only, try_all
from supplycheck.cases.scenarios import scenario_rows
from supplycheck.checks import CheckContext, PumpRating, ScenarioFacts, run_checks
from supplycheck.context import catalogue_c, class_figures, comparison_facts, reference_bores
from supplycheck.demand import Candidates, demand_cases
from supplycheck.errors import DomainError
from supplycheck.model import DemandCase, Project
from supplycheck.network import (
    Network,
    Solution,
    SourceCurve,
    build_network,
    solve_demand,
    solve_operating,
)
from supplycheck.project import read_project
from supplycheck.results.assemble import Stages, assemble
from supplycheck.results.records import Result, ScenarioRow
from supplycheck.supply import (
    Comparison,
    NodeSupply,
    compare,
    curve_points,
    source_curves,
    supply_curves,
)
from supplycheck.supply.needed import needed_pump
from supplycheck.supply.pumping import PumpAnswer, pump_answers
from supplycheck.supply.pumping import Stages as SourceStages
from supplycheck.supply.storage import TankAnswer, tank_answers

NO_SPRINKLERS: Final = Candidates((), (), "No sprinkler is part of this project.", "given")
LIBRARIES: Final = ("numpy", "scipy", "pandas", "reportlab", "pydantic", "click", "openpyxl")


def check_project(path: Path, progress: Progress | None = None) -> Result:
    """Return the result for the project file at ``path``.

    ``progress`` is called with (placements solved, placements in all).

    Raises
    ------
    ProjectFaultsError
        The project has faults; all of them are listed.
    NotConvergedError
        The network has no solution; cause, tags and remedy are named.
    """
    return check(read_project(path), progress)


def check(project: Project, progress: Progress | None = None) -> Result:
    """Return the result for ``project``; raises :class:`NotConvergedError`."""
    network = build_network(project.system, law=project.law, fluid=project.fluid)
    candidates = demand_cases(project) if project.criteria.has_sprinklers else NO_SPRINKLERS
    curves = supply_curves(project)
    sources = source_curves(curves)
    field = _Field(project, network, curves, sources)
    tried = try_all(project, network, candidates, sources, progress)
    sprinklers = None if tried.hardest is None else candidates.cases[tried.hardest]
    duties = solve_duties(Ground(project, network, curves, sources, _hydrant_rank), sprinklers)
    solved = [field.solve(one) for one in ([] if sprinklers is None else [sprinklers])]
    solved += [field.solve(one) for one, _ in duties.candidates]
    governing = _governing(solved)
    own = governing if sprinklers is None else solved[0]
    drawn = without_hose(project, governing.case)
    case, solution, comparison = governing.case, governing.solution, governing.comparison
    operating = governing.operating
    known = SourceStages(drawn, network, case, solution, operating, comparison, curves)
    pumps = pump_answers(known)
    needed = needed_pump(drawn, solution, comparison, curves, pumps, _pump_sizes(project))
    favourable = tried.favourable is not None
    context = _context(project, candidates, governing, favourable)
    context = replace(context, pumps=pumps, needed_pump=needed, pump_ratings=_ratings(pumps))
    rows = scenario_rows(project, network, own.case, sources, own.operating)
    facts = scenario_facts(own.case, rows)
    context = replace(context, duties=duties.answer, scenarios=facts)
    heads = None if own is governing else _context(project, candidates, own, favourable)
    findings = run_checks(context, None if heads is None else replace(heads, scenarios=facts))
    return assemble(
        Stages(
            project=project,
            candidates=candidates,
            tried=tried if tried.placements else only(case, dict(duties.candidates)[case], project),
            case=case,
            solution=solution,
            comparison=comparison,
            graph=curve_points(drawn, solution, curves, comparison),
            scenarios=rows,
            findings=findings,
            version=__version__,
            library_versions=MappingProxyType({name: installed(name) for name in LIBRARIES}),
            pumps=pumps,
            tanks=_tanks(project, solution, operating),
            needed_pump=needed,
            duties=duties.answer,
        )
    )


@dataclass(frozen=True, slots=True, eq=False)
class _Solved:
    """One case in full: the demand state, what really flows, and both sides compared."""

    case: DemandCase
    solution: Solution
    operating: Solution
    comparison: Comparison


@dataclass(frozen=True, slots=True, eq=False)
class _Field:
    """What a case is solved on."""

    project: Project
    network: Network
    curves: Sequence[NodeSupply]
    sources: Sequence[SourceCurve]

    def solve(self, case: DemandCase) -> _Solved:
        """Return ``case`` in full."""
        load, policy = load_of(self.project, case), self.project.criteria.velocity_pressure
        required, sources = required_of(case), self.sources
        solution = solve_demand(self.network, load, required, sources, velocity_pressure=policy)
        operating = solve_operating(self.network, load, sources, velocity_pressure=policy)
        comparison = compare(without_hose(self.project, case), solution, self.curves)
        return _Solved(case, solution, operating, comparison)


def _governing(solved: Sequence[_Solved]) -> _Solved:
    """Return the case that leaves least after the margin rule: of the sprinklers, or of another duty.

    Raises :class:`DomainError` where there is none.
    """
    if not solved:
        raise DomainError(
            "there is nothing to judge: the project has no sprinklers, and no case of its standpipes or "
            "hydrants counts; name one in counts"
        )

    def left(one: _Solved) -> float:
        after = one.comparison.after_rule
        return one.comparison.margin if after is None else after

    return min(solved, key=left)


def _hydrant_rank(flow: float) -> tuple[str, str, str]:
    row = catalogue.hydrant_class(flow)
    return row.name, row.colour, row.source


def scenario_facts(case: DemandCase, rows: Sequence[ScenarioRow]) -> tuple[ScenarioFacts, ...]:
    """Return what the project's scenarios, all rows but the first, leave the heads of ``case``."""
    asked = dict(zip(case.heads, case.required_flow, strict=True))
    found = []
    for row in rows[1:]:
        shares = [(flow / asked[tag], tag) for tag, flow, _ in row.head_flows if asked.get(tag, 0.0) > 0.0]
        share, head = min(shares, default=(None, ""))
        solved = math.isfinite(row.total_flow)
        found.append(ScenarioFacts(row.name, head, share, row.note, solved))
    return tuple(found)


def _context(project: Project, candidates: Candidates, solved: _Solved, favourable: bool) -> CheckContext:
    return CheckContext(
        project=project,
        case=solved.case,
        solution=solved.solution,
        comparison=comparison_facts(solved.comparison),
        operating=solved.operating,
        searched=candidates.mode == "search" and candidates.complete,
        placements_tried=len(candidates.cases),
        most_favourable_found=favourable,
        class_figures=class_figures(project),
        catalogue_c=catalogue_c(project),
        reference_bores=reference_bores(project),
    )


def _ratings(pumps: Sequence[PumpAnswer]) -> Mapping[str, PumpRating]:
    return {
        pump.tag: PumpRating(pump.rating.flow, pump.rating.pressure)
        for pump in pumps
        if pump.rating is not None
    }


def _pump_sizes(project: Project) -> tuple[float, ...]:
    """Return the rated flows [m³/s] in which pumps are made; none are standard under EN 12845."""
    if project.criteria.standard != "NFPA 13":
        return ()
    return tuple(row.value for row in catalogue.pump_ratings())


def _tanks(project: Project, solution: Solution, operating: Solution) -> tuple[TankAnswer, ...]:
    nominal, actual = (
        dict(zip(state.source_tags, state.source_flow.tolist(), strict=True))
        for state in (solution, operating)
    )
    return tank_answers(project.supply.tanks, project.criteria.duration, nominal, actual)
