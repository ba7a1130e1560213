"""Standpipes, fire flow and hydrants in the project file: figures of the tables, faults named at once."""

from __future__ import annotations

from pathlib import Path

import pytest
from duty_projects import HEAD, written

from supplycheck.model import Project
from supplycheck.project import ProjectFaultsError, read_project
from supplycheck.units import FOOT, GPM, PSI

NODES = ["S,0,supply", "T,5,junction", "A,8,hydrant", "B,9,hydrant", "C,9,hydrant"]
PIPES = ["main,S,T,100,8,,,underground", "la,T,A,20,6", "lb,T,B,20,6", "lc,T,C,20,6"]
HYDRANTS = "".join(f'[[hydrant]]\ntag = "{tag}"\nnode = "{tag}"\n' for tag in "ABC")
FLOW = "[fire_flow]\nflow = 1000\nduration = 60\n"
RISERS = """\
[[standpipe.riser]]
tag = "1"
outlets = ["A", "B"]
[[standpipe.riser]]
tag = "2"
outlets = ["C"]
"""
STANDPIPE = "[standpipe]\nsprinklered = true\n" + RISERS


def read(folder: Path, text: str, nodes: list[str] = NODES, top: str = HEAD) -> Project:
    return read_project(written(folder, text, nodes, PIPES, top=top))


def faults(folder: Path, text: str, nodes: list[str] = NODES, top: str = HEAD) -> list[str]:
    with pytest.raises(ProjectFaultsError) as caught:
        read(folder, text, nodes, top)
    return [f"{fault.place.where}: {fault.problem}" for fault in caught.value.faults]


def looked_up(construction: str, area: float, edition: int, *more: str) -> str:
    lines = [f'construction = "{construction}"', f"area = {area}", f"edition = {edition}", *more]
    return "[fire_flow]\n" + "\n".join(lines) + "\n" + HYDRANTS


@pytest.mark.parametrize(
    ("construction", "area", "gpm", "hours"),
    [
        ("IA", 22_700, 1500, 2),
        ("I-B", 22_701, 1750, 2),
        ("IIA", 47_100, 3000, 3),
        ("IIB", 9_500, 2000, 2),
        ("III-B", 9_801, 2250, 2),
        ("Type V-A", 30_100, 3000, 3),
        ("IV", 52_500, 4000, 4),
        ("VB", 36_000, 5000, 4),
    ],
)
def test_fire_flow_of_the_table(
    tmp_path: Path, construction: str, area: float, gpm: float, hours: float
) -> None:
    """IFC table B105.1 (2012), as published: limits in 1000 ft² by type of construction."""
    project = read(tmp_path, looked_up(construction, area, 2012, "sprinklered = false"))
    assert project.hydrants is not None
    asked = project.hydrants.fire_flow
    assert asked.flow == pytest.approx(gpm * GPM)
    assert asked.duration == hours * 3600
    assert asked.reduction == 0 and asked.area == pytest.approx(area * FOOT**2)
    assert project.criteria.duration == hours * 3600


@pytest.mark.parametrize(
    ("edition", "area", "more", "gpm"),
    [
        (2012, 36_000, (), 1500),  # 75 % off 5000 is 1250, not below 1500
        (2021, 36_000, (), 1250),  # a quarter of 5000
        (2021, 3_600, (), 1000),  # a quarter of 1500 is 375, not below 1000
        (2021, 36_000, ("reduction = 50",), 2500),
        (2012, 3_600, (), 1500),
    ],
)
def test_reduction_for_sprinklers_by_edition(
    tmp_path: Path, edition: int, area: float, more: tuple[str, ...], gpm: float
) -> None:
    """Older rule up to 75 % off, not below 1500 gpm (published); from 2015 on not below 1000 (memory)."""
    project = read(tmp_path, looked_up("VB", area, edition, "sprinklered = true", *more))
    assert project.hydrants is not None
    assert project.hydrants.fire_flow.flow == pytest.approx(gpm * GPM)
    assumed = {note.key for note in project.assumptions if note.origin == "assumed"}
    assert ("fire_flow.reduction" in assumed) == (not more)


@pytest.mark.parametrize(
    ("sprinklered", "gpm"), [("false", 1000), ("true", 500)], ids=["plain", "sprinklered"]
)
def test_dwellings(tmp_path: Path, sprinklered: str, gpm: float) -> None:
    """IFC (2012) B105.1: dwellings up to 3600 ft² 1000 gpm for 1 h, half of it with sprinklers."""
    text = f"[fire_flow]\ndwelling = true\narea = 3600\nedition = 2012\nsprinklered = {sprinklered}\n"
    project = read(tmp_path, text + HYDRANTS)
    assert project.hydrants is not None
    assert project.hydrants.fire_flow.flow == pytest.approx(gpm * GPM)
    assert project.hydrants.fire_flow.duration == 3600


@pytest.mark.parametrize(("gpm", "number"), [(1750, 1), (1751, 2), (2250, 2), (2750, 3), (6000, 3)])
def test_number_of_hydrants_that_share_the_flow(tmp_path: Path, gpm: float, number: int) -> None:
    """IFC appendix C (from memory): 1 up to 1750, 2 up to 2250, 3 up to 2750 gpm; here there are three."""
    project = read(tmp_path, f"[fire_flow]\nflow = {gpm}\n" + HYDRANTS)
    assert project.hydrants is not None
    assert project.hydrants.at_once == number
    assert "fire_flow.hydrants_at_once" in {note.key for note in project.assumptions}


def test_highest_point_is_the_highest_node_of_the_buried_pipes(tmp_path: Path) -> None:
    project = read(tmp_path, FLOW + HYDRANTS)
    assert project.hydrants is not None
    assert project.hydrants.highest_point == "T"
    assert project.hydrants.residual == pytest.approx(20 * PSI)


def test_a_project_without_sprinklers_needs_no_criteria(tmp_path: Path) -> None:
    project = read(tmp_path, FLOW + HYDRANTS)
    assert not project.criteria.has_sprinklers
    assert project.hose.inside == project.hose.outside == 0


@pytest.mark.parametrize(("sprinklered", "cap"), [("true", 1000), ("false", 1250)])
def test_greatest_flow_of_standpipes(tmp_path: Path, sprinklered: str, cap: float) -> None:
    """NFPA 14 (published training notes)."""
    project = read(tmp_path, STANDPIPE.replace("true", sprinklered))
    duty = project.standpipes
    assert duty is not None
    assert duty.greatest_flow == pytest.approx(cap * GPM)
    assert duty.outlet_flow == pytest.approx(250 * GPM)
    asked = [outlet.required_pressure for riser in duty.risers for outlet in riser.outlets]
    assert asked == pytest.approx([100 * PSI] * 3)


def test_small_outlets_need_65_psi(tmp_path: Path) -> None:
    project = read(tmp_path, STANDPIPE.replace('tag = "2"\n', 'tag = "2"\nsize = "1 1/2"\n'))
    assert project.standpipes is not None
    (outlet,) = project.standpipes.risers[1].outlets
    assert outlet.required_pressure == pytest.approx(65 * PSI)


BODY = '[device.body]\ncurve = [[0, 0], [900, 3]]\nsource = "maker"\n'
REGULATOR = '[[standpipe.regulating]]\ntag = "R"\noutlets = ["A"]\nsource = "maker"\nflowing = {}\n'

FAULTS = {
    "no hydrant": (FLOW, "hydrant: there is no hydrant"),
    "no fire flow": (HYDRANTS, "fire_flow: is missing: hydrants need a fire flow"),
    "the same hydrant twice": (
        FLOW + HYDRANTS + '[[hydrant]]\ntag = "A"\nnode = "T"\n',
        "hydrant: the same hydrant stands twice",
    ),
    "two hydrants at a node": (
        FLOW + HYDRANTS + '[[hydrant]]\ntag = "D"\nnode = "A"\n',
        "hydrant: the same node of a hydrant stands twice",
    ),
    "unknown node": (
        FLOW + '[[hydrant]]\ntag = "A"\nnode = "X"\n',
        "hydrant[1].node: there is no such node",
    ),
    "unknown valve": (FLOW + 'valves = ["X"]\n' + HYDRANTS, "fire_flow.valves: there is no such pipe"),
    "unknown device": (
        FLOW + HYDRANTS.replace('node = "A"', 'node = "A"\ndevice = "X"'),
        "hydrant[1].device: is not a device with a loss",
    ),
    "curve too short": (
        FLOW + HYDRANTS.replace('node = "A"', 'node = "A"\ndevice = "body"') + BODY,
        "hydrant[1].device: the curve of body ends before the share of this hydrant in the fire flow",
    ),
    "too many at once": (
        FLOW + "hydrants_at_once = 4\n" + HYDRANTS,
        "fire_flow.hydrants_at_once: is more than there are hydrants",
    ),
    "too little each": (
        FLOW + "hydrants_at_once = 2\ngreatest_each = 400\n" + HYDRANTS,
        "fire_flow.greatest_each: 2 hydrants of so much do not make up the fire flow",
    ),
    "flow and table": (
        FLOW + 'construction = "VB"\n' + HYDRANTS,
        "fire_flow.construction: stands beside a flow that is given",
    ),
    "no edition": (
        '[fire_flow]\nconstruction = "VB"\narea = 9000\nsprinklered = false\n' + HYDRANTS,
        "fire_flow.edition: is missing",
    ),
    "neither flow nor table": ("[fire_flow]\n" + HYDRANTS, "fire_flow.construction: is missing"),
    "too much taken off": (
        looked_up("VB", 9000, 2021, "sprinklered = true", "reduction = 80"),
        "fire_flow.reduction: is more than the edition allows",
    ),
    "edition between": (
        looked_up("VB", 9000, 2013, "sprinklered = true"),
        "fire_flow.edition: ",
    ),
    "beyond the table": (looked_up("VB", 90_000, 2021, "sprinklered = false"), "fire_flow.area: "),
    "unknown construction": (
        looked_up("VIII", 9000, 2021, "sprinklered = false"),
        "fire_flow.construction: ",
    ),
    "unknown key": (FLOW + "durations = 3\n" + HYDRANTS, "fire_flow.durations: unknown key"),
    "negative flow": ("[fire_flow]\nflow = -5\n" + HYDRANTS, "fire_flow.flow: is negative"),
    "no riser": ("[standpipe]\nsprinklered = true\n", "standpipe.riser: is missing"),
    "riser without outlet": (
        '[standpipe]\nsprinklered = true\n[[standpipe.riser]]\ntag = "1"\noutlets = []\n',
        "standpipe.riser[1].outlets: has a wrong number of entries",
    ),
    "not said whether sprinklered": ("[standpipe]\n" + RISERS, "standpipe.sprinklered: is missing"),
    "outlet twice": (
        STANDPIPE.replace('["C"]', '["A"]'),
        "standpipe.riser: the same outlet stands twice",
    ),
    "riser twice": (
        STANDPIPE.replace('"2"', '"1"'),
        "standpipe.riser: the same standpipe stands twice",
    ),
    "odd size": (
        STANDPIPE.replace('tag = "2"\n', 'tag = "2"\nsize = 4\n'),
        "standpipe.riser[2].pressure: is missing: NFPA 14 names 2½ in and 1½ in outlets only",
    ),
    "too little in all": (
        STANDPIPE.replace("true\n", "true\ngreatest_flow = 400\n"),
        "standpipe.greatest_flow: is less than the most remote standpipe gives by itself",
    ),
    "unknown connection": (
        STANDPIPE.replace("true\n", 'true\nconnection = "X"\n'),
        "standpipe.connection: there is no such node",
    ),
    "device at no outlet": (
        STANDPIPE + REGULATOR.format("[[100, 90], [150, 110]]").replace('["A"]', '["T"]'),
        "standpipe.regulating: is no outlet of a standpipe",
    ),
    "inlet falls": (
        STANDPIPE + REGULATOR.format("[[150, 90], [100, 80]]"),
        "standpipe.regulating[1].flowing: the inlet pressures do not rise",
    ),
    "outlet falls": (
        STANDPIPE + REGULATOR.format("[[100, 90], [150, 80]]"),
        "standpipe.regulating[1].flowing: the outlet pressure falls",
    ),
    "outlet above inlet": (
        STANDPIPE + REGULATOR.format("[[100, 110], [150, 120]]"),
        "standpipe.regulating[1].flowing: the outlet pressure is above its inlet pressure",
    ),
    "one row": (
        STANDPIPE + REGULATOR.format("[[100, 90]]"),
        "standpipe.regulating[1].flowing: has a wrong number of entries",
    ),
    "three numbers": (
        STANDPIPE + REGULATOR.format("[[100, 90, 5], [150, 100, 5]]"),
        "standpipe.regulating[1].flowing: a row does not hold two pressures",
    ),
}


@pytest.mark.parametrize("name", FAULTS)
def test_fault_is_named_with_its_place(tmp_path: Path, name: str) -> None:
    text, expected = FAULTS[name]
    found = faults(tmp_path, text)
    assert any(fault.startswith(expected) for fault in found), found


def test_all_faults_at_once(tmp_path: Path) -> None:
    text = FLOW + 'valves = ["X"]\nhighest_point = "Y"\nhydrants_at_once = 9\n' + HYDRANTS
    places = {fault.split(":")[0] for fault in faults(tmp_path, text)}
    assert places == {"fire_flow.valves", "fire_flow.highest_point", "fire_flow.hydrants_at_once"}


def test_a_node_that_draws_already_would_count_twice(tmp_path: Path) -> None:
    nodes = [*NODES[:2], "A,8,hydrant,,500", *NODES[3:]]
    found = faults(tmp_path, FLOW + HYDRANTS, nodes)
    assert any("counted twice" in fault for fault in found)


def test_sprinklers_without_criteria_are_a_fault(tmp_path: Path) -> None:
    nodes = [*NODES[:4], "C,9,sprinkler,K"]
    text = (
        FLOW + HYDRANTS.rsplit("[[hydrant]]", 1)[0] + "[sprinkler.K]\nk_factor = 5.6\ncoverage_area = 100\n"
    )
    assert "criteria: the table is missing" in faults(tmp_path, text, nodes)
    none = '[criteria]\nhazard = "none"\nsystem = "wet"\n'
    found = faults(tmp_path, none + text, nodes)
    assert "criteria.hazard: there are sprinklers, but no hazard class" in found


def test_nothing_to_check_is_a_fault(tmp_path: Path) -> None:
    found = faults(tmp_path, '[criteria]\nhazard = "none"\nsystem = "wet"\n')
    assert "criteria.hazard: there is nothing to check" in found


def test_duties_in_metric_units(tmp_path: Path) -> None:
    """1 bar is 1e5 Pa, 1 L/min 1e-3/60 m³/s; the standard's own 250 gpm stays what it is."""
    top = HEAD.replace('"us"', '"metric"')
    text = "[fire_flow]\nflow = 3800\nresidual = 1.4\n" + HYDRANTS
    test = (
        "[supply.flow_test]\nstatic = 6\nresidual = 4\nflow = 4000\ndate = 2026-06-01\n"
        'gauge_elevation = 0\n[supply.margin]\nrule = "none"\n'
    )
    project = read_project(written(tmp_path, text, NODES, PIPES, top=top, test=test))
    assert project.hydrants is not None
    assert project.hydrants.fire_flow.flow == pytest.approx(3.8 / 60)
    assert project.hydrants.residual == pytest.approx(1.4e5)
