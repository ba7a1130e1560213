"""Pumps, grade lines, diffusers and tanks in the project file: what is read, and every fault."""

from __future__ import annotations

from pathlib import Path

import pytest
from project_texts import LAYOUT_PROJECT, faults, read

from supplycheck.check import check_project
from supplycheck.model import Device, FlowTest, Project
from supplycheck.units import FOOT, GALLON, GPM, INCH, LPM, PSI

TEST = """\
static = 72
residual = 60
flow = 1000
date = 2026-06-01
gauge_elevation = 0
"""
TANK = '[[supply.tank]]\ntag = "T"\nnode = "S"\nwater_level = 40\n'


def with_pump(keys: str) -> str:
    pump = f'[device.pump]\nkind = "pump"\nsource = "sheet"\n{keys}\n'
    return LAYOUT_PROJECT.replace("[device.backflow]", pump + "[device.backflow]").replace(
        'devices = ["backflow"]', 'devices = ["backflow", "pump"]'
    )


def with_test(keys: str) -> str:
    return LAYOUT_PROJECT.replace(TEST, keys + "\n")


def with_tank(keys: str) -> str:
    return LAYOUT_PROJECT.replace("[supply.flow_test]\n" + TEST, TANK + keys + "\n")


def pump_of(project: Project) -> Device:
    return project.system.device("pump")


def flow_test(project: Project) -> FlowTest:
    return project.supply.tests[0]


RATED = "rated_flow = 500\nrated_pressure = 60\n"
STATED = RATED + "churn_pressure = 72\npressure_at_150 = 42"


def test_three_points_from_a_rating(tmp_path: Path) -> None:
    pump = pump_of(read(tmp_path, with_pump(STATED)))
    assert pump.flows == pytest.approx((0.0, 500 * GPM, 750 * GPM))
    assert pump.values == pytest.approx((72 * PSI, 60 * PSI, 42 * PSI))
    assert pump.pump is not None
    assert (pump.pump.rated_flow, pump.pump.rated_pressure) == pytest.approx((500 * GPM, 60 * PSI))
    assert not pump.pump.from_limits


def test_curve_without_rating_is_read(tmp_path: Path) -> None:
    pump = pump_of(read(tmp_path, with_pump("curve = [[0, 72], [500, 60]]")))
    assert pump.values == pytest.approx((72 * PSI, 60 * PSI))
    assert pump.pump is not None and pump.pump.rated_flow is None


def test_limits_are_an_assumption_with_their_numbers(tmp_path: Path) -> None:
    """NFPA 20: 140 % at no flow and 65 % at 150 % flow of 500 gpm at 60 psi are 84 and 39 psi."""
    project = read(tmp_path, with_pump(RATED + "curve_from_limits = true"))
    pump = pump_of(project)
    assert pump.values == pytest.approx((84 * PSI, 60 * PSI, 39 * PSI))
    assert pump.pump is not None and pump.pump.from_limits
    noted = next(one for one in project.assumptions if one.key == "device.pump.curve")
    assert noted.origin == "assumed" and "84.0 psi" in noted.value and "39.0 psi" in noted.value


def test_speed_by_the_affinity_laws(tmp_path: Path) -> None:
    project = read(tmp_path, with_pump(STATED + "\nspeed = 1600\nrated_speed = 2000"))
    pump = pump_of(project)
    assert pump.flows == pytest.approx((0.0, 400 * GPM, 600 * GPM))
    assert pump.values == pytest.approx((72 * 0.64 * PSI, 60 * 0.64 * PSI, 42 * 0.64 * PSI))
    assert pump.pump is not None and pump.pump.rated_flow == pytest.approx(400 * GPM)
    assert any(one.key == "device.pump.speed" for one in project.assumptions)


@pytest.mark.parametrize(("arrangement", "flow", "net"), [("parallel", 2, 1), ("series", 1, 2)])
def test_two_pumps(tmp_path: Path, arrangement: str, flow: int, net: int) -> None:
    pump = pump_of(read(tmp_path, with_pump(f'{STATED}\ncount = 2\narrangement = "{arrangement}"')))
    assert pump.flows[-1] == pytest.approx(flow * 750 * GPM)
    assert pump.values[0] == pytest.approx(net * 72 * PSI)
    assert pump.pump is not None
    assert pump.pump.rated_flow == pytest.approx(flow * 500 * GPM)
    assert pump.pump.rated_pressure == pytest.approx(net * 60 * PSI)


def test_test_header(tmp_path: Path) -> None:
    pump = pump_of(read(tmp_path, with_pump(STATED + "\ntest_header = [[0, 0], [750, 3]]"))).pump
    assert pump is not None and pump.test_losses == pytest.approx((0.0, 3 * PSI))


@pytest.mark.parametrize(
    ("keys", "where", "says"),
    [
        (RATED, "device.pump.curve", "bounds a curve, it is none"),
        ("", "device.pump.curve", "a pump needs its curve"),
        ("rated_flow = 500", "device.pump.rated_pressure", "rated_flow is given"),
        ("rated_pressure = 60", "device.pump.rated_flow", "rated_pressure is given"),
        (RATED + "churn_pressure = 72", "device.pump.pressure_at_150", "is missing"),
        (RATED + "pressure_at_150 = 40", "device.pump.churn_pressure", "is missing"),
        (RATED + "churn_pressure = 50\npressure_at_150 = 40", "device.pump.churn_pressure", "rises"),
        (RATED + "churn_pressure = 70\npressure_at_150 = 61", "device.pump.churn_pressure", "rises"),
        ("curve = [[0, 60], [500, 61]]", "device.pump.curve", "rises"),
        ("curve = [[0, 60]]", "device.pump.curve", "has one point"),
        ("curve = [[100, 60], [500, 50]]", "device.pump.curve", "does not start at no flow"),
        ("curve = [[0, 60], [0, 50]]", "device.pump.curve", "flows do not rise"),
        (STATED + "\ncurve = [[0, 60], [500, 50]]", "device.pump", "more than once"),
        (STATED + "\ncurve_from_limits = true", "device.pump", "more than once"),
        (STATED + "\nspeed = 1600", "device.pump.rated_speed", "is missing"),
        (STATED + "\nrated_speed = 1600", "device.pump.speed", "is missing"),
        (STATED + "\ncount = 2", "device.pump.arrangement", "is missing"),
        (STATED + '\narrangement = "series"', "device.pump.count", "is missing"),
        (STATED + "\ncount = 0", "device.pump.count", "1"),
        (STATED + "\nloss = 5", "device.pump", "a pump has no loss"),
        (STATED + "\ntest_header = [[100, 2], [50, 1]]", "device.pump.test_header", "must rise"),
        (STATED + "\ntest_header = [[0, 0], [50, -1]]", "device.pump.test_header", "negative"),
        ("rated_flow = 0\nrated_pressure = 60", "device.pump.rated_flow", "is zero"),
        ("rated_flow = 500\nrated_pressure = -60", "device.pump.rated_pressure", "is negative"),
    ],
)
def test_faults_of_pumps(tmp_path: Path, keys: str, where: str, says: str) -> None:
    found = faults(tmp_path, with_pump(keys))
    assert [fault for fault in found if fault.place.where == where and says in str(fault)], found


def test_keys_of_a_pump_on_another_device(tmp_path: Path) -> None:
    text = LAYOUT_PROJECT.replace(
        "curve = [[0, 2], [500, 6]]", "curve = [[0, 2], [500, 6]]\nrated_flow = 5"
    )
    found = faults(tmp_path, text)
    assert [fault.place.where for fault in found] == ["device.backflow.rated_flow"]


HGL = "hgl_high = 170\nhgl_low = 130\nflow = 900\ndate = 2026-06-01"


def test_grade_lines_are_a_supply(tmp_path: Path) -> None:
    """Node S lies at −4 ft: 174 ft and 134 ft of water above it, at 0.433 psi/ft."""
    project = read(tmp_path, with_test(HGL))
    test = flow_test(project)
    assert test.model
    assert test.static == pytest.approx(174 * 0.433 * PSI)
    assert test.points[0].residual == pytest.approx(134 * 0.433 * PSI)
    assert test.points[0].flow == pytest.approx(900 * GPM)
    assert any("grade lines" in one.source for one in project.assumptions)


def test_grade_lines_do_not_need_the_gauge(tmp_path: Path) -> None:
    one = flow_test(read(tmp_path, with_test(HGL)))
    other = flow_test(read(tmp_path, with_test(HGL + "\ngauge_elevation = 100")))
    assert one.gauge_elevation == pytest.approx(-4 * FOOT)
    assert one.static + 0.433 * PSI * -4 == pytest.approx(other.static + 0.433 * PSI * 100)


@pytest.mark.parametrize(
    ("keys", "where", "says"),
    [
        (HGL.replace("flow = 900\n", ""), "flow", "at which flow"),
        (HGL.replace("hgl_low = 130\n", ""), "hgl_low", "is missing"),
        (HGL.replace("hgl_high = 170\n", ""), "hgl_high", "is missing"),
        (HGL.replace("= 130", "= 171"), "hgl_low", "not below"),
        (HGL.replace("= 130", "= -10"), "hgl_low", "below the node"),
        (HGL + "\nstatic = 80", "static", "both given"),
        (TEST.replace("static = 72\n", ""), "static", "is missing"),
        (TEST.replace("gauge_elevation = 0\n", ""), "gauge_elevation", "is missing"),
        (TEST.replace("= 60", "= 72"), "residual", "not below the static"),
        (TEST.replace("= 72", "= -72"), "static", "is negative"),
        (TEST.replace("flow = 1000", "outlets = [{ diameter = 2.5, coefficient = 0.9, pitot = 0 }]"),
         "outlets", "is zero"),
    ],
)  # fmt: skip
def test_faults_of_tests(tmp_path: Path, keys: str, where: str, says: str) -> None:
    found = faults(tmp_path, with_test(keys))
    place = f"supply.flow_test.{where}"
    assert [one for one in found if one.place.where.startswith(place) and says in str(one)], found


def test_grade_lines_carry_a_project_and_are_asked_about(tmp_path: Path) -> None:
    """130 ft above the datum at 900 gpm: the curve of the project passes through 134 ft above node S."""
    read(tmp_path, with_test(HGL))
    result = check_project(tmp_path)
    assert result.supply.static == pytest.approx(174 * 0.433 * PSI)
    assert result.supply.residual == pytest.approx(134 * 0.433 * PSI)
    asked = {one.check: one.state for one in result.findings}
    assert asked["modelled supply"] == "ask authority"
    assert asked["gauge error against the drop"] == "not applicable"


def outlet(keys: str) -> str:
    return with_test(TEST.replace("flow = 1000", f"outlets = [{{ {keys} }}]"))


def test_diffuser_by_its_k_factor(tmp_path: Path) -> None:
    """Q = K√p: 168√16 = 672 gpm; no pumper factor, whatever its opening."""
    made = outlet('kind = "diffuser", diameter = 4.5, k_factor = 168, pitot = 16')
    point = flow_test(read(tmp_path, made)).points[0]
    assert point.flow / GPM == pytest.approx(672.0, rel=1e-9)
    assert point.outlets[0].kind == "diffuser" and point.outlets[0].pumper_factor == 1.0


def test_readings_in_the_other_unit(tmp_path: Path) -> None:
    """29.84 c d² √p with 65 mm and 1.4 bar in inches and psi (NFPA 291)."""
    made = outlet('units = "metric", diameter = 65, coefficient = 0.9, pitot = 1.4')
    flow = flow_test(read(tmp_path, made)).points[0].flow
    expected = 29.84 * 0.9 * (65e-3 / INCH) ** 2 * (1.4e5 / PSI) ** 0.5
    assert flow / GPM == pytest.approx(expected, rel=1e-9)
    assert flow / LPM == pytest.approx(expected * 3.785411784, rel=1e-9)


def test_pumper_outlet_of_any_size_takes_its_factor(tmp_path: Path) -> None:
    made = outlet('kind = "pumper outlet", diameter = 3.8, coefficient = 0.9, pitot = 10')
    assert flow_test(read(tmp_path, made)).points[0].outlets[0].pumper_factor == pytest.approx(0.83)


@pytest.mark.parametrize(
    ("keys", "where", "says"),
    [
        ('kind = "diffuser", diameter = 2.5, pitot = 16', "k_factor", "figure of its maker"),
        ("diameter = 2.5, pitot = 16, k_factor = 168", "k_factor", "is for a diffuser"),
        ('kind = "diffuser", diameter = 2.5, pitot = 16, k_factor = 168, pumper_factor = 0.9',
         "pumper_factor", "does not use it"),
        ('kind = "nozzle", diameter = 2.5, pitot = 16, coefficient = 0.9', "kind", "diffuser"),
    ],
)  # fmt: skip
def test_faults_of_outlets(tmp_path: Path, keys: str, where: str, says: str) -> None:
    found = faults(tmp_path, outlet(keys))
    assert [one for one in found if one.place.where.endswith(where) and says in str(one)], found


def test_tank_with_a_low_level(tmp_path: Path) -> None:
    tank = read(tmp_path, with_tank('low_level = 12\nkind = "break"\nvolume = 30000\nrefill = 200')).supply
    only = tank.tanks[0]
    assert (only.kind, only.lowest_level, only.water_level) == (
        "break",
        pytest.approx(12 * FOOT),
        pytest.approx(40 * FOOT),
    )
    assert (only.volume, only.refill) == (pytest.approx(30000 * GALLON), pytest.approx(200 * GPM))


def test_level_of_a_suction_tank_is_told_as_an_assumption(tmp_path: Path) -> None:
    project = read(tmp_path, with_tank('kind = "suction"'))
    assert any("low_level" in one.key for one in project.assumptions)
    gravity = read(tmp_path, with_tank('kind = "gravity"'))
    assert not any("low_level" in one.key for one in gravity.assumptions)


@pytest.mark.parametrize(
    ("keys", "where", "says"),
    [
        ("low_level = 41", "low_level", "above the water level"),
        ("volume = 0", "volume", "is zero"),
        ("volume = -5", "volume", "is negative"),
        ("refill = -1", "refill", "is negative"),
        ('kind = "pond"', "kind", "reservoir"),
    ],
)
def test_faults_of_tanks(tmp_path: Path, keys: str, where: str, says: str) -> None:
    found = faults(tmp_path, with_tank(keys))
    assert [one for one in found if one.place.where.endswith(where) and says in str(one)], found
