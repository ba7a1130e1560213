"""Demand cases of private hydrants: groups that share the fire flow, and what may happen meanwhile.

Sources: 20 psi residual and the required fire flow, IFC appendix B (2012); that the hydrants of a group
share the flow equally: common practice, no source.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from itertools import combinations, islice
from typing import Final

from supplycheck.demand.duties import DutyCase, fixed_case
from supplycheck.hydraulics import Curve
from supplycheck.model import DemandCase, Device, FixedOutlet
from supplycheck.model.duty import Hydrant, HydrantDuty

MOST: Final = 300
"""Groups of hydrants of one size that are tried."""

LossOf = Callable[[Hydrant, float], tuple[float, bool]]


def hydrant_cases(
    duty: HydrantDuty, devices: Sequence[Device], sprinklers: DemandCase | None = None
) -> tuple[DutyCase, ...]:
    """Return every demand case of ``duty``.

    Each hydrant alone and each group up to the number that shares the fire flow; the groups of that
    number again at maximum-day demand, with the hardest case of the ``sprinklers`` where it is given, and
    with one valve shut at a time. ``devices`` are those of the system.
    """
    by_tag = {device.tag: device for device in devices}

    def loss(hydrant: Hydrant, flow: float) -> tuple[float, bool]:
        device = by_tag.get(hydrant.device or "")
        return device_loss(device, flow), in_range(device, flow)

    found = [_case(duty, group, loss) for size in _sizes(duty) for group in _groups(duty, size)]
    full = list(_groups(duty, duty.at_once))
    if duty.maximum_day:
        found += [_case(duty, group, loss, kind="maximum day") for group in full]
    if sprinklers is not None:
        found += [_case(duty, group, loss, kind="with sprinklers", sprinklers=sprinklers) for group in full]
    for pipe in duty.valves:
        found += [_case(duty, group, loss, kind="valve shut", valve=pipe) for group in full]
    return tuple(found)


def device_loss(device: Device | None, flow: float) -> float:
    """Return the loss [Pa] of lateral and body at ``flow`` [m³/s], carried on beyond the curve."""
    if device is None or not device.flows:
        return 0.0
    return float(Curve(device.flows, device.values).carried_on(max(flow, device.flows[0]))[0])


def in_range(device: Device | None, flow: float) -> bool:
    """Say whether ``flow`` [m³/s] lies inside the curve of ``device``; a fixed loss holds everywhere."""
    if device is None or len(device.flows) < 2:
        return True
    return device.flows[0] * (1 - 1e-9) <= flow <= device.flows[-1] * (1 + 1e-9)


def flow_of_each(duty: HydrantDuty, size: int) -> float:
    """Return what each of ``size`` hydrants gives [m³/s]: its share, or the most asked of one."""
    return min(duty.fire_flow.flow / size, duty.greatest_each)


def outlet_of(duty: HydrantDuty, hydrant: Hydrant, flow: float, loss: float) -> FixedOutlet:
    """Return a flowing hydrant: its node keeps the residual and the ``loss`` [Pa] of lateral and body."""
    return FixedOutlet(hydrant.node, flow, duty.residual + loss, f"hydrant {hydrant.tag}")


def highest_point(duty: HydrantDuty) -> tuple[FixedOutlet, ...]:
    """Return the pressure asked at the highest point of the main, which draws nothing."""
    if duty.highest_point is None:
        return ()
    return (FixedOutlet(duty.highest_point, 0.0, duty.residual, "the highest point of the main"),)


def _sizes(duty: HydrantDuty) -> range:
    """Return the sizes of group that are listed; pairs always, so that A, B and A + B stand together."""
    return range(1, min(max(duty.at_once, 2), len(duty.hydrants)) + 1)


def _groups(duty: HydrantDuty, size: int) -> Iterator[tuple[Hydrant, ...]]:
    return islice(combinations(duty.hydrants, size), MOST)


def _case(
    duty: HydrantDuty,
    group: Sequence[Hydrant],
    loss: LossOf,
    *,
    kind: str = "hydrants",
    valve: str | None = None,
    sprinklers: DemandCase | None = None,
) -> DutyCase:
    flow = flow_of_each(duty, len(group))
    losses = [loss(hydrant, flow) for hydrant in group]
    outlets = [outlet_of(duty, one, flow, lost) for one, (lost, _) in zip(group, losses, strict=True)]
    notes = [f"sprinklers: {sprinklers.label}"] if sprinklers else []
    if not all(inside for _, inside in losses):
        notes.append("the loss of a hydrant is carried on beyond its curve")
    tags = tuple(hydrant.tag for hydrant in group)
    label = f"hydrants {' + '.join(tags)}" if len(tags) > 1 else f"hydrant {tags[0]} alone"
    label += {"valve shut": f", {valve} shut", "hydrants": ""}.get(kind, f", {kind}")
    label = label.replace(", maximum day", ", at maximum-day demand")
    case = fixed_case(
        label,
        "hydrants",
        (*outlets, *highest_point(duty)),
        sprinklers=sprinklers,
        flows=duty.maximum_day if kind == "maximum day" else (),
        closed_pipes=(valve,) if valve else (),
        note="; ".join(notes),
    )
    counts = kind in duty.counts and len(group) == duty.at_once
    return DutyCase(case, kind, counts, tags)
