"""Bores, materials, C-factors, roughness: identities of the tables, names, errors, a project's own rows."""

from __future__ import annotations

import re
from decimal import Decimal
from itertools import pairwise

import pytest

from supplycheck import catalogue
from supplycheck.catalogue import BoreRow, CFactorRow, ExtraRows
from supplycheck.catalogue.names import fold
from supplycheck.catalogue.tables import table
from supplycheck.errors import NotInCatalogueError

INCH = 0.0254
ROWS = [("in", row) for row in table("bores_in")] + [("mm", row) for row in table("bores_mm")]
WITH_WALL = [(unit, row) for unit, row in ROWS if row[f"wall_{unit}"]]
MATERIALS = sorted({row["material"] for _, row in ROWS})

# rows whose bore is not OD − 2t of the outside diameter and wall beside it; each says so in its note
CONTRADICT = {
    ("steel EN 10255 medium", "DN 50"): Decimal("0.1"),
    ("steel EN 10255 medium", "DN 65"): Decimal("0.1"),
    ("steel EN 10255 medium", "DN 80"): Decimal("0.1"),
    ("steel EN 10255 medium", "DN 150"): Decimal("-0.3"),
}


def half_digit(text: str) -> Decimal:
    """Half a unit of the last digit that is printed."""
    return Decimal(1).scaleb(int(Decimal(text).as_tuple().exponent)) / 2


@pytest.mark.parametrize(
    ("unit", "row"), WITH_WALL, ids=lambda value: value if isinstance(value, str) else value["nominal"]
)
def test_outside_less_two_walls_is_the_bore(unit: str, row: dict[str, str]) -> None:
    lining = Decimal(row.get("lining_in") or 0)
    inside = Decimal(row[f"outside_{unit}"]) - 2 * Decimal(row[f"wall_{unit}"]) - 2 * lining
    miss = inside - Decimal(row[f"bore_{unit}"])
    key = (row["material"], row["nominal"])
    if key in CONTRADICT:
        assert miss == CONTRADICT[key]
        assert "OD − 2t" in row["note"]
    else:
        assert abs(miss) <= half_digit(row[f"bore_{unit}"])


def test_bores_without_a_wall_follow_their_dimension_ratio() -> None:
    # AWWA C900/C906 and ASTM F442 (from memory): t = OD/DR at least; the average wall lies 6 % above
    # it, for F442 by half of a tolerance of 12 % or .020 in, whichever is larger. Walls are
    # standardised to .001 in, hence .001 on two walls for F442, beside half a digit of the printed
    # bore.
    seen = 0
    for row in table("bores_in"):
        if row["wall_in"]:
            continue
        ratio = re.search(r"(?:SDR |DR)(\d+(?:\.\d)?)", row["material"])
        assert ratio, row["material"]
        outside, bore = Decimal(row["outside_in"]), Decimal(row["bore_in"])
        least = outside / Decimal(ratio[1])
        slack = half_digit(row["bore_in"])
        if "minimum wall" in row["material"]:
            wall = least
        elif "average wall" in row["material"]:
            wall = least * Decimal("1.06")
        else:
            wall, slack = max(least * Decimal("1.06"), least + Decimal("0.010")), slack + Decimal("0.001")
        assert abs(outside - 2 * wall - bore) <= slack, (row["material"], row["nominal"])
        seen += 1
    assert seen == len(ROWS) - len(WITH_WALL) == 32


@pytest.mark.parametrize("material", MATERIALS)
def test_bores_grow_with_the_nominal_size(material: str) -> None:
    rows = catalogue.bores(material)
    inches = [catalogue.in_inches(row.nominal) for row in rows]
    order = [row["nominal_in"] for row in table("nominal_sizes")]
    places = [order.index(size) for size in inches]
    assert places == sorted(set(places))
    assert all(left.bore < right.bore for left, right in pairwise(rows))
    for row in rows:
        assert row.outside is not None
        assert row.bore < row.outside


@pytest.mark.parametrize(
    ("thick", "thin"),
    [
        ("steel schedule 40", "steel schedule 10"),
        ("steel schedule 40", "steel schedule 30"),
        ("steel schedule 10S", "steel schedule 5S"),
        ("steel schedule 10", "steel schedule 5S"),
        ("copper type K", "copper type L"),
        ("copper type L", "copper type M"),
        ("ductile iron class 52, bare", "ductile iron pressure class 350, bare"),
        ("ductile iron class 52, cement-lined", "ductile iron class 52, bare"),
        ("PVC C900 DR14, minimum wall", "PVC C900 DR18, minimum wall"),
        ("PVC C900 DR14, average wall", "PVC C900 DR14, minimum wall"),
        ("HDPE DIPS DR11, average wall", "PVC C900 DR14, average wall"),
    ],
)
def test_the_thinner_wall_has_the_larger_bore(thick: str, thin: str) -> None:
    smaller = {row.nominal: row.bore for row in catalogue.bores(thick)}
    larger = {row.nominal: row.bore for row in catalogue.bores(thin)}
    shared = smaller.keys() & larger.keys()
    assert shared
    assert all(smaller[size] < larger[size] for size in shared)


def test_pipe_of_one_outside_diameter_has_one_outside_diameter() -> None:
    # steel and CPVC share iron-pipe sizes; iron, PVC and HDPE share ductile-iron sizes (from memory)
    for words in (("steel", "CPVC"), ("ductile", "PVC C900", "HDPE"), ("copper",)):
        sizes: dict[str, set[str]] = {}
        for row in table("bores_in"):
            if row["material"].startswith(words):
                sizes.setdefault(row["nominal"], set()).add(row["outside_in"])
        assert sizes
        assert all(len(outside) == 1 for outside in sizes.values()), sizes


@pytest.mark.parametrize(
    ("material", "nominal", "bore"),
    [
        (
            "steel schedule 40",
            "1",
            1.049,
        ),  # NFPA 13 annex sample calculation (from memory) prints these bores
        ("steel schedule 40", "1 1/4", 1.380),
        ("steel schedule 40", "1 1/2", 1.610),
        ("steel schedule 40", "2", 2.067),
        ("steel schedule 40", "2 1/2", 2.469),
        ("steel schedule 40", "3", 3.068),
        ("copper type M", "3", 2.981),
        ("steel schedule 10", "8", 8.249),  # NFPA 13 list (from memory) against 8.329 of schedule 10S
        ("steel schedule 10S", "8", 8.329),
        ("steel schedule 40", "12", 11.938),  # Grinnell handbook p. 360 against 12.000 of standard weight
        ("steel standard weight", "12", 12.000),
        ("copper type L", "6", 5.845),  # OD − 2t; copper.org prints 5.854
    ],
)
def test_published_bores(material: str, nominal: str, bore: float) -> None:
    row = catalogue.find_bore(material, nominal)
    assert row.bore == pytest.approx(bore * INCH, rel=1e-12)
    assert row.source


def test_sources_that_disagree_are_told() -> None:
    for material, nominal in (
        ("steel schedule 40", "12"),
        ("steel schedule 10", "8"),
        ("copper type K", "1/2"),
    ):
        assert catalogue.find_bore(material, nominal).note


@pytest.mark.parametrize(
    "size", ["1 1/4", "1¼", "1-1/4", "1.25", 1.25, '1 1/4"', "1 1/4 in", "DN 32", "dn32", "32 mm"]
)
def test_a_size_is_found_however_it_is_written(size: str | float) -> None:
    assert catalogue.find_bore("steel schedule 40", size).bore == pytest.approx(1.380 * INCH)
    assert catalogue.find_bore("EN 10255", size).bore == pytest.approx(36.0e-3)  # EN 10255 (from memory)


def test_a_bare_number_is_in_the_unit_of_the_material() -> None:
    assert catalogue.find_bore("EN 10255", "50").nominal == "DN 50"
    assert catalogue.find_bore("EN 10255", 50).nominal == "DN 50"
    with pytest.raises(NotInCatalogueError, match="no size '50'"):
        catalogue.find_bore("steel schedule 40", "50")
    with pytest.raises(NotInCatalogueError, match="no size '20'"):
        catalogue.find_bore("steel schedule 40", "20")


@pytest.mark.parametrize(
    ("written", "name"),
    [
        ("Sch. 40 steel", "steel schedule 40"),
        ("black steel, schedule 40", "steel schedule 40"),
        ("sch10", "steel schedule 10"),
        ("SCHEDULE 10S", "steel schedule 10S"),
        ("Copper M", "copper type M"),
        ("CPVC", "CPVC SDR 13.5"),
        ("C900 DR18 average wall", "PVC C900 DR18, average wall"),
        ("ductile iron CL52 lined", "ductile iron class 52, cement-lined"),
        ("galvanised EN 10255", "galvanized steel EN 10255 medium"),
    ],
)
def test_materials_by_other_names(written: str, name: str) -> None:
    assert {row.material for row in catalogue.bores(written)} == {name}


def test_no_name_of_a_material_means_two() -> None:
    names = [name for row in catalogue.materials() for name in (row.name, *row.aliases)]
    assert len({fold(name) for name in names}) == len(names)


def test_every_material_resolves_by_each_of_its_names() -> None:
    bored = {row["bores_of"] for row in table("materials")} - {""}
    assert bored == set(MATERIALS)
    for row in catalogue.materials():
        for name in (row.name, *row.aliases):
            if row.size_unit:
                assert {bore.material for bore in catalogue.bores(name)} == {row.name}
            else:
                with pytest.raises(NotInCatalogueError):
                    catalogue.bores(name)


def test_galvanized_and_stainless_pipe_has_the_bore_of_its_schedule() -> None:
    for coated, plain in (
        ("galvanized steel schedule 40", "steel schedule 40"),
        ("stainless steel schedule 10S", "steel schedule 10S"),
        ("galvanized steel EN 10255 medium", "steel EN 10255 medium"),
    ):
        assert [row.bore for row in catalogue.bores(coated)] == [row.bore for row in catalogue.bores(plain)]


def test_an_ambiguous_wall_basis_is_not_chosen_silently() -> None:
    with pytest.raises(NotInCatalogueError) as caught:
        catalogue.bores("PVC C900 DR18")
    assert {"PVC C900 DR18, minimum wall", "PVC C900 DR18, average wall"} <= set(caught.value.near)


def test_a_family_has_a_c_factor_and_no_bores() -> None:
    assert catalogue.c_factor("PVC", "wet", "NFPA 13 (2022)").value == 150  # plastic; NFPA 13 from memory
    with pytest.raises(NotInCatalogueError, match="family of pipe") as caught:
        catalogue.bores("copper")
    assert caught.value.near == ("copper type K", "copper type L", "copper type M")
    with pytest.raises(NotInCatalogueError, match="without bores; give its bores"):
        catalogue.bores("brass")
    own = ExtraRows(bores=(BoreRow("brass", "1", 0.0266, source="maker"),))
    assert catalogue.find_bore("brass", "1", own).bore == 0.0266


def test_unknown_names_come_with_near_ones() -> None:
    with pytest.raises(NotInCatalogueError) as caught:
        catalogue.bores("ductile iron")
    assert "ductile iron class 52, bare" in caught.value.near
    assert "ductile iron class 52, cement-lined" in caught.value.near
    with pytest.raises(NotInCatalogueError) as caught:
        catalogue.bores("x" * 1_000_000)
    assert len(str(caught.value)) < 1000
    with pytest.raises(NotInCatalogueError) as caught:
        catalogue.bores("steel schedul 40")
    assert "steel schedule 40" in caught.value.near
    with pytest.raises(NotInCatalogueError) as caught:
        catalogue.find_bore("steel schedule 40", "7")
    assert "6" in caught.value.near
    assert "8" in caught.value.near


def test_next_larger() -> None:
    rows = catalogue.bores("steel schedule 40")
    for row in rows:
        assert catalogue.next_larger("steel schedule 40", row.bore) == row
        assert catalogue.next_larger("steel schedule 40", row.bore * 0.9999) == row
    for row, after in pairwise(rows):
        assert catalogue.next_larger("steel schedule 40", row.bore * 1.0001) == after
    with pytest.raises(NotInCatalogueError, match="largest size is 12"):
        catalogue.next_larger("steel schedule 40", 0.4)


@pytest.mark.parametrize(
    ("material", "system", "value"),
    [  # NFPA 13 (2019 and 2022), from memory
        ("steel schedule 40", "wet", 120),
        ("steel schedule 40", "deluge", 120),
        ("steel schedule 40", "dry", 100),
        ("steel schedule 10", "preaction", 100),
        ("steel schedule 10", "double interlock preaction", 100),
        ("steel schedule 10", "dry, nitrogen", 120),
        ("galvanized steel schedule 40", "wet", 120),
        ("galvanized steel schedule 40", "dry", 100),
        ("CPVC", "wet", 150),
        ("copper M", "wet", 150),
        ("stainless steel schedule 10S", "dry", 150),
        ("brass", "wet", 150),
        ("ductile iron class 52 lined", "wet", 140),
        ("ductile iron PC350 bare", "wet", 100),
        ("cast iron", "wet", 100),
        ("asbestos cement", "wet", 140),
        ("concrete", "wet", 140),
    ],
)
def test_c_factors_nfpa(material: str, system: str, value: float) -> None:
    row = catalogue.c_factor(material, system, "NFPA 13 (2022)")
    assert row.value == value
    assert "from memory" in row.source


@pytest.mark.parametrize(
    ("material", "value"),
    [  # EN 12845 table 22, from memory
        ("cast iron", 100),
        ("ductile iron PC350 bare", 110),
        ("EN 10255", 120),
        ("galvanized EN 10255", 120),
        ("spun cement", 130),
        ("cement-lined", 130),
        ("stainless", 140),
        ("copper", 140),
        ("GRP", 140),
    ],
)
def test_c_factors_en(material: str, value: float) -> None:
    assert catalogue.c_factor(material, "dry", "EN 12845 (2015)").value == value


def test_owners_and_waterworks_figures_are_kept_apart() -> None:
    # UFGS 13958N: steel 100, deluge 120; municipal code ecode360 29345307; water-works tables
    assert catalogue.c_factor("steel schedule 40", "wet", "UFGS 13958N").value == 100
    assert catalogue.c_factor("steel schedule 40", "deluge", "UFGS 13958N").value == 120
    assert "120" in catalogue.c_factor("ductile iron bare", "wet", "municipal design example").note
    assert "140" in catalogue.c_factor("copper", "wet", "water works tables").note


def test_c_factor_that_a_standard_does_not_list() -> None:
    with pytest.raises(NotInCatalogueError, match="EN 12845 lists no C-factor for plastic"):
        catalogue.c_factor("CPVC", "wet", "EN 12845 (2015)")
    with pytest.raises(NotInCatalogueError) as caught:
        catalogue.c_factor("steel schedule 40", "wett", "NFPA 13 (2022)")
    assert "wet" in caught.value.near
    with pytest.raises(NotInCatalogueError) as caught:
        catalogue.c_factor("steel schedule 40", "wet", "NFPA 31")
    assert "NFPA 13" in caught.value.near


@pytest.mark.parametrize(
    ("material", "feet"),
    [  # lmnoeng roughness table, ft
        ("steel schedule 40", 1.5e-4),
        ("galvanized steel schedule 40", 5e-4),
        ("cast iron", 8.5e-4),
        ("ductile iron PC350 bare", 4e-4),
        ("copper K", 5e-6),
        ("drawn tubing", 5e-6),
    ],
)
def test_roughness(material: str, feet: float) -> None:
    row = catalogue.roughness(material)
    assert row.value == pytest.approx(feet * 0.3048, rel=1e-12)
    assert row.source


def test_no_roughness_is_invented() -> None:
    with pytest.raises(NotInCatalogueError, match="give roughness"):
        catalogue.roughness("ductile iron class 52 lined")
    with pytest.raises(NotInCatalogueError):
        catalogue.roughness("glass")
    assert catalogue.roughness("CPVC").note, "a stand-in says so"


OWN = ExtraRows(
    bores=(
        BoreRow("thinwall", "1", 0.0285, source="listing"),
        BoreRow("thinwall", "20", 0.480, source="listing"),
        BoreRow("steel schedule 40", "2", 0.0530, source="measured"),
        BoreRow("steel schedule 40", "20", 0.478, source="measured"),
    ),
    c_factors=(
        CFactorRow("thinwall", 118, "listing"),
        CFactorRow("steel schedule 40", 90, "old pipe", system="dry", standard="NFPA 13"),
    ),
)


def test_own_rows_come_first() -> None:
    assert catalogue.find_bore("Thinwall", "1 in", OWN).source == "listing"
    assert catalogue.find_bore("sch 40 steel", "2", OWN).bore == 0.0530
    assert catalogue.find_bore("steel schedule 40", "DN 50", OWN).bore == 0.0530
    assert catalogue.find_bore("steel schedule 40", "3", OWN) == catalogue.find_bore(
        "steel schedule 40", "3"
    )
    assert len(catalogue.bores("steel schedule 40", OWN)) == len(catalogue.bores("steel schedule 40")) + 1
    assert catalogue.next_larger("steel schedule 40", 0.4, OWN).nominal == "20"
    assert catalogue.c_factor("thinwall", "wet", "EN 12845", OWN).value == 118
    assert catalogue.c_factor("schedule 40", "dry", "NFPA 13 (2022)", OWN).value == 90
    assert catalogue.c_factor("schedule 40", "wet", "NFPA 13 (2022)", OWN).value == 120
    assert catalogue.c_factor("schedule 40", "dry", "EN 12845", OWN).value == 120


def test_an_own_20_inch_size_is_not_dn_20() -> None:
    assert catalogue.find_bore("steel schedule 40", "20", OWN).bore == 0.478
    assert catalogue.find_bore("steel schedule 40", "3/4", OWN).bore == pytest.approx(0.824 * INCH)
    assert catalogue.find_bore("steel schedule 40", "DN 20", OWN).bore == pytest.approx(0.824 * INCH)


def test_an_own_material_is_near_a_misspelt_one() -> None:
    with pytest.raises(NotInCatalogueError) as caught:
        catalogue.find_bore("thinwal", "1", OWN)
    assert "thinwall" in caught.value.near
    with pytest.raises(NotInCatalogueError):
        catalogue.find_bore("thinwall", "1")
