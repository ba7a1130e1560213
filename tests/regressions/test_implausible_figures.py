"""Figures that no system has, each from a slip of the decimal point or of a unit, once taken as read."""

from __future__ import annotations

from pathlib import Path

import pytest
from project_texts import LAYOUT, LAYOUT_PROJECT, NODES, TABLE_PROJECT, faults

from supplycheck.findings import Fault

FLOW_TEST = "supply.flow_test"
TANK = '[[supply.tank]]\ntag = "t"\nnode = "S"\nwater_level = {level}\n'
METRIC = """\
units = "metric"
[project]
title = "Test"
date = 2026-11-20
standard = "EN 12845 (2015)"
[criteria]
hazard = "OH1"
system = "wet"
[sprinkler.A]
k_factor = 80
[pipe.lines]
material = "steel schedule 40"
[supply.flow_test]
static = 5
residual = 4
flow = 2000
date = 2026-06-01
gauge_elevation = 0
[supply.margin]
rule = "none"
""" + LAYOUT.replace("line_spacing = 10", "line_spacing = 3").replace(
    "head_spacing = 13", "head_spacing = 4"
)
METRIC = METRIC.replace("first_head = 6.5", "first_head = 2").replace("elevation = 15", "elevation = 6")


def spoilt(old: str, new: str, text: str = LAYOUT_PROJECT) -> str:
    assert old in text
    return text.replace(old, new)


def only(found: list[Fault]) -> Fault:
    assert len(found) == 1, "\n".join(map(str, found))
    return found[0]


def outlets(text: str) -> str:
    return spoilt("flow = 1000", f"outlets = [{{ {text} }}]")


@pytest.mark.parametrize(
    ("text", "where", "problem", "hint"),
    [
        (spoilt("static = 72", "static = 720"), "static", "too high for a water main", "400 psi"),
        (spoilt("static = 72", 'static = "29 bar"'), "static", "too high", "psi"),
        (
            spoilt("gauge_elevation = 0", "gauge_elevation = 600"),
            "gauge_elevation",
            "604 ft above",
            "500 ft",
        ),
        (spoilt("gauge_elevation = 0", "gauge_elevation = -900"), "gauge_elevation", "below its node", ""),
        (spoilt("date = 2026-06-01", "date = 1926-06-01"), "date", "too far back", "1926-06-01"),
        (spoilt("date = 2026-06-01", "date = 2206-06-01"), "date", "after the calculation", "2026-11-20"),
        (
            outlets("diameter = 25, coefficient = 0.9, pitot = 20"),
            "outlets[1].diameter",
            "larger than any outlet",
            "at most 6 in",
        ),
        (
            outlets("diameter = 2.5, coefficient = 0.9, pitot = 73"),
            "outlets[1].pitot",
            "above the static pressure",
            "72.0 psi",
        ),
        (
            outlets('kind = "hose outlet", diameter = 4.5, coefficient = 0.9, pitot = 20'),
            "outlets[1].pumper_factor",
            "4 in or more",
            "4.500 in",
        ),
    ],
)
def test_figures_of_a_flow_test(tmp_path: Path, text: str, where: str, problem: str, hint: str) -> None:
    fault = only(faults(tmp_path, text))
    assert fault.place.where == f"{FLOW_TEST}.{where}"
    assert problem in fault.problem
    assert hint in str(fault)


@pytest.mark.parametrize(
    "text",
    [
        spoilt("static = 72", "static = 400"),
        spoilt("gauge_elevation = 0", "gauge_elevation = 496"),
        spoilt("date = 2026-06-01", "date = 2026-11-20"),
        outlets("diameter = 2.5, coefficient = 0.9, pitot = 72"),
        outlets("diameter = 6, coefficient = 0.9, pitot = 20"),
        spoilt("k_factor = 5.6", "k_factor = 50"),
        spoilt("k_factor = 5.6", 'k_factor = "80 L/min/bar½"'),
        spoilt('"wet"', '"wet"\ndensity = 0.03\narea = 1500'),
        METRIC,
    ],
)
def test_figures_at_the_limits_pass(tmp_path: Path, text: str) -> None:
    assert faults(tmp_path, text) == []


def test_a_test_between_project_date_and_submittal(tmp_path: Path) -> None:
    late = spoilt("date = 2026-06-01", "date = 2026-12-01")
    assert (
        faults(
            tmp_path, late.replace("[supply.flow", "[supply]\nsubmittal_date = 2026-12-24\n[supply.flow")
        )
        == []
    )
    assert only(faults(tmp_path, late)).place.where == f"{FLOW_TEST}.date"


@pytest.mark.parametrize(
    ("text", "found", "hint"),
    [
        (
            spoilt("k_factor = 5.6", "k_factor = 115"),
            "115 gpm/psi½",
            "looks like L/min/bar½: then write 8.0 gpm/psi½",
        ),
        (spoilt("k_factor = 5.6", "k_factor = 57"), "57 gpm/psi½", "4.0 gpm/psi½"),
        (spoilt("k_factor = 5.6", "k_factor = 8000"), "8000 gpm/psi½", "decimal point"),
        (spoilt("k_factor = 5.6", "k_factor = 0.56"), "0.56 gpm/psi½", "decimal point"),
        (spoilt("k_factor = 80", "k_factor = 5.6", METRIC), "5.6 L/min/bar½", "80.7 L/min/bar½"),
    ],
)
def test_a_k_factor_in_the_wrong_unit(tmp_path: Path, text: str, found: str, hint: str) -> None:
    """K 8.0 is 115 metric and K 4.0 is 57: the nominal pairs of sprinkler makers (from memory).

    5.6 gpm/psi½ is 5.6 × 3.785412 / √0.0689476 = 80.7 L/min/bar½ by the exact factors.
    """
    fault = only(faults(tmp_path, text))
    assert fault.place.where == "sprinkler.A.k_factor"
    assert fault.found == found and hint in fault.remedy


def test_a_k_factor_of_a_node(tmp_path: Path) -> None:
    nodes = NODES.replace("area\n", "area,k_factor\n").replace("A,130\n", "A,130,115\n", 1)
    fault = only(faults(tmp_path, TABLE_PROJECT, nodes))
    assert fault.place.where == "row 2, column k_factor" and "8.0 gpm" in fault.remedy


@pytest.mark.parametrize("level", [1100, -2000])
def test_a_water_level_far_from_its_node(tmp_path: Path, level: int) -> None:
    text = LAYOUT_PROJECT.replace("[supply.margin]", TANK.format(level=level) + "[supply.margin]")
    fault = only(faults(tmp_path, text))
    assert fault.place.where == "supply.tank[1].water_level" and "1000 ft" in fault.allowed


@pytest.mark.parametrize("key", ["head_spacing = 13", "line_spacing = 10"])
def test_heads_closer_than_any(tmp_path: Path, key: str) -> None:
    name = key.partition(" ")[0]
    fault = only(faults(tmp_path, spoilt(key, f"{name} = 1.3")))
    assert (fault.place.where, fault.found) == (f"layout.{name}", "1.30 ft")


@pytest.mark.parametrize("density", ["0.01", "8.1", '"0.4 mm/min"'])
def test_a_density_in_the_wrong_unit(tmp_path: Path, density: str) -> None:
    fault = only(faults(tmp_path, spoilt('"wet"', f'"wet"\ndensity = {density}\narea = 1500')))
    assert fault.place.where == "criteria.density"


def test_an_elevation_without_its_decimal_point(tmp_path: Path) -> None:
    """It once blamed the length of the feed main."""
    fault = only(faults(tmp_path, spoilt("head_elevation = 15", 'head_elevation = "21500"')))
    assert fault.place.where == "layout.head_elevation"
    assert "21500.00 ft" in fault.found
    level = spoilt("head_elevation = 15", "head_elevation = 5215")
    level = level.replace("bottom_elevation = 1", "bottom_elevation = 52010").replace("-4 }", "5196 }")
    assert only(faults(tmp_path, level)).place.where == "layout.riser.bottom_elevation"


@pytest.mark.parametrize(
    ("curve", "problem"),
    [
        ("[[0, 3], [100, 9], [500, 2], [900, 12]]", "falls while the flow rises"),
        ("[[0, 10], [100, 7.4], [500, 12]]", "falls while the flow rises"),
        ("[[0, 0], [500, 0]]", "zero at every point"),
        ("[[0, 10], [100, 7.5], [500, 12]]", ""),
        ("[[0, 0], [500, 6]]", ""),
    ],
)
def test_the_curve_of_a_device(tmp_path: Path, curve: str, problem: str) -> None:
    found = faults(tmp_path, spoilt("[[0, 2], [500, 6]]", curve))
    if not problem:
        assert found == []
        return
    fault = only(found)
    assert fault.place.where == "device.backflow.curve" and problem in fault.problem
    assert fault.found.endswith(" psi") and fault.found[0].isdigit()
