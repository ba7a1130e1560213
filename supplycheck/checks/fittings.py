"""Rules on fittings: equivalent lengths corrected, tees charged where the flow turns."""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext
from supplycheck.checks.rule import About, Rule, some
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
    ("ok", "fail", "not applicable"),
    "NFPA 13 charging rules (from memory): the leg that turns is charged the tee",
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
    at: dict[str, list[Pipe]] = defaultdict(list)
    for pipe in context.project.system.pipes:
        if abs(context.flow(pipe)) > small:
            at[pipe.start].append(pipe)
            at[pipe.end].append(pipe)
    forks = {tag: pipes for tag, pipes in at.items() if len(pipes) >= 3}
    if not forks:
        return TEES.says("not applicable", "The flow divides nowhere.")
    bare = tuple(tag for tag, pipes in forks.items() if not any(_turns(pipe, tag) for pipe in pipes))
    if bare:
        text = f"No tee or cross is charged where the flow divides at {some(bare)}."
        do = "Charge the leg that turns (branch outlet, riser nipple) the tee of its own size."
        return TEES.says("fail", text, tags=bare, remedy=do)
    return TEES.says("ok", "Each point where the flow divides is charged a tee or cross.")


def _turns(pipe: Pipe, tag: str) -> bool:
    words = ("tee", "cross", "outlet", "equivalent")
    return any(
        fitting.node in {None, tag}
        and (fitting.minor_k > 0 or any(word in fitting.name.casefold() for word in words))
        for fitting in pipe.fittings
    )


RULES = (Rule(EQUIVALENT, equivalent), Rule(TEES, tees))
