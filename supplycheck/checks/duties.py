"""Rules on standpipes, private hydrants and fixed outflows."""

from __future__ import annotations

from collections.abc import Callable

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext
from supplycheck.checks.rule import About, Rule, count, flow, pressure, some
from supplycheck.findings import Finding, Measure
from supplycheck.model.duty import DutyRow, HydrantDuty, OutletState, StandpipeDuty
from supplycheck.supply.beyond import beyond_words

FIRE_FLOW = About(
    "required fire flow",
    "where the fire flow comes from, its reduction for sprinklers, its duration",
    ("ok", "ask authority", "missing", "not applicable"),
    "IFC appendix B, table B105.1 (2012, published); reduction from 2015 on from memory",
    weight=3,
)
NUMBER = About(
    "number of hydrants",
    "hydrants of the project against the number asked for the fire flow",
    ("ok", "ask authority", "not applicable"),
    "IFC appendix C (from memory)",
)
HYDRANTS = About(
    "residual at flowing hydrants",
    "pressure at every flowing hydrant and at the highest point in the cases that count",
    ("ok", "fail", "not applicable"),
    "IFC appendix B: fire flow at 20 psi residual; practice of utilities",
    weight=3,
)
MEANWHILE = About(
    "hydrants with a valve shut or with sprinklers",
    "the same pressures in the hydrant cases that are only listed",
    ("ok", "ask authority", "not applicable"),
    "reviewers' practice, no source",
)
GREATEST = About(
    "greatest flow of each hydrant",
    "flow at the residual asked against the share of the hydrant in the fire flow",
    ("ok", "fail", "missing", "not applicable"),
    "NFPA 291: hydrants are rated by their flow at 20 psi residual",
)
BODY = About(
    "loss of hydrants",
    "whether lateral and body of every hydrant are drawn or given, inside their curve",
    ("ok", "ask authority", "missing", "not applicable"),
    "data sheet of the hydrant; common practice, no source",
)
OUTLETS = About(
    "pressure at hose outlets",
    "pressure at every flowing outlet of the standpipes in the cases that count",
    ("ok", "fail", "not applicable"),
    "NFPA 14: 100 psi at 2½ in, 65 psi at 1½ in outlets (published)",
    weight=3,
)
REGULATING = About(
    "regulating devices at hose outlets",
    "pressure at every outlet at no flow, after its regulating device",
    ("ok", "fail", "missing", "not applicable"),
    "NFPA 14: above 175 psi a regulating device (from memory)",
)
CONNECTION = About(
    "fire department connection",
    "pressure that must be fed at the connection for the standpipe demand",
    ("ask authority", "missing", "not applicable"),
    "NFPA 14: the standpipe demand is supplied through the connection too (from memory)",
)

OUTFLOWS = About(
    "pressure asked at nodes",
    "pressure with the supply as it is at every node that states a minimum pressure, sprinklers apart",
    ("ok", "fail", "not applicable"),
    "the project; that every outflow runs at once: common practice, no source",
    weight=3,
)
STATED = About(
    "minimum pressure of outflows",
    "whether every fixed outflow states the pressure that must be left there",
    ("ok", "missing", "not applicable"),
    "reviewers' practice, no source",
    weight=2,
)

NO_HYDRANTS = "There are no private hydrants."
NO_STANDPIPES = "There are no standpipes."


def fire_flow(context: CheckContext) -> Finding:
    """The reduction is the authority's to grant."""
    duty = context.project.hydrants
    if duty is None:
        return FIRE_FLOW.says("not applicable", NO_HYDRANTS)
    asked = duty.fire_flow
    measured, source = flow(asked.flow), asked.source
    if asked.duration is None:
        ask = "For how long must the fire flow last?"
        text = "Not run: no duration of the fire flow is given."
        return FIRE_FLOW.says("missing", text, measured=measured, remedy=ask, source=source)
    values = {"time": Measure(asked.duration, "time")}
    if asked.table_flow is None or asked.reduction == 0:
        text = "Fire flow {measured} for {time}."
        return FIRE_FLOW.says("ok", text, measured=measured, values=values, source=source)
    values["table"] = flow(asked.table_flow)
    values["share"] = Measure(asked.reduction, "percent")
    text = "Fire flow {measured} for {time}: {table} of the table less {share} for sprinklers."
    ask = "Does the authority grant the reduction of the fire flow for sprinklers in full?"
    return FIRE_FLOW.says(
        "ask authority", text, measured=measured, values=values, remedy=ask, source=source
    )


def number(context: CheckContext) -> Finding:
    """Public hydrants near by may count, which the project does not tell."""
    duty = context.project.hydrants
    if duty is None or duty.hydrants_asked is None:
        return NUMBER.says("not applicable", NO_HYDRANTS)
    measured, limit = count(len(duty.hydrants)), count(duty.hydrants_asked)
    source = duty.asked_source or NUMBER.source
    if len(duty.hydrants) >= duty.hydrants_asked:
        text = "{measured} hydrants; the fire flow asks {limit}."
        return NUMBER.says("ok", text, measured=measured, limit=limit, source=source)
    text = "{measured} hydrants; the fire flow asks {limit}. Public ones near by may count."
    ask = "Which public hydrants count towards the number that the fire flow asks?"
    return NUMBER.says("ask authority", text, measured=measured, limit=limit, remedy=ask, source=source)


def _tightest(rows: list[DutyRow]) -> tuple[DutyRow, OutletState] | None:
    """Return the case and outlet with the least pressure to spare with the supply as it is."""
    pairs = [(row, outlet) for row in rows for outlet in row.outlets]
    return min(pairs, key=lambda pair: pair[1].spare, default=None)


def _rows(context: CheckContext, duty: str, *, counts: bool) -> list[DutyRow]:
    return [row for row in context.duties.rows if row.duty == duty and row.counts == counts]


def _judged(about: About, rows: list[DutyRow], remedy: str) -> Finding:
    """Return what the cases that count say: the outlet with least to spare."""
    tightest = _tightest(rows)
    cut = [row for row in rows if row.governing_by == "cut off"]
    if cut:
        text = f"{cut[0].label[:1].upper()}{cut[0].label[1:]}: {cut[0].note}."
        return about.says("fail", text, tags=(cut[0].governing,), remedy=remedy)
    if tightest is None:
        return about.says("not applicable", "No such case counts.")
    row, outlet = tightest
    measured, limit = pressure(outlet.pressure), pressure(outlet.required)
    text = f"{outlet.name[:1].upper()}{outlet.name[1:]} keeps {{measured}} in the case {row.label}; "
    text += "{limit} is asked."
    if outlet.pressure >= outlet.required - limits.ROUND_OFF * max(abs(outlet.required), 1.0):
        return about.says("ok", text, measured=measured, limit=limit, tags=(outlet.node,))
    return about.says("fail", text, measured=measured, limit=limit, tags=(outlet.node,), remedy=remedy)


def hydrants(context: CheckContext) -> Finding:
    """The lowest of all the cases that count."""
    if context.project.hydrants is None:
        return HYDRANTS.says("not applicable", NO_HYDRANTS)
    do = "Enlarge the main or its supply, or share the flow among more hydrants."
    return _judged(HYDRANTS, _rows(context, "hydrants", counts=True), do)


def meanwhile(context: CheckContext) -> Finding:
    """Whether a shut valve or sprinklers must be reckoned with is the authority's to say."""
    kinds = ("valve shut", "with sprinklers")
    rows = [row for row in _rows(context, "hydrants", counts=False) if row.kind in kinds]
    if not rows:
        return MEANWHILE.says("not applicable", "No such case is listed.")
    short = [row for row in rows if not row.margin >= 0]
    if not short:
        text = "The fire flow is there in each of {measured} cases with a valve shut or with sprinklers."
        return MEANWHILE.says("ok", text, measured=count(len(rows)))
    names = some(row.label for row in short)
    text = f"{{measured}} of {len(rows)} cases fall short or are cut off: {names}."
    ask = f"Must the fire flow be there in the case {names}?"
    return MEANWHILE.says("ask authority", text, measured=count(len(short)), limit=count(0), remedy=ask)


def greatest(context: CheckContext) -> Finding:
    """The poorest hydrant against its share."""
    rows = context.duties.hydrants
    if not rows:
        return GREATEST.says("not applicable", NO_HYDRANTS)
    known = [row for row in rows if row.greatest_flow is not None]
    unknown = [row for row in rows if row.greatest_flow is None and row.note.startswith("no solution")]
    if unknown or not known:
        if not unknown:
            return GREATEST.says("ok", "Nothing in the network limits the flow of any hydrant.")
        text = f"Not run: {some(row.tag for row in unknown)} cannot be solved."
        ask = "What keeps these hydrants from flowing?"
        return GREATEST.says("missing", text, tags=tuple(row.tag for row in unknown), remedy=ask)
    worst = min(known, key=lambda row: (row.greatest_flow or 0.0) / row.share)
    measured, limit = flow(worst.greatest_flow or 0.0), flow(worst.share)
    text = f"Hydrant {worst.tag} gives at most {{measured}} at the residual asked; its share is {{limit}}."
    if (worst.greatest_flow or 0.0) >= worst.share * (1 - limits.ROUND_OFF):
        return GREATEST.says("ok", text, measured=measured, limit=limit, tags=(worst.tag,))
    do = "Enlarge what feeds this hydrant."
    return GREATEST.says("fail", text, measured=measured, limit=limit, tags=(worst.tag,), remedy=do)


def _bare(context: CheckContext, duty: HydrantDuty) -> tuple[str, ...]:
    """Return the hydrants whose node is a tee in the main and whose loss nobody gave."""
    degree: dict[str, int] = {}
    for pipe in context.project.system.pipes:
        for tag in (pipe.start, pipe.end):
            degree[tag] = degree.get(tag, 0) + 1
    with_device = {pipe.start for pipe in context.project.system.pipes if pipe.devices}
    with_device |= {pipe.end for pipe in context.project.system.pipes if pipe.devices}
    return tuple(
        one.tag
        for one in duty.hydrants
        if one.device is None and (degree.get(one.node, 0) > 1 or one.node not in with_device)
    )


def body(context: CheckContext) -> Finding:
    """A lateral that ends at the hydrant holds its loss; the body is a device in it, or named."""
    duty = context.project.hydrants
    if duty is None:
        return BODY.says("not applicable", NO_HYDRANTS)
    bare = _bare(context, duty)
    if bare:
        ask = f"What do lateral and body of {some(bare)} lose at the fire flow?"
        text = f"Not run: nobody gave the loss of {some(bare)}."
        return BODY.says("missing", text, tags=bare, remedy=ask)
    beyond = tuple(row.tag for row in context.duties.hydrants if not row.device_in_range)
    if beyond:
        ask = f"What do lateral and body of {some(beyond)} lose beyond their curve?"
        text = f"The loss of {some(beyond)} is carried on beyond its curve."
        return BODY.says("ask authority", text, tags=beyond, remedy=ask)
    return BODY.says("ok", "Every hydrant has the loss of its lateral and body.")


def outlets(context: CheckContext) -> Finding:
    """The lowest of all the cases that count."""
    if context.project.standpipes is None:
        return OUTLETS.says("not applicable", NO_STANDPIPES)
    do = "Enlarge the standpipes or their feed, or boost the supply."
    return _judged(OUTLETS, _rows(context, "standpipes", counts=True), do)


def _regulated(context: CheckContext, duty: StandpipeDuty) -> Finding | None:
    """Return the finding where a device lacks what it takes to judge it."""
    rows = context.duties.standpipes
    unsaid = tuple(
        row.node
        for row in rows
        if row.device and row.after_device is None and row.no_flow > duty.regulating_pressure
    )
    if not unsaid:
        return None
    names = dict.fromkeys(row.device for row in rows if row.node in unsaid)
    ask = f"What does {some(names)} leave at no flow at the inlet pressures of {some(unsaid)}?"
    text = f"Not run: the table of {some(names)} does not reach the pressure at no flow."
    return REGULATING.says("missing", text, tags=unsaid, remedy=ask)


def regulating(context: CheckContext) -> Finding:
    """Greatest pressure without flow, on the highest measured supply with pumps at churn."""
    duty, rows = context.project.standpipes, context.duties.standpipes
    if duty is None or not rows:
        return REGULATING.says("not applicable", NO_STANDPIPES)
    limit = pressure(duty.regulating_pressure)
    over = [row for row in rows if row.over_limit and not (row.device and row.after_device is None)]

    def shown(row: int) -> float:
        one = rows[row]
        return one.no_flow if one.after_device is None else one.after_device

    if over:
        worst = max(over, key=lambda row: row.no_flow if row.after_device is None else row.after_device)
        at = worst.no_flow if worst.after_device is None else worst.after_device
        text = f"{{measured}} at outlet {worst.node} at no flow, {len(over)} outlets above {{limit}}."
        do = "Give these outlets pressure-regulating devices, and their tables in the project."
        tags = tuple(row.node for row in over)
        return REGULATING.says("fail", text, measured=pressure(at), limit=limit, tags=tags, remedy=do)
    lacking = _regulated(context, duty)
    if lacking is not None:
        return lacking
    highest = max(range(len(rows)), key=shown)
    text = f"At most {{measured}} at an outlet at no flow ({rows[highest].node}); the limit is {{limit}}."
    return REGULATING.says("ok", text, measured=pressure(shown(highest)), limit=limit)


def connection(context: CheckContext) -> Finding:
    """What a pumper has to feed; whether it can is known to the fire department alone."""
    if context.project.standpipes is None:
        return CONNECTION.says("not applicable", NO_STANDPIPES)
    row = context.duties.connection
    if row is None:
        ask = "At which node does the fire department connection join the standpipes?"
        return CONNECTION.says("missing", "Not run: no connection is named.", remedy=ask)
    if row.note.startswith("no solution"):
        ask = f"Is {row.node} joined to the standpipes so that water can enter there?"
        return CONNECTION.says("missing", f"Not run: {row.note}.", tags=(row.node,), remedy=ask)
    values = {"flow": flow(row.flow)}
    text = f"{{measured}} is needed at {row.node} to give {{flow}} ({row.case})."
    ask = f"Can the fire department feed this pressure and flow into {row.node}?"
    return CONNECTION.says(
        "ask authority", text, measured=pressure(row.pressure), values=values, tags=(row.node,), remedy=ask
    )


def asked_at_nodes(context: CheckContext) -> Finding:
    """The node with least to spare beyond what the project states."""
    operating = context.operating
    if operating is None:
        return OUTFLOWS.says("not applicable", "What really flows was not solved.")
    places = {tag: row for row, tag in enumerate(operating.node_tags)}
    states = [
        (float(operating.pressure[places[node.tag]]) - node.minimum_pressure, node)
        for node in context.project.system.nodes
        if node.minimum_pressure is not None and node.kind != "sprinkler"
    ]
    if not states:
        return OUTFLOWS.says("not applicable", "No node but sprinklers states a minimum pressure.")
    spare, node = min(states, key=lambda pair: pair[0])
    asked = node.minimum_pressure or 0.0
    measured, limit, tags = pressure(spare + asked), pressure(asked), (node.tag,)
    text = f"Node {node.tag} keeps {{measured}} in the case {context.case.label}; {{limit}} is asked."
    doubt = beyond_words(operating)
    text += f" What really flows is {doubt}." if doubt else ""
    if spare >= -limits.ROUND_OFF * max(abs(asked), 1.0):
        return OUTFLOWS.says("ok", text, measured=measured, limit=limit, tags=tags)
    do = "Enlarge what feeds this node, or boost the supply."
    return OUTFLOWS.says("fail", text, measured=measured, limit=limit, tags=tags, remedy=do)


def stated(context: CheckContext) -> Finding:
    """An outflow without a pressure would be served by any supply that reaches it."""
    duty = context.project.outflows
    if duty is None:
        return STATED.says("not applicable", "Fixed outflows are not what this project is judged by.")
    if not duty.unstated:
        text = "{measured} outflows, each with the pressure that must be left."
        return STATED.says("ok", text, measured=count(len(duty.drawn)))
    ask = f"Which pressure must be left at {some(duty.unstated)}?"
    text = f"Not run: no minimum pressure is stated at {some(duty.unstated)}; 0 is taken."
    return STATED.says("missing", text, tags=duty.unstated, remedy=ask)


_ALL: tuple[tuple[About, Callable[[CheckContext], Finding]], ...] = (
    (FIRE_FLOW, fire_flow),
    (NUMBER, number),
    (HYDRANTS, hydrants),
    (MEANWHILE, meanwhile),
    (GREATEST, greatest),
    (BODY, body),
    (OUTLETS, outlets),
    (REGULATING, regulating),
    (CONNECTION, connection),
    (OUTFLOWS, asked_at_nodes),
    (STATED, stated),
)
RULES = tuple(Rule(about, run) for about, run in _ALL)
