"""Hazard classes, modifiers of the design area, K-factors."""

from __future__ import annotations

import math
from itertools import pairwise

import pytest

from supplycheck import catalogue
from supplycheck.catalogue.names import fold
from supplycheck.catalogue.tables import table
from supplycheck.errors import DomainError, NotInCatalogueError

FOOT, INCH = 0.3048, 0.0254
GPM = 231 * INCH**3 / 60
PSI = 0.45359237 * 9.80665 / INCH**2
DENSITY = GPM / FOOT**2
LATEST = "NFPA 13 (2022)"

# NFPA 13 (from memory): end points of the curves, hose with duration
CURVES = {
    "light hazard": ((0.10, 1500), (0.07, 3000), 100, 30, 30),
    "ordinary hazard group 1": ((0.15, 1500), (0.10, 4000), 250, 60, 90),
    "ordinary hazard group 2": ((0.20, 1500), (0.15, 4000), 250, 60, 90),
    "extra hazard group 1": ((0.30, 2500), (0.20, 5000), 500, 90, 120),
    "extra hazard group 2": ((0.40, 2500), (0.30, 5000), 500, 90, 120),
}


@pytest.mark.parametrize("name", CURVES)
def test_nfpa_classes(name: str) -> None:
    (density, area), (low, far), hose, least, most = CURVES[name]
    old, new = catalogue.hazard_class(name, "NFPA 13 (2019)"), catalogue.hazard_class(name, LATEST)
    for row in (old, new):
        assert row.density == pytest.approx(density * DENSITY, rel=1e-12)
        assert row.area == pytest.approx(area * FOOT**2, rel=1e-12)
        assert row.hose_outside == pytest.approx(hose * GPM)
        assert (row.duration_min, row.duration_max) == (least * 60, most * 60)
        assert row.minimum_pressure == pytest.approx(7 * PSI)
        assert row.hose_inside_choices == pytest.approx((0, 50 * GPM, 100 * GPM))
        assert row.area_dry is None
        assert row.source
    assert len(new.points) == 1
    assert old.points[-1].density == pytest.approx(low * DENSITY)
    assert old.points[-1].area == pytest.approx(far * FOOT**2)
    assert old.density_at(old.points[-1].area) == old.points[-1].density
    middle = old.density_at((area + far) / 2 * FOOT**2)
    assert middle == pytest.approx((density + low) / 2 * DENSITY)


def test_a_curve_is_not_left() -> None:
    row = catalogue.hazard_class("OH2", "NFPA 13", 2016)
    assert row.density_at(2000 * FOOT**2) == pytest.approx(0.19 * DENSITY)  # .20 − .05 × 500/2500 by hand
    for area in (1499, 4001, math.nan):
        with pytest.raises(DomainError, match="published for"):
            row.density_at(area * FOOT**2)
    point = catalogue.hazard_class("OH2", LATEST)
    assert point.density_at(1500 * FOOT**2) == point.density
    with pytest.raises(DomainError):
        point.density_at(2000 * FOOT**2)


def test_a_worse_hazard_never_asks_less() -> None:
    for standard, names in ((LATEST, list(CURVES)), ("NFPA 13 (2016)", list(CURVES))):
        rows = [catalogue.hazard_class(name, standard) for name in names]
        for low, high in pairwise(rows):
            assert low.density is not None
            assert high.density is not None
            assert low.density < high.density
            assert low.maximum_coverage >= high.maximum_coverage
            assert low.maximum_spacing >= high.maximum_spacing
            assert (low.hose_outside or 0) <= (high.hose_outside or 0)


def test_coverage_limits() -> None:
    # yardsprinkler.blogspot.com (2013): 225, 130 and 100 ft²; spacing 15, 15, 12 ft (from memory)
    for name, area, spacing in (("LH", 225, 15), ("OH1", 130, 15), ("EH1", 100, 12)):
        row = catalogue.hazard_class(name, LATEST)
        assert row.maximum_coverage == pytest.approx(area * FOOT**2)
        assert row.maximum_spacing == pytest.approx(spacing * FOOT)
        assert row.maximum_coverage <= row.maximum_spacing**2 * (1 + 1e-12)


def test_least_flow_of_a_head_ordinary_hazard_2() -> None:
    # NICET practice item (Friedman 2007, NFPA 13-2007 11.2.3.1.1): 26.0 gpm at 130 ft² a head
    row = catalogue.hazard_class("ordinary hazard group 2", "NFPA 13-2007")
    assert row.density is not None
    assert row.density * row.maximum_coverage == pytest.approx(26.0 * GPM, rel=1e-12)


def test_heads_of_the_annex_example() -> None:
    # NFPA 13 annex (from memory): 1500 ft², 130 ft², 13 ft on the line: 11.54 heads, 12; 1.2 √1500 / 13
    # = 3.58
    row = catalogue.hazard_class("OH1", LATEST)
    assert row.area is not None
    assert row.area / row.maximum_coverage == pytest.approx(11.54, abs=0.005)
    shape = catalogue.rule("shape factor", "NFPA 13").value
    assert shape * math.sqrt(row.area) / (13 * FOOT) == pytest.approx(3.58, abs=0.005)


def test_modifiers_multiply() -> None:
    # Anvil fire-protection blog 2020: dry and sloped, 1500 × 1.3 × 1.3 = 2535 ft², × .10 × 1.20 =
    # 304–305 gpm
    row = catalogue.hazard_class("light hazard", LATEST)
    assert row.area is not None
    assert row.density is not None
    factor = catalogue.rule("area factor, dry", "NFPA 13").value
    factor *= catalogue.rule("area factor, slope over 1 in 6", "NFPA 13").value
    area = row.area * factor
    assert area == pytest.approx(2535 * FOOT**2, rel=1e-12)
    assert 304 <= area * row.density * 1.20 / GPM <= 305
    assert row.area * catalogue.rule(
        "area factor, double interlock preaction", "NFPA 13"
    ).value == pytest.approx(
        1950 * FOOT**2  # sprinklernotes 485
    )


def test_quick_response_reduction() -> None:
    # NFPA 13 (from memory): 40 % at 10 ft, 32.5 at 15, 25 at 20; 900 ft² at 10 ft (sprinklernotes 485)
    def value(part: str) -> float:
        return catalogue.rule(f"quick response reduction, {part}", "NFPA 13").value

    for feet, share in ((10, 0.40), (15, 0.325), (20, 0.25)):
        assert value("intercept") + value("slope") * feet * FOOT == pytest.approx(share, rel=1e-12)
    assert value("greatest") == 0.4
    assert 1500 * (1 - value("greatest")) == pytest.approx(900)
    assert value("lowest ceiling of the slope") == pytest.approx(10 * FOOT)
    assert value("highest ceiling") == pytest.approx(20 * FOOT)
    assert value("fewest sprinklers") == 5


@pytest.mark.parametrize(
    ("name", "density", "wet", "dry", "bar", "coverage"),
    [  # EN 12845 (OH1, OH3: charter.daham.lk/37 citing the 2004 edition; the rest from memory)
        ("LH", 2.25, 84, None, 0.70, 21),
        ("OH1", 5.0, 72, 90, 0.35, 12),
        ("OH2", 5.0, 144, 180, 0.35, 12),
        ("OH3", 5.0, 216, 270, 0.35, 12),
        ("OH4", 5.0, 360, None, 0.35, 12),
        ("HHP1", 7.5, 260, 325, 0.50, 9),
        ("HHP2", 10.0, 260, 325, 0.50, 9),
        ("HHP3", 12.5, 260, 325, 0.50, 9),
    ],
)
def test_en_classes(
    name: str, density: float, wet: float, dry: float | None, bar: float, coverage: float
) -> None:
    row = catalogue.hazard_class(name, "EN 12845 (2015)")
    assert row.name == name
    assert row.density == pytest.approx(density * 1e-3 / 60)
    assert row.area == wet
    assert row.area_dry == dry
    if dry:
        assert dry == 1.25 * wet, "dry areas of the table are a quarter larger"
    assert row.minimum_pressure == pytest.approx(bar * 1e5)
    assert row.maximum_coverage == coverage
    # spacing and duration from memory of EN 12845: 4.6, 4.0, 3.7 m; 30, 60, 90 min
    spacing, minutes = {"LH": (4.6, 30), "OH": (4.0, 60), "HH": (3.7, 90)}[name[:2]]
    assert row.maximum_spacing == spacing
    assert row.duration_min == row.duration_max == minutes * 60
    assert row.hose_outside is None


def test_en_k_factors() -> None:
    # EN 12845 (from memory): K 57 in LH, 80 in OH, 80 or 115 in HHP; L/min/√bar
    unit = 1e-3 / 60 / math.sqrt(1e5)
    families = {"LH": (57,), "OH": (80,), "HH": (80, 115)}
    for name in catalogue.hazard_names("EN 12845")[:-1]:  # all but the deluge class
        k = families[name[:2]]
        row = catalogue.hazard_class(name, "EN 12845")
        assert row.k_factors == pytest.approx([number * unit for number in k])
        assert row.k_factor == (row.k_factors[0] if len(k) == 1 else None)


def test_deluge_class_has_no_density() -> None:
    row = catalogue.hazard_class("HHP4", "EN 12845")
    assert row.density is None
    assert row.area is None
    with pytest.raises(DomainError, match="no density"):
        row.density_at(260.0)


def test_every_name_of_a_class() -> None:
    for standard in (LATEST, "EN 12845 (2015)"):
        code = standard.split(" (")[0]
        names = catalogue.hazard_names(standard)
        for name in names:
            assert catalogue.hazard_class(name, standard).name == name
        aliases = [row for row in table("aliases") if row["kind"] == "hazard" and row["standard"] == code]
        for row in aliases:
            assert catalogue.hazard_class(row["alias"], standard).name == row["name"]
        assert not {fold(row["alias"]) for row in aliases} & {fold(name) for name in names}


def test_roman_groups() -> None:
    assert catalogue.hazard_class("Ordinary Hazard (Group II)", LATEST).name == "ordinary hazard group 2"
    assert catalogue.hazard_class("extra hazard I", LATEST).name == "extra hazard group 1"


def test_the_edition_must_be_known() -> None:
    with pytest.raises(DomainError, match="give the edition"):
        catalogue.hazard_class("OH2", "NFPA 13")
    with pytest.raises(DomainError, match="up to 2019, and from 2022"):
        catalogue.hazard_class("OH2", "NFPA 13 (2020)")
    assert catalogue.hazard_class("OH2", "NFPA 13", "2022").edition == "2022"
    assert catalogue.hazard_class("OH2", "NFPA 13 (2025)").edition == "2025"


def test_unknown_classes() -> None:
    with pytest.raises(NotInCatalogueError) as caught:
        catalogue.hazard_class("ordinary hazard group 4", LATEST)
    assert "ordinary hazard group 1" in caught.value.near
    with pytest.raises(NotInCatalogueError):
        catalogue.hazard_class("", LATEST)
    with pytest.raises(NotInCatalogueError) as caught:
        catalogue.hazard_class("OH2", "NFPA 31")
    assert "NFPA 13" in caught.value.near


def test_k_factors_in_both_units() -> None:
    # published: metric K = 14.4 × US K; each figure rounded as printed (the trade name 80 is 5.6
    # rounded back)
    for row in table("k_factors"):
        us, metric = row["k_gpm_psi"], row["k_lpm_bar"]
        places = len(metric.partition(".")[2])
        back = len(us.partition(".")[2])
        forward = round(14.4 * float(us), places) == float(metric)
        assert forward or round(float(metric) / 14.4, back) == float(us), (us, metric)
    for pair in catalogue.k_factors():
        assert pair.us == pytest.approx(pair.metric, rel=0.012)  # 80 for 80.6 is .8 %, 14.4 for 14.416 .1 %


def test_early_suppression_is_marked() -> None:
    # public listings and NFPA 13 (from memory): 12 heads, 250 gpm, 60 min; K 14 at 50 psi, K 16.8 at 35 psi
    rows = catalogue.esfr()
    assert all(row.heads == 12 and row.duration == 3600 for row in rows)
    assert all(row.hose == pytest.approx(250 * GPM) for row in rows)
    low = {round(row.k_factor / (GPM / math.sqrt(PSI)), 1): row for row in rows if row.building_height < 10}
    assert low[14.0].pressure_low == pytest.approx(50 * PSI)
    assert low[16.8].pressure_low == pytest.approx(35 * PSI)
    for row in rows:
        assert "verify before use" in row.note or row.pressure_low is None
