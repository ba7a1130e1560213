"""Rules on the basis of the calculation: standard, authority, method, assumptions, what lies outside."""

from __future__ import annotations

import re

from supplycheck.checks.context import CheckContext
from supplycheck.checks.rule import About, Rule, count, some
from supplycheck.checks.wording import told
from supplycheck.findings import Finding

EDITION = About(
    "standard and edition",
    "whether the adopted standard and its edition are named",
    ("ok", "missing"),
    "NFPA 13, hydraulic data report: the standard with its edition",
)
AUTHORITY = About(
    "authority",
    "whether the approving authority is named",
    ("ok", "missing"),
    "NFPA 13, hydraulic data report: approving agency",
)
OCCUPANCY = About(
    "occupancy behind the hazard",
    "whether the occupancy is described for which the hazard class is chosen; a person compares the two",
    ("missing", "ask authority"),
    "NFPA 13, hydraulic data report: hazard description; a class too low is the commonest real error",
    weight=3,
)
DESIGNER = About(
    "designer",
    "whether somebody is named who takes responsibility for the design",
    ("ok", "missing"),
    "NFPA 13, hydraulic data report: name of the contractor or designer",
    weight=1,
)
PLAN = About(
    "coordinates of every node",
    "whether every node has coordinates in plan; whether the figure shows it is not looked at",
    ("ok", "missing"),
    "NFPA 13, hydraulic data report: reference points on the plan",
    weight=1,
)
FRICTION = About(
    "friction formula",
    "friction law against the form that the standard prints, and against the fluid",
    ("ok", "ask authority"),
    "NFPA 13: 4.52 form, Darcy-Weisbach for antifreeze (from memory); BS EN 12845:2004 13.2.1: 6.05e5 form",
)
FULL = About(
    "full calculation of loops",
    "whether looped and gridded pipes are solved as a network",
    ("ok", "not applicable"),
    "EN 12845 13.1.1: full calculation is mandatory for loops and grids",
    weight=1,
)
ASSUMED = About(
    "assumed values",
    "values on which the answer depends that nobody gave",
    ("ok", "ask authority"),
    "reviewers' practice, no source",
)
OUTSIDE = About(
    "outside this calculation",
    "freezing, obstructions, seismic bracing, storage arrangements, corrosion",
    ("ask authority",),
    "scope of a hydraulic calculation",
    weight=1,
)


_LONGEST = 80
"""Characters of a description that a finding repeats."""


def edition(context: CheckContext) -> Finding:
    """Figures change between editions, and amendments are nowhere in the file."""
    criteria, named = context.project.criteria, context.project.facts.standard.strip()
    year = criteria.edition.strip()
    if not named or not (year or re.search(r"\b(19|20)\d\d\b", named)):
        name = named or criteria.standard
        text = f"Not run: {name} is named without its edition."
        return EDITION.says("missing", text, remedy=f"Which edition of {criteria.standard} is adopted?")
    text = f"Calculated to {named}; local amendments are not part of it."
    return EDITION.says("ok", text)


def authority(context: CheckContext) -> Finding:
    """The name as typed."""
    name = context.project.facts.authority.strip()
    if not name:
        ask = "Which authority reviews this project?"
        return AUTHORITY.says("missing", "Not run: no authority is named.", remedy=ask)
    return AUTHORITY.says("ok", f"To be reviewed by {name}.")


def occupancy(context: CheckContext) -> Finding:
    """The program cannot judge the class; it shows on what it rests."""
    hazard = context.project.criteria.hazard
    told = " ".join(context.project.facts.occupancy.split())
    if not told:
        ask = f"What is done and stored in the building, how high, that {hazard} covers it?"
        return OCCUPANCY.says("missing", "Not run: no occupancy is described.", remedy=ask)
    short = told if len(told) <= _LONGEST else f"{told[:_LONGEST].rstrip()}…"
    text = f"{hazard[:1].upper()}{hazard[1:]} is chosen (not judged here) for: {short}."
    ask = f"Does {hazard} cover this occupancy: {short}?"
    if context.european and context.hazard == "light":
        ask += " Does every room keep to the size and fire resistance that light hazard asks?"
    return OCCUPANCY.says("ask authority", text, remedy=ask)


def designer(context: CheckContext) -> Finding:
    """The name as typed."""
    name = context.project.facts.designer.strip()
    if not name:
        ask = "Who takes responsibility for the design?"
        return DESIGNER.says("missing", "Not run: no designer is named.", remedy=ask)
    return DESIGNER.says("ok", f"Designed by {name}.")


def plan(context: CheckContext) -> Finding:
    """Tables may leave the coordinates out."""
    bare = tuple(node.tag for node in context.project.system.nodes if node.x is None or node.y is None)
    if bare:
        ask = f"Where in plan do {some(bare)} lie?"
        text = f"Not run: {len(bare)} nodes have no coordinates: {some(bare)}."
        return PLAN.says("missing", text, tags=bare, remedy=ask)
    return PLAN.says("ok", "Every node has coordinates; whether the plan shows it is not looked at.")


def friction(context: CheckContext) -> Finding:
    """Standard first, then fluid."""
    project = context.project
    water = "water" in project.fluid.name.casefold() or not project.fluid.name
    law, standard = project.law, project.criteria.standard
    if law.family == "hazen-williams" and not water:
        text = f"{project.fluid.name} is calculated by Hazen-Williams, which holds for water."
        ask = f"Is Hazen-Williams accepted for {project.fluid.name}, or is Darcy-Weisbach asked?"
        return FRICTION.says("ask authority", text, remedy=ask)
    if law.family != "hazen-williams" and water:
        text = f"Friction follows Darcy-Weisbach; {standard} prints Hazen-Williams."
        ask = f"Is Darcy-Weisbach accepted in place of the formula of {standard}?"
        return FRICTION.says("ask authority", text, remedy=ask)
    printed = {"NFPA 13": "4.52", "EN 12845": "6.05"}[standard]
    if law.family == "hazen-williams" and printed not in law.name:
        text = f"Friction follows another form than {standard} prints: {law.name}."
        ask = f"Is this form accepted in place of the one that {standard} prints?"
        return FRICTION.says("ask authority", text, remedy=ask)
    return FRICTION.says("ok", f"Friction: {law.name}.")


def loops_in(context: CheckContext) -> int:
    """Return the number of independent loops of the open pipes."""
    parent = {tag: tag for tag in context.nodes}

    def root(tag: str) -> str:
        while parent[tag] != tag:
            parent[tag] = parent[parent[tag]]
            tag = parent[tag]
        return tag

    loops = 0
    for pipe in context.project.system.pipes:
        if pipe.valve == "closed":
            continue
        one, two = root(pipe.start), root(pipe.end)
        loops += one == two
        parent[one] = two
    return loops


def full_calculation(context: CheckContext) -> Finding:
    """The solver always solves the whole network."""
    if not context.european:
        return FULL.says("not applicable", "Asked by EN 12845 only.")
    loops = loops_in(context)
    if not loops:
        return FULL.says("not applicable", "The pipes form no loop.")
    text = f"{{measured}} loop{'s' * (loops != 1)}, solved as one network."
    return FULL.says("ok", text, measured=count(loops))


def assumed(context: CheckContext) -> Finding:
    """Assumed is what nobody gave; catalogue and inferred values have their source, paper has no weight."""
    notes = [
        note
        for note in context.project.assumptions
        if note.origin == "assumed" and not note.key.startswith("project.")
    ]
    if not notes:
        return ASSUMED.says("ok", "No value is assumed.", measured=count(0))
    standpipes = context.project.standpipes
    words = told(notes, [riser.tag for riser in standpipes.risers] if standpipes else [])
    text = f"{{measured}} assumed: {some(words, show=2)}."
    ask = f"Are these assumed values right: {'; '.join(words)}?"
    keys = tuple(note.key for note in notes)
    return ASSUMED.says("ask authority", text, measured=count(len(keys)), tags=keys, remedy=ask)


def outside(context: CheckContext) -> Finding:
    """One line for all that a hydraulic calculation does not see."""
    del context
    text = "Freezing, obstructions, seismic bracing, storage arrangements and corrosion are not looked at."
    ask = "Who looks at freezing, obstructions, seismic bracing, storage arrangements and corrosion?"
    return OUTSIDE.says("ask authority", text, remedy=ask)


RULES = (
    Rule(EDITION, edition),
    Rule(AUTHORITY, authority),
    Rule(DESIGNER, designer),
    Rule(OCCUPANCY, occupancy),
    Rule(PLAN, plan),
    Rule(FRICTION, friction),
    Rule(FULL, full_calculation),
    Rule(ASSUMED, assumed),
    Rule(OUTSIDE, outside),
)
