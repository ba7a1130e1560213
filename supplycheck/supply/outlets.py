"""From pitot readings at hydrant outlets to the flow of a test.

References
----------
.. [1] NFPA 291, flow from a hydrant outlet: Q = 29.84 c d² √p with Q in gpm, d in inches and p in psi
   (from memory; some prints have 29.83, 0.03 % less). The factors for a pumper outlet are from memory
   too, except 0.83 at 7 psi and above, which a practitioners' worked example gives.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Final

from supplycheck.errors import DomainError
from supplycheck.hydraulics import pitot_discharge
from supplycheck.model import Outlet

_PSI: Final = 0.45359237 * 9.80665 / 0.0254**2
PUMPER_FACTORS: Final = ((2.0, 0.97), (3.0, 0.92), (4.0, 0.89), (5.0, 0.86), (6.0, 0.84), (7.0, 0.83))
"""Factor on the flow of a large pumper outlet by pitot reading in psi; the last holds above 7 psi."""


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


def pumper_factor(pitot: float) -> float | None:
    """Return the published factor for a pumper outlet at ``pitot`` [Pa], ``None`` below 2 psi.

    Straight between the printed readings (2 to 7 psi), 0.83 above; NFPA 291, from memory.

    >>> pumper_factor(10 * 6894.757293168)
    0.83
    """
    reading = pitot / _PSI
    if reading < PUMPER_FACTORS[0][0] * (1 - 1e-9):
        return None
    for (low, at_low), (high, at_high) in pairwise(PUMPER_FACTORS):
        if reading <= high:
            return at_low + (at_high - at_low) * max(reading - low, 0.0) / (high - low)
    return PUMPER_FACTORS[-1][1]
