"""Reading the tables: CSV in the source's own units, one ``source`` cell in every row."""

from __future__ import annotations

import functools
import re
from collections.abc import Mapping
from types import MappingProxyType

from supplycheck.catalogue.names import fold
from supplycheck.errors import DomainError
from supplycheck.units import Unit, find_unit

Row = Mapping[str, str]
DATA_PACKAGE = "supplycheck.catalogue"


@functools.cache
def text_of(name: str) -> str:
    """Return the text of the data file ``name``."""
    import importlib.resources

    return importlib.resources.files(DATA_PACKAGE).joinpath("data", name).read_text(encoding="utf-8")


@functools.cache
def table(name: str) -> tuple[Row, ...]:
    """Return the rows of ``data/<name>.csv`` as printed text by column."""
    import csv
    import io

    reader = csv.DictReader(io.StringIO(text_of(f"{name}.csv")), strict=True)
    return tuple(MappingProxyType(dict(row)) for row in reader)


@functools.cache
def _unit(symbol: str) -> Unit:
    unit = find_unit(symbol)
    if unit is None:
        raise DomainError(f"the catalogue names a unit {symbol!r} that does not exist")
    return unit


def si(row: Row, column: str, symbol: str) -> float:
    """Return the cell ``column`` [SI] of a number printed in the unit ``symbol``."""
    return _unit(symbol).to_si(float(row[column]))


def si_or_none(row: Row, column: str, symbol: str) -> float | None:
    """Return the cell as :func:`si` does, ``None`` where it is empty."""
    return si(row, column, symbol) if row[column] else None


def listed(cell: str) -> tuple[float, ...]:
    """Return the numbers of a cell that holds several, divided by ``|``."""
    return tuple(float(part) for part in cell.split("|") if part)


def split_standard(standard: str, edition: str | int | None = None) -> tuple[str, int | None]:
    """Return the standard without its edition, and the year of the edition where one is given.

    >>> split_standard("NFPA 13 (2022)")
    ('NFPA 13', 2022)
    >>> split_standard("EN 12845", "2015")
    ('EN 12845', 2015)
    """
    found = re.fullmatch(r"\s*(.*?)\s*(?:[(:–-]\s*((?:19|20)\d\d)\s*\)?)?\s*", standard)
    name, year = (found[1], found[2]) if found else (standard.strip(), None)
    if edition not in (None, ""):
        year = str(edition).strip()
        if not re.fullmatch(r"(?:19|20)\d\d", year):
            raise DomainError(f"edition {year[:40]!r} of {name}: write the year, such as 2022")
    name = re.sub(r"^(?:BS|DIN|NF)\s+EN\s+", "EN ", name)
    return name, int(year) if year else None


def in_edition(row: Row, year: int | None) -> bool:
    """Return whether ``row`` holds in the edition ``year`` (any row where no year is given)."""
    if year is None:
        return True
    low, high = row["edition_from"], row["edition_to"]
    return (not low or int(low) <= year) and (not high or year <= int(high))


@functools.cache
def aliases(kind: str, standard: str) -> Mapping[str, str]:
    """Return folded alias → name for ``kind``, valid under ``standard``."""
    rows = (row for row in table("aliases") if row["kind"] == kind and row["standard"] in {"any", standard})
    return MappingProxyType({fold(row["alias"]): row["name"] for row in rows})
