"""Balance of the solution, recomputed from the reported numbers."""

from __future__ import annotations

from collections import defaultdict

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext
from supplycheck.checks.rule import About, Rule, flow
from supplycheck.findings import Finding, Measure, State
from supplycheck.model import FrictionLaw, Pipe

PRESSURE = About(
    "pressure balance",
    "pressures at both ends of every pipe against its friction, rise and devices, computed anew",
    ("ok", "fail"),
    "NFPA 13: 0.5 psi at a junction (from memory); CEA 4001 and EN 12845: 1 mbar",
    weight=3,
)
MASS = About(
    "flow balance",
    "flow into and out of every node",
    ("ok", "fail"),
    "CEA 4001 and EN 12845: 0.1 L/min at a junction; NFPA 13: 0.1 gpm (common practice, no source)",
    weight=3,
)


def _friction(pipe: Pipe, law: FrictionLaw, density: float, amount: float) -> float | None:
    if law.family != "hazen-williams" or pipe.c_factor is None or pipe.devices:
        return None
    size = abs(amount)
    per_length = (
        law.coefficient * (size / pipe.c_factor) ** law.flow_exponent / pipe.bore**law.bore_exponent
    )
    area = 0.7853981633974483 * pipe.bore**2
    minor = pipe.minor_k * density * (size / area) ** 2 / 2
    loss: float = per_length * (pipe.length + pipe.equivalent_length) + minor
    return loss if amount >= 0 else -loss


def pressure_gap(context: CheckContext, pipe: Pipe) -> float:
    """Return by how much [Pa] the pressures at the ends of ``pipe`` disagree with its losses.

    Friction is computed anew by Hazen-Williams; for Darcy-Weisbach and in a pipe with a device the
    reported loss is taken.
    """
    row, project = context.pipe_rows[pipe.tag], context.project
    friction = _friction(pipe, project.law, project.fluid.density, context.flow(pipe))
    if friction is None:
        friction = float(context.solution.friction[row])
    rise = context.nodes[pipe.end].elevation - context.nodes[pipe.start].elevation
    loss = friction + project.fluid.unit_weight * rise + float(context.solution.device_loss[row])
    return abs(context.pressure(pipe.start) - context.pressure(pipe.end) - loss)


def pressures(context: CheckContext) -> Finding:
    """Shut pipes have no law; one-way pipes without flow may hold any pressure back."""
    open_pipes = [
        pipe
        for pipe in context.project.system.pipes
        if pipe.valve != "closed"
        and not (context.flow(pipe) == 0 and (pipe.valve == "check" or pipe.devices))
    ]
    gaps = {pipe.tag: pressure_gap(context, pipe) for pipe in open_pipes}
    tag = max(gaps, key=lambda one: gaps[one], default="")
    most = gaps.get(tag, 0.0)
    limit = limits.BALANCE_EN if context.european else limits.BALANCE_NFPA
    where = f", in {tag}" if tag else ""
    return _judged(
        PRESSURE, Measure(most, "imbalance"), Measure(limit, "imbalance"), f"pressure{where}", tag
    )


def _judged(about: About, most: Measure, limit: Measure, what: str, tag: str) -> Finding:
    """The share is told, because the limit is about the last digit that is printed."""
    state: State = "ok" if most.value <= limit.value else "fail"
    values = {"share": Measure(most.value / limit.value, "percent")}
    text = f"Largest disagreement of {what}: {{share}} of the {{limit}} allowed."
    do = "Do not use these results: the calculation contradicts itself." if state == "fail" else ""
    tags = (tag,) if tag else ()
    return about.says(state, text, measured=most, limit=limit, tags=tags, values=values, remedy=do)


def mass(context: CheckContext) -> Finding:
    """Every node of the network, sources included."""
    net: dict[str, float] = defaultdict(float)
    solution = context.solution
    for tag, amount in zip(solution.source_tags, solution.source_flow, strict=True):
        net[tag] += float(amount)
    for tag, amount in zip(solution.node_tags, solution.outflow, strict=True):
        net[tag] -= float(amount)
    for pipe in context.project.system.pipes:
        amount = context.flow(pipe)
        net[pipe.start] -= amount
        net[pipe.end] += amount
    worst = max(net, key=lambda tag: abs(net[tag]))
    off, limit = abs(net[worst]), limits.BALANCE_FLOW_EN if context.european else limits.BALANCE_FLOW_NFPA
    return _judged(MASS, flow(off), flow(limit), f"flow, at {worst}", worst)


RULES = (Rule(PRESSURE, pressures), Rule(MASS, mass))
