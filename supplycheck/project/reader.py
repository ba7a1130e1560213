"""Reading a project: one function from the file to the frozen record, or all its faults at once."""

from __future__ import annotations

import contextlib
import math
import re
import tomllib
from dataclasses import replace
from pathlib import Path
from typing import Any, Final

from supplycheck.catalogue import HazardRow
from supplycheck.errors import DomainError
from supplycheck.findings import Place
from supplycheck.model import (
    Criteria,
    FrictionLaw,
    HoseAllowance,
    Project,
    ProjectFacts,
    Supply,
    System,
)
from supplycheck.model.system import Origin
from supplycheck.project.criteria import CriteriaReader
from supplycheck.project.dates import ALLOWED, date_problem, date_remedy, unquoted_date
from supplycheck.project.drafts import DraftSystem, Notes
from supplycheck.project.duties import NO_HOSE, criteria_table, read_duties, with_duration
from supplycheck.project.faults import FaultList, quoted
from supplycheck.project.files import Folder
from supplycheck.project.fittings import Lengths
from supplycheck.project.fluid import read_fluid
from supplycheck.project.layout import generate
from supplycheck.project.layout_parts import units_in
from supplycheck.project.network_tables import read_network
from supplycheck.project.parts import KindReader, kinds_by_name, read_devices, read_extra, read_sprinklers
from supplycheck.project.scenarios import read_scenarios
from supplycheck.project.sections import Sections, read_sections
from supplycheck.project.standard import Standard, read_laws, read_standard
from supplycheck.project.starter import unedited
from supplycheck.project.supply import SupplyReader
from supplycheck.project.system import Finisher, finish
from supplycheck.project.tags import TagCheck
from supplycheck.units import UNIT_SETS

PROJECT_FILE: Final = "project.toml"
LARGEST_PROJECT: Final = 5_000_000


def _parse(text: str, name: str, faults: FaultList) -> dict[str, Any] | None:
    """Return the TOML tables of ``text``; ``None`` with a fault noted."""
    if len(text) > LARGEST_PROJECT:
        faults.add(
            Place(name),
            "the project file is too large",
            found=f"{len(text) / 1e6:.1f} million characters",
            allowed=f"at most {LARGEST_PROJECT / 1e6:.0f} million; put long tables into CSV files",
        )
        return None
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as caught:
        match = re.fullmatch(
            r"(.*?)\s*\(at (?:line (\d+), column (\d+)|end of document)\)", str(caught), re.DOTALL
        )
        problem = match[1] if match else str(caught)
        twice = re.fullmatch(r"Cannot declare \((.*)\) twice", problem)
        where = f"line {match[2]}, column {match[3]}" if match and match[2] else "end of the file"
        lines = text.splitlines()
        line = (
            lines[int(match[2]) - 1].strip() if match and match[2] and int(match[2]) <= len(lines) else ""
        )
        if twice or problem == "Cannot overwrite a value":
            keys = re.findall(r"'([^']*)'", twice[1]) if twice else []
            what = f"[{'.'.join(keys)}]" if twice else "a key"
            remedy = "keep one of them" + ("; a list of them is written [[…]]" if twice else "")
            faults.add(Place(name, where), f"{what} stands twice", found=quoted(line), remedy=remedy)
            return None
        day = unquoted_date(line)
        if day:
            faults.add(
                Place(name, where),
                date_problem(day),
                found=quoted(line),
                allowed=ALLOWED,
                remedy=date_remedy(day),
            )
            return None
        faults.add(
            Place(name, where),
            f"is not TOML: {problem[:1].lower()}{problem[1:]}",
            found=quoted(line) if line else "",
            remedy="texts stand in quotes; a backslash or a quote in a text is written inside '…'",
        )
    except (ValueError, RecursionError) as caught:
        faults.add(
            Place(name),
            f"cannot be read as TOML ({type(caught).__name__})",
            allowed="plain tables and numbers",
        )
    return None


def _facts(sections: Sections, standard: Standard) -> ProjectFacts | None:
    table = sections.project
    if table is None:
        return None
    paper = table.paper or ("letter" if sections.units == "us" else "a4")
    return ProjectFacts(
        title=table.title,
        site=table.site,
        stage=table.stage,
        date=table.date,
        standard=standard.text,
        authority=table.authority,
        owner=table.owner,
        designer=table.designer,
        building=table.building,
        occupancy=table.occupancy,
        paper=paper,
    )


def _hose(
    sections: Sections,
    row: HazardRow | None,
    supply: Supply,
    tags: TagCheck,
    notes: Notes,
    faults: FaultList,
) -> HoseAllowance:
    """Return the hose allowance; what is not given comes from the hazard class and joins at the supply."""
    table = sections.hose
    units = units_in(table, UNIT_SETS[sections.units]) if table else UNIT_SETS[sections.units]
    inside = table.inside.si(units) if table and table.inside else 0.0
    total = (row.hose_outside if row else None) or 0.0
    source = row.source if row else ""
    node = supply.tests[0].node if supply.tests else supply.tanks[0].node if supply.tanks else ""
    if table and table.outside is not None:
        outside = table.outside.si(units)
        source = table.source or "given in the project"
    else:
        outside = max(total - inside, 0.0)
        text = units.text(outside, "flow")
        words = "hose of the hazard class" if total else "the standard asks for none"
        notes.add("hose.outside", text, "catalogue" if total else "assumed", f"{words}; {source}")
    outside_node = table.outside_node if table else None
    if outside_node is None and outside > 0:
        outside_node = node
        notes.add("hose.outside_node", node, "assumed", "outside hose joins at the supply node")
    if outside_node and table and table.outside_node:
        tags.node(outside_node, "hose.outside_node")
    inside_node = table.inside_node if table else None
    if inside_node:
        tags.node(inside_node, "hose.inside_node")
    elif inside > 0:
        faults.add(
            sections.place("hose.inside_node"),
            "is missing: inside hose joins at a node",
            allowed="a node tag",
        )
    origin: Origin = "given" if table and table.outside is not None else "catalogue"
    return HoseAllowance(inside, inside_node, outside, outside_node, source, origin)


def _check_area(
    sections: Sections, criteria: Criteria | None, system: System, tags: TagCheck, faults: FaultList
) -> None:
    """Note an empty design area and heads in it that do not exist."""
    where = "criteria.design_area"
    heads = [node for node in system.nodes if node.kind == "sprinkler"]
    draws = any(node.fixed_flow > 0 for node in system.nodes)
    if not heads and not faults.touched(sections.place("layout")):
        faults.add(
            sections.place("layout" if sections.layout else "network.nodes"),
            "there is no sprinkler",
            allowed="at least one node of kind sprinkler",
            remedy='or hazard = "none" in [criteria]' if draws else "",
        )
    area = criteria.design_area if criteria else "search"
    if area == "search":
        return
    if not area:
        faults.add(
            sections.place(where),
            "is empty",
            found="[]",
            allowed='"search", or the tags of at least one sprinkler',
        )
    tags.heads(area, where)


def _draft(
    sections: Sections, folder: Folder, sprinklers: Any, notes: Notes, faults: FaultList
) -> DraftSystem | None:
    if sections.layout is not None and sections.network is not None:
        faults.add(sections.place("network"), "layout and network are both given", allowed="one of them")
        return None
    if sections.layout is not None:
        return generate(sections, sprinklers, notes, faults)
    if sections.network is not None:
        return read_network(sections, folder, sprinklers, notes, faults)
    if not sections.present & {"layout", "network"}:
        faults.add(
            sections.place("layout"),
            "the system is missing",
            allowed="a table [layout] for a regular array, or [network] with tables of nodes and pipes",
        )
    return None


def _system(
    sections: Sections,
    folder: Folder,
    laws: tuple[FrictionLaw, FrictionLaw | None],
    standard: Standard | None,
    notes: Notes,
    faults: FaultList,
) -> System | None:
    extra = read_extra(sections)
    sprinklers = read_sprinklers(sections, notes, faults)
    devices = read_devices(sections, notes, faults)
    used = tuple(law for law in laws if law is not None)
    kind_reader = KindReader(sections, used, standard.text if standard else "", extra, notes, faults)
    kinds = kinds_by_name(kind_reader, sections.pipes)
    draft = _draft(sections, folder, sprinklers, notes, faults)
    if draft is None:
        return None
    lengths = Lengths(standard.text if standard else "NFPA 13", extra, faults)
    finisher = Finisher(sections, kinds, devices, lengths, faults)
    return finish(draft, finisher, sprinklers, notes, faults)


def _assemble(sections: Sections, folder: Folder, faults: FaultList) -> Project:
    notes = Notes()
    standard = read_standard(sections, faults)
    laws = read_laws(sections, standard, faults)
    system = _system(sections, folder, laws, standard, notes, faults)
    tags = TagCheck(system, sections, faults)
    criteria, row = None, None
    table = criteria_table(sections, system, faults)
    if table is not None and standard is not None:
        criteria, row = CriteriaReader(sections, table, standard, notes, faults).read()
    duties = read_duties(sections, system, tags, notes, faults)
    if system is not None and (criteria is None or criteria.has_sprinklers):
        _check_area(sections, criteria, system, tags, faults)
    fluid = read_fluid(sections, standard, laws, notes, faults)
    weight = fluid.unit_weight if fluid is not None else math.nan
    supply = None
    if sections.supply is not None:
        supply = SupplyReader(sections, sections.supply, tags, notes, faults, weight).read()
    hose = None
    if criteria is not None and not criteria.has_sprinklers and sections.hose is None:
        hose = NO_HOSE
    elif supply is not None:
        hose = _hose(sections, row, supply, tags, notes, faults)
    scenarios = read_scenarios(sections, tags, notes, faults)
    facts = _facts(sections, standard) if standard else None
    faults.stop()
    if (
        facts is None
        or criteria is None
        or system is None
        or supply is None
        or hose is None
        or fluid is None
    ):
        faults.add(Place(sections.file), "the project is not complete")
        faults.stop()
        raise AssertionError
    return Project(
        facts=facts,
        units=sections.units,
        criteria=with_duration(criteria, duties),
        system=system,
        supply=supply,
        hose=hose,
        fluid=fluid,
        law=laws[0],
        second_law=laws[1],
        scenarios=scenarios,
        assumptions=tuple(notes.entries),
        files=folder.files(),
        standpipes=duties.standpipes,
        hydrants=duties.hydrants,
        outflows=duties.outflows,
    )


def _check_there(path: Path, faults: FaultList) -> None:
    """Raise :class:`ProjectFaultsError` where there is no project at ``path`` at all."""
    folder, file = (path.parent, path) if path.name == PROJECT_FILE else (path, path / PROJECT_FILE)
    remedy = f"`supplycheck new {folder}` makes one"
    if path.is_dir() and not file.exists() and not file.is_symlink():
        faults.add(Place(str(path)), f"there is no {PROJECT_FILE} in this folder", remedy=remedy)
    elif not path.exists() and not path.is_symlink():
        where = "" if path.suffix and path.name != PROJECT_FILE else remedy
        faults.add(Place(str(path)), "there is no such folder or project file", remedy=where)
    faults.stop()


def read_project(path: Path) -> Project:
    """Return the project whose file, or whose folder with a ``project.toml``, is ``path``.

    Tables are read from the same folder only. All numbers of the record are SI.

    Raises
    ------
    ProjectFaultsError
        The project has faults; the error holds all that were found.
    """
    faults = FaultList()
    path = Path(path)
    _check_there(path, faults)
    if path.is_dir():
        path = path / PROJECT_FILE
    with contextlib.suppress(OSError, RuntimeError):  # a circle of links: the reading says so
        path = path.resolve()
    folder = Folder(path.parent, faults)
    text = folder.read_text(path.name, Place(path.name))
    raw = _parse(text, path.name, faults) if text is not None else None
    if raw is None:
        faults.stop()
    sections = read_sections(raw or {}, path.name, faults)
    faults.seal()
    try:
        project = _assemble(sections, folder, faults)
        return replace(project, unedited=unedited(text or "", raw or {}))
    except DomainError:
        faults.stop()  # a stand-in for a value that could not be read has gone too far
        raise
