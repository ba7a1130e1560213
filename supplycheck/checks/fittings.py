"""Rules on fittings: equivalent lengths corrected, tees charged where the flow turns."""

from __future__ import annotations

import re
from collections import defaultdict
from dataclasses import dataclass
from types import MappingProxyType

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext
from supplycheck.checks.geometry import distance
from supplycheck.checks.rule import About, Rule, count, some
from supplycheck.findings import Finding, Measure
from supplycheck.model import Fitting, Pipe

EQUIVALENT = About(
    "equivalent lengths corrected",
    "equivalent lengths from the table against the corrections for C and bore",
    ("ok", "fail", "ask authority", "not applicable"),
    "NFPA 13: (C/120)^1.85 and (bore/table bore)^4.87; EN 12845 table 23: C row only",
)
TEES = About(
    "tee where flow turns",
    "whether each point where flow divides is charged a tee or cross",
    ("ok", "fail", "ask authority", "not applicable"),
    "NFPA 13 charging rules (from memory): the leg that turns is charged the tee",
)
TWICE = About(
    "fitting charged twice",
    "whether an elbow or a tee stands on a pipe both as written and from geometry",
    ("ok", "ask authority", "not applicable"),
    "reviewers' practice, no source: both count, so that one real fitting may be charged twice",
)
OWN_TURNS = 1.05
"""A pipe that is longer than its ends are apart by over 5 % has elbows of its own (common practice)."""
_FAMILIES = MappingProxyType(
    {"elbow": re.compile(r"elbow|bend|\bell\b"), "tee": re.compile(r"\b(tee|cross)\b")}
)


@dataclass(frozen=True, slots=True)
class _Charged:
    """A fitting charged from the table: its length and what C, then C and bore make of it [m]."""

    pipe: Pipe
    fitting: Fitting
    for_c: float
    for_both: float


def _charged(context: CheckContext) -> list[_Charged]:
    found = []
    for pipe in context.project.system.pipes:
        for_c = ((pipe.c_factor or 120.0) / 120.0) ** 1.85
        reference = None if context.european else context.reference_bores.get(pipe.nominal)
        for_bore = (pipe.bore / reference) ** 4.87 if reference else 1.0
        for fitting in pipe.fittings:
            plain = fitting.table_length * fitting.count
            if plain > 0 and "as written" not in fitting.source:
                found.append(_Charged(pipe, fitting, plain * for_c, plain * for_c * for_bore))
    return found


def equivalent(context: CheckContext) -> Finding:
    """Within 1 %: the printed C row is rounded (0.713 for 0.714, 1.51 for 1.511).

    A length that is right for C but not for the bore may be stated for this very pipe, so it is asked.
    Lengths written on the pipe are taken as they are.
    """
    if context.project.law.family != "hazen-williams":
        return EQUIVALENT.says("not applicable", "The corrections belong to Hazen-Williams.")
    charged = _charged(context)
    if not charged:
        return EQUIVALENT.says("not applicable", "No fitting is charged from a table.")
    low = [one for one in charged if one.fitting.length < 0.99 * one.for_c]
    if low:
        one = max(low, key=lambda each: each.for_c - each.fitting.length)
        tags, where = tuple({each.pipe.tag: 0 for each in low}), f"{one.fitting.name} on {one.pipe.tag}"
        text = f"{where} is charged {{measured}}; corrected for C it is {{limit}}."
        do = "Multiply table lengths by (C/120)^1.85."
        measured, limit = Measure(one.fitting.length, "length"), Measure(one.for_c, "length")
        return EQUIVALENT.says("fail", text, measured=measured, limit=limit, tags=tags, remedy=do)
    low = [one for one in charged if one.fitting.length < 0.99 * one.for_both]
    if low:
        one = max(low, key=lambda each: each.for_both - each.fitting.length)
        tags, where = tuple({each.pipe.tag: 0 for each in low}), f"{one.fitting.name} on {one.pipe.tag}"
        text = (
            f"{one.fitting.name} on {one.pipe.tag} is charged {{measured}}; with the bore it is {{limit}}."
        )
        ask = f"Is the length of the {one.fitting.name} on {some(tags)} stated for this very bore?"
        measured, limit = Measure(one.fitting.length, "length"), Measure(one.for_both, "length")
        return EQUIVALENT.says("ask authority", text, measured=measured, limit=limit, tags=tags, remedy=ask)
    return EQUIVALENT.says("ok", "Equivalent lengths are corrected for C and bore.")


def tees(context: CheckContext) -> Finding:
    """Where three pipes carry flow, at least one of them turns."""
    small = limits.ROUND_OFF * context.comparison.demand_flow
    pipes = context.project.system.pipes
    at: dict[str, list[Pipe]] = defaultdict(list)
    for pipe in pipes:
        if abs(context.flow(pipe)) > small:
            at[pipe.start].append(pipe)
            at[pipe.end].append(pipe)
    forks = {tag: pipes for tag, pipes in at.items() if len(pipes) >= 3}
    if not forks:
        return TEES.says("not applicable", "The flow divides nowhere.")
    bare = tuple(tag for tag, pipes in forks.items() if not any(_turns(pipe, tag) for pipe in pipes))
    mains = not context.project.criteria.has_sprinklers
    if mains and not any(pipe.fittings for pipe in pipes):
        text = "No fitting is charged anywhere in these mains; the flow divides at {count} points."
        ask = "Does the C-factor of the mains take in their fittings, or are tees and valves to be added?"
        return TEES.says("ask authority", text, tags=bare, remedy=ask, values={"count": count(len(forks))})
    if bare:
        text = f"No tee or cross is charged where the flow divides at {some(bare)}."
        which = "" if mains else " (branch outlet, riser nipple)"
        do = f"Charge the leg that turns{which} the tee of its own size."
        do += ' Tables do so by fittings = "from geometry".' if mains else ""
        return TEES.says("fail", text, tags=bare, remedy=do)
    return TEES.says("ok", "Each point where the flow divides is charged a tee or cross.")


def _turns(pipe: Pipe, tag: str) -> bool:
    words = ("tee", "cross", "outlet", "equivalent")
    return any(
        fitting.node in {None, tag}
        and (fitting.minor_k > 0 or any(word in fitting.name.casefold() for word in words))
        for fitting in pipe.fittings
    )


def _wanders(context: CheckContext, pipe: Pipe) -> bool:
    apart = distance(context.nodes[pipe.start], context.nodes[pipe.end])
    return apart is not None and pipe.length > OWN_TURNS * apart


def _family(fitting: Fitting) -> str:
    name = fitting.name.casefold()
    return next((family for family, words in _FAMILIES.items() if words.search(name)), "")


def twice(context: CheckContext) -> Finding:
    """Whether it is one fitting or two cannot be seen from the file; both count, on the safe side.

    Only fittings of one pipe are compared: an elbow written on one pipe and one that geometry charges to
    the next are as a rule the two ends of the former.
    """
    pipes = context.project.system.pipes
    both = [pipe for pipe in pipes if {"given", "inferred"} <= {one.origin for one in pipe.fittings}]
    if not both:
        return TWICE.says("not applicable", "No pipe has fittings both as written and from geometry.")
    found = []
    for pipe in both:
        inferred = {_family(one): one for one in pipe.fittings if one.origin == "inferred"}
        for one in pipe.fittings:
            other = inferred.get(_family(one)) if one.origin == "given" else None
            if other and not (_family(one) == "elbow" and _wanders(context, pipe)):
                found.append((pipe, one, other))
    if not found:
        return TWICE.says("ok", "No elbow or tee is both written on a pipe and inferred for it.")
    pipe, one, other = found[0]
    tags = tuple(dict.fromkeys(each.tag for each, _, _ in found))
    text = f"{pipe.tag} is charged {one.count} {one.name} as written; geometry charges it {other.count} "
    text += f"{other.name} at {other.node}. The written one adds {{measured}}."
    ask = f"Is the {one.name} written on {some(tags)} the turn at its end, "
    ask += "so that it is to be taken out of the column fittings?"
    measured = Measure(one.length, "length")
    return TWICE.says("ask authority", text, measured=measured, tags=tags, remedy=ask)


RULES = (Rule(EQUIVALENT, equivalent), Rule(TEES, tees), Rule(TWICE, twice))
