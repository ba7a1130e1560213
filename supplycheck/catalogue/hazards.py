"""Hazard classes, sprinkler K-factors, early-suppression criteria."""

from __future__ import annotations

import functools
from dataclasses import dataclass
from types import MappingProxyType
from typing import Final

from supplycheck.catalogue.names import fold, not_found
from supplycheck.catalogue.tables import (
    Row,
    aliases,
    in_edition,
    listed,
    si,
    si_or_none,
    split_standard,
    table,
)
from supplycheck.errors import DomainError
from supplycheck.units import FOOT, GPM, METRIC

_TABLES: Final = MappingProxyType({"NFPA 13": "hazards_nfpa", "EN 12845": "hazards_en"})


@dataclass(frozen=True, slots=True)
class DensityPoint:
    """A point of the density/area figure: area [m²], density [m/s]."""

    area: float
    density: float
    source: str


@dataclass(frozen=True, slots=True)
class HazardRow:
    """Criteria of a hazard class.

    ``density`` [m/s] and ``area`` [m²] are the first point of ``points`` (the smallest area);
    ``area_dry`` [m²] is set where the standard tabulates one. Pressure [Pa], coverage [m²],
    spacing [m], hose flows [m³/s], durations [s], K-factors [m³/s/√Pa]. ``hose_outside`` is the
    allowance when no inside hose is connected; ``hose_inside_choices`` are what inside hose may
    ask, and count within that total. Values are ``None`` where the standard gives none.
    """

    name: str
    standard: str
    edition: str
    points: tuple[DensityPoint, ...]
    area_dry: float | None
    minimum_pressure: float
    maximum_coverage: float
    maximum_spacing: float
    hose_inside: float | None
    hose_outside: float | None
    hose_inside_choices: tuple[float, ...]
    duration_min: float
    duration_max: float
    k_factors: tuple[float, ...]
    source: str
    note: str = ""

    @property
    def density(self) -> float | None:
        """Density [m/s] at the smallest area; ``None`` where the standard tabulates none."""
        return self.points[0].density if self.points else None

    @property
    def area(self) -> float | None:
        """Smallest design area [m²] (wet); ``None`` where the standard tabulates none."""
        return self.points[0].area if self.points else None

    @property
    def k_factor(self) -> float | None:
        """The K-factor [m³/s/√Pa] where the standard names exactly one."""
        return self.k_factors[0] if len(self.k_factors) == 1 else None

    def density_at(self, area: float) -> float:
        """Return the density [m/s] at the design ``area`` [m²].

        Straight between the two end points of the figure (editions of NFPA 13 up to 2019, whose
        curves are straight lines on linear axes: from memory, not verified); single-point classes
        answer at their own area only.

        Raises
        ------
        DomainError
            Outside the end points: a figure is not extrapolated.
        """
        if not self.points:
            raise DomainError(f"{self.name}: {self.standard} tabulates no density for this class")
        low, high = self.points[0], self.points[-1]
        slack = 1e-9 * high.area
        if not low.area - slack <= area <= high.area + slack:
            raise DomainError(
                f"{self.name}: the density is published for {low.area:.1f} to {high.area:.1f} m², "
                f"not for {area:.1f} m²; give the density in the project"
            )
        if low is high:
            return low.density
        share = (area - low.area) / (high.area - low.area)
        return low.density + share * (high.density - low.density)


@dataclass(frozen=True, slots=True)
class EsfrRow:
    """Early-suppression criteria.

    Building height [m], K [m³/s/√Pa], pressures [Pa] (``None`` where the listing decides), hose [m³/s],
    duration [s].
    """

    building_height: float
    k_factor: float
    pressure_low: float | None
    pressure_high: float | None
    heads: int
    hose: float
    duration: float
    source: str
    note: str = ""


@dataclass(frozen=True, slots=True)
class KFactorPair:
    """A sprinkler's K-factor as printed in both unit sets; both [m³/s/√Pa]."""

    us: float
    metric: float
    source: str
    note: str = ""


def hazard_names(standard: str) -> tuple[str, ...]:
    """Return the hazard classes of ``standard`` (``"NFPA 13"`` or ``"EN 12845"``).

    Raises
    ------
    NotInCatalogueError
        There is no table for the standard.
    """
    name, _ = split_standard(standard)
    if name not in _TABLES:
        raise not_found("hazard classes of the standard", name, _TABLES)
    return tuple(row["hazard"] for row in table(_TABLES[name]))


def hazard_class(name: str, standard: str, edition: str | int | None = None) -> HazardRow:
    """Return the criteria of a hazard class; the edition may stand in ``standard`` or apart.

    NFPA 13 gives single density/area points from 2022 on and curves up to 2019.

    Raises
    ------
    NotInCatalogueError
        The class or the standard is unknown.
    DomainError
        No edition is given for a standard whose editions differ, or it is not a year, or lies
        between the editions that are tabulated.

    >>> row = hazard_class("OH2", "NFPA 13 (2022)")
    >>> row.name, round(row.area / 0.3048**2)
    ('ordinary hazard group 2', 1500)
    """
    known = hazard_names(standard)
    code, year = split_standard(standard, edition)
    key = fold(name)
    found = {fold(hazard): hazard for hazard in known}.get(key) or aliases("hazard", code).get(key)
    if found is None:
        other = [
            row["alias"] for row in table("aliases") if row["kind"] == "hazard" and row["standard"] == code
        ]
        raise not_found(f"hazard class in {code}", name, [*known, *other])
    return _nfpa(found, year) if code == "NFPA 13" else _en(found, year)


def _nfpa(name: str, year: int | None) -> HazardRow:
    if year is None:
        raise DomainError(
            "NFPA 13: give the edition, such as NFPA 13 (2022); densities differ between editions"
        )
    rows = [row for row in table("density_points_nfpa") if row["hazard"] == name and in_edition(row, year)]
    if not rows:
        raise DomainError(f"NFPA 13 ({year}): no such edition is tabulated; up to 2019, and from 2022")
    return _nfpa_row(name, year, rows)


def _nfpa_row(name: str, year: int, rows: list[Row]) -> HazardRow:
    points = [
        DensityPoint(si(row, "area_ft2", "ft²"), si(row, "density_gpm_ft2", "gpm/ft²"), row["source"])
        for row in rows
    ]
    cells = next(row for row in table("hazards_nfpa") if row["hazard"] == name)
    notes = [cells["note"], *dict.fromkeys(row["note"] for row in rows)]
    sources = [*dict.fromkeys(row["source"] for row in rows), cells["source"]]
    return HazardRow(
        name=name,
        standard="NFPA 13",
        edition=str(year),
        points=tuple(sorted(points, key=lambda point: point.area)),
        area_dry=None,
        minimum_pressure=si(cells, "minimum_pressure_psi", "psi"),
        maximum_coverage=si(cells, "maximum_coverage_ft2", "ft²"),
        maximum_spacing=si(cells, "maximum_spacing_ft", "ft"),
        hose_inside=0.0,
        hose_outside=si(cells, "hose_total_gpm", "gpm"),
        hose_inside_choices=tuple(flow * GPM for flow in listed(cells["hose_inside_gpm"])),
        duration_min=si(cells, "duration_low_min", "min"),
        duration_max=si(cells, "duration_high_min", "min"),
        k_factors=(),
        source="; ".join(sources),
        note="; ".join(note for note in notes if note),
    )


def _en(name: str, year: int | None) -> HazardRow:
    cells = next(row for row in table("hazards_en") if row["hazard"] == name)
    area = si_or_none(cells, "area_wet_m2", "m²")
    density = si_or_none(cells, "density_mm_min", "mm/min")
    points = (DensityPoint(area, density, cells["source"]),) if area and density else ()
    return HazardRow(
        name=name,
        standard="EN 12845",
        edition=str(year or ""),
        points=points,
        area_dry=si_or_none(cells, "area_dry_m2", "m²"),
        minimum_pressure=si(cells, "minimum_pressure_bar", "bar"),
        maximum_coverage=si(cells, "maximum_coverage_m2", "m²"),
        maximum_spacing=si(cells, "maximum_spacing_m", "m"),
        hose_inside=None,
        hose_outside=None,
        hose_inside_choices=(),
        duration_min=si(cells, "duration_min", "min"),
        duration_max=si(cells, "duration_min", "min"),
        k_factors=tuple(METRIC.to_si(k, "k_factor") for k in listed(cells["k_factor_lpm_bar"])),
        source=cells["source"],
        note=cells["note"],
    )


@functools.cache
def k_factors() -> tuple[KFactorPair, ...]:
    """Return published pairs of US and metric K-factors (metric = 14.4 × US)."""
    return tuple(
        KFactorPair(
            si(row, "k_gpm_psi", "gpm/psi½"), si(row, "k_lpm_bar", "L/min/bar½"), row["source"], row["note"]
        )
        for row in table("k_factors")
    )


@functools.cache
def esfr() -> tuple[EsfrRow, ...]:
    """Return early-suppression criteria from memory: verify before use."""
    return tuple(
        EsfrRow(
            building_height=float(row["building_up_to_ft"]) * FOOT,
            k_factor=si(row, "k_gpm_psi", "gpm/psi½"),
            pressure_low=si_or_none(row, "pressure_low_psi", "psi"),
            pressure_high=si_or_none(row, "pressure_high_psi", "psi"),
            heads=int(row["heads"]),
            hose=si(row, "hose_gpm", "gpm"),
            duration=si(row, "duration_min", "min"),
            source=row["source"],
            note=row["note"],
        )
        for row in table("esfr")
    )
