"""Single published numbers (limits, allowances) by standard and edition, and shapes of margin rules."""

from __future__ import annotations

import functools
from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from supplycheck.catalogue.names import fold, not_found
from supplycheck.catalogue.records import ValueRow
from supplycheck.catalogue.tables import Row, in_edition, split_standard, table, text_of
from supplycheck.errors import DomainError
from supplycheck.units import FOOT, PSI, find_unit

if TYPE_CHECKING:
    from supplycheck.model import MarginRule


@dataclass(frozen=True, slots=True)
class MarginShape:
    """The shape of a margin rule as an authority wrote it: an example, not current law."""

    place: str
    applies_to: str
    published: str
    text: str
    rule: MarginRule
    source: str
    note: str


def rule_names(standard: str) -> tuple[str, ...]:
    """Return the names of the rules that the catalogue holds for ``standard`` (``"NFPA 13"``, …)."""
    name, _ = split_standard(standard)
    return tuple(dict.fromkeys(row["rule"] for row in table("rules") if row["standard"] == name))


def _rule_value(row: Row) -> float:
    value, unit = float(row["value"]), row["unit"]
    if not unit:
        return value
    if unit == "%/ft":
        return value / 100 / FOOT
    found = find_unit(unit)
    if found is None:
        raise DomainError(f"the catalogue names a unit {unit!r} that does not exist")
    return found.to_si(value)


def rule(name: str, standard: str, edition: str | int | None = None) -> ValueRow:
    """Return one published number [SI; a percentage as a fraction].

    Raises
    ------
    NotInCatalogueError
        The catalogue holds no such rule of ``standard``.
    DomainError
        Editions differ and none is given, or the edition is not a year or is not covered.

    >>> rule("test drop", "NFPA 291", 2019).value
    0.1
    """
    code, year = split_standard(standard, edition)
    rows = [row for row in table("rules") if row["standard"] == code and fold(row["rule"]) == fold(name)]
    if not rows:
        known = rule_names(code) or {row["standard"] for row in table("rules")}
        raise not_found(f"rule of {code}", name, known)
    fits = [row for row in rows if in_edition(row, year)]
    if len(fits) != 1:
        why = "give the edition: its editions differ" if fits else f"no figure for the {year} edition"
        raise DomainError(f"{name}, {code}: {why}")
    return ValueRow(_rule_value(fits[0]), fits[0]["source"], fits[0]["note"])


@functools.cache
def margin_shapes() -> tuple[MarginShape, ...]:
    """Return the shapes of margin rules as authorities have written them: examples, not current law."""
    import tomllib

    book = tomllib.loads(text_of("margins.toml"))
    return tuple(
        MarginShape(
            place=entry["place"],
            applies_to=entry["applies_to"],
            published=entry["published"],
            text=entry["text"],
            rule=_margin_rule(entry, entry["source"]),
            source=entry["source"],
            note=book["status"],
        )
        for entry in book["rule"]
    )


def _margin_rule(entry: Mapping[str, Any], source: str) -> MarginRule:
    from supplycheck.model import MarginRule

    bands = tuple(
        (
            float(band["below_psi"]) * PSI if "below_psi" in band else float("inf"),
            _margin_rule(band, source),
        )
        for band in entry.get("bands", ())
    )
    return MarginRule(
        kind=entry["kind"],
        pressure=float(entry.get("pressure_psi", 0)) * PSI,
        percent=float(entry.get("percent", 0)) / 100,
        parts=tuple(_margin_rule(part, source) for part in entry.get("parts", ())),
        bands=bands,
        free_years=float(entry.get("free_years", 0)),
        per_year=float(entry.get("per_year_psi", 0)) * PSI,
        source=source,
    )
