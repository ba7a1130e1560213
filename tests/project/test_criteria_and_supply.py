"""Criteria with their modifiers, flow tests, margin rules, and the list of what was not given."""

from __future__ import annotations

import math
from pathlib import Path

import pytest
from project_texts import HEAD, LAYOUT, LAYOUT_PROJECT, faults, read

from supplycheck.model import HW_METRIC, HW_US, Project
from supplycheck.units import BAR, FOOT, GPM, INCH, LPM, PSI

SQUARE_FOOT = FOOT**2


def criteria(folder: Path, lines: str, hazard: str = "OH1", standard: str = "NFPA 13 (2022)") -> Project:
    text = HEAD.replace('system = "wet"\n', lines).replace("ordinary hazard group 1", hazard)
    text = text.replace("NFPA 13 (2022)", standard)
    if standard.startswith("EN"):
        text = text.replace('"steel schedule 40"', '"steel schedule 40"\nc_factor = 120')
    return read(folder, text + LAYOUT)


def test_area_of_a_wet_system(tmp_path: Path) -> None:
    """NFPA 13 (2022), ordinary hazard group 1: 0.15 gpm/ft² over 1500 ft² (from memory of the standard)."""
    found = criteria(tmp_path, 'system = "wet"\n').criteria
    assert found.required_area / SQUARE_FOOT == pytest.approx(1500)
    assert found.density / (GPM / SQUARE_FOOT) == pytest.approx(0.15)
    assert found.minimum_pressure / PSI == pytest.approx(7)
    assert (found.modifiers, found.minimum_heads, found.shape_factor) == ((), 1, 1.2)


def test_dry_and_sloped_multiply(tmp_path: Path) -> None:
    """Anvil fire-protection blog (2020): 1500 × 1.3 × 1.3 = 2535 ft², multiplied and not added."""
    found = criteria(tmp_path, 'system = "dry"\nslope_over_1_in_6 = true\n').criteria
    assert found.required_area / SQUARE_FOOT == pytest.approx(2535)
    assert [modifier.factor for modifier in found.modifiers] == [1.3, 1.3]


@pytest.mark.parametrize(("ceiling", "reduction"), [(10, 0.40), (15, 0.325), (20, 0.25), (8, 0.40)])
def test_quick_response_reduction(tmp_path: Path, ceiling: float, reduction: float) -> None:
    """NFPA 13 (from memory): y = −3x/2 + 55; 900 ft² at 10 ft, five heads (sprinklernotes 485)."""
    lines = f'system = "wet"\nquick_response = true\nceiling_height = {ceiling}\n'
    found = criteria(tmp_path, lines).criteria
    assert found.required_area / SQUARE_FOOT == pytest.approx(1500 * (1 - reduction))
    assert found.minimum_heads == 5


def test_quick_response_is_refused_where_it_may_not_be_taken(tmp_path: Path) -> None:
    for lines, where in (
        ('system = "wet"\nquick_response = true\n', "criteria.ceiling_height"),
        ('system = "wet"\nquick_response = true\nceiling_height = 21\n', "criteria.ceiling_height"),
        ('system = "dry"\nquick_response = true\nceiling_height = 12\n', "criteria.quick_response"),
    ):
        text = LAYOUT_PROJECT.replace('system = "wet"\n', lines)
        assert [fault.place.where for fault in faults(tmp_path, text)] == [where]


def test_own_values_come_before_the_class(tmp_path: Path) -> None:
    found = criteria(tmp_path, 'system = "wet"\ndensity = 0.3\narea = 2000\nduration = 45\n').criteria
    assert found.required_area / SQUARE_FOOT == pytest.approx(2000)
    assert (found.density / (GPM / SQUARE_FOOT), found.duration) == (pytest.approx(0.3), 2700)


def test_curves_of_older_editions(tmp_path: Path) -> None:
    """Ordinary hazard group 1 up to 2019: 0.15 at 1500 ft², 0.10 at 4000 ft² (from memory)."""
    found = criteria(tmp_path, 'system = "wet"\narea = 4000\n', standard="NFPA 13 (2016)").criteria
    assert found.density / (GPM / SQUARE_FOOT) == pytest.approx(0.10)


def test_european_criteria(tmp_path: Path) -> None:
    """EN 12845, OH1: 5 mm/min over 72 m² wet, 90 m² dry; 0.35 bar; 10 and 6 m/s (charter.daham.lk/37)."""
    wet = criteria(tmp_path, 'system = "wet"\n', "OH1", "EN 12845 (2015)")
    dry = criteria(tmp_path, 'system = "dry"\n', "OH1", "EN 12845 (2015)")
    assert wet.criteria.required_area == pytest.approx(72)
    assert dry.criteria.required_area == pytest.approx(90)
    assert wet.criteria.density == pytest.approx(5e-3 / 60)
    assert wet.criteria.minimum_pressure == pytest.approx(0.35 * BAR)
    assert (wet.criteria.velocity.pipe_limit, wet.criteria.velocity.valve_limit) == (10, 6)
    assert (wet.law, wet.hose.outside) == (HW_METRIC, 0)


def test_unit_weight_and_law_follow_the_standard(tmp_path: Path) -> None:
    """0.433 psi/ft under NFPA 13, 0.098 bar/m under EN 12845 (both as the trade rounds them)."""
    american = criteria(tmp_path, 'system = "wet"\n')
    european = criteria(tmp_path, 'system = "wet"\n', "OH1", "EN 12845 (2015)")
    assert american.fluid.unit_weight * FOOT / PSI == pytest.approx(0.433)
    assert european.fluid.unit_weight / BAR == pytest.approx(0.098)
    assert american.law == HW_US


def test_dry_steel_has_its_own_c(tmp_path: Path) -> None:
    """NFPA 13 (from memory): black steel 120 wet, 100 dry; equivalent lengths by (C/120)^1.85."""
    wet, dry = criteria(tmp_path, 'system = "wet"\n'), criteria(tmp_path, 'system = "dry"\n')
    assert {pipe.c_factor for pipe in wet.system.pipes} == {120}
    assert {pipe.c_factor for pipe in dry.system.pipes} == {100}
    for a, b in zip(wet.system.pipes, dry.system.pipes, strict=True):
        assert b.equivalent_length == pytest.approx(a.equivalent_length * (100 / 120) ** 1.85)


def test_hose_of_the_class_joins_at_the_supply(tmp_path: Path) -> None:
    """Ordinary hazard: 250 gpm (Brock, taylorfrancis b10340-9)."""
    hose = read(tmp_path).hose
    assert (hose.outside / GPM, hose.outside_node, hose.inside) == (pytest.approx(250), "S", 0)
    text = LAYOUT_PROJECT + '[hose]\ninside = 100\ninside_node = "TOR"\n'
    hose = read(tmp_path, text).hose
    assert (hose.inside / GPM, hose.outside / GPM) == (pytest.approx(100), pytest.approx(150))
    assert (hose.inside_node, hose.outside_node) == ("TOR", "S")


def test_pitot_readings_give_the_flow(tmp_path: Path) -> None:
    """Practitioners' forum: 2½ in, 0.9, 40 psi: 1061 gpm; 4 in, 0.9, 10 psi, factor 0.83: 1127 gpm.

    Both are rounded to 1 gpm, and 29.83 is printed beside our 29.84 (0.7 gpm on the sum): 1.7 gpm in all.
    """
    outlets = "outlets = [{ diameter = 2.5, coefficient = 0.9, pitot = 40 }, "
    outlets += "{ diameter = 4, coefficient = 0.9, pitot = 10 }]"
    project = read(tmp_path, LAYOUT_PROJECT.replace("flow = 1000", outlets))
    point = project.supply.tests[0].points[0]
    assert point.flow / GPM == pytest.approx(1061 + 1127, abs=1.7)
    assert point.outlets[1].pumper_factor == pytest.approx(0.83)
    assert any("pumper_factor" in entry.key for entry in project.assumptions)


def test_points_are_sorted_by_flow(tmp_path: Path) -> None:
    text = LAYOUT_PROJECT.replace(
        "residual = 60\nflow = 1000",
        "points = [{ residual = 50, flow = 1500 }, { residual = 64, flow = 700 }]",
    )
    flows = [point.flow / GPM for point in read(tmp_path, text).supply.tests[0].points]
    assert flows == pytest.approx([700, 1500])


def test_units_of_one_table(tmp_path: Path) -> None:
    text = LAYOUT_PROJECT.replace(
        "static = 72\nresidual = 60\nflow = 1000", 'units = "metric"\nstatic = 5\nresidual = 4\nflow = 3000'
    )
    test = read(tmp_path, text).supply.tests[0]
    assert (test.static / BAR, test.points[0].flow / LPM) == (pytest.approx(5), pytest.approx(3000))


def test_margin_rules_nest(tmp_path: Path) -> None:
    rule = 'rule = "by static"\nbands = [{ rule = "of demand", percent = 10, minimum = 5, below = 50 }, '
    rule += '{ rule = "none" }]'
    margin = read(tmp_path, LAYOUT_PROJECT.replace('rule = "none"', rule)).supply.margin
    assert margin is not None
    assert [limit / PSI for limit, _ in margin.bands] == [pytest.approx(50), math.inf]
    larger = margin.bands[0][1]
    assert (larger.kind, [part.kind for part in larger.parts]) == ("larger of", ["of demand", "fixed"])
    assert larger.parts[0].percent == pytest.approx(0.1)


def test_no_margin_rule_is_none(tmp_path: Path) -> None:
    assert (
        read(tmp_path, LAYOUT_PROJECT.replace('[supply.margin]\nrule = "none"\n', "")).supply.margin is None
    )


def test_what_is_not_given_is_listed_with_its_source(tmp_path: Path) -> None:
    project = read(tmp_path)
    keys = {entry.key for entry in project.assumptions}
    assert keys >= {
        "criteria.density",
        "criteria.area",
        "criteria.minimum_pressure",
        "criteria.maximum_pressure",
        "criteria.duration",
        "pipe.lines.c_factor",
        "pipe.lines: bores",
        "hose.outside",
        "hose.outside_node",
        "supply.compare_at",
        "layout: area of each head",
        "fluid: unit weight",
    }
    assert all(entry.source and entry.value and entry.origin != "given" for entry in project.assumptions)


def test_given_values_are_not_assumed(tmp_path: Path) -> None:
    lines = 'system = "wet"\ndensity = 0.2\narea = 1500\nduration = 60\n'
    lines += "minimum_pressure = 10\nmaximum_pressure = 175\n"
    keys = {entry.key for entry in criteria(tmp_path, lines).assumptions}
    assert not keys & {
        f"criteria.{key}" for key in ("density", "area", "minimum_pressure", "maximum_pressure")
    }


def test_own_catalogue_rows_come_first(tmp_path: Path) -> None:
    rows = (
        '[[catalogue.bore]]\nmaterial = "steel schedule 40"\nnominal = "2"\nbore = 2.1\nsource = "maker"\n'
    )
    rows += '[[catalogue.fitting]]\nfitting = "tee"\nnominal = "1 1/4"\nlength = 7\nsource = "maker"\n'
    project = read(tmp_path, LAYOUT_PROJECT + rows)
    main = next(pipe for pipe in project.system.pipes if pipe.tag == "M2-M1")
    line = next(pipe for pipe in project.system.pipes if pipe.tag == "M1-L1.2")
    assert main.bore / INCH == pytest.approx(2.1)
    assert line.equivalent_length / FOOT == pytest.approx(7)


def test_own_bores_of_a_kind_of_pipe(tmp_path: Path) -> None:
    text = LAYOUT_PROJECT.replace('"steel schedule 40"', '"steel schedule 40"\nbores = { "2" = 2.2 }')
    main = next(pipe for pipe in read(tmp_path, text).system.pipes if pipe.tag == "M2-M1")
    assert main.bore / INCH == pytest.approx(2.2)


def test_a_fluid_needs_its_properties(tmp_path: Path) -> None:
    text = LAYOUT_PROJECT + '[fluid]\nname = "glycol"\n'
    assert [fault.place.where for fault in faults(tmp_path, text)] == ["fluid.density", "fluid.viscosity"]
    fluid = read(tmp_path, text + 'density = "1045 kg/m³"\nviscosity = 6\nsource = "maker"\n').fluid
    assert (fluid.density, fluid.viscosity) == (pytest.approx(1045), pytest.approx(6e-3))
    assert fluid.unit_weight == pytest.approx(1045 * 9.80665)


def test_scenarios(tmp_path: Path) -> None:
    text = LAYOUT_PROJECT + '[[scenario]]\nname = "shut"\nclosed_pipes = ["M3-M2"]\nflows = { TOR = 50 }\n'
    scenario = read(tmp_path, text).scenarios[0]
    assert (scenario.open_heads, scenario.closed_pipes, scenario.with_hose) == (None, ("M3-M2",), True)
    assert scenario.flows[0] == ("TOR", pytest.approx(50 * GPM))
    spoilt = text.replace("M3-M2", "M3-M9").replace("TOR =", "TOP =")
    assert [fault.place.where for fault in faults(tmp_path, spoilt)] == [
        "scenario[1].closed_pipes",
        "scenario[1].flows",
    ]


def test_devices_of_equivalent_length_count_as_pipe(tmp_path: Path) -> None:
    text = LAYOUT_PROJECT.replace("curve = [[0, 2], [500, 6]]", "equivalent_length = 15")
    riser = next(pipe for pipe in read(tmp_path, text).system.pipes if pipe.tag == "BOR-TOR")
    assert riser.devices == ()
    assert "backflow" in [fitting.name for fitting in riser.fittings]
    assert riser.fittings[-1].length / FOOT == pytest.approx(15)
