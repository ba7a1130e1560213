"""Standpipes, hydrants, outflows: every case solved, row beside row, and what each hydrant can give."""

from __future__ import annotations

import math
from collections import deque
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from typing import Final

from supplycheck.cases.floors import counted, watched
from supplycheck.cases.greatest_flow import at_rest, hydrant_rows
from supplycheck.cases.ground import Ground
from supplycheck.cases.loads import Draws, load_of, required_of
from supplycheck.demand.duties import DutyCase
from supplycheck.demand.hydrants import hydrant_cases
from supplycheck.demand.outflows import asked_at_nodes, outflow_cases, with_asked
from supplycheck.demand.standpipes import is_complete, left_by, needed_at_node, standpipe_cases
from supplycheck.errors import NotConvergedError
from supplycheck.model import DemandCase, Project
from supplycheck.model.duty import (
    ConnectionRow,
    DutyAnswer,
    DutyRow,
    OutletState,
    Riser,
    StandpipeDuty,
    StandpipeOutlet,
    StandpipeRow,
)
from supplycheck.network import (
    DemandSummary,
    SourceCurve,
    demand_many,
)
from supplycheck.supply.beyond import beyond_words

MOST_ROWS: Final = 80
"""Hydrant cases that are listed one by one."""


@dataclass(frozen=True, slots=True, eq=False)
class DutyResult:
    """The rows, and of the cases on which the verdict rests the hardest of each duty, kind and flow."""

    answer: DutyAnswer
    candidates: tuple[tuple[DemandCase, DemandSummary], ...] = ()


def solve_duties(ground: Ground, sprinklers: DemandCase | None) -> DutyResult:
    """Return the answer for the standpipes, hydrants or fixed outflows of a project.

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
    if project.outflows is not None:
        cases += outflow_cases(project.outflows, project.system.nodes)
    if not cases:
        return DutyResult(DutyAnswer())
    asked = asked_at_nodes(project.system.nodes)
    cases = [replace(one, case=with_asked(one.case, asked)) for one in cases]
    solved, cut = _solve(ground, cases)
    rows = [_row(ground, *worst) for worst in _hardest_of_each(solved)]
    rows += [_cut_row(one, tags) for one, tags in cut]
    states = tuple(rows)
    answer = DutyAnswer(
        rows=states,
        hydrants=tuple(hydrant_rows(ground, project.hydrants)) if project.hydrants else (),
        standpipes=tuple(_standpipe_rows(ground, project.standpipes, states)) if project.standpipes else (),
        connection=_connection(ground, [one for one, _ in solved]),
    )
    return DutyResult(answer, _candidates(solved))


def _left(summary: DemandSummary) -> float:
    """Return the margin [Pa] without round-off, so that of like cases the first listed is kept."""
    return round(summary.shift, 2)


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
        if one.counts and (key not in hardest or _left(summary) < _left(hardest[key][1])):
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
    draws = Draws.of(ground.project)
    questions = [(draws.load(one.case), required_of(one.case)) for one in open_cases]
    node = ground.project.supply.compare_at
    at = node if all(node in tags for tags in reached.values()) else None
    watch = [tag for tag in watched(ground) if all(tag in tags for tags in reached.values())]
    summaries = demand_many(
        ground.network, questions, ground.sources, velocity_pressure=policy, at=at, watch=watch
    )
    margins = counted(ground, [one.case for one in open_cases], summaries)
    return list(zip(open_cases, margins, strict=True)), cut


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
    return [
        (*min(group, key=lambda pair: _left(pair[1])), len(group)) for group in groups.values() if group
    ]


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
    drawn = {node.tag: node.fixed_flow for node in ground.project.system.nodes}
    states = tuple(
        OutletState(
            outlet.what,
            outlet.node,
            outlet.flow + drawn[outlet.node],
            float(solution.pressure[solution.node(outlet.node)]),
            outlet.minimum_pressure,
        )
        for outlet in case.outlets
    )
    beyond = beyond_words(solution)
    return states, f"with the supply as it is {beyond}" if beyond else ""


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


def _standpipe_rows(ground: Ground, duty: StandpipeDuty, rows: Sequence[DutyRow]) -> Iterable[StandpipeRow]:
    lowest: dict[str, float] = {}
    for row in rows:
        for state in row.outlets:
            if row.duty == "standpipes" and state.flow > 0:
                lowest[state.node] = min(lowest.get(state.node, math.inf), state.pressure)
    for riser in duty.risers:
        for outlet in riser.outlets:
            yield _standpipe_row(ground, duty, riser, outlet, lowest.get(outlet.node))


def _standpipe_row(
    ground: Ground, duty: StandpipeDuty, riser: Riser, outlet: StandpipeOutlet, lowest: float | None
) -> StandpipeRow:
    device = next((one for one in duty.devices if one.tag == outlet.device), None)
    still = at_rest(ground, outlet.node, highest=True)
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
    draws = Draws.of(ground.project)
    questions = [(draws.load(one.case), required_of(one.case)) for one in fed]
    source = SourceCurve(duty.connection, 0.0)
    try:
        answers = demand_many(ground.network, questions, [source])
    except NotConvergedError as error:
        nothing = math.nan
        return ConnectionRow(duty.connection, nothing, nothing, "", "", f"no solution: {error}")
    place = max(range(len(answers)), key=lambda row: round(answers[row].source_pressure, 2))
    return ConnectionRow(
        node=duty.connection,
        pressure=answers[place].source_pressure,
        flow=answers[place].total_flow,
        case=fed[place].case.label,
        governing=answers[place].governing,
        note="" if is_complete(duty) else "not every choice of further standpipes was tried",
    )
