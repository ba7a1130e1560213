"""The water supply as it was measured, and the authority's margin rule."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from typing import Literal

from supplycheck.findings import Place
from supplycheck.model.system import Origin


@dataclass(frozen=True, slots=True)
class Outlet:
    """A flowing hydrant outlet: diameter [m], coefficient [-], pitot [Pa], pumper factor [-].

    ``kind`` says through what it flowed, empty where that is not told. The coefficient of a diffuser is
    that of its maker and may stand for a K-factor.
    """

    diameter: float
    coefficient: float
    pitot: float
    pumper_factor: float = 1.0
    shape: str = ""
    origin: Origin = "given"
    hydrant: str = ""
    kind: Literal["", "hose outlet", "pumper outlet", "diffuser"] = ""


@dataclass(frozen=True, slots=True)
class TestPoint:
    """One reading of a flow test: residual [Pa] at ``flow`` [m³/s]; outlets where they were read."""

    __test__ = False  # the trade's word, not a test case

    residual: float
    flow: float
    outlets: tuple[Outlet, ...] = ()


@dataclass(frozen=True, slots=True)
class FlowTest:
    """A hydrant flow test; pressures [Pa] at the gauge, elevation of the gauge [m].

    ``model`` marks values that a utility computed instead of a reading.
    """

    tag: str
    node: str
    date: dt.date
    static: float
    points: tuple[TestPoint, ...]
    gauge_elevation: float
    time: str = ""
    static_hydrant: str = ""
    flow_hydrant: str = ""
    conducted_by: str = ""
    witnessed_by: str = ""
    main: str = ""
    gauge_range: float | None = None
    gauge_accuracy: float | None = None
    gauge_calibrated: dt.date | None = None
    outlet_diameter_measured: bool | None = None
    model: bool = False
    source: str = ""
    place: Place | None = None


@dataclass(frozen=True, slots=True)
class Tank:
    """A tank or reservoir at a node: water level [m, same datum], usable volume and refill [m³, m³/s].

    The supply counts from ``low_level`` [m], to which the volume draws the water down, where it is told;
    the highest pressure without flow then stands from ``water_level``.
    """

    tag: str
    node: str
    water_level: float
    volume: float | None = None
    refill: float = 0.0
    kind: Literal["gravity", "suction", "break", "reservoir"] = "gravity"
    place: Place | None = None
    low_level: float | None = None

    @property
    def lowest_level(self) -> float:
        """The level [m] from which the supply is counted."""
        return self.water_level if self.low_level is None else self.low_level


@dataclass(frozen=True, slots=True)
class Adjustment:
    """A change made to the measured curve before it is compared, in the order given.

    ``low supply``: static and residual lowered by ``pressure`` [Pa];
    ``static cap``: no pressure on the curve above ``pressure`` [Pa];
    ``percent``: every pressure multiplied by ``factor``.
    """

    kind: Literal["low supply", "static cap", "percent"]
    pressure: float = 0.0
    factor: float = 1.0
    reason: str = ""


@dataclass(frozen=True, slots=True)
class MarginRule:
    """The margin that the authority asks for, as a small tree of formulas.

    ``none`` · ``fixed`` (``pressure`` [Pa]) · ``percent`` (``percent`` as a fraction, read as
    ``reading``) · ``of demand`` (``percent`` of the required pressure) · ``larger of``
    (``parts``) · ``by static`` (``bands``: the first rule whose limit [Pa] is above the static) ·
    ``by test age`` (``pressure`` plus ``per_year`` [Pa] for each full year beyond ``free_years``).
    """

    kind: Literal["none", "fixed", "percent", "of demand", "larger of", "by static", "by test age"]
    pressure: float = 0.0
    percent: float = 0.0
    reading: Literal["static lowered", "pressure scaled", "flow scaled"] | None = None
    parts: tuple[MarginRule, ...] = ()
    bands: tuple[tuple[float, MarginRule], ...] = ()
    free_years: float = 0.0
    per_year: float = 0.0
    source: str = ""


@dataclass(frozen=True, slots=True)
class Supply:
    """All that feeds the system, where it is compared, how it is adjusted, what margin is asked.

    ``margin`` is ``None`` where no rule is given: the verdict cannot then be "adequate".
    ``compare_at`` is the node at which demand and supply are set side by side.
    """

    tests: tuple[FlowTest, ...]
    tanks: tuple[Tank, ...]
    adjustments: tuple[Adjustment, ...]
    margin: MarginRule | None
    compare_at: str
    maximum_test_age_months: float | None = None
    submittal_date: dt.date | None = None
    main_floor_pressure: float | None = None
