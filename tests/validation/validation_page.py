"""The page docs/validation.md: every published figure that is checked, computed beside printed.

Run ``python tests/validation/validation_page.py docs/validation.md`` to write it.
"""

from __future__ import annotations

import sys
from dataclasses import dataclass
from pathlib import Path

from one_pipe_page import (
    Row,
    annex_rows,
    chart_rows,
    more_problem_rows,
    problem_rows,
    psi_per_foot,
    trade_rows,
)
from system_rows import (
    area_rows,
    drop_rows,
    gpm,
    head_rows,
    hydrant_rows,
    margin_rows,
    pump_rows,
    tree_rows,
    two_loop_rows,
    two_path_rows,
)

from supplycheck.catalogue import c_factor, find_bore
from supplycheck.hydraulics import hazen_williams_gradient
from supplycheck.model import HEAD_FORM
from supplycheck.units import FOOT, GPM, INCH, PSI

INTRODUCTION = """# Validation

Published figures, and beside each what this program computes. A figure counts as met within half a unit
of its last printed digit; where the source itself leaves more open (it rounds on the way, or reads a
chart), the remark or the test says why and by how much. This page is written by
`python tests/validation/validation_page.py docs/validation.md` from the same figures that
`tests/validation/test_validation_page.py` compares; a test fails when the two differ.

"From memory" marks figures that were not read in the publication named when the test was written.
"Constructed" marks a problem that no publication prints and whose answer follows in closed form.

What is not validated here: no figure comes from a measured sprinkler system, and no published example of
a gridded system was at hand. Grids are checked against independent methods and conservation laws in
`tests/network` and `tests/properties`.
"""


@dataclass(frozen=True, slots=True)
class Section:
    """A table of the page: its heading, the source, the file that tests it, its rows."""

    title: str
    source: str
    tests: str
    rows: tuple[Row, ...]

    def lines(self) -> list[str]:
        """Return the section as Markdown lines."""
        return [
            f"## {self.title}",
            "",
            f"Source: {self.source}",
            "",
            f"Test: `tests/{self.tests}`.",
            "",
            "| figure | printed | computed | remark |",
            "|---|---|---|---|",
            *(row.line for row in self.rows),
            "",
        ]


def system_sections() -> list[Section]:
    """Sprinkler systems, design areas and loops."""
    return [
        Section(
            "A sprinkler tree from head to main",
            "NFPA 13, annex sample calculation, Group I, 1500 ft² (from memory; its rows reproduce "
            "each other). "
            "Twelve heads on three lines, worked as one project. Pressures may differ by 0.05 psi "
            "for each rounded "
            "row of the sheet that stands before them.",
            "validation/test_annex_tree.py",
            tuple(tree_rows()),
        ),
        Section(
            "Friction losses of that calculation",
            "the same sheet, row by row.",
            "validation/test_friction_tables.py",
            tuple(annex_rows()),
        ),
        Section(
            "Size of the design area",
            "Jensen Hughes course page 13.10 (0.20 gpm/ft² over 3000 ft², 10 × 12 ft); NFPA 13 annex "
            "(from memory); "
            "Anvil fire-protection blog, 2020 (dry system under a slope: factors multiplied, not added).",
            "validation/test_design_area.py",
            tuple(area_rows()),
        ),
        Section(
            "Density at every head",
            "NICET practice item (Friedman 2007; NFPA 13-2007, 11.2.3.1.1): ordinary hazard group 2, "
            "130 ft² a head: "
            "no head below 26.0 gpm, also where velocity pressure is used. Computed: the lowest of "
            "all heads.",
            "validation/test_density_at_every_head.py",
            tuple(head_rows()),
        ),
        Section(
            "A network of two loops",
            "Alperovits and Shamir (1977), Water Resour. Res. 13, 885, with the diameters of Savic "
            "and Walters (1997), "
            "J. Water Resour. Plann. Manage. 123, 67 (from memory). The last pipe runs from 7 to 5, "
            "against the drawing. "
            "The constant of the formula is printed with several values between 10.51 and 10.90; "
            "here 10.667.",
            "validation/test_loops.py",
            tuple(two_loop_rows()),
        ),
        Section(
            "Two paths in parallel",
            "constructed: 200 ft of 3 in beside 350 ft of 4 in Schedule 40, C 120, 400 gpm; "
            "Q₁/Q₂ = [(L₂/L₁)(d₁/d₂)^4.87]^(1/1.85).",
            "validation/test_loops.py",
            tuple(two_path_rows()),
        ),
    ]


def supply_sections() -> list[Section]:
    """Hydrant tests, margins, pumps and storage."""
    return [
        Section(
            "Hydrant outlets",
            'training slides "NFPA 13 hydraulic calculations"; a practitioners\' forum, thread on '
            "flow-test modifiers; "
            "theoretical discharge of NFPA 291 (from memory).",
            "validation/test_hydrant_tests.py",
            tuple(hydrant_rows()),
        ),
        Section(
            "Drop of a flow test to the power 0.54",
            "table of NFPA 291 (from memory). The program uses the exponent of its own curve, "
            "1/1.85, so that both ways "
            "along the curve agree; over a ratio of one hundred in the drop this changes the figure "
            "by 0.25 %.",
            "validation/test_hydrant_tests.py",
            tuple(drop_rows()),
        ),
        Section(
            "One margin rule read in three ways",
            "constructed from rules as authorities publish them: 10 % on 82 psi static and 54 psi at "
            "956 gpm, "
            "demand 700 gpm at 60.3 psi.",
            "validation/test_hydrant_tests.py",
            tuple(margin_rows()),
        ),
        Section(
            "Pump behind a city main, and storage",
            "constructed: city 90 psi static, 65 psi at 1000 gpm; pump 100 psi at 1000 gpm, churn "
            "140 psi, 65 psi at "
            "1500 gpm, within the limits of NFPA 20 (churn at most 140 %, at least 65 % at 150 % of "
            "rated flow). Storage "
            "for one hour.",
            "supply/test_pump_and_storage.py",
            tuple(pump_rows()),
        ),
    ]


def law_sections() -> list[Section]:
    """Laws and one-pipe problems."""
    return [
        Section(
            "Figures of the trade",
            "NFPA 13 and 291, EN 12845 and handbooks (from memory unless the remark names more).",
            "validation/test_friction_tables.py",
            tuple(trade_rows()),
        ),
        Section(
            "Friction factors",
            "Colebrook's equation, iterated by hand (constructed); smooth pipe: White, *Fluid "
            "Mechanics* (from memory).",
            "validation/test_friction_tables.py",
            tuple(chart_rows()),
        ),
        Section(
            "Text-book problems of one pipe",
            "Fox and McDonald, *Introduction to Fluid Mechanics*; Çengel and Cimbala, *Fluid "
            "Mechanics*; White, "
            "*Fluid Mechanics*. White, Fox and McDonald 8.5, Çengel and Cimbala 8-2 from memory.",
            "validation/test_one_pipe_textbooks.py",
            (*problem_rows(), *more_problem_rows()),
        ),
    ]


def sections() -> list[Section]:
    """Return every table of computed beside printed figures, in the order of the page."""
    return [*system_sections(), *supply_sections(), *law_sections()]


def head_form(flow: float, bore: float) -> float:
    """Return the loss by the water-works form at C 120 [psi/ft]; flow [gpm], bore [in]."""
    gradient, _ = hazen_williams_gradient(
        flow=flow * GPM,
        bore=bore * INCH,
        c_factor=120.0,
        coefficient=HEAD_FORM.coefficient,
        flow_exponent=HEAD_FORM.flow_exponent,
        bore_exponent=HEAD_FORM.bore_exponent,
    )
    return gradient / (PSI / FOOT)


def bore_of(material: str, size: str) -> str:
    """Return the bore of the catalogue [in], three decimals."""
    return f"{find_bore(material, size).bore / INCH:.3f}"


def c_of(material: str, system: str) -> str:
    """Return the C-factor under NFPA 13."""
    return f"{c_factor(material, system, 'NFPA 13').value:.0f}"


def disagreements() -> list[str]:
    """Return the table of figures on which publications differ."""
    steel, light = "steel schedule 40", "steel schedule 10"
    c900 = "PVC C900 DR18"
    outlet = f"{gpm(2.5, 0.9, 40):.0f}"
    rows = [
        (
            "constant of the pitot formula",
            "29.83 (training slides, forum)",
            "29.84 (NFPA 291, from memory)",
            "29.84; 0.03 % of the flow",
        ),
        (
            "Hazen-Williams, 500 gpm in 4 in, psi/ft",
            f"{psi_per_foot(500, 4.026):.5f} with 4.52, 1.85, 4.87 (NFPA 13)",
            f"{head_form(500, 4.026):.5f} with 10.67, 1.852, 4.871 (water works)",
            "the form of the standard; the report names it",
        ),
        (
            "weight of water, psi/ft",
            "0.433",
            "0.434",
            "0.433 under NFPA 13, 0.098 bar/m under EN 12845",
        ),
        (
            "bore of 12 in Schedule 40, in",
            "11.938 (wall 0.406, Grinnell handbook)",
            "12.000 (wall 0.375, pipe charts, Illinois code)",
            f"{bore_of(steel, '12')}; the other is `steel standard weight`, "
            f"{bore_of('steel standard weight', '12')}",
        ),
        (
            "bore of 8 in Schedule 10, in",
            "8.249 (wall 0.188, NFPA 13, from memory)",
            "8.329 (wall 0.148, 10S)",
            f"{bore_of(light, '8')}; the other is `steel schedule 10S`, "
            f"{bore_of('steel schedule 10S', '8')}",
        ),
        (
            "bore of 6 in PVC C900 DR18, in",
            "6.13 from the minimum wall",
            "6.09 from the average wall",
            f"no silent choice: the name says which, `{c900}, minimum wall` or `{c900}, average wall`",
        ),
        (
            "multiplier of equivalent lengths at C 100",
            "0.713 (NFPA 13, from memory)",
            "0.714 (the formula; CEA 4001)",
            "the formula",
        ),
        (
            "C of black steel, wet",
            "120 (NFPA 13, from memory)",
            "100 (UFGS 13958N, except deluge)",
            f"{c_of(steel, 'wet')} unless the project gives its own",
        ),
        (
            "C of black steel, dry",
            "100 (NFPA 13, from memory)",
            "120 (EN 12845, from memory)",
            f"{c_of(steel, 'dry')} under NFPA 13, by the standard",
        ),
        (
            "C of copper",
            "150 (NFPA 13, from memory)",
            "130–140 (water-works tables)",
            f"{c_of('copper type M', 'wet')} under NFPA 13",
        ),
        (
            "2½ in, c 0.90, 40 psi, gpm",
            "1061 (forum)",
            "1178 (a published answer that left its coefficient out)",
            f"{outlet}",
        ),
        (
            "least drop of a flow test",
            "25 % or the full demand (NFPA 291, 2010)",
            "10 % (later editions, from memory)",
            "below 10 % fails; between the two the report asks whether it is accepted",
        ),
        (
            "10 % margin on the case above, psi available",
            "58.1 (static lowered) or 59.6 (pressures scaled)",
            "62.9 (flows scaled)",
            "the project must say which",
        ),
        (
            "churn of a fire pump",
            "at most 140 % of rated pressure",
            "an older figure of 120 %",
            "140 %",
        ),
        (
            "specific gravity of 50 % glycerine",
            "1.128 by weight, 68 °F (Lange's Handbook)",
            "1.133 by volume, 60 °F (older NFPA 13, from memory)",
            "neither: density and viscosity are given by the user",
        ),
        (
            "fire flow of a sprinklered building (IFC)",
            "up to 75 % off, not below 1500 gpm (older rule)",
            "25 % of the table, not below 1000 gpm (2015 on, from memory)",
            "by the edition named",
        ),
    ]
    return [
        "## Where publications disagree",
        "",
        "Test: `tests/validation/test_validation_page.py`, `tests/catalogue`.",
        "",
        "| what | one says | another says | here |",
        "|---|---|---|---|",
        *(f"| {' | '.join(row)} |" for row in rows),
        "",
    ]


def page() -> str:
    """Return the page as Markdown."""
    lines = [INTRODUCTION]
    for section in sections():
        lines += section.lines()
    return "\n".join([*lines, *disagreements()])


if __name__ == "__main__":
    Path(sys.argv[1]).write_text(page(), encoding="utf-8")
