"""Standpipes, hydrants, outflows and criteria of a project together: what there is, and what it lacks."""

from __future__ import annotations

from dataclasses import dataclass, replace

from supplycheck.model import Criteria, HoseAllowance, System
from supplycheck.model.duty import HydrantDuty, OutflowDuty, StandpipeDuty
from supplycheck.project.criteria import NO_HAZARD
from supplycheck.project.drafts import Notes
from supplycheck.project.duty_hydrants import HydrantReader
from supplycheck.project.duty_standpipes import StandpipeReader
from supplycheck.project.faults import FaultList, listed
from supplycheck.project.schema import CriteriaTable
from supplycheck.project.sections import Sections
from supplycheck.project.tags import TagCheck
from supplycheck.units import UNIT_SETS

_TABLES = frozenset({"standpipe", "fire_flow", "hydrant"})
NO_HOSE = HoseAllowance(0.0, None, 0.0, None, "no sprinklers: hoses are fed by the outlets", "given")


@dataclass(frozen=True, slots=True)
class Duties:
    """The duties beside sprinklers."""

    standpipes: StandpipeDuty | None
    hydrants: HydrantDuty | None
    outflows: OutflowDuty | None = None


def criteria_table(sections: Sections, system: System | None, faults: FaultList) -> CriteriaTable | None:
    """Return the criteria as written, or those of a project that has other duties and no sprinklers."""
    heads = [node for node in system.nodes if node.kind == "sprinkler"] if system else []
    table = sections.criteria
    place = sections.place("criteria")
    if table is None:
        if "criteria" in sections.present or system is None:
            return None
        if not heads:
            return CriteriaTable(hazard=NO_HAZARD, system="wet")
        if not faults.touched(place):
            faults.add(place, "the table is missing", remedy="sprinklers need a table [criteria]")
        return None
    if table.hazard.casefold() == NO_HAZARD and heads:
        faults.add(
            sections.place("criteria.hazard"),
            "there are sprinklers, but no hazard class",
            found=f"{len(heads)} sprinklers",
            allowed="the hazard class of the building",
        )
    if table.system is not None:
        return table
    where = sections.place("criteria.system")
    if table.hazard.casefold() != NO_HAZARD and not faults.touched(where):
        faults.add(where, "is missing", allowed="Kind of system", remedy="add the key")
    return table.model_copy(update={"system": "wet"})


def read_duties(
    sections: Sections, system: System | None, tags: TagCheck, notes: Notes, faults: FaultList
) -> Duties:
    """Return the duties of the project. With faults noted they are not fit for use."""
    heads = system is not None and any(node.kind == "sprinkler" for node in system.nodes)
    standpipes = hydrants = None
    if sections.standpipe is not None:
        standpipes = StandpipeReader(sections, tags, notes, faults).read(sections.standpipe)
    if sections.fire_flow is not None:
        reader = HydrantReader(sections, tags, notes, faults)
        hydrants = reader.read(sections.fire_flow, sections.hydrants, system, sprinklers=heads)
    elif sections.hydrants and "fire_flow" not in sections.present:
        faults.add(
            sections.place("fire_flow"),
            "is missing: hydrants need a fire flow",
            allowed="a table [fire_flow] with flow, or construction and area",
        )
    alone = not heads and not sections.present & _TABLES
    outflows = _outflows(sections, system, notes) if system is not None and alone else None
    if alone and outflows is None:
        _note_nothing(sections, faults)
    return Duties(standpipes, hydrants, outflows)


def _outflows(sections: Sections, system: System, notes: Notes) -> OutflowDuty | None:
    """Return the fixed outflows of ``system``, ``None`` where nothing flows out."""
    drawn = [node for node in system.nodes if node.fixed_flow > 0]
    if not drawn:
        return None
    unstated = tuple(node.tag for node in drawn if node.minimum_pressure is None)
    if unstated:
        least = UNIT_SETS[sections.units].text(0.0, "pressure")
        source = "no pressure is stated there; below it no water leaves"
        notes.add("network.nodes.minimum_pressure", f"{least} at {listed(unstated)}", "assumed", source)
    return OutflowDuty(tuple(node.tag for node in drawn), unstated)


def _note_nothing(sections: Sections, faults: FaultList) -> None:
    """Note that the project asks for nothing, unless a fault of the system may be why."""
    named = sections.criteria is not None and sections.criteria.hazard.casefold() == NO_HAZARD
    if named or ("criteria" not in sections.present and not len(faults)):
        faults.add(
            sections.place("criteria.hazard" if named else "network.nodes"),
            "there is nothing to check",
            allowed="sprinklers, nodes with a flow, or a table [standpipe] or [fire_flow]",
        )


def with_duration(criteria: Criteria, duties: Duties) -> Criteria:
    """Return ``criteria`` with the duration of the fire flow where no sprinklers set one."""
    if criteria.has_sprinklers or criteria.duration is not None or duties.hydrants is None:
        return criteria
    return replace(criteria, duration=duties.hydrants.fire_flow.duration)
