"""The standard of a project, its edition, and the friction laws that go with it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from supplycheck.catalogue.tables import split_standard
from supplycheck.model import DARCY, HEAD_FORM, HW_METRIC, HW_US, FrictionLaw
from supplycheck.project.faults import FaultList, quoted
from supplycheck.project.sections import Sections

StandardName = Literal["NFPA 13", "EN 12845"]


@dataclass(frozen=True, slots=True)
class Standard:
    """The standard and its edition; ``text`` as the catalogue reads it."""

    name: StandardName
    edition: str

    @property
    def text(self) -> str:
        """Return name and edition as one text."""
        return f"{self.name} ({self.edition})"


def read_standard(sections: Sections, faults: FaultList) -> Standard | None:
    """Return the standard of the project; ``None`` with a fault noted."""
    if sections.project is None:
        return None
    place = sections.place("project.standard")
    written = sections.project.standard
    name, edition = split_standard(written)
    allowed = '"NFPA 13 (2022)" or "EN 12845 (2015)", with the year of the edition'
    if name not in ("NFPA 13", "EN 12845"):
        faults.add(
            place, "is not a standard that the catalogue holds", found=quoted(written), allowed=allowed
        )
        return None
    if edition is None:
        faults.add(place, "has no edition", found=quoted(written), allowed=allowed)
        return None
    return Standard("NFPA 13" if name == "NFPA 13" else "EN 12845", str(edition))


def read_laws(
    sections: Sections, standard: Standard | None, faults: FaultList
) -> tuple[FrictionLaw, FrictionLaw | None]:
    """Return the friction law and the second one; Hazen-Williams in the form of the standard."""
    table = sections.criteria
    hazen = HW_METRIC if standard is not None and standard.name == "EN 12845" else HW_US
    by_name = {
        "hazen-williams": hazen,
        "darcy-weisbach": DARCY,
        "hazen-williams 4.52 us": HW_US,
        "hazen-williams 6.05e5 metric": HW_METRIC,
        "hazen-williams 10.67 head": HEAD_FORM,
    }
    if table is None:
        return hazen, None
    law, second = by_name[table.friction_law], by_name[table.second_law] if table.second_law else None
    if second == law:
        faults.add(
            sections.place("criteria.second_law"),
            "is the same as friction_law",
            found=quoted(table.second_law),
            remedy="take the key out",
        )
    return law, second
