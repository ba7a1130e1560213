"""Fire pumps: what the standard bounds, what suction and pump give together, what pump would be needed.

A rating with the limits of the standard is not a curve: it says what a pump may do, so that a shortfall can
be sized before a pump is chosen. A curve comes from three or more stated points.

References
----------
.. [1] NFPA 20: churn at most 140 % of the rated pressure; at least 65 % of it at 150 % of the rated flow.
.. [2] Net pressure = discharge − suction + difference of velocity pressure + difference of gauge height
   (definition in NFPA 20, from memory).
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Final

import numpy as np

from supplycheck.errors import DomainError
from supplycheck.hydraulics import Curve, pump_curve
from supplycheck.hydraulics.pump import HIGHEST_CHURN, LOWEST_OVERLOAD, OVERLOAD_FLOW
from supplycheck.network.records import FloatArray
from supplycheck.supply.curve import SupplyCurve

_SAMPLES: Final = 48
_HALVINGS: Final = 60


@dataclass(frozen=True, slots=True)
class PumpRating:
    """Rated flow [m³/s] and rated net pressure [Pa] of a fire pump."""

    flow: float
    pressure: float

    def __post_init__(self) -> None:
        for name, value in (("flow", self.flow), ("pressure", self.pressure)):
            if not (math.isfinite(value) and value > 0.0):
                raise DomainError(f"the rated {name} of a pump must be above 0, found {value:g}")

    @property
    def highest_churn(self) -> float:
        """Highest churn pressure allowed [Pa] [1]_."""
        return HIGHEST_CHURN * self.pressure

    @property
    def overload_flow(self) -> float:
        """150 % of the rated flow [m³/s]."""
        return OVERLOAD_FLOW * self.flow

    @property
    def lowest_overload(self) -> float:
        """Lowest net pressure allowed at 150 % of the rated flow [Pa] [1]_."""
        return LOWEST_OVERLOAD * self.pressure

    def least_pressure(self, flow: float) -> float:
        """Return the least net pressure [Pa] that a pump of this rating must give at ``flow`` [m³/s].

        The rated pressure up to the rated flow, then the straight line to the overload point, below which
        no falling curve that bends downward can lie. :class:`DomainError` beyond 150 % of the rated flow.
        """
        if not 0.0 <= flow <= self.overload_flow * (1 + 1e-12):
            raise DomainError("a pump is not asked beyond 150 % of its rated flow")
        beyond = max(flow - self.flow, 0.0) / (self.overload_flow - self.flow)
        return self.pressure - (self.pressure - self.lowest_overload) * beyond


@dataclass(frozen=True, slots=True)
class PumpFacts:
    """A pump curve against its rating and its suction; pressures [Pa], flows [m³/s], shares [-].

    ``overload_share`` is ``None`` where the curve stops before 150 % of the rated flow. The highest
    discharge pressure is churn on the highest static of the suction. ``demand_share`` is the demand over
    the rated flow.
    """

    rating: PumpRating
    churn: float
    churn_share: float
    overload_share: float | None
    suction_at_overload: float | None
    suction_at_demand: float | None
    discharge_at_demand: float | None
    highest_discharge: float | None
    demand_share: float | None


@dataclass(frozen=True, slots=True)
class Boosted:
    """Suction curve and pump together: at every flow the pressures add."""

    suction: SupplyCurve
    pump: Curve

    @property
    def largest_flow(self) -> float:
        """The flow [m³/s] at which the curve of the pump ends."""
        return self.pump.flows[-1]

    def pressure_at(self, flow: float) -> float:
        """Return the discharge pressure [Pa] at ``flow`` [m³/s]; :class:`DomainError` outside the curve."""
        return self.suction.pressure_at(flow) + float(self.pump.at(flow)[0])

    def flow_at(self, pressure: float) -> float | None:
        """Return the flow [m³/s] that leaves ``pressure`` [Pa]: 0 if none does, ``None`` past the curve."""
        low, high = self.pump.flows[0], self.largest_flow
        if self.pressure_at(low) < pressure:
            return 0.0
        if self.pressure_at(high) >= pressure:
            return None
        while high - low > 1e-13 * high:
            middle = 0.5 * (low + high)
            low, high = (middle, high) if self.pressure_at(middle) >= pressure else (low, middle)
        return low


@dataclass(frozen=True, slots=True)
class PumpOption:
    """A pump that would carry a demand: its rating, how far it is used, what is left at its suction.

    ``suction_at_overload`` [Pa] is the suction at 150 % of the rated flow and ``suction_holds`` whether
    that is at or above the floor.
    """

    rating: PumpRating
    demand_share: float
    suction_at_overload: float
    suction_holds: bool


def net_pressure(
    *,
    discharge: float,
    suction: float,
    discharge_velocity_pressure: float = 0.0,
    suction_velocity_pressure: float = 0.0,
    height: float = 0.0,
) -> float:
    """Return the net pressure [Pa] of a pump from its two gauges [2]_.

    ``height`` [Pa] is the water column from the suction gauge up to the discharge gauge.
    """
    return discharge - suction + discharge_velocity_pressure - suction_velocity_pressure + height


def pump_facts(
    curve: Curve,
    rating: PumpRating,
    *,
    suction: SupplyCurve | None = None,
    highest_static: float | None = None,
    demand: float | None = None,
) -> PumpFacts:
    """Return the facts of a pump at ``demand`` [m³/s]; ``highest_static`` [Pa] is the greatest suction.

    Raises :class:`DomainError` where the demand lies outside the curve.
    """
    churn = float(curve.at(0.0)[0])
    overload = float(curve.at(rating.overload_flow)[0]) if curve.flows[-1] >= rating.overload_flow else None
    at_demand = suction.pressure_at(demand) if suction is not None and demand is not None else None
    added = float(curve.at(demand)[0]) if demand is not None else None
    return PumpFacts(
        rating=rating,
        churn=churn,
        churn_share=churn / rating.pressure,
        overload_share=None if overload is None else overload / rating.pressure,
        suction_at_overload=None if suction is None else suction.pressure_at(rating.overload_flow),
        suction_at_demand=at_demand,
        discharge_at_demand=None if at_demand is None or added is None else at_demand + added,
        highest_discharge=None if highest_static is None else highest_static + churn,
        demand_share=None if demand is None else demand / rating.flow,
    )


def in_series(curves: Sequence[Curve]) -> Curve:
    """Return pumps one behind the other: pressures add at the same flow, up to the shortest curve.

    Exact at every point of each curve and at 48 flows between.
    """
    _several(curves)
    end = min(curve.flows[-1] for curve in curves)
    flows = {flow for curve in curves for flow in curve.flows if flow <= end}
    flows |= {end * index / _SAMPLES for index in range(_SAMPLES + 1)}
    ordered = _apart(sorted(flows))
    return pump_curve(
        flows=ordered, pressures=[sum(float(curve.at(flow)[0]) for curve in curves) for flow in ordered]
    )


def in_parallel(curves: Sequence[Curve]) -> Curve:
    """Return pumps side by side: flows add at the same pressure, each behind its check valve.

    A pump gives nothing at a pressure above its churn. The curve ends at the highest of the pressures at
    which one of them ends. Like pumps are exact; unlike ones at every point and at 48 flows of each.
    """
    _several(curves)
    if all(curve == curves[0] for curve in curves):
        return Curve(tuple(len(curves) * flow for flow in curves[0].flows), curves[0].values)
    low = max(curve.values[-1] for curve in curves)
    asked = [np.asarray(curve.values) for curve in curves]
    asked += [curve.at(np.linspace(0.0, curve.flows[-1], _SAMPLES + 1))[0] for curve in curves]
    pressures = np.unique(np.concatenate(asked))[::-1]
    pressures = pressures[pressures >= low]
    flows: FloatArray = np.sum([_flows_of(curve, pressures) for curve in curves], axis=0)
    rising = np.diff(flows, prepend=-flows[-1]) > 1e-9 * flows[-1]
    return pump_curve(flows=tuple(flows[rising].tolist()), pressures=tuple(pressures[rising].tolist()))


def _several(curves: Sequence[Curve]) -> None:
    if not curves:
        raise DomainError("at least one pump is needed")
    for curve in curves:
        if len(curve.flows) < 2 or curve.flows[0] != 0.0:
            raise DomainError("pumps are combined from curves that start at no flow")
        if any(after >= before for before, after in pairwise(curve.values)):
            raise DomainError("pumps are combined from curves that fall from point to point")


def _apart(flows: list[float]) -> list[float]:
    kept = [flows[0]]
    for flow in flows[1:]:
        if flow > kept[-1] + 1e-9 * flows[-1]:
            kept.append(flow)
    return kept


def _flows_of(curve: Curve, pressures: FloatArray) -> FloatArray:
    """Return the flow of one pump at pressures not below the end of its curve; 0 above its churn."""
    low, high = np.zeros_like(pressures), np.full_like(pressures, curve.flows[-1])
    for _ in range(_HALVINGS):
        middle = 0.5 * (low + high)
        above = curve.at(middle)[0] >= pressures
        low, high = np.where(above, middle, low), np.where(above, high, middle)
    return np.where(pressures >= curve.values[0], 0.0, high)


def needed_pumps(
    *,
    suction: SupplyCurve,
    flow: float,
    pressure: float,
    rated_flows: Sequence[float],
    suction_floor: float,
) -> tuple[PumpOption, ...]:
    """Return the ratings that give ``pressure`` [Pa] at ``flow`` [m³/s] behind the pump, smallest first.

    Each of ``rated_flows`` [m³/s] that carries the flow within 150 % is tried: the rated pressure is the
    least for which every pump within the limits [1]_ has enough. ``suction_floor`` [Pa] is the authority's
    floor at 150 % of the rated flow. Empty where the suction alone is enough or no rated flow reaches.
    """
    missing = pressure - suction.pressure_at(flow)
    if missing <= 0.0:
        return ()
    options = []
    for rated in sorted(rated_flows):
        if flow > OVERLOAD_FLOW * rated:
            continue
        share = PumpRating(rated, 1.0).least_pressure(flow)
        at_overload = suction.pressure_at(OVERLOAD_FLOW * rated)
        options.append(
            PumpOption(
                PumpRating(rated, missing / share), flow / rated, at_overload, at_overload >= suction_floor
            )
        )
    return tuple(options)
