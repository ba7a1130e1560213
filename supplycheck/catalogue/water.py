"""Hydrants, required fire flow, pumps, antifreeze."""

from __future__ import annotations

import functools
import re
from dataclasses import dataclass

from supplycheck.catalogue.names import fold, not_found
from supplycheck.catalogue.records import ValueRow
from supplycheck.catalogue.rules import rule
from supplycheck.catalogue.tables import si, si_or_none, table
from supplycheck.errors import DomainError, NotInCatalogueError
from supplycheck.units import PSI


@dataclass(frozen=True, slots=True)
class HydrantClassRow:
    """A hydrant class: lowest flow [m³/s] at 20 psi, upper limit (``None`` for the best class), colour."""

    name: str
    flow_from: float
    flow_below: float | None
    colour: str
    source: str


@dataclass(frozen=True, slots=True)
class FireFlowRow:
    """Fire flow [m³/s] and duration [s] for areas [m²] above ``area_above``, up to ``area_up_to``."""

    construction: str
    area_above: float
    area_up_to: float
    flow: float
    duration: float
    source: str
    note: str = ""


@dataclass(frozen=True, slots=True)
class ReductionRow:
    """What an automatic sprinkler system takes off the fire flow: share [-] and the floor [m³/s]."""

    share: float
    floor: float | None
    source: str
    note: str = ""


@dataclass(frozen=True, slots=True)
class HydrantSpacingRow:
    """Hydrants asked for a fire flow: least number, average spacing [m], greatest distance [m]."""

    hydrants: int
    spacing: float
    distance: float
    source: str
    note: str = ""


@dataclass(frozen=True, slots=True)
class PumpDutyRow:
    """A pre-calculated pump duty: flow [m³/s], pressure [Pa] on top of the static head."""

    hazard: str
    flow: float
    pressure: float
    source: str
    note: str = ""


@dataclass(frozen=True, slots=True)
class FluidRow:
    """An antifreeze mixture: fraction [-] by ``basis`` (volume or weight).

    Specific gravity [-] at ``temperature`` [K], freezing point [K].
    """

    name: str
    table: str
    fraction: float
    basis: str
    specific_gravity: float
    temperature: float
    freezing_point: float
    source: str
    note: str = ""


def outlet_shapes() -> tuple[str, ...]:
    """Return the names of the hydrant outlet shapes."""
    return tuple(row["shape"] for row in table("outlet_coefficients"))


def outlet_coefficient(shape: str) -> ValueRow:
    """Return the discharge coefficient [-] of a hydrant outlet of that shape.

    Raises
    ------
    NotInCatalogueError
        The shape is unknown. One word that fits a single shape is enough (``"smooth"``).
    """
    words = set(fold(shape).split())
    rows = [
        row for row in table("outlet_coefficients") if words and words <= set(fold(row["shape"]).split())
    ]
    if len(rows) != 1:
        raise not_found("hydrant outlet shape", shape, outlet_shapes())
    return ValueRow(float(rows[0]["coefficient"]), rows[0]["source"])


def pumper_factor(pitot: float) -> ValueRow:
    """Return the factor [-] on the flow of a pumper outlet at the ``pitot`` pressure [Pa].

    Straight between the printed readings, constant above the last one (7 psi).

    Raises
    ------
    DomainError
        The reading is below the first of the table (2 psi).
    """
    rows = [(float(row["pitot_psi"]), float(row["factor"]), row) for row in table("pumper_factors")]
    reading = round(pitot / PSI, 9)
    if not reading >= rows[0][0]:
        raise DomainError(
            f"pumper outlet: the table starts at {rows[0][0]:g} psi, the reading is {reading:.2f} psi"
        )
    if reading >= rows[-1][0]:
        last = rows[-1][2]
        return ValueRow(rows[-1][1], last["source"], last["note"])
    above = next(index for index, (psi, _, _) in enumerate(rows) if psi > reading)
    (low, left, cells), (high, right, _) = rows[above - 1], rows[above]
    value = left + (right - left) * (reading - low) / (high - low)
    note = f"straight between {low:g} and {high:g} psi" if reading > low else ""
    return ValueRow(value, cells["source"], note)


@functools.cache
def hydrant_classes() -> tuple[HydrantClassRow, ...]:
    """Return the hydrant classes from the best to the poorest; flows [m³/s] at 20 psi."""
    rows, above = [], None
    for row in table("hydrant_classes"):
        flow = si(row, "flow_from_gpm", "gpm")
        rows.append(HydrantClassRow(row["class"], flow, above, row["colour"], row["source"]))
        above = flow
    return tuple(rows)


def hydrant_class(flow: float) -> HydrantClassRow:
    """Return the class of a hydrant that gives ``flow`` [m³/s] at 20 psi.

    Raises
    ------
    DomainError
        The flow is negative or not a number.
    """
    slack = 1e-12
    for row in hydrant_classes():
        if flow >= row.flow_from - slack and flow >= 0:
            return row
    raise DomainError("a hydrant's flow must be zero or more")


def construction_types() -> tuple[str, ...]:
    """Return the columns of the fire-flow table, such as ``"IIA-IIIA"``."""
    return tuple(dict.fromkeys(row["construction"] for row in table("fire_flow")))


def _construction(text: str) -> str:
    plain = re.sub(r"[^A-Z]", "", text.upper().removeprefix("TYPE"))
    for name in construction_types():
        if plain == name.replace("-", "") or plain in name.split("-"):
            return name
    types = [part for name in construction_types() for part in name.split("-")]
    raise not_found("construction type", text, types)


def fire_flow(area: float, construction: str) -> FireFlowRow:
    """Return the required fire flow and duration for a fire-flow calculation ``area`` [m²].

    ``construction`` is a type such as ``"IIB"`` or ``"Type V-B"``. The flow is before any
    reduction for sprinklers (:func:`fire_flow_reduction`).

    Raises
    ------
    NotInCatalogueError
        The construction type is unknown, or the area lies beyond the table (5,000 gpm).
    DomainError
        The area is not above zero.
    """
    if not area > 0:
        raise DomainError("a fire-flow calculation area must be above zero")
    column, above = _construction(construction), 0.0
    for row in table("fire_flow"):
        if row["construction"] != column:
            continue
        limit = si(row, "area_up_to_ft2", "ft²")
        if area <= limit * (1 + 1e-12):
            flow, duration = si(row, "flow_gpm", "gpm"), si(row, "duration_h", "h")
            return FireFlowRow(column, above, limit, flow, duration, row["source"], row["note"])
        above = limit
    raise NotInCatalogueError(
        f"fire flow: the table ends at {above:.0f} m² for {column}; give the fire flow in the project"
    )


def fire_flow_reduction(edition: str | int, *, dwelling: bool = False) -> ReductionRow:
    """Return what a sprinkler system takes off the fire flow in the IFC ``edition`` (a year).

    The share is the most that may be taken off. For dwellings no floor is printed in the source.

    Raises
    ------
    DomainError
        The edition is not a year, or lies between the editions that are tabulated.
    """
    if dwelling:
        share = rule("fire flow reduction, sprinklered dwelling", "IFC", edition)
        return ReductionRow(share.value, None, share.source, share.note)
    share = rule("fire flow reduction, sprinklered building", "IFC", edition)
    floor = rule("fire flow floor, sprinklered building", "IFC", edition)
    return ReductionRow(share.value, floor.value, share.source, share.note)


def hydrant_spacing(flow: float) -> HydrantSpacingRow:
    """Return number and spacing of hydrants for the required fire ``flow`` [m³/s].

    Raises
    ------
    DomainError
        The flow is not above zero.
    """
    if not flow > 0:
        raise DomainError("a required fire flow must be above zero")
    rows = table("hydrant_spacing")
    limits = [si_or_none(row, "flow_up_to_gpm", "gpm") for row in rows]
    row = next(
        row for row, limit in zip(rows, limits, strict=True) if limit is None or flow <= limit * (1 + 1e-12)
    )
    spacing, distance = si(row, "spacing_ft", "ft"), si(row, "distance_ft", "ft")
    return HydrantSpacingRow(int(row["hydrants"]), spacing, distance, row["source"], row["note"])


@functools.cache
def pump_ratings() -> tuple[ValueRow, ...]:
    """Return the rated flows [m³/s] in which fire pumps are made, ascending."""
    return tuple(ValueRow(si(row, "flow_gpm", "gpm"), row["source"]) for row in table("pump_ratings"))


@functools.cache
def pump_duties() -> tuple[PumpDutyRow, ...]:
    """Return pre-calculated pump duties of EN 12845."""
    return tuple(
        PumpDutyRow(
            row["hazard"],
            si(row, "flow_lpm", "L/min"),
            si(row, "pressure_bar", "bar"),
            row["source"],
            row["note"],
        )
        for row in table("pump_duties_en")
    )


@functools.cache
def antifreeze() -> tuple[FluidRow, ...]:
    """Return the antifreeze tables. They hold no viscosity: take it from the maker."""
    return tuple(
        FluidRow(
            name=row["fluid"],
            table=row["table"],
            fraction=float(row["percent"]) / 100,
            basis=row["basis"],
            specific_gravity=float(row["specific_gravity"]),
            temperature=si(row, "temperature_f", "°F"),
            freezing_point=si(row, "freezing_f", "°F"),
            source=row["source"],
            note=row["note"],
        )
        for row in table("fluids")
    )
