"""Numbers that no system has: what a slip of the decimal point, of a unit or of a datum leaves behind.

The limits lie far outside what is built, so that no real project meets them; figures inside them that are
merely unusual are left to the checks. All limits are common practice, no source, unless one is named.
"""

from __future__ import annotations

import datetime as dt
import math
from dataclasses import dataclass
from fractions import Fraction
from typing import Final

from supplycheck.findings import Place
from supplycheck.project.faults import FaultList
from supplycheck.project.quantity import Written
from supplycheck.units import INCH, METRIC, US, UnitSet, units_of


@dataclass(frozen=True, slots=True)
class Limit:
    """A round number in each unit set, US and metric, and what it bounds."""

    kind: str
    us: float
    metric: float
    decimals: int = 0

    def si(self, units: UnitSet) -> float:
        """Return the limit [SI] in force for numbers written in ``units``."""
        return units.to_si(self.us if units is US else self.metric, self.kind)

    def text(self, units: UnitSet) -> str:
        """Return the limit as text in ``units``."""
        return units.text(self.si(units), self.kind, self.decimals)

    @property
    def both(self) -> str:
        """Return the limit in both unit sets, for the documentation."""
        return f"{self.text(US)} ({self.text(METRIC)})"


HIGHEST_STATIC: Final = Limit("pressure", 400, 28)
FARTHEST_GAUGE: Final = Limit("length", 500, 150)
FARTHEST_WATER: Final = Limit("length", 1000, 300)
FARTHEST_HEAD: Final = Limit("length", 2000, 600)
CLOSEST: Final = Limit("length", 2, 0.6, 1)
LEAST_DENSITY: Final = Limit("density", 0.03, 1, 2)
GREATEST_DENSITY: Final = Limit("density", 3, 120)
SMALLEST_K: Final = Limit("k_factor", 1, 14)
LARGEST_K: Final = Limit("k_factor", 50, 720)
"""The largest listed sprinklers stand near 34 gpm/psi½ (from memory); the metric number of the smallest,
57 L/min/bar½, must not pass as a US one."""
LARGEST_OUTLET: Final = Limit("size", 6, 160)
"""Pumper outlets are 4 to 6 in (from memory)."""
ROUGHEST: Final = Limit("roughness", 0.01, 3, 2)
"""Riveted steel and rough concrete end there in tables of roughness (from memory)."""
LEAST_BORE: Final = 0.5
GREATEST_BORE: Final = 1.6
"""Bore as a part of the nominal size; tables run from about 0.7 (thick plastic) to 1.3 (3/8 in steel)."""
ROUGHEST_OF_BORE: Final = 1 / 20
"""Greatest relative roughness of the chart of friction factors (Moody 1944, from memory)."""
UNLIKE: Final = 5.0
"""A roughness as many times that of its material is asked about where another unit makes it fit."""
LARGEST_DIP: Final = 0.25
"""Share of its highest loss by which the loss of a device may fall: a spring-loaded check that opens."""
FIRST_TEST: Final = dt.date(1950, 1, 1)

LIMITS: Final = (
    ("static pressure of a test", f"at most {HIGHEST_STATIC.both}"),
    ("pitot reading", "at most the static pressure of its test"),
    ("outlet of a hydrant", f"at most {LARGEST_OUTLET.both}"),
    ("gauge, from its node", f"at most {FARTHEST_GAUGE.both} above or below"),
    ("date of a test", "from 1950 to the date of the project or the day of submittal"),
    ("water level, from its node", f"at most {FARTHEST_WATER.both} above or below"),
    ("K-factor of a sprinkler", f"{SMALLEST_K.both} to {LARGEST_K.both}"),
    ("roughness of a pipe", f"below {ROUGHEST.both}; at most a twentieth of the bore"),
    ("density", f"{LEAST_DENSITY.both} to {GREATEST_DENSITY.both}"),
    ("distance of heads, and of lines", f"at least {CLOSEST.both}"),
    ("elevations of a layout", f"at most {FARTHEST_HEAD.both} apart"),
    ("curve of a device", "not zero throughout; no fall by more than 25 % of its highest loss before"),
)
"""What is bounded, and the bound in words; for the page of the project file."""

_NEAR: Final = 1 + 1e-9
_ABOUT: Final = 0.15
"""Share by which a roughness differs between tables: 0.045 and 0.05 mm are printed for the same steel."""
_ROUGHNESS_REMEDY: Final = 'check the decimal point and state the unit, as in "0.0018 in" or "0.045 mm"'


def check_k_factor(value: float, units: UnitSet, place: Place, faults: FaultList) -> None:
    """Note a K-factor [m³/s/√Pa] that no sprinkler has, and the unit in which it would be one."""
    low, high = SMALLEST_K.si(units), LARGEST_K.si(units)
    if math.isnan(value) or low / _NEAR <= value <= high * _NEAR:
        return
    number = units.from_si(value, "k_factor")
    other = METRIC if units is US else US
    meant = other.to_si(number, "k_factor")
    remedy = "check the decimal point and the unit"
    if SMALLEST_K.si(other) <= meant <= LARGEST_K.si(other):
        told = units.text(meant, "k_factor", 1)
        remedy = f'looks like {other.symbol("k_factor")}: then write {told}, or "{number:g} '
        remedy += f'{other.symbol("k_factor")}"'
    faults.add(
        place,
        "is not the K-factor of a sprinkler",
        found=f"{number:g} {units.symbol('k_factor')}",
        allowed=f"{SMALLEST_K.text(units)} to {LARGEST_K.text(units)}",
        remedy=remedy,
    )


def check_roughness(
    written: Written, units: UnitSet, typical: float | None, place: Place, faults: FaultList
) -> None:
    """Note a roughness that no pipe has, or a bare number that fits its material in another unit only.

    ``typical`` [m] is the roughness of the material by the catalogue, ``None`` where it has none.
    """
    value = written.si(units)
    too_rough = value >= ROUGHEST.si(units) / _NEAR
    fits = [
        unit.symbol
        for unit in (units_of("size") + units_of("length") if written.unit is None else ())
        if typical and value > 0 and abs(unit.to_si(written.number) / typical - 1) < _ABOUT
    ]
    unlike = bool(typical) and value > 0 and not 1 / UNLIKE < value / (typical or 1.0) < UNLIKE
    if not (too_rough or (fits and unlike)):
        return
    symbol = units.symbol("roughness")
    remedy = f'state the unit: roughness = "{written.number:g} {fits[0]}"' if fits else _ROUGHNESS_REMEDY
    allowed = f"less than {ROUGHEST.si(units) / units.unit('roughness').factor:g} {symbol}"
    if typical:
        known = units.from_si(typical, "roughness")
        allowed += f"; the catalogue has {known:.2g} {symbol} for this material"
    faults.add(
        place,
        "is too rough for a pipe" if too_rough else "does not fit the material in this unit",
        found=written.text(units) + (f", a bare number being in {symbol}" if written.unit is None else ""),
        allowed=allowed,
        remedy=remedy,
    )


def check_relative_roughness(
    written: Written, bore: float, units: UnitSet, place: Place, faults: FaultList
) -> None:
    """Note a roughness of more than a twentieth of the smallest ``bore`` [m] that has it."""
    if written.si(units) > ROUGHEST_OF_BORE * bore * _NEAR:
        faults.add(
            place,
            "is too rough for the bore",
            found=written.text(units),
            allowed=f"at most {units.text(ROUGHEST_OF_BORE * bore, 'size')}, a twentieth of the bore of "
            f"{units.text(bore, 'size')}",
            remedy=_ROUGHNESS_REMEDY,
        )


def check_bore(bore: float, nominal: str, units: UnitSet, place: Place, faults: FaultList) -> None:
    """Note a ``bore`` [m] that no pipe of the size ``nominal`` [in] can have; other sizes are let pass."""
    try:
        size = float(sum(Fraction(part) for part in nominal.split())) * INCH
    except (ValueError, ZeroDivisionError):
        return
    if size <= 0 or math.isnan(bore):
        return
    low, high = LEAST_BORE * size, GREATEST_BORE * size
    if not low <= bore <= high:
        faults.add(
            place,
            f"is no bore of a pipe of size {nominal} in",
            found=units.text(bore, "size"),
            allowed=f"{units.text(low, 'size')} to {units.text(high, 'size')}",
            remedy='check the decimal point and the unit, such as "4.026 in" or "102.3 mm"',
        )


def check_density(value: float | None, units: UnitSet, place: Place, faults: FaultList) -> None:
    """Note a density [m/s] that no hazard asks for."""
    if value is None or math.isnan(value):
        return
    if not LEAST_DENSITY.si(units) / _NEAR <= value <= GREATEST_DENSITY.si(units) * _NEAR:
        faults.add(
            place,
            "is not a design density",
            found=f"{units.from_si(value, 'density'):g} {units.symbol('density')}",
            allowed=f"{LEAST_DENSITY.text(units)} to {GREATEST_DENSITY.text(units)}",
            remedy="check the decimal point and the units",
        )


def check_spacing(value: float, units: UnitSet, place: Place, faults: FaultList) -> None:
    """Note heads or lines [m] that stand closer than any are built."""
    if value < CLOSEST.si(units) / _NEAR:
        faults.add(
            place,
            "is too small",
            found=units.text(value, "length"),
            allowed=f"at least {CLOSEST.text(units)}",
            remedy="check the decimal point and the units",
        )


def check_height(
    height: float, limit: Limit, what: str, units: UnitSet, place: Place, faults: FaultList
) -> None:
    """Note a ``height`` [m] above or below a node that is beyond ``limit``; NaN says nothing."""
    if abs(height) > limit.si(units) * _NEAR:
        faults.add(
            place,
            f"stands {units.text(abs(height), 'length', 0)} {'above' if height > 0 else 'below'} {what}",
            allowed=f"at most {limit.text(units)}",
            remedy="check the elevations: all count from the same datum",
        )


def check_static(value: float, units: UnitSet, place: Place, faults: FaultList) -> None:
    """Note a static pressure [Pa] that no public main has."""
    if value > HIGHEST_STATIC.si(units) * _NEAR:
        faults.add(
            place,
            "is too high for a water main",
            found=units.text(value, "pressure"),
            allowed=f"at most {HIGHEST_STATIC.text(units)}",
            remedy="check the decimal point and the units",
        )


def check_test_date(day: dt.date, latest: dt.date | None, place: Place, faults: FaultList) -> None:
    """Note a test that was made before there were such tests, or after the calculation."""
    if day < FIRST_TEST:
        faults.add(
            place,
            "lies too far back",
            found=day.isoformat(),
            allowed=f"{FIRST_TEST.isoformat()} or later",
            remedy="check the year",
        )
    elif latest is not None and day > latest:
        faults.add(
            place,
            "lies after the calculation",
            found=day.isoformat(),
            allowed=f"at most {latest.isoformat()}, the date of the project or the day of submittal",
            remedy="check the year, and the date of the project",
        )
