"""From pitot readings at hydrant outlets to the flow of a test.

References
----------
.. [1] NFPA 291, flow from a hydrant outlet: Q = 29.84 c d² √p with Q in gpm, d in inches and p in psi
   (from memory; some prints have 29.83, 0.03 % less).
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from supplycheck.errors import DomainError
from supplycheck.hydraulics import pitot_discharge
from supplycheck.model import Outlet


@dataclass(frozen=True, slots=True)
class OutletFlow:
    """The flow [m³/s] of one outlet before (``theoretical`` × coefficient) and after its pumper factor."""

    outlet: Outlet
    theoretical: float
    before_factor: float
    flow: float


def _check(outlet: Outlet) -> None:
    limits = (
        ("diameter", outlet.diameter, 1.0),
        ("coefficient", outlet.coefficient, 1.0),
        ("pitot reading", outlet.pitot, math.inf),
        ("pumper factor", outlet.pumper_factor, 1.0),
    )
    for name, value, highest in limits:
        if not (math.isfinite(value) and 0.0 < value <= highest):
            allowed = "above 0" if math.isinf(highest) else f"above 0 and at most {highest:g}"
            unit = {"diameter": " m", "pitot reading": " Pa"}.get(name, "")
            raise DomainError(f"the {name} of an outlet is {value:g}{unit}; allowed: {allowed}{unit}")


def outlet_flow(outlet: Outlet) -> OutletFlow:
    """Return the flow of one outlet [m³/s].

    Raises :class:`DomainError` for a reading, diameter, coefficient or factor outside its range.
    """
    _check(outlet)
    theoretical, _ = pitot_discharge(pitot=outlet.pitot, diameter=outlet.diameter, coefficient=1.0)
    before = outlet.coefficient * float(theoretical)
    return OutletFlow(outlet, float(theoretical), before, before * outlet.pumper_factor)


def reduce_outlets(outlets: Sequence[Outlet]) -> tuple[float, tuple[OutletFlow, ...]]:
    """Return the sum of the outlets' flows [m³/s] and the flow of each.

    Raises :class:`DomainError` where there is no outlet or a reading is out of range.
    """
    if not outlets:
        raise DomainError("a flow test needs at least one flowing outlet or a given flow")
    each = tuple(outlet_flow(outlet) for outlet in outlets)
    return math.fsum(one.flow for one in each), each
