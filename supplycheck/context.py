"""What the checks are given beyond the solved state: figures of the class and the catalogue."""

from __future__ import annotations

from collections.abc import Mapping

from supplycheck import catalogue
from supplycheck.checks import ClassFigures, ComparisonFacts
from supplycheck.errors import NotInCatalogueError
from supplycheck.model import Project
from supplycheck.supply import Comparison


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
