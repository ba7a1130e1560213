"""How good a flow test is: plain facts for the checks, without judgement.

References
----------
.. [1] NFPA 291: pitot readings of 10 to 30 psi on 2½ in outlets are preferred; the residual should drop
   by a fair share of the static (25 % in older editions, 10 % in later ones; from memory).
"""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from typing import Final, Literal

from supplycheck.model import FlowTest, Outlet
from supplycheck.supply.margin import age_in_years
from supplycheck.supply.sources import gauge_curve, off_line

_PSI: Final = 0.45359237 * 9.80665 / 0.0254**2
_INCH: Final = 0.0254
LOWEST_PITOT: Final = 10.0 * _PSI
"""Lowest pitot reading preferred [Pa], 10 psi [1]_."""
HIGHEST_PITOT: Final = 30.0 * _PSI
"""Highest pitot reading preferred on a 2½ in outlet [Pa], 30 psi [1]_."""
LARGE_OUTLET: Final = 3.9 * _INCH
"""From this diameter [m] on, an outlet is taken for a pumper outlet (4 and 4½ in ones)."""


@dataclass(frozen=True, slots=True)
class PitotFact:
    """A pitot reading [Pa] against the preferred range for its outlet."""

    outlet: Outlet
    state: Literal["within", "below", "above"]
    limit: float


@dataclass(frozen=True, slots=True)
class FlowTestFacts:
    """The facts of one test: pressures [Pa], flow [m³/s], age [years].

    ``drop`` is static less the residual at the largest flow and ``drop_share`` its share of the static.
    ``gauge_error`` is the accuracy of the gauge over its range. ``deviation`` is how far the readings lie
    from one N^1.85 line. ``ratio`` is the demand over the largest tested flow, where a demand is given.
    """

    tag: str
    drop: float
    drop_share: float
    tested_flow: float
    age: float
    pitots: tuple[PitotFact, ...]
    pumper_outlets_without_factor: tuple[Outlet, ...]
    same_hydrant: bool
    gauge_error: float | None
    deviation: float
    ratio: float | None
    missing: tuple[str, ...]


def drop_of(test: FlowTest) -> float:
    """Return static less the residual [Pa] at the largest flow of the test."""
    last = max(test.points, key=lambda point: (point.flow, -point.residual))
    return test.static - last.residual


def drop_share(test: FlowTest) -> float:
    """Return the drop as a share of the static [-]; 0 where the static is not above 0."""
    return drop_of(test) / test.static if test.static > 0.0 else 0.0


def pitot_fact(outlet: Outlet) -> PitotFact:
    """Return where the reading of ``outlet`` stands; large outlets have no upper limit here."""
    if outlet.pitot < LOWEST_PITOT * (1 - 1e-9):
        return PitotFact(outlet, "below", LOWEST_PITOT)
    if outlet.pitot > HIGHEST_PITOT * (1 + 1e-9) and outlet.diameter < LARGE_OUTLET:
        return PitotFact(outlet, "above", HIGHEST_PITOT)
    return PitotFact(outlet, "within", HIGHEST_PITOT)


def tested_ratio(test: FlowTest, flow: float) -> float:
    """Return ``flow`` [m³/s] over the largest flow of the test [-]."""
    return flow / max(point.flow for point in test.points)


def age_of(test: FlowTest, when: dt.date) -> float:
    """Return the age of the test on ``when`` [years]; negative where it lies ahead."""
    return age_in_years(test.date, when)


def missing_facts(test: FlowTest) -> tuple[str, ...]:
    """Return what a reviewer asks for and the test does not say, each as a precise question."""
    questions = (
        (test.conducted_by, "Who conducted the test?"),
        (test.witnessed_by, "Who witnessed the test?"),
        (test.time, "At what time of day was the test made?"),
        (test.static_hydrant, "At which hydrant were static and residual read?"),
        (test.flow_hydrant, "Which hydrant flowed?"),
        (test.main, "Which main was tested, and of what size?"),
        (test.gauge_calibrated, "When was the gauge calibrated?"),
        (test.gauge_range, "What is the range of the gauge?"),
        (test.gauge_accuracy, "What is the accuracy of the gauge?"),
    )
    asked = [question for answer, question in questions if answer in ("", None)]
    read = any(point.outlets for point in test.points)
    if read and test.outlet_diameter_measured is None:
        asked.append("Was the inside diameter of the flowing outlet measured?")
    if not read and not test.model:
        asked.append("What were the pitot readings and the outlets behind the given flow?")
    return () if test.model else tuple(asked)


def flow_test_facts(test: FlowTest, when: dt.date, demand_flow: float | None = None) -> FlowTestFacts:
    """Return the facts of ``test`` on the day ``when``, against ``demand_flow`` [m³/s] where given.

    Raises :class:`supplycheck.errors.DomainError` for readings that give no curve.
    """
    outlets = [outlet for point in test.points for outlet in point.outlets]
    error = None
    if test.gauge_range is not None and test.gauge_accuracy is not None:
        error = test.gauge_range * test.gauge_accuracy
    named = test.static_hydrant.strip() and test.flow_hydrant.strip()
    curve = gauge_curve(test)
    return FlowTestFacts(
        tag=test.tag,
        drop=drop_of(test),
        drop_share=drop_share(test),
        tested_flow=curve.tested_flow,
        age=age_of(test, when),
        pitots=tuple(pitot_fact(outlet) for outlet in outlets if outlet.kind != "diffuser"),
        pumper_outlets_without_factor=tuple(
            outlet
            for outlet in outlets
            if outlet.diameter >= LARGE_OUTLET
            and outlet.pumper_factor == 1.0
            and outlet.kind in ("", "pumper outlet")
        ),
        same_hydrant=bool(named)
        and test.static_hydrant.strip().casefold() == test.flow_hydrant.strip().casefold(),
        gauge_error=error,
        deviation=off_line(test),
        ratio=None if demand_flow is None else tested_ratio(test, demand_flow),
        missing=missing_facts(test),
    )
