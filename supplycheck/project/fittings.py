"""Fittings as written on a pipe, and their equivalent lengths after the corrections for C and bore.

A text lists fittings between semicolons: ``2 elbow 90; 1 tee``. The number may be left out. A fitting of
known length or loss states it: ``strainer = 20 ft``, ``entrance: k = 0.5``. ``none`` means no fittings.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Final

from supplycheck import catalogue
from supplycheck.errors import NotInCatalogueError
from supplycheck.findings import Place
from supplycheck.hydraulics.equivalent_length import REFERENCE_C, bore_factor, c_multiplier
from supplycheck.model import Fitting
from supplycheck.model.system import Origin
from supplycheck.project.faults import FaultList, listed, quoted
from supplycheck.project.quantity import NumberError, read_number
from supplycheck.units import UnitSet

_PART: Final = re.compile(r"(?:(\d+)\s*(?:[x×]\s*)?(?=\D))?\s*(.+?)\s*(?:[:=]\s*(.+))?", re.IGNORECASE)
MOST_DIGITS: Final = 4
_SWING: Final = "swing check valve"
_NONE: Final = ("none", "-", "–", "0")


@dataclass(frozen=True, slots=True)
class WrittenFitting:
    """One entry of the text: so many of a name, with an own length [m] or loss coefficient."""

    count: int
    name: str
    length: float | None = None
    minor_k: float | None = None


@dataclass(frozen=True, slots=True)
class PipeSize:
    """What the length of a fitting depends on: nominal size, bore [m], C (``None``: not used)."""

    nominal: str
    bore: float
    c_factor: float | None


def parse(text: str, units: UnitSet, place: Place, faults: FaultList) -> list[WrittenFitting]:
    """Return the fittings written in ``text``; what cannot be read is noted at ``place``."""
    found: list[WrittenFitting] = []
    for part in re.split(r"[;\n]", text):
        entry = part.strip()
        if not entry or entry.casefold() in _NONE:
            continue
        match = _PART.fullmatch(entry)
        name = match[2].strip() if match else ""
        if match is None or not name[:1].isalnum() or not re.search(r"[^\W\d_]", name) or match[1] == "0":
            faults.add(
                place,
                "is not a list of fittings",
                found=quoted(entry),
                allowed="a number and a name, with ; between them: 2 elbow 90; 1 tee",
            )
            continue
        if match[1] and not len(match[1]) <= MOST_DIGITS:
            faults.add(
                place,
                "the number of fittings is out of range",
                found=quoted(entry),
                allowed=f"1 to {10**MOST_DIGITS - 1}",
            )
            continue
        length, minor_k = _own_value(match[3], entry, units, place, faults) if match[3] else (None, None)
        found.append(WrittenFitting(int(match[1] or 1), name, length, minor_k))
    return found


def _own_value(
    text: str, entry: str, units: UnitSet, place: Place, faults: FaultList
) -> tuple[float | None, float | None]:
    """Return the length [m] or the loss coefficient that an entry states for one fitting."""
    loss = re.fullmatch(r"k\s*=?\s*(.+)", text.strip(), re.IGNORECASE)
    try:
        if loss:
            return None, read_number(loss[1], "ratio", "zero or more").si(units)
        return read_number(text, "length", "zero or more").si(units), None
    except NumberError as fault:
        faults.add(
            place, f"the value of a fitting: {fault.problem}", found=quoted(entry), allowed=fault.allowed
        )
        return 0.0, None


class Lengths:
    """Equivalent lengths under one standard; each (fitting, size) is looked up once.

    ``read_as_swing`` collects valves written without their type where the standard prints two.
    """

    def __init__(self, standard: str, extra: catalogue.ExtraRows, faults: FaultList) -> None:
        self.standard, self.extra, self.faults = standard, extra, faults
        self.read_as_swing: dict[str, None] = {}
        self._rows: dict[tuple[str, str], catalogue.FittingRow | NotInCatalogueError] = {}
        self._factors: dict[tuple[float | None, float, float | None, float], tuple[float, float]] = {}

    def _factor(
        self, size: PipeSize, reference_c: float, reference_bore: float | None
    ) -> tuple[float, float]:
        """Return the corrections for C and for the bore."""
        key = (size.c_factor, size.bore, reference_bore, reference_c)
        if key not in self._factors:
            of_c = of_bore = 1.0
            if size.c_factor is not None:
                of_c = c_multiplier(c_factor=size.c_factor, reference_c=reference_c)
            if reference_bore is not None:
                of_bore = bore_factor(bore=size.bore, reference_bore=reference_bore)
            self._factors[key] = (of_c, of_bore)
        return self._factors[key]

    def c_only(self, size: PipeSize) -> float:
        """Return the correction for C alone, for a length that holds for this size."""
        return self._factor(size, REFERENCE_C, None)[0]

    def _row(self, name: str, nominal: str) -> catalogue.FittingRow | NotInCatalogueError:
        """Return the catalogue row, or the error that there is none."""
        key = (name, nominal)
        if key not in self._rows:
            try:
                self._rows[key] = catalogue.equivalent_length(name, nominal, self.standard, self.extra)
            except NotInCatalogueError as caught:
                self._rows[key] = caught
        return self._rows[key]

    def _note(self, caught: NotInCatalogueError, name: str, nominal: str, place: Place) -> None:
        own = f"or state its length: {name} = 5 ft"
        try:
            known = catalogue.fitting_name(name, self.standard)
        except NotInCatalogueError:
            close = f"did you mean {caught.near[0]}? {own}" if caught.near else own
            names = listed(catalogue.fitting_names(self.standard), 20)
            problem = f"is not a fitting of {self.standard}"
            self.faults.add(place, problem, found=quoted(name), allowed=names, remedy=close)
            return
        self.faults.add(
            place,
            f"{self.standard} prints no length of a {known} in this size",
            found=f"size {nominal}",
            allowed=f"sizes {listed(caught.near, 20)}",
            remedy=own,
        )

    def charge(
        self, written: WrittenFitting, size: PipeSize, origin: Origin, place: Place, node: str | None = None
    ) -> Fitting | None:
        """Return the fitting with its corrected length; ``None`` with a fault noted."""
        count = written.count
        if written.minor_k is not None:
            return Fitting(
                written.name,
                count,
                0.0,
                0.0,
                written.minor_k * count,
                origin,
                "loss coefficient as written",
            )
        if written.length is not None:
            length = written.length
            return Fitting(written.name, count, length, length * count, 0.0, origin, "length as written")
        if not size.nominal:
            self.faults.add(
                place,
                "a pipe with fittings has no nominal size",
                found=written.name,
                allowed="the nominal size, from which the equivalent length is looked up",
            )
            return None
        row = self._row(written.name, size.nominal)
        if isinstance(row, NotInCatalogueError):
            self._note(row, written.name, size.nominal, place)
            return None
        if row.name == _SWING and self.standard.startswith("EN") and "swing" not in written.name.casefold():
            self.read_as_swing[written.name] = None
        of_c, of_bore = self._factor(size, row.reference_c, row.reference_bore)
        length = row.length * count * (of_c * of_bore)
        return Fitting(row.name, count, row.length, length, 0.0, origin, row.source, node, of_c, of_bore)
