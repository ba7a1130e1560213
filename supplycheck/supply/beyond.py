"""Where a solved state was read outside the curve of a device: nothing is known there.

The network carries a curve on along its last line so that the rest can be judged; what is read from such a
state, flows, pressures, densities and times, is not to be relied on.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from supplycheck.model import Device
from supplycheck.network.records import Solution


@dataclass(frozen=True, slots=True)
class Beyond:
    """A ``flow`` [m³/s] through ``device`` in ``pipe``, outside its curve.

    ``end`` [m³/s] is the point of the curve next to it: its last, or its first where the flow is smaller.
    """

    device: str
    pipe: str
    flow: float
    end: float

    @property
    def share(self) -> float:
        """How far the flow is from the curve, as a ratio above 1."""
        return self.flow / self.end if self.flow > self.end else self.end / self.flow

    @property
    def side(self) -> str:
        """``ends at`` or ``starts at``: which end of the curve it is."""
        return "ends at" if self.flow > self.end else "starts at"


def beyond_curves(devices: Iterable[Device], solution: Solution) -> tuple[Beyond, ...]:
    """Return every flow of ``solution`` outside the curve of a device, the furthest first."""
    curves = {device.tag: device.flows for device in devices}
    found = []
    for pipe, tag, signed in solution.out_of_range:
        flow, low, high = abs(signed), min(curves[tag]), max(curves[tag])
        found.append(Beyond(tag, pipe, flow, high if flow > high else low))
    return tuple(sorted(found, key=lambda one: -one.share))


def beyond_words(solution: Solution) -> str:
    """Return in words that ``solution`` was read beyond curves, and of which devices; else nothing."""
    tags = tuple({tag: None for _, tag, _ in solution.out_of_range})
    if not tags:
        return ""
    shown = ", ".join(tags[:4]) + (f" and {len(tags) - 4} more" if len(tags) > 4 else "")
    return f"read beyond the curve of {shown}, so not to be relied on"
