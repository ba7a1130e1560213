"""Frozen rows that several tables share, in SI; every row names its source."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class ValueRow:
    """One published number; ``value`` in SI, in the unit that the function which returns it names."""

    value: float
    source: str
    note: str = ""


@dataclass(frozen=True, slots=True)
class BoreRow:
    """A pipe size; bore, outside diameter, wall and lining [m] (``None`` where not published)."""

    material: str
    nominal: str
    bore: float
    outside: float | None = None
    wall: float | None = None
    source: str = ""
    note: str = ""
    lining: float = 0.0


@dataclass(frozen=True, slots=True)
class MaterialRow:
    """A material, its other names, the family that gives its C-factor.

    ``size_unit`` is ``"in"`` or ``"mm"``, empty for a family that has no bores.
    """

    name: str
    aliases: tuple[str, ...]
    family: str
    size_unit: str
    source: str
    note: str = ""


@dataclass(frozen=True, slots=True)
class CFactorRow:
    """A project's own C-factor [-]; ``system`` and ``standard`` may be ``"any"``."""

    material: str
    value: float
    source: str
    system: str = "any"
    standard: str = "any"
    note: str = ""


@dataclass(frozen=True, slots=True)
class FittingRow:
    """Equivalent length [m] of a fitting as printed.

    The length holds at C = ``reference_c`` in a pipe of ``reference_bore`` [m]; ``None`` means that
    the standard does not correct its lengths for the bore (EN 12845: the pipe's own bore).
    """

    name: str
    nominal: str
    length: float
    reference_bore: float | None
    source: str
    reference_c: float = 120.0
    note: str = ""


@dataclass(frozen=True, slots=True)
class ExtraRows:
    """A project's own rows, looked up before those of the catalogue."""

    bores: tuple[BoreRow, ...] = ()
    c_factors: tuple[CFactorRow, ...] = ()
    fittings: tuple[FittingRow, ...] = ()
