"""The margin rule of the authority: from the user's table to a small tree of formulas."""

from __future__ import annotations

import math

from supplycheck.model import MarginRule
from supplycheck.project.faults import FaultList, quoted
from supplycheck.project.layout_parts import units_in
from supplycheck.project.schema_supply import MarginTable
from supplycheck.project.sections import Sections
from supplycheck.units import UnitSet

SMALLEST_PERCENT = 0.01
"""A smaller share is taken for a fraction typed where per cent is meant (no authority asks for so little:
common practice, no source)."""

_NEEDS = {
    "none": (),
    "fixed": ("pressure",),
    "percent": ("percent", "reading"),
    "of demand": ("percent",),
    "larger of": ("parts",),
    "by static": ("bands",),
    "by test age": ("pressure", "free_years", "per_year"),
}
_MAY = {"of demand": ("minimum",)}
_MEANING = {
    "pressure": "a pressure",
    "percent": "a number of per cent",
    "reading": '"static lowered", "pressure scaled" or "flow scaled": the three give different margins',
    "parts": "a list of rules",
    "bands": "a list of rules, each but the last with below",
    "free_years": "a number of years",
    "per_year": "a pressure",
}


def _check_keys(
    table: MarginTable, where: str, sections: Sections, faults: FaultList, *, band: bool
) -> None:
    needed = _NEEDS[table.rule]
    allowed = {"rule", "units", "source", *needed, *_MAY.get(table.rule, ())} | (
        {"below"} if band else set()
    )
    for key in needed:
        if key not in table.model_fields_set or getattr(table, key) in (None, []):
            faults.add(
                sections.place(f"{where}.{key}"),
                f"is missing: the rule {quoted(table.rule)} needs it",
                allowed=_MEANING[key],
            )
    for key in sorted(table.model_fields_set - allowed):
        faults.add(
            sections.place(f"{where}.{key}"),
            f"the rule {quoted(table.rule)} does not use it",
            remedy="take the key out, or choose another rule",
        )


def _bands(
    table: MarginTable, where: str, sections: Sections, units: UnitSet, faults: FaultList
) -> tuple[tuple[float, MarginRule], ...]:
    found, before = [], 0.0
    for number, band in enumerate(table.bands, start=1):
        place = f"{where}.bands[{number}]"
        last = number == len(table.bands)
        limit = band.below.si(units_in(band, units)) if band.below else math.inf
        if last and band.below is not None:
            faults.add(
                sections.place(f"{place}.below"),
                "the last band has a limit, so that no rule counts above it",
                found=units_in(band, units).text(limit, "pressure"),
                remedy="add a band without below",
            )
        elif not last and band.below is None:
            faults.add(sections.place(f"{place}.below"), "is missing: only the last band has no limit")
        elif limit <= before:
            faults.add(
                sections.place(f"{place}.below"),
                "the limits do not rise from band to band",
                found=units_in(band, units).text(limit, "pressure"),
                allowed=f"more than {units_in(band, units).text(before, 'pressure')}, the limit before it",
            )
        before = limit
        rule = _rule(band, place, sections, units, faults, band=True)
        found.append((limit, rule))
    return tuple(found)


def _rule(
    table: MarginTable,
    where: str,
    sections: Sections,
    units: UnitSet,
    faults: FaultList,
    *,
    band: bool = False,
) -> MarginRule:
    units = units_in(table, units)
    _check_keys(table, where, sections, faults, band=band)
    percent = table.percent.si(units) if table.percent else 0.0
    if 0 < percent < SMALLEST_PERCENT:
        faults.add(
            sections.place(f"{where}.percent"),
            "is less than one per cent, as if it were a fraction",
            found=f"{percent * 100:g}",
            allowed="per cent: 10 for one tenth",
            remedy=f"write {percent * 1e4:g} if {percent * 1e4:g} % is meant",
        )
    if percent >= 1:
        faults.add(
            sections.place(f"{where}.percent"),
            "is 100 or more",
            found=f"{percent * 100:g}",
            allowed="less than 100",
        )
    rule = MarginRule(
        kind=table.rule,
        pressure=table.pressure.si(units) if table.pressure else 0.0,
        percent=percent,
        reading=table.reading,
        parts=tuple(
            _rule(part, f"{where}.parts[{number}]", sections, units, faults)
            for number, part in enumerate(table.parts, start=1)
        ),
        bands=_bands(table, where, sections, units, faults),
        free_years=table.free_years.number if table.free_years else 0.0,
        per_year=table.per_year.si(units) if table.per_year else 0.0,
        source=table.source,
    )
    if table.minimum is None:
        return rule
    least = MarginRule("fixed", pressure=table.minimum.si(units), source=table.source)
    return MarginRule("larger of", parts=(rule, least), source=table.source)


def read_margin(
    table: MarginTable | None, where: str, sections: Sections, units: UnitSet, faults: FaultList
) -> MarginRule | None:
    """Return the margin rule, ``None`` where the project gives none."""
    if table is None or faults.sealed(sections.place(f"{where}.rule")):
        return None
    return _rule(table, where, sections, units, faults)
