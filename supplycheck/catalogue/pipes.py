"""Pipe: bores, materials and their names, C-factors, roughness."""

from __future__ import annotations

import functools
from collections.abc import Mapping
from types import MappingProxyType

from supplycheck.catalogue.names import fold, normalise_nominal, not_found
from supplycheck.catalogue.records import BoreRow, ExtraRows, MaterialRow, ValueRow
from supplycheck.catalogue.tables import Row, aliases, si, si_or_none, split_standard, table
from supplycheck.errors import NotInCatalogueError

_NO_EXTRA = ExtraRows()


@functools.cache
def _material_rows() -> Mapping[str, Row]:
    return MappingProxyType({fold(row["material"]): row for row in table("materials")})


@functools.cache
def _sizes() -> tuple[Mapping[str, str], Mapping[str, str]]:
    """Inch → DN and DN → inch."""
    pairs = [(row["nominal_in"], "DN " + row["nominal_dn"]) for row in table("nominal_sizes")]
    return MappingProxyType(dict(pairs)), MappingProxyType({metric: inch for inch, metric in pairs})


def in_inches(nominal: str | float) -> str:
    """Return the inch size of a nominal size written either way; the canonical text where there is none.

    >>> in_inches("DN 65")
    '2 1/2'
    """
    size = normalise_nominal(nominal)
    return _sizes()[1].get(size, size)


def in_dn(nominal: str | float) -> str:
    """Return the DN size of a nominal size written either way; a bare number that is a DN is one.

    >>> in_dn("2 1/2"), in_dn("65")
    ('DN 65', 'DN 65')
    """
    size = normalise_nominal(nominal)
    if f"DN {size}" in _sizes()[1]:
        return f"DN {size}"
    return _sizes()[0].get(size, size)


def _size_key(nominal: str | float, unit: str) -> str:
    """Return one text for a size however it is written; a bare number is in the material's own unit."""
    size = normalise_nominal(nominal)
    return in_dn(size) if unit == "mm" else _sizes()[0].get(size, size)


@functools.cache
def materials() -> tuple[MaterialRow, ...]:
    """Return every material and family of the catalogue with its other names, in the order of the table."""
    by_name: dict[str, list[str]] = {}
    for row in table("aliases"):
        if row["kind"] == "material":
            by_name.setdefault(row["name"], []).append(row["alias"])
    return tuple(
        MaterialRow(
            row["material"],
            tuple(by_name.get(row["material"], ())),
            row["family"],
            row["size_unit"],
            row["source"],
            row["note"],
        )
        for row in table("materials")
    )


def _material_row(material: str) -> Row | None:
    key = fold(material)
    name = aliases("material", "any").get(key)
    return _material_rows().get(fold(name) if name else key)


def _size_unit(material: str) -> str:
    row = _material_row(material)
    return row["size_unit"] if row else ""


def _no_bores(material: str, family: str) -> NotInCatalogueError:
    kinds = tuple(row.name for row in materials() if row.family == family and row.size_unit)
    choice = f"choose one of {', '.join(kinds)}, or give" if kinds else "give"
    return NotInCatalogueError(
        f"{material} names a family of pipe, without bores; {choice} its bores", kinds
    )


def _unknown_material(material: str, *, with_bores: bool, extra: ExtraRows) -> NotInCatalogueError:
    rows = [row for row in materials() if row.size_unit or not with_bores]
    known = [row.name for row in rows] + [row.material for row in extra.bores]
    known += [alias for row in rows for alias in row.aliases]
    return not_found("material", material, known, "or give bore and C-factor in the project")


@functools.cache
def _catalogue_bores(material: str) -> tuple[BoreRow, ...]:
    row = _material_rows()[fold(material)]
    unit = row["size_unit"]
    rows = [
        BoreRow(
            material,
            cells["nominal"],
            si(cells, f"bore_{unit}", unit),
            si_or_none(cells, f"outside_{unit}", unit),
            si_or_none(cells, f"wall_{unit}", unit),
            cells["source"],
            cells["note"],
            (si_or_none(cells, "lining_in", unit) or 0.0) if unit == "in" else 0.0,
        )
        for cells in (table(f"bores_{unit}") if unit else ())
        if cells["material"] == row["bores_of"]
    ]
    return tuple(sorted(rows, key=lambda bore: bore.bore))


@functools.lru_cache(maxsize=256)
def bores(material: str, extra: ExtraRows = _NO_EXTRA) -> tuple[BoreRow, ...]:
    """Return the sizes of ``material`` in ascending order of bore.

    Rows of ``extra`` with the same material replace the catalogue's row of the same nominal size.

    Raises
    ------
    NotInCatalogueError
        The material is unknown, or is a family that has no bores.
    """
    row = _material_row(material)
    key = fold(row["material"]) if row else fold(material)
    own = [bore for bore in extra.bores if fold(bore.material) in {key, fold(material)}]
    listed = _catalogue_bores(row["material"]) if row else ()
    if row and not own and not listed:
        raise _no_bores(material, row["family"])
    if not own and not listed:
        raise _unknown_material(material, with_bores=True, extra=extra)
    unit = row["size_unit"] if row else ""
    replaced = {_size_key(bore.nominal, unit) for bore in own}
    kept = [bore for bore in listed if _size_key(bore.nominal, unit) not in replaced]
    return tuple(sorted([*own, *kept], key=lambda bore: bore.bore))


@functools.lru_cache(maxsize=256)
def _bore_index(material: str, extra: ExtraRows) -> Mapping[str, BoreRow]:
    unit = _size_unit(material)
    return MappingProxyType({_size_key(row.nominal, unit): row for row in bores(material, extra)})


def find_bore(material: str, nominal: str | float, extra: ExtraRows = _NO_EXTRA) -> BoreRow:
    """Return the row of one size.

    Sizes may be written either way (``"1 1/4"``, ``1.25``, ``"DN 32"``); a bare number is in the
    unit in which the material is sold, inches for ``steel schedule 40``, DN for ``steel EN 10255``.

    Raises
    ------
    NotInCatalogueError
        The material, or the size in it, is unknown; ``near`` holds the sizes that exist.

    >>> round(find_bore("steel schedule 40", "1¼").bore / 0.0254, 3)
    1.38
    """
    row = _bore_index(material, extra).get(_size_key(nominal, _size_unit(material)))
    if row is None:
        sizes = tuple(bore.nominal for bore in bores(material, extra))
        raise NotInCatalogueError(
            f"{material}: no size {str(nominal)[:40]!r} in the catalogue; it has {', '.join(sizes)}; "
            "or give the bore in the project",
            sizes,
        )
    return row


def next_larger(material: str, bore: float, extra: ExtraRows = _NO_EXTRA) -> BoreRow:
    """Return the smallest size whose bore is at least ``bore`` [m].

    Raises
    ------
    NotInCatalogueError
        No size of ``material`` is as large, or the material is unknown.
    """
    rows = bores(material, extra)
    for row in rows:
        if row.bore >= bore:
            return row
    raise NotInCatalogueError(
        f"{material}: the largest size is {rows[-1].nominal} with a bore of {rows[-1].bore * 1000:.1f} mm; "
        f"{bore * 1000:.1f} mm is asked",
        (rows[-1].nominal,),
    )


def c_factor(material: str, system: str, standard: str, extra: ExtraRows = _NO_EXTRA) -> ValueRow:
    """Return the Hazen-Williams C-factor [-] of ``material`` in a ``system`` under ``standard``.

    ``system`` is ``"wet"``, ``"dry"``, ``"preaction"``, ``"double interlock preaction"``, ``"deluge"``
    or ``"dry, nitrogen"``; the standard may carry its edition.

    Raises
    ------
    NotInCatalogueError
        The material is unknown, or the standard lists no C-factor for it in such a system.
    """
    name, _ = split_standard(standard)
    row = _material_row(material)
    keys = {fold(material)} | ({fold(row["material"])} if row else set())
    asked = (fold(system), "any")
    for own in extra.c_factors:
        if (
            fold(own.material) in keys
            and fold(own.system) in asked
            and own.standard in {"any", name, standard}
        ):
            return ValueRow(own.value, own.source, own.note)
    if row is None:
        raise _unknown_material(material, with_bores=False, extra=extra)
    found = {
        fold(cells["system"]): cells
        for cells in table("c_factors")
        if cells["standard"] == name and cells["family"] == row["family"]
    }
    for key in asked:
        if key in found:
            return ValueRow(float(found[key]["c_factor"]), found[key]["source"], found[key]["note"])
    have = sorted({cells["standard"] for cells in table("c_factors")})
    if name not in have:
        raise not_found("C-factors of the standard", name, have)
    raise NotInCatalogueError(
        f"{name} lists no C-factor for {row['family']} in a {system[:40]} system; "
        "give c_factor in the project",
        tuple(cells["system"] for cells in found.values()),
    )


def roughness(material: str) -> ValueRow:
    """Return the absolute roughness [m] of ``material``.

    Raises
    ------
    NotInCatalogueError
        The material is unknown, or the sources at hand give no roughness for it.
    """
    row = _material_row(material)
    families = {fold(cells["family"]): cells for cells in table("roughness")}
    cells = families.get(fold(row["roughness_family"]) if row else fold(material))
    if cells is None and row is None:
        raise _unknown_material(material, with_bores=False, extra=_NO_EXTRA)
    if cells is None:
        raise NotInCatalogueError(
            f"no published roughness at hand for {material}; give roughness in the project"
        )
    note = row["note"] if row else ""
    return ValueRow(si(cells, "roughness_ft", "ft"), cells["source"], note if "roughness" in note else "")
