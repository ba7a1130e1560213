"""What the cases of standpipes, hydrants and fixed outflows share."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Literal

from supplycheck.model import DemandCase, FixedOutlet


@dataclass(frozen=True, slots=True)
class DutyCase:
    """A demand case of a duty: its ``kind``, whether the verdict ``counts`` on it, who gives the water.

    ``members`` are the tags of the risers or hydrants, the most remote first.
    """

    case: DemandCase
    kind: str
    counts: bool
    members: tuple[str, ...]


def fixed_case(
    label: str,
    duty: Literal["standpipes", "hydrants", "outflows"],
    outlets: Sequence[FixedOutlet],
    *,
    sprinklers: DemandCase | None = None,
    flows: tuple[tuple[str, float], ...] = (),
    closed_pipes: tuple[str, ...] = (),
    note: str = "",
) -> DemandCase:
    """Return a case of fixed outlets, with the heads of ``sprinklers`` open where it is given.

    The hose allowance of the sprinklers does not flow: the outlets are where hoses are attached.
    """
    heads = sprinklers
    return DemandCase(
        label=label,
        heads=heads.heads if heads else (),
        required_flow=heads.required_flow if heads else (),
        required_pressure=heads.required_pressure if heads else (),
        required_by=heads.required_by if heads else (),
        area=heads.area if heads else 0.0,
        lines=heads.lines if heads else 0,
        along_line=heads.along_line if heads else 0,
        note=note,
        outlets=merged(outlets),
        flows=flows,
        closed_pipes=closed_pipes,
        with_hose=False,
        duty=duty,
    )


def merged(outlets: Iterable[FixedOutlet]) -> tuple[FixedOutlet, ...]:
    """Return ``outlets`` with those of one node as one: flows added, the higher pressure asked.

    >>> one = FixedOutlet("A", 1.0, 2.0, "hydrant A")
    >>> merged([one, FixedOutlet("A", 0.0, 3.0, "highest point")])[0].minimum_pressure
    3.0
    """
    found: dict[str, FixedOutlet] = {}
    for one in outlets:
        before = found.get(one.node)
        if before is None:
            found[one.node] = one
            continue
        names = dict.fromkeys((before.what, one.what))
        found[one.node] = FixedOutlet(
            one.node,
            before.flow + one.flow,
            max(before.minimum_pressure, one.minimum_pressure),
            " and ".join(names),
        )
    return tuple(found.values())
