"""Pumps: curve from points, affinity laws, power.

References
----------
.. [1] NFPA 20: churn at most 140 % of rated pressure; at 150 % of rated flow at least 65 % of it.
.. [2] Affinity laws, any text on turbomachines: flow ∝ speed, pressure ∝ speed², power ∝ speed³.
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise
from typing import Final

from supplycheck.errors import DomainError
from supplycheck.hydraulics.curve import Curve
from supplycheck.hydraulics.numbers import (
    AnyNumber,
    Number,
    as_array,
    not_negative,
    plain,
    positive,
    spread,
    within,
)

HIGHEST_CHURN: Final = 1.40
"""Highest churn pressure over rated pressure allowed [1]_ [-]."""
OVERLOAD_FLOW: Final = 1.50
"""Flow over rated flow at which the overload point is taken [1]_ [-]."""
LOWEST_OVERLOAD: Final = 0.65
"""Lowest pressure at the overload point over rated pressure allowed [1]_ [-]."""


def pump_curve(*, flows: Sequence[float], pressures: Sequence[float]) -> Curve:
    """Return the curve of a pump through its points, falling with the flow.

    Parameters
    ----------
    flows : Flows, rising, at least two. [m³/s]
    pressures : Net pressures at these flows, none above the one before. [Pa]

    Raises
    ------
    DomainError
        Fewer than two points, flows that do not rise, a pressure that rises or is negative.
    """
    if len(flows) < 2:
        raise DomainError(f"a pump curve needs at least two points; found {len(flows)}")
    for before, after in pairwise(pressures):
        if after > before:
            raise DomainError(
                f"a pump curve must not rise with the flow; found {after:g} Pa after {before:g} Pa"
            )
    if min(pressures) < 0 or min(flows) < 0:
        raise DomainError("a pump curve needs flows and pressures of 0 or more")
    return Curve(tuple(flows), tuple(pressures))


def rated_pump_curve(*, flow: float, pressure: float, churn: float, overload: float) -> Curve:
    """Return the curve through churn, rated and overload (150 % flow) points.

    Parameters
    ----------
    flow, pressure : Rated flow and rated net pressure. [m³/s], [Pa]
    churn : Net pressure at no flow; the highest allowed is 1.40 · ``pressure``. [Pa]
    overload : Net pressure at 1.5 · ``flow``; the lowest allowed is 0.65 · ``pressure``. [Pa]

    Raises
    ------
    DomainError
        Rated values not above 0, or pressures that rise with the flow.
    """
    positive("rated flow", "m³/s", flow)
    positive("rated pressure", "Pa", pressure)
    return pump_curve(flows=(0.0, flow, OVERLOAD_FLOW * flow), pressures=(churn, pressure, overload))


def limiting_pump_curve(*, flow: float, pressure: float) -> Curve:
    """Return the steepest curve the pump standard allows for a rating: 140 % churn, 65 % at 150 % flow.

    A pump not yet chosen can be no weaker than this beyond its rated flow and no stronger at churn.
    """
    return rated_pump_curve(
        flow=flow, pressure=pressure, churn=HIGHEST_CHURN * pressure, overload=LOWEST_OVERLOAD * pressure
    )


def at_speed(*, curve: Curve, ratio: float) -> Curve:
    """Return ``curve`` at ``ratio`` times its speed, by the affinity laws [2]_.

    Raises
    ------
    DomainError
        Ratio not above 0.
    """
    positive("speed ratio", "", ratio)
    return Curve(tuple(q * ratio for q in curve.flows), tuple(p * ratio**2 for p in curve.values))


def pump_pressure(*, flow: Number, curve: Curve) -> tuple[Number, Number]:
    """Return the net pressure of a pump [Pa] and its slope [Pa/(m³/s)] at ``flow`` [m³/s].

    Raises
    ------
    DomainError
        Flow outside the points of the curve.
    """
    return curve.at(flow)


def pressure_from_power(
    *, flow: Number, power: AnyNumber, efficiency: AnyNumber = 1.0
) -> tuple[Number, Number]:
    """Return the pressure that a shaft power gives the flow, η·P/q, and its derivative.

    Parameters
    ----------
    flow : Flow, above 0. [m³/s]
    power : Shaft power. [W]
    efficiency : Pump efficiency, above 0 up to 1; 1 where ``power`` is what the fluid receives. [-]

    Returns
    -------
    Pressure [Pa] and derivative [Pa/(m³/s)].

    Raises
    ------
    DomainError
        Flow not above 0, power negative, efficiency outside (0, 1].
    """
    q = positive("flow", "m³/s", flow)
    useful = not_negative("power", "W", power) * _efficiency(efficiency)
    return plain(useful / q), plain(-useful / q**2)


def power_from_pressure(
    *, flow: Number, pressure: AnyNumber, efficiency: AnyNumber = 1.0
) -> tuple[Number, Number]:
    """Return the shaft power p·q/η and its derivative with respect to the flow.

    Parameters
    ----------
    flow : Flow. [m³/s]
    pressure : Pressure given to the fluid. [Pa]
    efficiency : Pump efficiency, above 0 up to 1; 1 gives the power the fluid receives. [-]

    Returns
    -------
    Power [W] and derivative [W/(m³/s)].

    Raises
    ------
    DomainError
        Efficiency outside (0, 1].
    """
    slope = as_array(pressure) / _efficiency(efficiency)
    q = as_array(flow)
    return plain(slope * q), spread(slope, q)


def _efficiency(efficiency: AnyNumber) -> AnyNumber:
    positive("efficiency", "", efficiency)
    return within("efficiency", "", efficiency, 0.0, 1.0)
