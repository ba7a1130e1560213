"""The basis of design: what was asked, by which rule, with which law and fluid."""

from __future__ import annotations

from supplycheck.model import Criteria, Project, Sprinkler
from supplycheck.report.document import Block, Facts, Heading, Paragraph, Row, Section, Table
from supplycheck.report.sections.duties import duty_title
from supplycheck.report.show import Show, column, given, steps_table, words
from supplycheck.results.records import Result


def basis(result: Result) -> Section:
    """Return the basis of design."""
    show = Show.of(result)
    project = result.project
    blocks: list[Block] = [
        Facts(_project_facts(project), columns=2),
        Heading("Criteria"),
        *_design(result, show),
        Heading("Hose, friction law, fluid, units"),
        Facts(_law_facts(project, show)),
    ]
    return Section("Basis of design", tuple(blocks), fresh=True)


def _design(result: Result, show: Show) -> list[Block]:
    """Return the criteria of the sprinklers, or the few that hold without sprinklers."""
    project = result.project
    if not project.criteria.has_sprinklers:
        return [Facts(_without_sprinklers(project, show))]
    return [
        Facts(_criteria(project.criteria, show), columns=2),
        Facts(_sources(project.criteria, show)),
        *([_modifiers(project.criteria)] if project.criteria.modifiers else []),
        steps_table("How the design area was found", result.design_area.steps, show),
        *_search(result),
        _sprinklers(project.system.sprinklers, show),
    ]


def _search(result: Result) -> list[Block]:
    """Return what was tried beyond the shape of the steps, and what governs."""
    area = result.design_area
    if area.mode == "given" or area.tried < 2:
        return []
    text = (
        "The steps give the number of heads and the shape to start from. "
        f"{area.statement} Governing, with {len(area.governing.heads)} heads: {area.governing.label}."
    )
    return [Paragraph(text)]


def _without_sprinklers(project: Project, show: Show) -> tuple[tuple[str, str], ...]:
    criteria = project.criteria
    where = duty_title(project).lower()
    return (
        ("Sprinklers", f"none in this project; what is asked stands under {where}"),
        ("Duration", show.t(criteria.duration, "time")),
        ("Component rating", show.t(criteria.maximum_pressure, "pressure")),
        ("Velocity limits", _velocity(criteria, show)),
    )


def _velocity(criteria: Criteria, show: Show) -> str:
    velocity = criteria.velocity
    limits = [
        f"{what} {show.t(limit, 'velocity')}"
        for what, limit in (("pipe", velocity.pipe_limit), ("valve", velocity.valve_limit))
        if limit is not None
    ]
    return f"{velocity.name}: {', '.join(limits) or 'none set'} ({velocity.source})"


def _project_facts(project: Project) -> tuple[tuple[str, str], ...]:
    facts = project.facts
    return (
        ("Project", facts.title),
        ("Site", given(facts.site)),
        ("Owner", given(facts.owner)),
        ("Building", given(facts.building)),
        ("Occupancy", given(facts.occupancy)),
        ("Designer", given(facts.designer)),
        ("Authority", given(facts.authority)),
        ("Stage", given(facts.stage)),
        ("Standard", facts.standard),
        ("Date", facts.date.isoformat()),
    )


def _criteria(criteria: Criteria, show: Show) -> tuple[tuple[str, str], ...]:
    search = criteria.design_area == "search"
    return (
        ("Hazard", criteria.hazard),
        ("System", criteria.system),
        ("Density", show.t(criteria.density, "density")),
        ("Area before modifiers", show.t(criteria.base_area, "area")),
        ("Area required", show.t(criteria.required_area, "area")),
        ("Least number of heads", str(criteria.minimum_heads) if criteria.minimum_heads > 1 else "no rule"),
        ("Shape", f"at least {criteria.shape_factor:g} × √area along the branch lines"),
        ("Design area", "searched over all placements" if search else "heads named in the project"),
        ("Least pressure at a head", show.t(criteria.minimum_pressure, "pressure")),
        ("Duration", show.t(criteria.duration, "time")),
        (
            "Greatest coverage, spacing",
            f"{show.t(criteria.maximum_coverage, 'area')}, {show.t(criteria.maximum_spacing, 'length')}",
        ),
        ("Ceiling height", show.t(criteria.ceiling_height, "length")),
        ("Component rating", show.t(criteria.maximum_pressure, "pressure")),
        (
            "Velocity pressure",
            "taken into account" if criteria.velocity_pressure else "not taken into account",
        ),
    )


def _sources(criteria: Criteria, show: Show) -> tuple[tuple[str, str], ...]:
    none = () if criteria.modifiers else (("Modifiers of the area", "none applies"),)
    return (
        *none,
        ("Velocity limits", _velocity(criteria, show)),
        ("Source of the criteria", criteria.source),
    )


def _modifiers(criteria: Criteria) -> Table:
    rows = tuple(Row((one.name, f"{one.factor:.3f}", one.source)) for one in criteria.modifiers)
    columns = (words("Modifier of the area, in the order applied"), column("Factor"), words("Source"))
    return Table("Modifiers", columns, rows, empty="none applies")


def _sprinklers(sprinklers: tuple[Sprinkler, ...], show: Show) -> Table:
    columns = (
        words("Type"),
        column("K-factor", show.s("k_factor")),
        column("Least pressure", show.s("pressure")),
        column("Coverage", show.s("area")),
        column("Rating", show.s("pressure")),
        column("Temperature", show.s("temperature")),
        words("Response"),
        words("Listing"),
    )
    rows = tuple(
        Row(
            (
                one.tag,
                show.n(one.k_factor, "k_factor"),
                show.n(one.minimum_pressure, "pressure"),
                show.n(one.coverage_area, "area"),
                show.n(one.maximum_pressure, "pressure"),
                show.n(one.temperature, "temperature"),
                one.response or "not given",
                given(one.listing),
            )
        )
        for one in sprinklers
    )
    return Table("Sprinklers", columns, rows, empty="no sprinkler type in the project")


def _hose(flow: float, node: str | None, show: Show) -> str:
    return f"{show.t(flow, 'flow')} at {node or 'no node given'}" if flow > 0 else "none"


def _law_facts(project: Project, show: Show) -> tuple[tuple[str, str], ...]:
    hose, law, second, fluid = project.hose, project.law, project.second_law, project.fluid
    unit_names = ", ".join(
        show.s(kind)
        for kind in ("flow", "pressure", "length", "size", "area", "density", "velocity", "k_factor")
    )
    weight = show.t(fluid.unit_weight, "gradient")
    pairs = [
        ("Hose inside", _hose(hose.inside, hose.inside_node, show)),
        ("Hose outside", _hose(hose.outside, hose.outside_node, show)),
        ("Source of the hose", f"{hose.source} ({hose.origin})"),
        ("Friction law", f"{law.name} ({law.source})"),
        (
            "Fluid",
            f"{fluid.name}: {show.t(fluid.density, 'mass_density')}, "
            f"{show.t(fluid.viscosity, 'viscosity')}, "
            f"elevation {weight}"
            + (f", at {show.t(fluid.temperature, 'temperature')}" if fluid.temperature is not None else "")
            + f" ({fluid.source})",
        ),
        ("Units", f"{unit_names}; inside the calculation SI, rounded only where printed"),
    ]
    if second is not None:
        pairs.insert(4, ("Second law, printed beside", f"{second.name} ({second.source})"))
    return tuple(pairs)
