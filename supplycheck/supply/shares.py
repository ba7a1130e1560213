"""What each source gives of a demand, and what it could give."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class SourceShare:
    """What one source gives in the demand solution, and what it could give; pressures [Pa], flow [m³/s].

    ``flow`` is negative where water runs into the source. ``available`` is the compared curve at ``flow``,
    ``unadjusted`` the lowest measured curve there.
    ``governing`` names the test or tank; ``test_static``, ``test_residual`` and ``test_flow`` are as read
    (the reading at the largest flow of that test), ``None`` for a tank. ``required`` is what the margin
    rule asks of this source.
    """

    node: str
    flow: float
    demand_pressure: float
    available: float
    unadjusted: float
    governing: str
    test_static: float | None
    test_residual: float | None
    test_flow: float | None
    tested_flow: float
    extrapolated: bool
    tested_ratio: float | None
    required: float | None
