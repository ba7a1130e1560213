"""Demand cases of standpipes: each riser in turn as the most remote, with every choice of further ones.

Sources: NFPA 14: 250 gpm at each of the two topmost outlets of the most remote standpipe, 250 gpm for
each further one, at most 1000 gpm in sprinklered and 1250 gpm in other buildings; 750 gpm for a horizontal
standpipe with three or more outlets; 100 psi at a 2½ in outlet and 65 psi at 1½ in (published training
notes). That further standpipes flow at their topmost outlet, and that every flowing outlet keeps the
pressure it needs: from memory of NFPA 14.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import combinations, islice
from math import comb
from typing import Final

from supplycheck.demand.duties import DutyCase, fixed_case
from supplycheck.errors import DomainError
from supplycheck.model import DemandCase, FixedOutlet
from supplycheck.model.duty import RegulatingDevice, Riser, StandpipeDuty, StandpipeOutlet

MOST: Final = 2000
"""Choices of further risers tried in all; where there were more, the first ones of each riser are tried."""

SMALL: Final = 1e-9
"""Flow that is taken for none [m³/s]."""


def standpipe_cases(duty: StandpipeDuty, sprinklers: DemandCase | None = None) -> tuple[DutyCase, ...]:
    """Return every demand case of ``duty``.

    ``sprinklers`` is the hardest case of the sprinklers where they may flow at the same time.

    Raises :class:`DomainError` where a regulating device never gives the pressure that its outlet needs.
    """
    found = [
        _case(duty, remote, others)
        for remote in duty.risers
        for others in islice(_others(duty, remote), _share(duty))
    ]
    if sprinklers is not None:
        found += [_with_sprinklers(duty, one, sprinklers) for one in found]
    return tuple(found)


def is_complete(duty: StandpipeDuty) -> bool:
    """Say whether every choice of further risers is tried."""
    return all(_choices(duty, remote) <= _share(duty) for remote in duty.risers)


def needed_at_node(outlet: StandpipeOutlet, duty: StandpipeDuty) -> float | None:
    """Return the pressure [Pa] that the node of ``outlet`` needs so that its required one is left.

    Without a regulating device that is the required pressure itself; with one the lowest inlet of its
    table that leaves as much, straight between its rows, ``None`` where no row does.
    """
    device = next((one for one in duty.devices if one.tag == outlet.device), None)
    return outlet.required_pressure if device is None else lowest_inlet(device, outlet.required_pressure)


def lowest_inlet(device: RegulatingDevice, outlet: float) -> float | None:
    """Return the lowest inlet pressure [Pa] at which ``device`` leaves ``outlet`` [Pa]; ``None``: never.

    >>> table = RegulatingDevice("A", (100.0, 200.0), (90.0, 120.0), (), (), "")
    >>> lowest_inlet(table, 105.0), lowest_inlet(table, 121.0)
    (150.0, None)
    """
    before: tuple[float, float] | None = None
    for inlet, left in zip(device.inlet, device.outlet, strict=True):
        if left >= outlet:
            if before is None:
                return inlet
            return before[0] + (inlet - before[0]) * (outlet - before[1]) / (left - before[1])
        before = (inlet, left)
    return None


def left_by(inlets: Sequence[float], outlets: Sequence[float], inlet: float) -> float | None:
    """Return the outlet pressure [Pa] of a table at ``inlet`` [Pa]; ``None`` outside its rows."""
    if not inlets or not inlets[0] <= inlet <= inlets[-1]:
        return None
    for place in range(1, len(inlets)):
        if inlet <= inlets[place]:
            low, high = inlets[place - 1], inlets[place]
            part = (inlet - low) / (high - low)
            return outlets[place - 1] + part * (outlets[place] - outlets[place - 1])
    return outlets[0]


def _own(duty: StandpipeDuty, riser: Riser) -> list[tuple[StandpipeOutlet, float]]:
    """Return the outlets at which the most remote ``riser`` flows, and the flow of each [m³/s]."""
    if riser.horizontal and len(riser.outlets) > 2:
        return [(outlet, duty.horizontal_flow / 3) for outlet in riser.outlets[:3]]
    return [(outlet, duty.outlet_flow) for outlet in riser.outlets[:2]]


def _further(duty: StandpipeDuty, remote: Riser) -> int:
    """Return how many further risers flow beside ``remote``."""
    left = duty.greatest_flow - sum(flow for _, flow in _own(duty, remote))
    count, others = 0, len(duty.risers) - 1
    while count < others and left > SMALL:
        left -= duty.outlet_flow
        count += 1
    return count


def _choices(duty: StandpipeDuty, remote: Riser) -> int:
    return comb(len(duty.risers) - 1, _further(duty, remote))


def _share(duty: StandpipeDuty) -> int:
    return max(1, MOST // max(len(duty.risers), 1))


def _others(duty: StandpipeDuty, remote: Riser) -> Iterator[tuple[Riser, ...]]:
    rest = [riser for riser in duty.risers if riser is not remote]
    return combinations(rest, _further(duty, remote))


def _outlet(duty: StandpipeDuty, riser: Riser, outlet: StandpipeOutlet, flow: float) -> FixedOutlet:
    needed = needed_at_node(outlet, duty)
    if needed is None:
        raise DomainError(
            f"standpipe {riser.tag}: the regulating device {outlet.device} at {outlet.node} never leaves "
            "the pressure that the outlet needs; choose another device or give more rows of its table"
        )
    return FixedOutlet(outlet.node, flow, needed, f"outlet {outlet.node} of standpipe {riser.tag}")


def _case(duty: StandpipeDuty, remote: Riser, others: Sequence[Riser]) -> DutyCase:
    outlets = [_outlet(duty, remote, outlet, flow) for outlet, flow in _own(duty, remote)]
    left = duty.greatest_flow - sum(outlet.flow for outlet in outlets)
    for riser in others:
        outlets.append(_outlet(duty, riser, riser.outlets[0], min(duty.outlet_flow, left)))
        left -= duty.outlet_flow
    kind = "horizontal" if remote.horizontal else "risers"
    label = f"{'horizontal standpipe' if remote.horizontal else 'standpipe'} {remote.tag} most remote"
    label += f", with {', '.join(riser.tag for riser in others)}" if others else ""
    case = fixed_case(label, "standpipes", outlets, flows=duty.added_flows)
    return DutyCase(case, kind, kind in duty.counts, (remote.tag, *(one.tag for one in others)))


def _with_sprinklers(duty: StandpipeDuty, one: DutyCase, sprinklers: DemandCase) -> DutyCase:
    case = fixed_case(
        f"{one.case.label}, with sprinklers",
        "standpipes",
        one.case.outlets,
        sprinklers=sprinklers,
        flows=one.case.flows,
        note=f"sprinklers: {sprinklers.label}",
    )
    return DutyCase(case, "with sprinklers", "with sprinklers" in duty.counts, one.members)
