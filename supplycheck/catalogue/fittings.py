"""Equivalent lengths of fittings and valves."""

from __future__ import annotations

import functools
from collections.abc import Mapping
from types import MappingProxyType

from supplycheck.catalogue.names import fold, not_found
from supplycheck.catalogue.pipes import find_bore, in_dn, in_inches
from supplycheck.catalogue.records import ExtraRows, FittingRow, ValueRow
from supplycheck.catalogue.tables import aliases, si, split_standard, table
from supplycheck.errors import NotInCatalogueError

_NO_EXTRA = ExtraRows()
_STANDARDS = MappingProxyType({"NFPA 13": "nfpa", "NFPA 14": "nfpa", "EN 12845": "en", "CEA 4001": "en"})
_EN_NAMES = "EN 12845"
_EN_STANDARDS = frozenset(name for name, family in _STANDARDS.items() if family == "en")


def _family(standard: str) -> str:
    name, _ = split_standard(standard)
    if name not in _STANDARDS:
        raise not_found("table of fittings for the standard", name, _STANDARDS)
    return _STANDARDS[name]


@functools.cache
def _rows(family: str) -> Mapping[tuple[str, str], FittingRow]:
    rows = {}
    for cells in table(f"fittings_{family}"):
        nominal = cells["nominal"]
        if family == "nfpa":
            length, bore = si(cells, "length_ft", "ft"), find_bore("steel schedule 40", nominal).bore
        else:
            length, bore = si(cells, "length_m", "m"), None
        rows[cells["fitting"], nominal] = FittingRow(
            cells["fitting"], nominal, length, bore, cells["source"], note=cells["note"]
        )
    return MappingProxyType(rows)


def fitting_names(standard: str) -> tuple[str, ...]:
    """Return the names of the fittings that ``standard`` tabulates.

    Raises
    ------
    NotInCatalogueError
        There is no table for the standard.
    """
    return tuple(dict.fromkeys(name for name, _ in _rows(_family(standard))))


def fitting_aliases(standard: str) -> Mapping[str, str]:
    """Return other name → name for the fittings of ``standard``."""
    known, names = set(fitting_names(standard)), {"any", _EN_NAMES if _family(standard) == "en" else ""}
    rows = (row for row in table("aliases") if row["kind"] == "fitting" and row["standard"] in names)
    return MappingProxyType({row["alias"]: row["name"] for row in rows if row["name"] in known})


@functools.lru_cache(maxsize=512)
def fitting_name(text: str, standard: str) -> str:
    """Return the catalogue's name of a fitting as people write it.

    Raises
    ------
    NotInCatalogueError
        ``standard`` tabulates no such fitting; ``near`` holds the close names.

    >>> fitting_name("90° elbow", "NFPA 13 (2022)"), fitting_name("cross", "NFPA 13 (2022)")
    ('elbow 90', 'tee')
    """
    family = _family(standard)
    key = fold(text)
    names = {fold(name): name for name in fitting_names(standard)}
    name = names.get(key) or aliases("fitting", _EN_NAMES if family == "en" else "NFPA 13").get(key)
    if name is None or fold(name) not in names:
        remedy = "give its listed equivalent length, or its loss as a device, in the project"
        raise not_found(
            f"fitting in {standard}", text, [*names.values(), *fitting_aliases(standard)], remedy
        )
    return name


def equivalent_length(
    fitting: str, nominal: str | float, standard: str, extra: ExtraRows = _NO_EXTRA
) -> FittingRow:
    """Return the equivalent length [m] of one fitting as the standard prints it.

    NFPA lengths hold at C 120 in steel schedule 40 of the same nominal size, whose bore is
    ``reference_bore``; EN 12845 corrects for C alone. A bare number is inches under NFPA and DN under
    EN 12845, so pass the ``nominal`` of the pipe's own :class:`BoreRow`.

    Raises
    ------
    NotInCatalogueError
        The fitting, or its length in that size, is not tabulated.
    """
    key = fold(fitting)
    size_of = in_dn if split_standard(standard)[0] in _EN_STANDARDS else in_inches
    for own in extra.fittings:
        if fold(own.name) == key and size_of(own.nominal) == size_of(nominal):
            return own
    try:
        name = fitting_name(fitting, standard)
    except NotInCatalogueError:
        sizes = tuple(own.nominal for own in extra.fittings if fold(own.name) == key)
        if sizes:
            raise NotInCatalogueError(
                f"{fitting}: the project gives it in {', '.join(sizes)}, not in {str(nominal)[:40]}",
                sizes,
            ) from None
        raise
    row = _rows(_family(standard)).get((name, size_of(nominal)))
    if row is None:
        sizes = tuple(nominal for known, nominal in _rows(_family(standard)) if known == name)
        raise NotInCatalogueError(
            f"{name}: {standard} prints no length in size {str(nominal)[:40]!r}; "
            f"it has {', '.join(sizes)}; give its equivalent length in the project",
            sizes,
        )
    return row


@functools.cache
def c_multipliers(standard: str) -> tuple[tuple[float, ValueRow], ...]:
    """Return (C, printed multiplier [-]) on equivalent lengths, for comparison with (C/120)^1.85."""
    name = {"nfpa": "NFPA 13", "en": "EN 12845"}[_family(standard)]
    rows = (row for row in table("c_multipliers") if row["standard"] == name)
    return tuple(
        (float(row["c_factor"]), ValueRow(float(row["multiplier"]), row["source"])) for row in rows
    )
