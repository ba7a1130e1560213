"""The scenarios of a project file: which heads are open, which pipes shut, and what else flows."""

from __future__ import annotations

from supplycheck.model import Scenario
from supplycheck.project.drafts import Notes
from supplycheck.project.faults import FaultList, quoted
from supplycheck.project.layout_parts import units_in
from supplycheck.project.schema_supply import ScenarioTable
from supplycheck.project.sections import Sections
from supplycheck.project.tags import TagCheck
from supplycheck.units import UNIT_SETS


def read_scenarios(
    sections: Sections, tags: TagCheck, notes: Notes, faults: FaultList
) -> tuple[Scenario, ...]:
    """Return the scenarios in their order; what is wrong with one is noted in ``faults``."""
    found: dict[str, Scenario] = {}
    for number, table in sections.scenarios:
        where = f"scenario[{number}]"
        if table.name in found:
            faults.add(
                sections.place(f"{where}.name"),
                "stands twice",
                found=quoted(table.name),
                allowed="every name once",
            )
        found[table.name] = _scenario(sections, table, where, tags, faults)
        if table.node_flows is None:
            _note_what_adds(found[table.name], where, tags, sections, notes)
    return tuple(found.values())


def _scenario(
    sections: Sections, table: ScenarioTable, where: str, tags: TagCheck, faults: FaultList
) -> Scenario:
    units = units_in(table, UNIT_SETS[sections.units])
    heads = None if table.heads == "design area" else tuple(table.heads)
    if heads == () and not table.flows:
        faults.add(
            sections.place(f"{where}.heads"),
            "is empty, and nothing else flows",
            found="[]",
            allowed='"design area", the tags of at least one sprinkler, or flows',
        )
    tags.heads(heads or (), f"{where}.heads")
    tags.pipes_named(table.closed_pipes, f"{where}.closed_pipes")
    for tag in table.flows:
        tags.node(tag, f"{where}.flows")
    return Scenario(
        table.name,
        heads,
        tuple(table.closed_pipes),
        tuple((tag, flow.si(units)) for tag, flow in table.flows.items()),
        table.hose,
        sections.place(where),
        table.node_flows is not False,
    )


def _note_what_adds(
    scenario: Scenario, where: str, tags: TagCheck, sections: Sections, notes: Notes
) -> None:
    """Note each flow at a node that draws one of its own: that both run is the safe reading."""
    units = UNIT_SETS[sections.units]
    for tag, flow in scenario.flows:
        node = tags.nodes.get(tag)
        if node is not None and node.fixed_flow > 0.0 and flow > 0.0:
            own, more = units.text(node.fixed_flow, "flow"), units.text(flow, "flow")
            value = f"{more} on top of the {own} of the node table"
            source = "say node_flows = true, or false where they stand in its place"
            notes.add(f"{where}.flows.{tag}", value, "assumed", source)
