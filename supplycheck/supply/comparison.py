"""Demand and supply side by side at one point, and the margin before and after the rule.

The network is solved from the source, so the losses between source and point of comparison are known at
the demand flow. What is left over at the source is left over at the point as well:

    available there = demand there + (curve at the demand flow − demand at the source).

The demand flow is all that the supply gives: sprinklers, hose inside and outside, and any other fixed
outflow, each counted once, at the node where it is drawn.
"""

from __future__ import annotations

import datetime as dt
import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Final

from supplycheck.errors import DomainError
from supplycheck.model import Project
from supplycheck.model.words import Step, Value, Words
from supplycheck.network import Network
from supplycheck.network.records import Solution
from supplycheck.supply.floor import Floor, floor_of
from supplycheck.supply.hose import hose_parts
from supplycheck.supply.margin import MarginCase, RequiredMargin, required_margin, rule_words
from supplycheck.supply.narration import demand_step, left_over_step, sharing_step, source_steps
from supplycheck.supply.point import Point, point_of
from supplycheck.supply.route import CarriedCurve
from supplycheck.supply.shares import SourceShare
from supplycheck.supply.sources import NodeSupply
from supplycheck.supply.states import States


@dataclass(frozen=True, slots=True)
class Comparison:
    """Demand against supply at ``node``; pressures [Pa], flows [m³/s].

    ``demand_flow`` is all that the sources give: ``sprinkler_flow`` + ``hose_inside`` + ``hose_outside`` +
    ``other_flow``. ``carried_flow`` is what passes ``node`` or is drawn at it. ``available_pressure`` is
    what a gauge at ``node`` shows with the demand drawn from the supplies as they are. ``available_flow``
    is the flow at which the demand pressure is still there (``None``: at every flow). ``margin`` is by how
    much the supply can be lowered with the demand still met: the available less the demand pressure, unless
    a regulating valve throttles more while the supply is not lowered, or less than nothing would be left in
    a main (``floor``). ``required`` is what the rule asks
    (``None``: no rule given) and ``after_rule`` what is left. ``static`` is what a gauge at ``node`` shows
    with nothing drawn from the compared curves, ``highest_static`` the highest that the highest measured
    ones can bring there. ``principal`` is the source that gives most; the flows at 20 psi are read at its
    gauge, on the lowest measured and on the adjusted curve. ``carried`` is the curve of the source whose
    water comes to ``node``, behind the losses of its route. ``states`` solves the network for the
    pressure at ``node``; ``None`` where the sum along the route is exact at every flow.
    """

    node: str
    demand_flow: float
    carried_flow: float
    sprinkler_flow: float
    hose_inside: float
    hose_outside: float
    other_flow: float
    demand_pressure: float
    available_pressure: float
    unadjusted_pressure: float
    available_flow: float | None
    static: float
    highest_static: float
    margin: float
    required: float | None
    after_rule: float | None
    rule: Words
    rule_source: str
    principal: str
    sources: tuple[SourceShare, ...]
    carried: CarriedCurve
    carried_unadjusted: CarriedCurve
    supply_steps: tuple[Step, ...]
    margin_steps: tuple[Step, ...]
    flow_at_20_psi: float | None
    adjusted_flow_at_20_psi: float | None
    notes: tuple[Words, ...]
    states: States | None = None
    floor: Floor | None = None

    @property
    def shift(self) -> float:
        """By how much the supply stands lower in the demand state than it is [Pa], by the numbers alone."""
        return self.margin + (self.floor.lack if self.floor is not None else 0.0)

    @property
    def hose_flow(self) -> float:
        """Hose inside and outside [m³/s]."""
        return self.hose_inside + self.hose_outside

    @property
    def main_source(self) -> SourceShare:
        """The share of the principal source."""
        return next(share for share in self.sources if share.node == self.principal)


RATING_PRESSURE: Final = 20.0 * 0.45359237 * 9.80665 / 0.0254**2
"""Pressure [Pa] at which the flow of a main is rated, 20 psi (NFPA 291)."""


def reference_date(project: Project) -> dt.date:
    """Return the day against which a test's age counts: submittal, or the date of the project."""
    return project.supply.submittal_date or project.facts.date


def compare(
    project: Project, solution: Solution, curves: Sequence[NodeSupply], network: Network | None = None
) -> Comparison:
    """Return demand against supply at ``project.supply.compare_at``.

    ``solution`` is the demand solution made with these ``curves``; ``network`` saves building it anew. With
    one source the margin is the curve at the demand flow less the demand at the source; with several it is
    ``solution.shift``, by how much all curves can be lowered together.

    Raises :class:`DomainError` where the solution holds no demand (no shift, no flow), where the point of
    comparison does not exist or no open pipe leads to it, and for a margin rule that cannot be applied;
    :class:`NotConvergedError` where the pressure there has to be solved and has no solution.
    """
    by_node = {one.node: one for one in curves}
    if len(solution.source_tags) == 0 or not math.isfinite(solution.shift):
        raise DomainError("only a demand solution can be compared with a supply")
    shares = tuple(
        _share(project, by_node[tag], float(flow), float(pressure))
        for tag, flow, pressure in zip(
            solution.source_tags, solution.source_flow, solution.source_pressure, strict=True
        )
    )
    main = max(shares, key=lambda share: share.flow)
    supply = by_node[main.node]
    margin = main.available - main.demand_pressure if len(shares) == 1 else solution.shift
    at = project.supply.compare_at
    if at not in solution.node_tags:
        raise DomainError(f"the point of comparison {at} is not a node of the network")
    point = point_of(project, solution, by_node, shares, margin, network)
    floor = floor_of(project, solution, by_node)
    steps = _left_steps(shares, point, margin, floor)
    margin -= floor.lack if floor is not None else 0.0
    rule = project.supply.margin
    required = None if rule is None else _strictest(shares).required
    flows = _flows(project, solution)
    return Comparison(
        node=at,
        demand_flow=math.fsum(share.flow for share in shares),
        carried_flow=_through(project, solution, at),
        sprinkler_flow=flows["sprinklers"],
        hose_inside=flows["inside"],
        hose_outside=flows["outside"],
        other_flow=flows["other"],
        demand_pressure=point.demand,
        available_pressure=point.available,
        unadjusted_pressure=point.unadjusted,
        available_flow=point.available_flow,
        static=point.static,
        highest_static=point.highest_static,
        margin=margin,
        required=required,
        after_rule=None if required is None else margin - required,
        rule=rule_words(rule),
        rule_source=rule.source if rule is not None else "",
        principal=main.node,
        sources=shares,
        carried=point.carried,
        carried_unadjusted=point.carried_unadjusted,
        supply_steps=(
            demand_step(_named(flows)),
            *_source_steps(project, by_node, shares),
            *point.steps,
        ),
        margin_steps=steps + _rule_steps(project, by_node, shares, margin, required),
        flow_at_20_psi=supply.rated_flow(RATING_PRESSURE),
        adjusted_flow_at_20_psi=supply.rated_flow(RATING_PRESSURE, adjusted=True),
        notes=_sharing_notes(shares)
        + point.notes
        + _floor_notes(floor, margin)
        + _own_notes(by_node, shares)
        + _range_notes(shares, point.carried),
        states=point.states,
        floor=floor,
    )


def _margin_of(project: Project, supply: NodeSupply, flow: float, demand: float) -> RequiredMargin | None:
    rule = project.supply.margin
    if rule is None:
        return None
    curve = supply.adjusted_member(flow)
    case = MarginCase(
        curve=curve,
        flow=flow,
        demand_pressure=demand,
        measured_static=supply.measured_member(flow).gauge_static,
        test_date=None if supply.tank is not None else supply.test(curve.name).date,
        reference_date=reference_date(project),
    )
    return required_margin(rule, case)


def _share(project: Project, supply: NodeSupply, flow: float, demand: float) -> SourceShare:
    curve = supply.curve
    given = max(flow, 0.0)  # what a test says of a source that is fed is said at no flow
    test = supply.test_at(given)
    last = None if test is None else max(test.points, key=lambda point: (point.flow, -point.residual))
    member = supply.adjusted_member(given)
    required = _margin_of(project, supply, given, demand)
    return SourceShare(
        node=supply.node,
        flow=flow,
        demand_pressure=demand,
        available=curve.either_way(flow),
        unadjusted=supply.unadjusted.either_way(flow),
        governing=member.name,
        test_static=None if test is None else test.static,
        test_residual=None if last is None else last.residual,
        test_flow=None if last is None else last.flow,
        tested_flow=member.tested_flow,
        extrapolated=member.is_extrapolated(given),
        tested_ratio=member.tested_ratio(given),
        required=None if required is None else required.required,
    )


def _strictest(shares: Sequence[SourceShare]) -> SourceShare:
    """Return the source of which the margin rule asks most, among those that give water."""
    giving = [share for share in shares if share.flow > 0.0] or list(shares)
    return max(giving, key=lambda share: share.required or 0.0)


def _flows(project: Project, solution: Solution) -> dict[str, float]:
    """Return the outflow by what draws it; every outflow of the solution is counted once."""
    left = {tag: float(flow) for tag, flow in zip(solution.node_tags, solution.outflow, strict=True)}
    drawn = dict.fromkeys(("inside", "outside", "sprinklers", "other"), 0.0)
    for part in hose_parts(project):
        amount = min(part.flow, left.get(part.node, 0.0))
        drawn[part.name] += amount
        left[part.node] -= amount
    heads = {node.tag for node in project.system.nodes if node.k_factor is not None}
    drawn["sprinklers"] = math.fsum(flow for tag, flow in left.items() if tag in heads)
    drawn["other"] = math.fsum(flow for tag, flow in left.items() if tag not in heads)
    return drawn


def _named(flows: Mapping[str, float]) -> dict[str, float]:
    return {
        "sprinklers": flows["sprinklers"],
        "inside hose": flows["inside"],
        "outside hose": flows["outside"],
        "other": flows["other"],
    }


def _through(project: Project, solution: Solution, node: str) -> float:
    """Return the flow [m³/s] that arrives at ``node`` from pipes and from a source there."""
    flow = sum(
        float(amount)
        for tag, amount in zip(solution.source_tags, solution.source_flow, strict=True)
        if tag == node
    )
    ends = {pipe.tag: pipe for pipe in project.system.pipes}
    for tag, amount in zip(solution.pipe_tags, solution.pipe_flow, strict=True):
        pipe = ends[tag]
        flow += max(float(amount), 0.0) if pipe.end == node else 0.0
        flow += max(-float(amount), 0.0) if pipe.start == node else 0.0
    return flow


def _source_steps(
    project: Project, by_node: Mapping[str, NodeSupply], shares: Sequence[SourceShare]
) -> tuple[Step, ...]:
    """Return how the pressure at each source follows from its test or tank, at its own flow."""
    several = len(shares) > 1
    steps = [sharing_step([(share.node, share.flow) for share in shares])] if several else []
    for share in shares:
        steps += source_steps(by_node[share.node], share.flow, project.units, RATING_PRESSURE)
        steps += [left_over_step(share.node, share.available, share.demand_pressure)] if several else []
    return tuple(steps)


def _sharing_notes(shares: Sequence[SourceShare]) -> tuple[Words, ...]:
    if len(shares) < 2:
        return ()
    text = (
        "{count} sources feed the demand together ({nodes}). The margin is the pressure by which all "
        "their curves can be lowered alike until nothing is left over; each source is read at its own flow."
    )
    values = (("count", str(len(shares)), ""), ("nodes", ", ".join(one.node for one in shares), ""))
    return (Words(text, values),)


def _own_notes(by_node: Mapping[str, NodeSupply], shares: Sequence[SourceShare]) -> tuple[Words, ...]:
    return tuple(note for share in shares for note in by_node[share.node].notes)


def _floor_notes(floor: Floor | None, margin: float) -> tuple[Words, ...]:
    if floor is None:
        return ()
    text = (
        "Lowered by more than {margin} the supply leaves no pressure at {node}; what a pump could carry "
        "beyond that is not counted as margin."
    )
    return (Words(text, (("margin", max(margin, 0.0), "pressure"), ("node", floor.node, ""))),)


def _left_steps(
    shares: tuple[SourceShare, ...], point: Point, margin: float, floor: Floor | None
) -> tuple[Step, ...]:
    """Return the steps to the margin before the rule, of which ``margin`` is left by the numbers alone."""
    alike = "all supplies lowered alike" if len(shares) > 1 else ""
    if point.held_back:
        main = max(shares, key=lambda share: share.flow)
        available, demand, alike = (
            main.available,
            main.demand_pressure,
            "; ".join(filter(None, (alike, f"read at {main.node}"))),
        )
    else:
        available, demand = point.available, point.demand
    text = "{available} − ({demand})" if demand < 0 else "{available} − {demand}"
    words = Words(text, (("available", available, "pressure"), ("demand", demand, "pressure")))
    if floor is None:
        return (Step("Margin before the rule", words, margin, "pressure", alike),)
    values = (("margin", margin, "pressure"), ("lack", floor.lack, "pressure"))
    note = f"no less than nothing is left at {floor.node}"
    kept = Step(
        "Margin before the rule", Words("{margin} − {lack}", values), margin - floor.lack, "pressure", note
    )
    return (Step("Left over by the numbers", words, margin, "pressure", alike), kept)


def _rule_steps(
    project: Project,
    by_node: dict[str, NodeSupply],
    shares: tuple[SourceShare, ...],
    margin: float,
    required: float | None,
) -> tuple[Step, ...]:
    if required is None:
        return ()
    strictest = _strictest(shares)
    asked = _margin_of(
        project, by_node[strictest.node], max(strictest.flow, 0.0), strictest.demand_pressure
    )
    steps = list(asked.steps) if asked is not None else []
    values = (("margin", margin, "pressure"), ("required", required, "pressure"))
    words = Words("{margin} − {required}", values)
    steps.append(Step("Margin after the rule", words, margin - required, "pressure"))
    return tuple(steps)


def _range_notes(shares: tuple[SourceShare, ...], carried: CarriedCurve) -> tuple[Words, ...]:
    notes = []
    for share in shares:
        if share.extrapolated:
            values: tuple[Value, ...] = (
                ("node", share.node, ""),
                ("flow", share.flow, "flow"),
                ("tested", share.tested_flow, "flow"),
            )
            text = "At {node} the demand of {flow} lies beyond the tested {tested}: "
            notes.append(Words(text + "the curve is extrapolated there.", values))
    if not carried.route.within_devices(carried.route.flow):
        notes.append(
            Words("A device between the supply and the point of comparison is used beyond its curve.")
        )
    return tuple(notes)
