"""What a hydrant can give: pressure at rest, and the greatest flow that leaves the residual asked."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping
from typing import Final

from supplycheck.cases.ground import Ground
from supplycheck.demand.hydrants import device_loss, flow_of_each, highest_point, in_range
from supplycheck.errors import DomainError, NotConvergedError
from supplycheck.model import Device, Project
from supplycheck.model.duty import Hydrant, HydrantDuty, HydrantRow
from supplycheck.network import LoadCase
from supplycheck.supply.beyond import beyond_words
from supplycheck.supply.route import no_flow_pressure

LARGEST_FLOW: Final = 100.0
"""Flow [m³/s] beyond which a hydrant is said to have no limit here."""
FLOW_TOLERANCE: Final = 1e-10
"""Width [m³/s] to which the greatest flow of a hydrant is bracketed."""


def at_rest(ground: Ground, node: str, *, highest: bool) -> float:
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


def hydrant_rows(ground: Ground, duty: HydrantDuty) -> Iterable[HydrantRow]:
    """Return what each hydrant of ``duty`` gives by itself."""
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
            static=at_rest(ground, hydrant.node, highest=False),
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
    drawn = _drawn(ground.project, {**others, hydrant.node: others.get(hydrant.node, 0.0) + flow})
    beyond = beyond_words(ground.operating(drawn))
    note = "; ".join(text for text in (note, beyond and f"the greatest flow is {beyond}") if text)
    return flow, min(spare(flow))[1], note
