"""Every table: a source in every row, a key only once, numbers that are numbers, loaded only when asked."""

from __future__ import annotations

import math
import subprocess
import sys
import tomllib
from pathlib import Path

import pytest

from supplycheck import catalogue
from supplycheck.catalogue.names import fold
from supplycheck.catalogue.page import catalogue_page, table_names
from supplycheck.catalogue.tables import table
from supplycheck.units import find_unit

ROOT = Path(__file__).parents[2]
DATA = ROOT / "supplycheck" / "catalogue" / "data"
NAMES = sorted(path.stem for path in DATA.glob("*.csv"))

KEYS = {
    "aliases": ("kind", "standard", "alias"),
    "bores_in": ("material", "nominal"),
    "bores_mm": ("material", "nominal"),
    "c_factors": ("standard", "family", "system"),
    "c_multipliers": ("standard", "c_factor"),
    "density_points_nfpa": ("hazard", "edition_from", "edition_to", "area_ft2"),
    "esfr": ("building_up_to_ft", "k_gpm_psi"),
    "fire_flow": ("construction", "flow_gpm"),
    "fittings_check_en": ("fitting", "nominal"),
    "fittings_en": ("fitting", "nominal"),
    "fittings_nfpa": ("fitting", "nominal"),
    "fluids": ("fluid", "table", "percent"),
    "hazards_en": ("hazard",),
    "hazards_nfpa": ("hazard",),
    "hydrant_classes": ("class",),
    "hydrant_spacing": ("flow_up_to_gpm",),
    "k_factors": ("k_gpm_psi", "k_lpm_bar"),
    "materials": ("material",),
    "nominal_sizes": ("nominal_in",),
    "outlet_coefficients": ("shape",),
    "pump_duties_en": ("hazard", "flow_lpm"),
    "pump_ratings": ("flow_gpm",),
    "pumper_factors": ("pitot_psi",),
    "roughness": ("family",),
    "rules": ("rule", "standard", "edition_from", "edition_to"),
}
# the unit that closes a column name
SUFFIXES = ("_in", "_mm", "_ft", "_ft2", "_m", "_m2", "_psi", "_bar", "_gpm", "_lpm", "_min", "_h", "_f")


def test_every_table_has_a_key_here_and_a_place_on_the_page() -> None:
    assert sorted(KEYS) == NAMES
    assert sorted(table_names()) == NAMES


@pytest.mark.parametrize("name", NAMES)
def test_every_row_names_its_source(name: str) -> None:
    assert table(name)
    for row in table(name):
        assert row["source"].strip(), dict(row)
        assert None not in row.values(), dict(row)
        assert all(cell == cell.strip() for cell in row.values()), dict(row)


@pytest.mark.parametrize("name", NAMES)
def test_no_key_twice(name: str) -> None:
    keys = [tuple(fold(row[column]) or row[column] for column in KEYS[name]) for row in table(name)]
    assert len(set(keys)) == len(keys)


@pytest.mark.parametrize("name", NAMES)
def test_cells_under_a_unit_are_finite_numbers(name: str) -> None:
    for row in table(name):
        for column, cell in row.items():
            if cell and column.endswith(SUFFIXES) and not column.startswith("nominal"):
                assert all(math.isfinite(float(part)) for part in cell.split("|")), (column, cell)


def test_units_of_the_rules_exist() -> None:
    for row in table("rules"):
        assert not row["unit"] or row["unit"] == "%/ft" or find_unit(row["unit"]) is not None, row["unit"]
        known = catalogue.rule(
            row["rule"], row["standard"], row["edition_from"] or row["edition_to"] or None
        )
        assert math.isfinite(known.value)
        assert known.source


def test_margin_shapes_are_marked_as_examples() -> None:
    book = tomllib.loads((DATA / "margins.toml").read_text(encoding="utf-8"))
    assert book["compiled"].year >= 2026
    assert len(catalogue.margin_shapes()) == len(book["rule"])
    for shape in catalogue.margin_shapes():
        assert "not current law" in shape.note
        assert shape.source
        assert shape.rule.source == shape.source


def test_margin_shapes_hold_the_published_numbers() -> None:
    # Maine rules 16-219 ch. 4 section 5; Prince George's County; Wheeling IL; Bellevue WA
    # BCC 23.10.903.3.1; Georgia (forum quotation, 2008): numbers as their texts give them, psi
    psi = 6894.757293168
    by_place = {
        (shape.place.split(",")[0], shape.applies_to): shape.rule for shape in catalogue.margin_shapes()
    }
    most = "buildings other than houses"
    maine = by_place["State of Maine", most]
    assert (maine.kind, maine.free_years) == ("by test age", 5)
    assert maine.pressure == pytest.approx(5 * psi)
    assert maine.per_year == pytest.approx(1 * psi)
    county = by_place["Prince George's County", most]
    assert county.kind == "larger of"
    assert [(part.kind, part.percent) for part in county.parts] == [("of demand", 0.1), ("fixed", 0.0)]
    assert county.parts[1].pressure == pytest.approx(10 * psi)
    houses = by_place["Prince George's County", "houses"]
    assert houses.parts[0].percent == 0.05
    assert houses.parts[1].pressure == pytest.approx(5 * psi)
    assert by_place["Wheeling", most].pressure == pytest.approx(5 * psi)
    assert by_place["Wheeling", "houses"].pressure == pytest.approx(2 * psi)
    (limit, low), (rest, high) = by_place["Bellevue", most].bands
    assert limit == pytest.approx(50 * psi)
    assert rest == math.inf
    assert (low.percent, high.percent) == (0.05, 0.1)
    assert low.reading is None, "the published text does not say how the percentage is read"
    assert by_place["Georgia", "not stated"].pressure == pytest.approx(10 * psi)


def test_the_page_equals_the_tables() -> None:
    page = (ROOT / "docs" / "catalogue.md").read_text(encoding="utf-8")
    assert page == catalogue_page(), "run python -m supplycheck.catalogue.page docs/catalogue.md"


def test_every_printed_cell_stands_on_the_page() -> None:
    page = catalogue_page()
    for name in NAMES:
        for row in table(name):
            for cell in row.values():
                assert cell.replace("|", "\\|").replace("<", "&lt;") in page


def test_import_reads_nothing_and_takes_no_time() -> None:
    code = (
        "import sys, time, typing, types, importlib, supplycheck\n"
        "start = time.perf_counter()\n"
        "import supplycheck.catalogue\n"
        "taken = time.perf_counter() - start\n"
        "heavy = {'csv', 'difflib', 'pandas', 'numpy', 'importlib.resources'} & set(sys.modules)\n"
        "own = [name for name in sys.modules if name.startswith('supplycheck.catalogue.')]\n"
        "print(taken, sorted(heavy), own)\n"
    )
    runs = []
    for _ in range(3):
        done = subprocess.run(
            [sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, check=True
        )
        taken, _, rest = done.stdout.partition(" ")
        assert rest.strip() == "[] []"
        runs.append(float(taken))
    assert min(runs) < 0.020


def test_every_public_name_loads() -> None:
    for name in catalogue.__all__:
        assert getattr(catalogue, name) is not None
    assert sorted(catalogue.__all__) == list(catalogue.__all__)
    assert set(catalogue.__all__) <= set(dir(catalogue))
    with pytest.raises(AttributeError, match="no attribute 'bore'"):
        catalogue.__getattr__("bore")


def test_rows_are_frozen() -> None:
    row = catalogue.find_bore("steel schedule 40", "2")
    with pytest.raises(AttributeError):
        row.bore = 1.0  # type: ignore[misc]
