"""The pipeline: from a project file to the `Result`. Each step returns a new frozen value."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from importlib.metadata import version as installed
from itertools import repeat
from pathlib import Path
from types import MappingProxyType
from typing import Final

from supplycheck import __version__, catalogue
from supplycheck.checks import CheckContext, ClassFigures, ComparisonFacts, run_checks
from supplycheck.demand import Candidates, demand_cases
from supplycheck.errors import NotInCatalogueError
from supplycheck.model import DemandCase, Project
from supplycheck.network import (
    DemandSummary,
    LoadCase,
    Solution,
    build_network,
    demand_many,
    solve_demand,
    solve_operating,
)
from supplycheck.project import read_project
from supplycheck.results.assemble import Stages, assemble
from supplycheck.results.records import Placement, Result
from supplycheck.scenarios import scenario_rows
from supplycheck.supply import Comparison, compare, curve_points, hose_loads, source_curves, supply_curves

Progress = Callable[[int, int], None]
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
    candidates = demand_cases(project)
    curves = supply_curves(project)
    sources = source_curves(curves)
    loads = [(load_of(project, case), required_of(case)) for case in candidates.cases]
    summaries = demand_many(network, loads, sources, progress=progress)
    placements = tuple(map(_placement, repeat(project), candidates.cases, summaries))
    governing = min(range(len(placements)), key=lambda row: placements[row].margin)
    case = candidates.cases[governing]
    load, required = loads[governing]
    policy = project.criteria.velocity_pressure
    solution = solve_demand(network, load, required, sources, velocity_pressure=policy)
    comparison = compare(project, solution, curves)
    operating = solve_operating(network, load, sources, velocity_pressure=policy)
    context = _context(project, candidates, case, solution, operating, comparison)
    return assemble(
        Stages(
            project=project,
            candidates=candidates,
            placements=placements,
            case=case,
            solution=solution,
            comparison=comparison,
            graph=curve_points(project, solution, curves, comparison),
            scenarios=scenario_rows(project, network, case, sources, operating),
            findings=run_checks(context),
            version=__version__,
            library_versions=MappingProxyType({name: installed(name) for name in LIBRARIES}),
        )
    )


def load_of(project: Project, case: DemandCase) -> LoadCase:
    """Return what flows in ``case``: its heads and outlets, hose, and all other fixed outflows, each once."""
    flows: dict[str, float] = dict(hose_loads(project)) if case.with_hose else {}
    drawn = [(node.tag, node.fixed_flow) for node in project.system.nodes if node.fixed_flow]
    for tag, flow in (*drawn, *case.flows, *((one.node, one.flow) for one in case.outlets)):
        flows[tag] = flows.get(tag, 0.0) + flow
    return LoadCase(case.heads, MappingProxyType(flows), case.closed_pipes)


def required_of(case: DemandCase) -> Mapping[str, float]:
    """Return the pressure [Pa] that ``case`` asks at each of its heads and outlets."""
    return {
        **dict(zip(case.heads, case.required_pressure, strict=True)),
        **{outlet.node: outlet.minimum_pressure for outlet in case.outlets},
    }


def _placement(project: Project, case: DemandCase, summary: DemandSummary) -> Placement:
    inside = set(case.heads)
    spots = [
        (node.x, node.y)
        for node in project.system.nodes
        if node.tag in inside and node.x is not None and node.y is not None
    ]
    centre = [sum(axis) / len(spots) for axis in zip(*spots, strict=True)] if spots else [None, None]
    return Placement(
        label=case.label,
        heads=case.heads,
        required_pressure=summary.source_pressure,
        flow=summary.total_flow,
        margin=summary.shift,
        area=case.area,
        x=centre[0],
        y=centre[1],
    )


def _context(
    project: Project,
    candidates: Candidates,
    case: DemandCase,
    solution: Solution,
    operating: Solution,
    comparison: Comparison,
) -> CheckContext:
    return CheckContext(
        project=project,
        case=case,
        solution=solution,
        comparison=_facts(comparison),
        operating=operating,
        searched=candidates.mode == "search" and candidates.complete,
        placements_tried=len(candidates.cases),
        most_favourable_found=candidates.mode == "search" and candidates.complete,
        class_figures=_class_figures(project),
        catalogue_c=_catalogue_c(project),
        reference_bores=_reference_bores(project),
    )


def _facts(comparison: Comparison) -> ComparisonFacts:
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
    )


def _class_figures(project: Project) -> ClassFigures | None:
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


def _catalogue_c(project: Project) -> Mapping[str, float]:
    found: dict[str, float] = {}
    criteria = project.criteria
    for kind in project.system.pipe_kinds:
        try:
            found[kind.name] = catalogue.c_factor(kind.material, criteria.system, criteria.standard).value
        except NotInCatalogueError:
            continue
    return found


def _reference_bores(project: Project) -> Mapping[str, float]:
    if project.criteria.standard != "NFPA 13":
        return {}
    return {row.nominal: row.bore for row in catalogue.bores("steel schedule 40")}
