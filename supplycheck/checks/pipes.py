"""Rules on pipes: C-factor, bore, elevations, velocity."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

import numpy as np

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext
from supplycheck.checks.rule import About, Rule, pressure, some
from supplycheck.findings import Finding, Measure, State
from supplycheck.model import Pipe
from supplycheck.network.records import Solution

C_SYSTEM = About(
    "C-factor of dry steel",
    "C-factor of steel pipe in dry and preaction systems against 100",
    ("ok", "fail", "missing", "not applicable"),
    "NFPA 13 (2019, 2022, from memory): steel 100 in dry and preaction systems, 120 in wet",
    weight=3,
)
C_CATALOGUE = About(
    "C-factor against the catalogue",
    "C-factor of every pipe against the catalogue's for its material",
    ("ok", "ask authority", "missing", "not applicable"),
    "C-factors of the adopted standard, from the catalogue",
)
BORE = About(
    "actual bore",
    "bore of every pipe against its nominal size, and whether its source is known",
    ("ok", "fail", "missing"),
    "reviewers' practice, no source: nominal size in place of the bore is among the commonest errors",
)
ELEVATIONS = About(
    "elevations given",
    "whether any elevation is assumed, and whether all are the same",
    ("ok", "ask authority", "missing"),
    "reviewers' practice, no source: elevations without a datum are among the commonest errors",
    weight=3,
)
RISES = About(
    "pipe shorter than its rise",
    "length of every pipe against the difference in elevation of its ends",
    ("ok", "fail"),
    "geometry",
)
LEVEL = About(
    "risers and drops without rise",
    "elevation difference of every riser, riser nipple and drop",
    ("ok", "ask authority", "not applicable"),
    "reviewers' practice, no source: wrong elevations are among the commonest errors",
)
VELOCITY = About(
    "velocity",
    "largest velocity in pipes and through valves against the policy of the project",
    ("ok", "fail", "not applicable"),
    "EN 12845: 10 m/s (13.2.3, published example), 6 m/s at valves (from memory); NFPA 13 sets no limit",
)
VELOCITY_PRESSURE = About(
    "velocity pressure",
    "whether one policy is stated and kept",
    ("ok",),
    "NFPA 13: total pressure, or normal pressure throughout lines and mains (23.4.4.10)",
    weight=1,
)
_ELEVATION_SIDE = ("riser", "riser nipple", "drop")
_VALVE_WORDS = ("valve", "gate", "check", "butterfly", "strainer", "flow switch", "alarm")


def _steel(context: CheckContext, pipe: Pipe) -> bool:
    kind = context.kinds.get(pipe.kind)
    material = (kind.material if kind is not None else pipe.kind).casefold()
    return ("steel" in material or "galvan" in material) and "stainless" not in material


def dry_steel(context: CheckContext) -> Finding:
    """Underground pipe stays full, so it is left out."""
    system = context.project.criteria.system.casefold()
    if context.european or not ("dry" in system or "preaction" in system or "interlock" in system):
        reason = "EN 12845 makes no difference." if context.european else f"The system is {system}."
        return C_SYSTEM.says("not applicable", reason)
    if context.project.law.family != "hazen-williams":
        return C_SYSTEM.says("not applicable", "Darcy-Weisbach uses roughness, not C.")
    steel = [
        pipe
        for pipe in context.project.system.pipes
        if pipe.role != "underground" and _steel(context, pipe) and pipe.c_factor is not None
    ]
    if not steel:
        ask = "What C-factor has the steel pipe of this system?"
        return C_SYSTEM.says("missing", "Not run: no steel pipe with a C-factor.", remedy=ask)
    worst = max(steel, key=lambda pipe: pipe.c_factor or 0.0)
    measured, limit = Measure(worst.c_factor or 0.0, "count"), Measure(limits.DRY_STEEL_C, "count")
    over = tuple(pipe.tag for pipe in steel if (pipe.c_factor or 0.0) > limits.DRY_STEEL_C)
    if over:
        text = f"Steel in a {system} system is taken at C {{measured}} in {some(over)}; {{limit}} applies."
        do = "Use C 100, or show the edition and nitrogen supply that allow more."
        return C_SYSTEM.says("fail", text, measured=measured, limit=limit, tags=over, remedy=do)
    return C_SYSTEM.says("ok", "Steel is taken at C {measured} at most.", measured=measured, limit=limit)


def catalogue_c(context: CheckContext) -> Finding:
    """The pipe with the largest C over the catalogue's is shown."""
    if context.project.law.family != "hazen-williams":
        return C_CATALOGUE.says("not applicable", "Darcy-Weisbach uses roughness, not C.")
    known = [
        (pipe, pipe.c_factor, context.catalogue_c[pipe.kind])
        for pipe in context.project.system.pipes
        if pipe.c_factor is not None and pipe.kind in context.catalogue_c
    ]
    high = tuple(pipe.tag for pipe, used, table in known if used > table * (1 + limits.ROUND_OFF))
    if high:
        pipe, used, table = max(known, key=lambda one: one[1] / one[2])
        text = f"{pipe.kind} is taken at C {{measured}}; the catalogue has {{limit}}."
        ask = f"What supports C {used:g} for {pipe.kind}?"
        return C_CATALOGUE.says(
            "ask authority",
            text,
            measured=Measure(used, "count"),
            limit=Measure(table, "count"),
            tags=high,
            remedy=ask,
        )
    bare = {pipe.kind: 0 for pipe in context.project.system.pipes if pipe.kind not in context.catalogue_c}
    if bare:
        ask = f"What is the published C-factor of {some(bare)}?"
        text = f"Not run: the catalogue has no C-factor for {some(bare)}."
        return C_CATALOGUE.says("missing", text, tags=tuple(bare), remedy=ask)
    return C_CATALOGUE.says("ok", "No C-factor is above the catalogue's for its material and system.")


def nominal_size(text: str, *, metric: bool) -> float | None:
    """Return the size [m] that a nominal size names, ``None`` where it names none.

    >>> round(nominal_size("1 1/4", metric=False) / 0.0254, 2)
    1.25
    """
    words = text.casefold().replace("dn", "").replace("″", "").replace('"', "").split()
    unit = 1e-3 if metric else limits.INCH
    if words and words[-1] in {"in", "mm"}:
        unit = limits.INCH if words.pop() == "in" else 1e-3
    try:
        return float(sum(Fraction(word) for word in words)) * unit if words else None
    except (ValueError, ZeroDivisionError):
        return None


def bore(context: CheckContext) -> Finding:
    """12 in standard pipe is 12.000 in bore and so is exempt."""
    metric = context.project.units == "metric"
    written = {pipe.nominal for pipe in context.project.system.pipes}
    nominal = {text: nominal_size(text, metric=metric) for text in written}
    same = [
        pipe
        for pipe in context.project.system.pipes
        for size in (nominal[pipe.nominal],)
        if size is not None and abs(pipe.bore - size) < 5e-4 * size and abs(size - 12 * limits.INCH) > 1e-4
    ]
    if same:
        tags = tuple(pipe.tag for pipe in same)
        text = f"{some(tags)} is calculated with its nominal size ({{measured}}) as the bore."
        do = "Give the actual inside diameter of this pipe."
        return BORE.says("fail", text, measured=Measure(same[0].bore, "size"), tags=tags, remedy=do)
    used = {pipe.kind for pipe in context.project.system.pipes}
    bare = tuple(
        sorted(tag for tag in used if tag not in context.kinds or not context.kinds[tag].bore_source)
    )
    if bare:
        ask = f"Where does the bore of {some(bare)} come from?"
        return BORE.says(
            "missing", f"Not run: no source for the bore of {some(bare)}.", tags=bare, remedy=ask
        )
    return BORE.says("ok", "Every pipe has an actual bore with its source.")


def elevations(context: CheckContext) -> Finding:
    """The reader lists an elevation that was not given as an assumption."""
    keys = tuple(
        note.key
        for note in context.project.assumptions
        if "elevation" in note.key and note.origin == "assumed"
    )
    if keys:
        ask = f"What is {some(keys)}, on the datum of all other elevations?"
        return ELEVATIONS.says(
            "missing", f"Not run: assumed elevations: {some(keys)}.", tags=keys, remedy=ask
        )
    nodes = context.project.system.nodes
    values = {
        "low": Measure(min(node.elevation for node in nodes), "length"),
        "high": Measure(max(node.elevation for node in nodes), "length"),
    }
    if len(nodes) > 1 and values["low"] == values["high"]:
        ask = "Do supply, pipes and heads really lie at one elevation?"
        text = "Every node lies at {low}, supply and heads alike."
        return ELEVATIONS.says("ask authority", text, values=values, remedy=ask)
    return ELEVATIONS.says("ok", "Elevations are given at every node, {low} to {high}.", values=values)


def _rise(context: CheckContext, pipe: Pipe) -> float:
    return abs(context.nodes[pipe.end].elevation - context.nodes[pipe.start].elevation)


def rises(context: CheckContext) -> Finding:
    """Lengths are typed to a hundredth, so each end may be off by half of it."""
    pipes = context.project.system.pipes
    short = [pipe for pipe in pipes if _rise(context, pipe) > pipe.length + limits.TYPED_LENGTH]
    if not short:
        return RISES.says("ok", "No pipe is shorter than its rise.")
    short.sort(key=lambda pipe: pipe.length - _rise(context, pipe))
    worst = short[0]
    text = f"{worst.tag} is {{measured}} long but rises {{limit}} between {worst.start} and {worst.end}."
    measured, limit = Measure(worst.length, "length"), Measure(_rise(context, worst), "length")
    do = "Correct the length or an elevation."
    tags = tuple(pipe.tag for pipe in short)
    return RISES.says("fail", text, measured=measured, limit=limit, tags=tags, remedy=do)


def level(context: CheckContext) -> Finding:
    """A riser or drop between two nodes of one elevation has lost its height."""
    upright = [pipe for pipe in context.project.system.pipes if pipe.role in _ELEVATION_SIDE]
    if not upright:
        return LEVEL.says("not applicable", "No pipe is named a riser, riser nipple or drop.")
    flat = tuple(pipe.tag for pipe in upright if _rise(context, pipe) == 0 and pipe.length > 0)
    if flat:
        ask = f"What are the elevations at both ends of {some(flat)}?"
        text = f"{some(flat)} joins two nodes of one elevation."
        return LEVEL.says("ask authority", text, tags=flat, remedy=ask)
    return LEVEL.says("ok", "Every riser, riser nipple and drop has its height.")


def _is_valve(pipe: Pipe) -> bool:
    named = any(word in one.name.casefold() for one in pipe.fittings for word in _VALVE_WORDS)
    return named or bool(pipe.devices) or pipe.valve == "check"


@dataclass(frozen=True, slots=True, order=True)
class _Speed:
    """A velocity [m/s] over its limit, the velocity, the limit, the pipe, and where it was seen."""

    share: float
    speed: float
    limit: float
    tag: str
    where: str


def _fastest(solution: Solution, tags: set[str]) -> tuple[float, str]:
    rows = [row for row, tag in enumerate(solution.pipe_tags) if tag in tags]
    if not rows:
        return 0.0, ""
    speeds = np.nan_to_num(np.abs(solution.velocity[rows]))
    best = int(np.argmax(speeds))
    return float(speeds[best]), solution.pipe_tags[rows[best]]


def velocity(context: CheckContext) -> Finding:
    """Demand state and, where it was solved, what really flows: the faster counts."""
    policy, pipes = context.project.criteria.velocity, context.project.system.pipes
    every, valves = {pipe.tag for pipe in pipes}, {pipe.tag for pipe in pipes if _is_valve(pipe)}
    states = [("at the demand", context.solution)]
    if context.operating is not None:
        states.append(("with what really flows", context.operating))
    if policy.pipe_limit is None and policy.valve_limit is None:
        speed, tag, when = max((*_fastest(state, every), when) for when, state in states)
        text = f"No limit is set; the fastest is {{measured}} in {tag}, {when}."
        measured = Measure(speed, "velocity")
        return VELOCITY.says("not applicable", text, measured=measured, tags=(tag,))
    groups = (("in", every, policy.pipe_limit), ("through a valve in", valves, policy.valve_limit))
    worst = max(
        _Speed(speed / limit, speed, limit, tag, f"{place} {tag}, {when}")
        for place, tags, limit in groups
        if limit is not None
        for when, state in states
        for speed, tag in (_fastest(state, tags),)
    )
    state: State = "fail" if worst.share > 1 + limits.ROUND_OFF else "ok"
    return VELOCITY.says(
        state,
        f"{{measured}} {worst.where}; {policy.name} allows {{limit}}.",
        measured=Measure(worst.speed, "velocity"),
        limit=Measure(worst.limit, "velocity"),
        tags=(worst.tag,),
        remedy="Enlarge the pipe or valve." if state == "fail" else "",
        source=policy.source or VELOCITY.source,
    )


def velocity_pressure(context: CheckContext) -> Finding:
    """One switch for the whole project."""
    largest = float(np.nan_to_num(context.solution.velocity_pressure).max(initial=0.0))
    text = "Velocity pressure is left out throughout; at most {measured} in any pipe."
    if context.project.criteria.velocity_pressure:
        text = "Velocity pressure is taken into account throughout; at most {measured} in any pipe."
    return VELOCITY_PRESSURE.says("ok", text, measured=pressure(largest))


RULES = (
    Rule(C_SYSTEM, dry_steel),
    Rule(C_CATALOGUE, catalogue_c),
    Rule(BORE, bore),
    Rule(ELEVATIONS, elevations),
    Rule(RISES, rises),
    Rule(LEVEL, level),
    Rule(VELOCITY, velocity),
    Rule(VELOCITY_PRESSURE, velocity_pressure),
)
