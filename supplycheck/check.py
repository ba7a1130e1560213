"""The pipeline: from a project file to the `Result`. Each step returns a new frozen value."""

from __future__ import annotations

from collections.abc import Sequence
from importlib.metadata import version as installed
from pathlib import Path
from types import MappingProxyType
from typing import Final

from supplycheck import __version__, catalogue
from supplycheck.cases.duties import solve_duties
from supplycheck.cases.ground import Ground, Solved
from supplycheck.cases.loads import without_hose
from supplycheck.cases.placements import Progress, only, try_all
from supplycheck.cases.scenarios import scenario_rows
from supplycheck.cases.second_law import by_second_law
from supplycheck.checks import run_checks
from supplycheck.context import CheckGrounds, check_context
from supplycheck.demand import Candidates, demand_cases
from supplycheck.errors import DomainError
from supplycheck.model import Project
from supplycheck.network import (
    Solution,
    build_network,
)
from supplycheck.project import read_project
from supplycheck.results.assemble import Stages, assemble
from supplycheck.results.records import Result
from supplycheck.supply import (
    curve_points,
    source_curves,
    supply_curves,
)
from supplycheck.supply.beyond import beyond_words
from supplycheck.supply.needed import needed_pump
from supplycheck.supply.pumping import Stages as SourceStages
from supplycheck.supply.pumping import pump_answers
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
    ground = Ground(project, network, curves, sources, _hydrant_rank)
    tried = try_all(ground, candidates, progress)
    sprinklers = None if tried.hardest is None else candidates.cases[tried.hardest]
    duties = solve_duties(ground, sprinklers)
    cases = ([] if sprinklers is None else [sprinklers]) + [case for case, _ in duties.candidates]
    solved = [ground.solve(case) for case in cases]
    governing = _governing(solved)
    heads = governing if sprinklers is None else solved[0]
    drawn = without_hose(project, governing.case)
    solution, comparison = governing.solution, governing.comparison
    stages = SourceStages(drawn, network, governing.case, solution, governing.operating, comparison, curves)
    pumps = pump_answers(stages)
    needed = needed_pump(drawn, solution, comparison, curves, pumps, _pump_sizes(project))
    rows = scenario_rows(project, network, heads.case, sources, heads.operating)
    grounds = CheckGrounds(project, candidates, tried, pumps, needed, duties.answer, rows)
    findings = run_checks(
        check_context(grounds, governing),
        None if heads is governing else check_context(grounds, heads),
    )
    only_case = only(governing.case, dict(duties.candidates).get(governing.case), project)
    return assemble(
        Stages(
            project=project,
            candidates=candidates,
            tried=tried if tried.placements else only_case,
            case=governing.case,
            solution=solution,
            comparison=comparison,
            graph=curve_points(drawn, solution, curves, comparison),
            scenarios=rows,
            findings=findings,
            version=__version__,
            library_versions=MappingProxyType({name: installed(name) for name in LIBRARIES}),
            pumps=pumps,
            tanks=_tanks(project, solution, governing.operating),
            needed_pump=needed,
            duties=duties.answer,
            second_law=by_second_law(ground, governing.case),
        )
    )


def _governing(solved: Sequence[Solved]) -> Solved:
    """Return the case that leaves least after the margin rule: of the sprinklers, or of another duty.

    Raises :class:`DomainError` where there is none.
    """
    if not solved:
        raise DomainError(
            "there is nothing to judge: the project has no sprinklers, and no case of its standpipes or "
            "hydrants counts; name one in counts"
        )

    def left(one: Solved) -> float:
        after = one.comparison.after_rule
        return one.comparison.margin if after is None else after

    return min(solved, key=left)


def _hydrant_rank(flow: float) -> tuple[str, str, str]:
    row = catalogue.hydrant_class(flow)
    return row.name, row.colour, row.source


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
    words = beyond_words(operating)
    note = f"What really flows is {words}." if words else ""
    return tank_answers(project.supply.tanks, project.criteria.duration, nominal, actual, note)
