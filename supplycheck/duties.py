"""Standpipes and hydrants: every case solved, the rows beside each other, what each hydrant can give."""

from __future__ import annotations

import math
from collections import deque
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Final

from supplycheck.demand.duties import DutyCase
from supplycheck.demand.hydrants import device_loss, flow_of_each, highest_point, hydrant_cases, in_range
from supplycheck.demand.standpipes import is_complete, left_by, needed_at_node, standpipe_cases
from supplycheck.errors import DomainError, NotConvergedError
from supplycheck.loads import load_of, required_of
from supplycheck.model import DemandCase, Device, Project
from supplycheck.model.duty import (
    ConnectionRow,
    DutyAnswer,
    DutyRow,
    Hydrant,
    HydrantDuty,
    HydrantRow,
    OutletState,
    Riser,
    StandpipeDuty,
    StandpipeOutlet,
    StandpipeRow,
)
from supplycheck.network import (
    DemandSummary,
    LoadCase,
    Network,
    Solution,
    SourceCurve,
    demand_many,
    solve_operating,
)
from supplycheck.supply import NodeSupply
from supplycheck.supply.route import no_flow_pressure

LARGEST_FLOW: Final = 100.0
"""Flow [m³/s] beyond which a hydrant is said to have no limit here."""
MOST_ROWS: Final = 80
"""Hydrant cases that are listed one by one."""
FLOW_TOLERANCE: Final = 1e-10
"""Width [m³/s] to which the greatest flow of a hydrant is bracketed."""

RankOf = Callable[[float], tuple[str, str, str]]


@dataclass(frozen=True, slots=True, eq=False)
class Ground:
    """What every case is solved on; ``rank_of`` tells class, colour and source of a flow [m³/s]."""

    project: Project
    network: Network
    curves: Sequence[NodeSupply]
    sources: Sequence[SourceCurve]
    rank_of: RankOf

    def operating(self, load: LoadCase) -> Solution:
        """Return what really flows under ``load``."""
        policy = self.project.criteria.velocity_pressure
        return solve_operating(self.network, load, self.sources, velocity_pressure=policy)


@dataclass(frozen=True, slots=True, eq=False)
class DutyResult:
    """The rows, and of the cases on which the verdict rests the hardest of each duty, kind and flow."""

    answer: DutyAnswer
    candidates: tuple[tuple[DemandCase, DemandSummary], ...] = ()


def solve_duties(ground: Ground, sprinklers: DemandCase | None) -> DutyResult:
    """Return the answer for the standpipes and hydrants of a project.

    ``sprinklers`` is the hardest case of the sprinklers, ``None`` where the project has none.

    Raises
    ------
    NotConvergedError
        Where a case without a shut valve has no solution.
    DomainError
        Where a regulating device never gives what its outlet needs.
    """
    project = ground.project
    cases: list[DutyCase] = []
    if project.standpipes is not None:
        cases += standpipe_cases(project.standpipes, sprinklers)
    if project.hydrants is not None:
        cases += hydrant_cases(project.hydrants, project.system.devices, sprinklers)
    if not cases:
        return DutyResult(DutyAnswer())
    solved, cut = _solve(ground, cases)
    rows = [_row(ground, *worst) for worst in _hardest_of_each(solved)]
    rows += [_cut_row(one, tags) for one, tags in cut]
    states = tuple(rows)
    answer = DutyAnswer(
        rows=states,
        hydrants=tuple(_hydrant_rows(ground, project.hydrants)) if project.hydrants else (),
        standpipes=tuple(_standpipe_rows(ground, project.standpipes, states)) if project.standpipes else (),
        connection=_connection(ground, [one for one, _ in solved]),
    )
    return DutyResult(answer, _candidates(solved))


def _candidates(
    solved: Sequence[tuple[DutyCase, DemandSummary]],
) -> tuple[tuple[DemandCase, DemandSummary], ...]:
    """Return the hardest of the cases that count for each duty, kind and flow.

    At one flow the case that needs most pressure has the least margin before and after any margin rule; at
    different flows the rule may ask so much more of one that it is short where another is not.
    """
    hardest: dict[tuple[str, str, float], tuple[DemandCase, DemandSummary]] = {}
    for one, summary in solved:
        key = (one.case.duty, one.kind, round(summary.total_flow, 9))
        if one.counts and (key not in hardest or summary.shift < hardest[key][1].shift):
            hardest[key] = (one.case, summary)
    return tuple(hardest.values())


def _solve(
    ground: Ground, cases: Sequence[DutyCase]
) -> tuple[list[tuple[DutyCase, DemandSummary]], list[tuple[DutyCase, tuple[str, ...]]]]:
    """Return the cases with their summaries, and those whose outlets a shut valve cuts off."""
    cut: list[tuple[DutyCase, tuple[str, ...]]] = []
    open_cases: list[DutyCase] = []
    reached: dict[tuple[str, ...], set[str]] = {}
    for one in cases:
        shut = one.case.closed_pipes
        if shut not in reached:
            reached[shut] = _reached(ground.project, [source.node for source in ground.sources], shut)
        wanted = (*one.case.heads, *(outlet.node for outlet in one.case.outlets))
        away = tuple(tag for tag in wanted if tag not in reached[shut])
        if shut and away:
            cut.append((one, away))
        else:
            open_cases.append(one)
    policy = ground.project.criteria.velocity_pressure
    questions = [(load_of(ground.project, one.case), required_of(one.case)) for one in open_cases]
    node = ground.project.supply.compare_at
    at = node if all(node in tags for tags in reached.values()) else None
    summaries = demand_many(ground.network, questions, ground.sources, velocity_pressure=policy, at=at)
    return list(zip(open_cases, summaries, strict=True)), cut


def _reached(project: Project, sources: Iterable[str], shut: Iterable[str]) -> set[str]:
    """Return the nodes to which water can come, one-way pipes against their way left out."""
    closed = set(shut)
    one_way = {one.tag for one in project.system.devices if one.one_way or one.kind != "loss"}
    beside: dict[str, list[str]] = {}
    for pipe in project.system.pipes:
        if pipe.valve == "closed" or pipe.tag in closed:
            continue
        beside.setdefault(pipe.start, []).append(pipe.end)
        if pipe.valve != "check" and not one_way.intersection(pipe.devices):
            beside.setdefault(pipe.end, []).append(pipe.start)
    seen = set(sources)
    queue = deque(seen)
    while queue:
        for there in beside.get(queue.popleft(), ()):
            if there not in seen:
                seen.add(there)
                queue.append(there)
    return seen


def _hardest_of_each(
    solved: Sequence[tuple[DutyCase, DemandSummary]],
) -> list[tuple[DutyCase, DemandSummary, int]]:
    """Return the hardest case of each most remote riser, and the cases of the hydrants.

    Of more than :data:`MOST_ROWS` hydrant cases the hardest group of each kind and shut valve is kept.
    """
    many = sum(one.case.duty == "hydrants" for one, _ in solved) > MOST_ROWS
    groups: dict[tuple[str, ...], list[tuple[DutyCase, DemandSummary]]] = {}
    for one, summary in solved:
        if one.case.duty == "standpipes":
            members = one.members[:1]
        elif many and len(one.members) > 1:
            members = (str(len(one.members)), *one.case.closed_pipes)
        else:
            members = (*one.members, *one.case.closed_pipes)
        groups.setdefault((one.case.duty, one.kind, *members), []).append((one, summary))
    return [(*min(group, key=lambda pair: pair[1].shift), len(group)) for group in groups.values() if group]


def _row(ground: Ground, one: DutyCase, summary: DemandSummary, tried: int) -> DutyRow:
    case = one.case
    by = {
        **dict(zip(case.heads, case.required_by, strict=True)),
        **{outlet.node: outlet.what for outlet in case.outlets},
    }
    outlets, note = _states(ground, case)
    duty = ground.project.standpipes
    part = case.duty == "standpipes" and duty is not None and not is_complete(duty)
    notes = (case.note, note, "not every choice of further standpipes was tried" if part else "")
    return DutyRow(
        duty=case.duty,
        kind=one.kind,
        label=case.label,
        counts=one.counts,
        flow=summary.total_flow,
        required_pressure=summary.pressure_at,
        margin=summary.shift,
        governing=summary.governing,
        governing_by=by.get(summary.governing, ""),
        tried=tried,
        outlets=outlets,
        closed_pipes=case.closed_pipes,
        note="; ".join(text for text in notes if text),
    )


def _states(ground: Ground, case: DemandCase) -> tuple[tuple[OutletState, ...], str]:
    try:
        solution = ground.operating(load_of(ground.project, case))
    except NotConvergedError as error:
        return (), f"with the supply as it is there is no solution: {error}"
    states = tuple(
        OutletState(
            outlet.what,
            outlet.node,
            outlet.flow,
            float(solution.pressure[solution.node(outlet.node)]),
            outlet.minimum_pressure,
        )
        for outlet in case.outlets
    )
    return states, ""


def _cut_row(one: DutyCase, away: tuple[str, ...]) -> DutyRow:
    return DutyRow(
        duty=one.case.duty,
        kind=one.kind,
        label=one.case.label,
        counts=one.counts,
        flow=sum(outlet.flow for outlet in one.case.outlets),
        required_pressure=math.nan,
        margin=math.nan,
        governing=away[0],
        governing_by="cut off",
        tried=1,
        outlets=(),
        closed_pipes=one.case.closed_pipes,
        note=f"cut off from the supply: {', '.join(away[:12])}",
    )


def _at_rest(ground: Ground, node: str, *, highest: bool) -> float:
    """Return the pressure [Pa] at ``node`` with nothing flowing: of the compared or the highest curves."""
    found = []
    for one in ground.curves:
        statics = [curve.static for curve in one.measured] if highest else [one.curve.static]
        weight = ground.project.fluid.unit_weight
        try:
            found.append(no_flow_pressure(ground.project.system, max(statics), one.node, node, weight))
        except DomainError:
            continue
    return max(found, default=math.nan)


def _hydrant_rows(ground: Ground, duty: HydrantDuty) -> Iterable[HydrantRow]:
    devices = {device.tag: device for device in ground.project.system.devices}
    for hydrant in duty.hydrants:
        device = devices.get(hydrant.device or "")
        alone = flow_of_each(duty, 1)
        lost = device_loss(device, alone)
        state = ground.operating(_drawn(ground.project, {hydrant.node: alone}))
        most, limited_by, note = greatest_flow(ground, duty, hydrant, device, {})
        day = None
        if duty.maximum_day:
            day = greatest_flow(ground, duty, hydrant, device, dict(duty.maximum_day))[0]
        rank, colour, source = ("", "", "") if most is None else ground.rank_of(most)
        yield HydrantRow(
            tag=hydrant.tag,
            node=hydrant.node,
            location=hydrant.location,
            static=_at_rest(ground, hydrant.node, highest=False),
            alone=alone,
            residual_alone=float(state.pressure[state.node(hydrant.node)]) - lost,
            share=flow_of_each(duty, duty.at_once),
            greatest_flow=most,
            greatest_on_maximum_day=day,
            limited_by=limited_by,
            device_loss=lost,
            device_in_range=in_range(device, alone),
            rank=rank,
            colour=colour,
            source=source,
            note=note,
        )


def _drawn(project: Project, flows: Mapping[str, float]) -> LoadCase:
    """Return a load of fixed outflows, those of the project's nodes among them."""
    total = {node.tag: node.fixed_flow for node in project.system.nodes if node.fixed_flow}
    for tag, flow in flows.items():
        total[tag] = total.get(tag, 0.0) + flow
    return LoadCase((), total)


def greatest_flow(
    ground: Ground,
    duty: HydrantDuty,
    hydrant: Hydrant,
    device: Device | None,
    others: Mapping[str, float],
) -> tuple[float | None, str, str]:
    """Return the flow [m³/s] of ``hydrant`` that leaves exactly the residual, what limits it, a note.

    ``others`` are outflows [m³/s] by node at the same time. The residual is kept at the hydrant, after
    lateral and body, and at the highest point of the main. The root is bracketed by doubling and found by
    Brent's method on the actual supply.
    """
    from scipy.optimize import brentq

    points = highest_point(duty)

    def spare(flow: float) -> list[tuple[float, str]]:
        flows = {**others, hydrant.node: others.get(hydrant.node, 0.0) + flow}
        state = ground.operating(_drawn(ground.project, flows))
        here = float(state.pressure[state.node(hydrant.node)]) - device_loss(device, flow)
        found = [(here - duty.residual, f"hydrant {hydrant.tag}")]
        for point in points:
            left = float(state.pressure[state.node(point.node)]) - point.minimum_pressure
            found.append((left, f"{point.what}, {point.node}"))
        return found

    def least(flow: float) -> float:
        return min(spare(flow))[0]

    try:
        if least(0.0) <= 0.0:
            return 0.0, min(spare(0.0))[1], "the residual is not there even without flow"
        low, high = 0.0, max(flow_of_each(duty, 1), 1e-3)
        while least(high) > 0.0:
            low, high = high, 2.0 * high
            if high > LARGEST_FLOW:
                return None, "", "nothing in the network limits the flow"
        flow = float(brentq(least, low, high, xtol=FLOW_TOLERANCE, rtol=1e-12))
    except NotConvergedError as error:
        return None, "", f"no solution: {error}"
    note = "" if in_range(device, flow) else "the loss of the hydrant is carried on beyond its curve"
    return flow, min(spare(flow))[1], note


def _standpipe_rows(ground: Ground, duty: StandpipeDuty, rows: Sequence[DutyRow]) -> Iterable[StandpipeRow]:
    lowest: dict[str, float] = {}
    for row in rows:
        for state in row.outlets:
            if row.duty == "standpipes":
                lowest[state.node] = min(lowest.get(state.node, math.inf), state.pressure)
    for riser in duty.risers:
        for outlet in riser.outlets:
            yield _standpipe_row(ground, duty, riser, outlet, lowest.get(outlet.node))


def _standpipe_row(
    ground: Ground, duty: StandpipeDuty, riser: Riser, outlet: StandpipeOutlet, lowest: float | None
) -> StandpipeRow:
    device = next((one for one in duty.devices if one.tag == outlet.device), None)
    still = _at_rest(ground, outlet.node, highest=True)
    after = None
    if device is not None:
        after = left_by(device.static_inlet, device.static_outlet, still)
    over = still > duty.regulating_pressure * (1 + 1e-9)
    if device is not None and after is not None:
        over = after > duty.regulating_pressure * (1 + 1e-9)
    return StandpipeRow(
        riser=riser.tag,
        node=outlet.node,
        size=outlet.size,
        required=outlet.required_pressure,
        needed_at_node=needed_at_node(outlet, duty),
        no_flow=still,
        device=outlet.device or "",
        after_device=after,
        over_limit=over,
        lowest_flowing=lowest,
    )


def _connection(ground: Ground, cases: Sequence[DutyCase]) -> ConnectionRow | None:
    """Return what the fire department connection must be fed, with no other supply running."""
    duty = ground.project.standpipes
    if duty is None or duty.connection is None:
        return None
    fed = [one for one in cases if one.case.duty == "standpipes" and one.kind != "with sprinklers"]
    questions = [(load_of(ground.project, one.case), required_of(one.case)) for one in fed]
    source = SourceCurve(duty.connection, 0.0)
    try:
        answers = demand_many(ground.network, questions, [source])
    except NotConvergedError as error:
        nothing = math.nan
        return ConnectionRow(duty.connection, nothing, nothing, "", "", f"no solution: {error}")
    place = max(range(len(answers)), key=lambda row: answers[row].source_pressure)
    return ConnectionRow(
        node=duty.connection,
        pressure=answers[place].source_pressure,
        flow=answers[place].total_flow,
        case=fed[place].case.label,
        governing=answers[place].governing,
        note="" if is_complete(duty) else "not every choice of further standpipes was tried",
    )


def without_hose(project: Project, case: DemandCase) -> Project:
    """Return ``project`` without its hose allowance where ``case`` does not draw it."""
    if case.with_hose:
        return project
    return replace(project, hose=replace(project.hose, inside=0.0, outside=0.0))
