"""Messages that named the wrong place, the wrong unit, no value at all, or one that cannot be."""

from __future__ import annotations

from pathlib import Path

import pytest
from click.testing import CliRunner
from project_texts import LAYOUT_PROJECT, PIPES, TABLE_PROJECT, faults

from supplycheck.check import check_project
from supplycheck.cli import main
from supplycheck.findings import Fault
from supplycheck.project import ProjectFaultsError, read_project
from supplycheck.report.build import build_document
from supplycheck.report.document import Figure
from supplycheck.results.screen import screen_text
from supplycheck.units import US

SCENARIO = '[[scenario]]\nname = "s"\n'


def spoilt(old: str, new: str, text: str = LAYOUT_PROJECT) -> str:
    assert old in text
    return text.replace(old, new)


def only(found: list[Fault]) -> Fault:
    assert len(found) == 1, "\n".join(map(str, found))
    return found[0]


@pytest.mark.parametrize("place", ["criteria.design_area", "scenario[1].heads"])
def test_every_node_that_is_no_sprinkler_is_named(tmp_path: Path, place: str) -> None:
    tags = '["M1", "L1.1", "M2", "TOR"]'
    if place.startswith("criteria"):
        text = spoilt('"wet"', f'"wet"\ndesign_area = {tags}')
    else:
        text = LAYOUT_PROJECT + SCENARIO + f"heads = {tags}\n"
    fault = only(faults(tmp_path, text))
    assert fault.place.where == place
    assert fault.found == "M1, a junction; M2, a junction; TOR, a junction"


def test_every_unknown_tag_is_named(tmp_path: Path) -> None:
    text = LAYOUT_PROJECT + SCENARIO + 'closed_pipes = ["X1", "X2"]\nheads = ["Y1", "Y2", "Y3"]\n'
    told = {fault.place.where: fault.found for fault in faults(tmp_path, text)}
    assert told == {"scenario[1].closed_pipes": '"X1", "X2"', "scenario[1].heads": '"Y1", "Y2", "Y3"'}


def test_a_scenario_without_heads(tmp_path: Path) -> None:
    fault = only(faults(tmp_path, LAYOUT_PROJECT + SCENARIO + "heads = []\n"))
    assert (fault.place.where, fault.found) == ("scenario[1].heads", "[]")
    assert faults(tmp_path, LAYOUT_PROJECT + SCENARIO + "heads = []\nflows = { TOR = 100 }\n") == []


def test_an_area_outside_the_figure_is_told_in_units_of_the_project(tmp_path: Path) -> None:
    """NFPA 13: ordinary hazard at one point, 1500 ft² (2022)."""
    fault = only(faults(tmp_path, spoilt('"wet"', '"wet"\narea = 15')))
    assert fault.place.where == "criteria.area"
    assert (fault.found, fault.allowed) == ("15.0 ft²", "1500.0 ft²")
    assert "m²" not in str(fault)


@pytest.mark.parametrize(
    ("text", "says"),
    [
        (LAYOUT_PROJECT + '[supply.margin]\nrule = "none"\n', "[supply.margin] stands twice"),
        (spoilt("static = 72", "static = 72\nstatic = 73"), "a key stands twice"),
    ],
)
def test_what_stands_twice_is_no_riddle(tmp_path: Path, text: str, says: str) -> None:
    fault = only(faults(tmp_path, text))
    assert says in str(fault) and "keep one" in fault.remedy and "TOML" not in str(fault)
    assert fault.place.where.startswith("line ")


def test_no_project_at_all(tmp_path: Path) -> None:
    with pytest.raises(ProjectFaultsError) as caught:
        read_project(tmp_path / "nonexist")
    fault = only(list(caught.value.faults))
    assert fault.place.file == str(tmp_path / "nonexist")
    assert "no such folder or project file" in fault.problem and "supplycheck new" in fault.remedy
    with pytest.raises(ProjectFaultsError) as caught:
        read_project(tmp_path)
    assert "no project.toml in this folder" in only(list(caught.value.faults)).problem


def test_bands_and_curves_show_what_was_found(tmp_path: Path) -> None:
    rule = 'rule = "by static"\nbands = [{ below = 80, rule = "none" }, { below = 50, rule = "none" }, '
    rule += '{ rule = "none" }]'
    fault = only(faults(tmp_path, spoilt('rule = "none"', rule)))
    assert (fault.place.where, fault.found) == ("supply.margin.bands[2].below", "50.0 psi")
    assert "80.0 psi" in fault.allowed
    fault = only(faults(tmp_path, spoilt("[[0, 2], [500, 6]]", "[[500, 2], [0, 6]]")))
    assert fault.found == "500.0, 0.0 gpm"


@pytest.mark.parametrize("count", ["1000000", "10000"])
def test_too_many_fittings(tmp_path: Path, count: str) -> None:
    fault = only(faults(tmp_path, TABLE_PROJECT, pipes=PIPES.replace("1 tee", f"{count} gate valve")))
    assert "out of range" in fault.problem and fault.found == f'"{count} gate valve"'


@pytest.mark.parametrize("name", ["", "  "])
def test_new_needs_a_name(tmp_path: Path, name: str, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    printed = CliRunner().invoke(main, ["new", name])
    assert printed.exit_code == 2 and "is empty" in printed.stderr
    assert list(tmp_path.iterdir()) == []
    assert CliRunner().invoke(main, ["new", "."]).exit_code == 0


def test_a_flow_that_the_supply_cannot_give_has_no_pressure(tmp_path: Path) -> None:
    """A curve carried on below zero once printed as a negative pressure available."""
    path = tmp_path / "project.toml"
    path.write_text(spoilt("flow = 1000", "flow = 60"), encoding="utf-8")
    result = check_project(path)
    assert result.verdict == "not adequate" and result.supply.available_pressure < 0
    number = US.text(result.supply.available_pressure, "pressure")
    screen = screen_text(result)
    assert "cannot give this flow" in screen and "more than it can give" in screen
    assert number not in screen
    first = build_document(result).sections[0]
    told = str([block for block in first.blocks if not isinstance(block, Figure)])
    assert "which the supply cannot give" in told
    assert number not in told
