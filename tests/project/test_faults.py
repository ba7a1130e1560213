"""Each wrong input gets one clear fault at its place; all faults of a project come at once."""

from __future__ import annotations

from pathlib import Path

import pytest
from project_texts import HEAD, LAYOUT, LAYOUT_PROJECT, NETWORK, NODES, PIPES, TABLE_PROJECT, faults, write

from supplycheck.findings import Fault
from supplycheck.project import ProjectFaultsError, read_project


def only(found: list[Fault]) -> Fault:
    assert len(found) == 1, "\n".join(map(str, found))
    return found[0]


def spoilt(old: str, new: str, text: str = LAYOUT_PROJECT) -> str:
    assert old in text
    return text.replace(old, new)


def test_the_sound_projects_have_no_fault(tmp_path: Path) -> None:
    assert faults(tmp_path, LAYOUT_PROJECT) == []
    assert faults(tmp_path, TABLE_PROJECT) == []


FLOW_TEST = "supply.flow_test"


@pytest.mark.parametrize(
    ("old", "new", "where", "problem", "hint"),
    [
        (
            "residual = 60",
            "resdiual = 60",
            f"{FLOW_TEST}.resdiual",
            "unknown key",
            "did you mean residual?",
        ),
        ("[supply.margin]", "[suply.margin]", "suply", "unknown key", "did you mean supply?"),
        ('title = "Test"', 'title = "T"\ndensity = 1', "project.density", "unknown key", "[criteria]"),
        ("static = 72", 'static = "72 ft"', f"{FLOW_TEST}.static", "not a pressure", "psi"),
        ("static = 72", "static = true", f"{FLOW_TEST}.static", "is not a pressure", "true"),
        ("static = 72", "static = nan", f"{FLOW_TEST}.static", "finite", "nan"),
        ("static = 72", "static = 1e400", f"{FLOW_TEST}.static", "finite", "inf"),
        ("residual = 60", "residual = 72", f"{FLOW_TEST}.residual", "not below the static", "72.0 psi"),
        ("residual = 60", "residual = -1", f"{FLOW_TEST}.residual", "negative", "-1"),
        ("date = 2026-06-01\n", "", f"{FLOW_TEST}.date", "is missing", "Day of the test"),
        ("date = 2026-06-01", 'date = "1 June"', f"{FLOW_TEST}.date", "is not a date", "2026-06-01"),
        ("flow = 1000\n", "", f"{FLOW_TEST}.flow", "is missing", "outlets"),
        ("gauge_elevation = 0\n", "", f"{FLOW_TEST}.gauge_elevation", "is missing", "datum"),
        ("head_spacing = 13", "head_spacing = -13", "layout.head_spacing", "is negative", "-13"),
        ("head_spacing = 13", "head_spacing = 0", "layout.head_spacing", "is zero", "above zero"),
        ("heads = [2, 2]", "heads = [0, 0]", "layout.heads", "no heads", "at least one"),
        ("heads = [2, 2]", "heads = [2, 2, 2]", "layout.heads", "number of entries", "2 or fewer"),
        ("lines = 3", "lines = 0", "layout.lines", "out of range", "1 or more"),
        ("lines = 3", "lines = 3.5", "layout.lines", "whole number", "3.5"),
        ('"2"]', '"2 3/8"]', "layout.cross_main.sizes", "is not a size of steel", "2 1/2"),
        ("schedule 40", "shedule 40", "pipe.lines.material", "is not a material", "did you mean"),
        ("group 1", "group 9", "criteria.hazard", "is not a hazard class", "light hazard"),
        ("NFPA 13 (2022)", "NFPA 13", "project.standard", "has no edition", "EN 12845 (2015)"),
        ("NFPA 13 (2022)", "NFPA 31 (2022)", "project.standard", "is not a standard", "NFPA 13"),
        ('"wet"', '"wett"', "criteria.system", "is not one of the choices", 'did you mean "wet"?'),
        ('"wet"', '"wet"\ndesign_area = []', "criteria.design_area", "is empty", "search"),
        ('"wet"', '"wet"\ndesign_area = ["M1"]', "criteria.design_area", "is not a sprinkler", "M1"),
        ('"wet"', '"wet"\ndesign_area = ["X"]', "criteria.design_area", "no such node", '"X"'),
        ("k_factor = 5.6\n", "", "sprinkler.A.k_factor", "is missing", "K-factor"),
        ('units = "us"\n', "", "units", "is missing", "metric"),
        ('units = "us"', 'units = "si"', "units", "is not one of the choices", "metric"),
        ('["backflow"]', '["backflo"]', "layout.riser.devices", "no such device", "did you mean backflow?"),
        ('sprinkler = "A"', 'sprinkler = "B"', "layout.sprinkler", "no such sprinkler type", "allowed: A"),
        ("curve = [[0, 2], [500, 6]]\n", "", "device.backflow", "has no loss", "equivalent_length"),
        ("[[0, 2], [500, 6]]", "[[500, 2], [0, 6]]", "device.backflow.curve", "do not rise", ""),
        ("[[0, 2], [500, 6]]", "[[0, 2]]", "device.backflow.curve", "one point", "loss = "),
        ("[[0, 2], [500, 6]]", "[[0, 2], [500]]", "device.backflow.curve", "point 2 is not a pair", ""),
        ("[[0, 2], [500, 6]]", "[[0, 2], [500, nan]]", "device.backflow.curve", "finite", "in point 2"),
        ("[[0, 2], [500, 6]]", '[["0 psi", 2]]', "device.backflow.curve", "the unit psi", "gpm"),
        (', devices = ["backflow"]', "", "device.backflow", "in no pipe", "devices"),
        ('source = "data sheet"\n', "", "device.backflow.source", "is missing", ""),
        (
            "bottom_elevation = 1,",
            "bottom_elevation = 15,",
            "layout.riser.bottom_elevation",
            "no length",
            "",
        ),
        ("length = 50", "length = 4", "layout.underground.length", "shorter than", "5.00 ft"),
        ('rule = "none"', 'rule = "fixed"', "supply.margin.pressure", "is missing", "a pressure"),
        ('rule = "none"', 'rule = "non"', "supply.margin.rule", "choices", "none"),
        (
            'rule = "none"',
            'rule = "percent"\npercent = 10',
            "supply.margin.reading",
            "is missing",
            "scaled",
        ),
    ],
)
def test_a_wrong_value_gets_one_fault(
    tmp_path: Path, old: str, new: str, where: str, problem: str, hint: str
) -> None:
    fault = only(faults(tmp_path, spoilt(old, new)))
    assert fault.place.where == where
    assert fault.place.file == "project.toml"
    assert problem in fault.problem
    assert hint in str(fault)


@pytest.mark.parametrize(
    ("nodes", "pipes", "file", "where", "problem"),
    [
        (NODES + "001,1,1,10,junction,,\n", PIPES, "nodes.csv", "row 6", "tag stands twice"),
        (NODES, PIPES + "002,X9,10,lines,1,\n", "pipes.csv", "row 5, column to", "no such node"),
        (NODES + "Z,1,1,10,junction,,\n", PIPES, "nodes.csv", "row 6", "Z is not joined"),
        (
            NODES + "Y,1,1,10,,,\nZ,1,1,10,,,\n",
            PIPES + "Y,Z,9,lines,1,\n",
            "nodes.csv",
            "row 6",
            "not joined to the supply",
        ),
        (NODES.replace("supply", "junction"), PIPES, "project.toml", "network.nodes", "no supply node"),
        (NODES.replace("A,130", ",130", 1), PIPES, "nodes.csv", "row 2, column k_factor", "no K-factor"),
        (NODES.replace("A,130", "A,", 1), PIPES, "nodes.csv", "row 2, column area", "no floor area"),
        (
            NODES.replace("A,130", "B,130", 1),
            PIPES,
            "nodes.csv",
            "row 2, column sprinkler",
            "no such sprinkler",
        ),
        (
            NODES.replace("elevation", "elevaton"),
            PIPES,
            "nodes.csv",
            "row 1, column elevaton",
            "unknown column",
        ),
        (NODES, PIPES.replace("T,S,10", "T,S,-10"), "pipes.csv", "row 4, column length", "negative"),
        (NODES, PIPES.replace("T,S,10", "T,S,nan"), "pipes.csv", "row 4, column length", "cannot be read"),
        (NODES, PIPES.replace("T,S,10", "T,S,1e400"), "pipes.csv", "row 4, column length", "finite"),
        (NODES, PIPES.replace("T,S,10", "T,S,10 psi"), "pipes.csv", "row 4, column length", "the unit psi"),
        (
            NODES,
            PIPES.replace("T,S,10", "T,S,4"),
            "pipes.csv",
            "row 4, column length",
            "difference of elevation",
        ),
        (
            NODES,
            PIPES.replace("1 tee", "1 teee"),
            "pipes.csv",
            "row 3, column fittings",
            "is not a fitting",
        ),
        (
            NODES,
            PIPES.replace("1 tee", "12"),
            "pipes.csv",
            "row 3, column fittings",
            "not a list of fittings",
        ),
        (NODES, PIPES.replace("1 tee", "x" * 20_000), "pipes.csv", "row 3", "a cell is too long"),
        (NODES, PIPES.replace("1 tee", "x" * 10_000_000), "pipes.csv", "row 3", "a cell is too long"),
        (
            NODES,
            PIPES.replace("lines,2,", "lines,2 3/8,"),
            "pipes.csv",
            "row 4, column size",
            "is not a size",
        ),
        (
            NODES,
            PIPES.replace("lines,2,", "line,2,"),
            "pipes.csv",
            "row 4, column kind",
            "no such kind of pipe",
        ),
        (NODES, PIPES.replace("lines,2,", "lines,,"), "pipes.csv", "row 4, column size", "is empty"),
        (NODES, PIPES + "T,T,9,lines,1,\n", "pipes.csv", "row 5, column to", "a node to itself"),
        (NODES + "a\tb,1,1,1,,,\n", PIPES, "nodes.csv", "row 6, column tag", "not a usable tag"),
        ("", PIPES, "project.toml", "network.nodes", "the table is empty"),
        ("tag,elevation\n", PIPES, "project.toml", "network.nodes", "has no rows"),
        (NODES + '"abc,1,2\n', PIPES, "nodes.csv", "row 6", "cannot be read as CSV"),
    ],
)
def test_a_wrong_row_gets_a_fault_with_its_number(
    tmp_path: Path, nodes: str, pipes: str, file: str, where: str, problem: str
) -> None:
    found = faults(tmp_path, TABLE_PROJECT, nodes, pipes)
    assert problem in found[0].problem, "\n".join(map(str, found))
    assert (found[0].place.file, found[0].place.where) == (file, where)
    assert len(found) == (2 if problem == "unknown column" else 1), "\n".join(map(str, found))


def test_all_faults_come_at_once(tmp_path: Path) -> None:
    text = spoilt("residual = 60", "residual = 90")
    text = text.replace('"2"]', '"2 3/8"]').replace("minimum_pressure = 7", "minimum_presure = 7")
    text = text.replace('rule = "none"', 'rule = "fixed"').replace("group 1", "group 7")
    where = [fault.place.where for fault in faults(tmp_path, text)]
    assert sorted(where) == [
        "criteria.hazard",
        "layout.cross_main.sizes",
        "sprinkler.A.minimum_presure",
        "supply.flow_test.residual",
        "supply.margin.pressure",
    ]


def test_an_unreadable_value_hides_no_other(tmp_path: Path) -> None:
    text = spoilt("static = 72", "static = nan").replace("flow = 1000", "flow = -1")
    text = text.replace("gauge_elevation = 0\n", "").replace('rule = "none"', 'rule = "fixed"')
    where = {fault.place.where for fault in faults(tmp_path, text)}
    assert where == {
        "supply.flow_test.static",
        "supply.flow_test.flow",
        "supply.flow_test.gauge_elevation",
        "supply.margin.pressure",
    }


def test_syntax_error_names_line_and_column(tmp_path: Path) -> None:
    fault = only(faults(tmp_path, spoilt("static = 72", "static = 72 psi")))
    line = LAYOUT_PROJECT.splitlines().index("static = 72") + 1
    assert fault.place.where == f"line {line}, column 13"
    assert "static = 72 psi" in fault.found


def test_wrong_encoding_names_the_line(tmp_path: Path) -> None:
    path = write(tmp_path)
    path.write_bytes(path.read_bytes().replace(b'"Test"', b'"Stra\xdfe"'))
    with pytest.raises(ProjectFaultsError) as caught:
        read_project(path)
    fault = only(list(caught.value.faults))
    assert (fault.place.where, fault.allowed) == ("line 3", "UTF-8")
    assert "0xdf" in fault.found


def test_utf_16_is_named(tmp_path: Path) -> None:
    write(tmp_path)
    (tmp_path / "nodes.csv").write_bytes(NODES.encode("utf-16"))
    with pytest.raises(ProjectFaultsError) as caught:
        read_project(tmp_path)
    assert "UTF-16" in str(caught.value)


def test_missing_project_file(tmp_path: Path) -> None:
    with pytest.raises(ProjectFaultsError) as caught:
        read_project(tmp_path / "nothing.toml")
    assert "there is no such folder or project file" in str(caught.value)


def test_missing_table_names_those_there_are(tmp_path: Path) -> None:
    fault = only(faults(tmp_path, spoilt('"nodes.csv"', '"node.csv"', TABLE_PROJECT)))
    assert "does not exist" in fault.problem
    assert "nodes.csv" in fault.remedy


@pytest.mark.parametrize("name", ["../nodes.csv", "sub/../../nodes.csv", "link.csv", "linked/nodes.csv"])
def test_a_path_outside_the_folder_is_refused(tmp_path: Path, name: str) -> None:
    outside, inside = tmp_path / "outside", tmp_path / "inside"
    outside.mkdir()
    inside.mkdir()
    (outside / "nodes.csv").write_text(NODES, encoding="utf-8")
    (tmp_path / "nodes.csv").write_text(NODES, encoding="utf-8")
    (inside / "link.csv").symlink_to(outside / "nodes.csv")
    (inside / "linked").symlink_to(outside, target_is_directory=True)
    fault = only(faults(inside, spoilt('"nodes.csv"', f'"{name}"', TABLE_PROJECT)))
    assert fault.problem == "leads outside the folder of the project"
    assert fault.place.where == "network.nodes"


@pytest.mark.parametrize("name", ["/srv/nodes.csv", "C:\\\\nodes.csv", "\\\\\\\\server\\\\nodes.csv"])
def test_an_absolute_path_is_refused(tmp_path: Path, name: str) -> None:
    fault = only(faults(tmp_path, spoilt('"nodes.csv"', f'"{name}"', TABLE_PROJECT)))
    assert fault.problem == "is an absolute path"


def test_unreadable_workbook(tmp_path: Path) -> None:
    (tmp_path / "book.xlsx").write_bytes(b"no workbook")
    fault = only(faults(tmp_path, spoilt('"nodes.csv"', '"book.xlsx"', TABLE_PROJECT)))
    assert "cannot be read as XLSX" in fault.problem


def test_layout_and_network_exclude_each_other(tmp_path: Path) -> None:
    assert "both given" in only(faults(tmp_path, HEAD + LAYOUT + NETWORK)).problem
    assert "the system is missing" in only(faults(tmp_path, HEAD)).problem


def test_a_closed_valve_before_sprinklers(tmp_path: Path) -> None:
    pipes = PIPES.replace("fittings\n", "fittings,valve\n").replace("elbow 90\n", "elbow 90,closed\n")
    fault = only(faults(tmp_path, TABLE_PROJECT, pipes=pipes))
    assert fault.place.where == "row 4"
    assert "001, 002" in fault.found


def test_titles_keep_markup_and_control_characters(tmp_path: Path) -> None:
    title = "<b>A & B</b> \\u0007 {x} %s"
    project = read_project(write(tmp_path, spoilt('"Test"', f'"{title}"')))
    assert project.facts.title == "<b>A & B</b> \x07 {x} %s"


def test_a_long_text_is_refused(tmp_path: Path) -> None:
    fault = only(faults(tmp_path, spoilt('"Test"', '"' + "x" * 2_000_000 + '"')))
    assert fault.place.where == "project.title"
    assert "10000 characters" in fault.allowed
    assert len(str(fault)) < 500


def test_a_huge_project_file_is_refused(tmp_path: Path) -> None:
    fault = only(faults(tmp_path, LAYOUT_PROJECT + "# " + "x" * 10_000_000))
    assert "too large" in fault.problem


def test_messages_show_control_characters_escaped(tmp_path: Path) -> None:
    fault = only(faults(tmp_path, spoilt("static = 72", 'static = "7\\u001b[31m2"')))
    assert "\x1b" not in str(fault)
    assert "\\x1b" in fault.found


def test_faults_of_the_second_test_name_it(tmp_path: Path) -> None:
    second = "[[supply.flow_test]]\nstatic = 60\nresidual = 70\nflow = 500\n"
    second += "date = 2026-05-01\ngauge_elevation = 0\n"
    text = spoilt("[supply.flow_test]", "[[supply.flow_test]]")
    text = text.replace("[supply.margin]", second + "[supply.margin]")
    assert only(faults(tmp_path, text)).place.where == "supply.flow_test[2].residual"


def test_a_linked_project_file_is_read_where_it_lies(tmp_path: Path) -> None:
    real, other = tmp_path / "real", tmp_path / "other"
    real.mkdir()
    other.mkdir()
    write(real)
    (other / "project.toml").symlink_to(real / "project.toml")
    assert len(read_project(other / "project.toml").system.nodes) == 4


def test_a_circle_of_links_is_a_fault(tmp_path: Path) -> None:
    (tmp_path / "a.toml").symlink_to(tmp_path / "b.toml")
    (tmp_path / "b.toml").symlink_to(tmp_path / "a.toml")
    with pytest.raises(ProjectFaultsError):
        read_project(tmp_path / "a.toml")


def test_flat_keys_of_a_named_table_are_explained_once(tmp_path: Path) -> None:
    fault = only(faults(tmp_path, spoilt("[pipe.lines]", "[pipe]")))
    assert "[pipe.NAME]" in fault.remedy


def test_a_wrong_hazard_hides_no_other_criterion(tmp_path: Path) -> None:
    text = spoilt("NFPA 13 (2022)", "EN 12845 (2015)").replace("hazard group 1", "hazard group 9")
    text = text.replace('"wet"', '"wet"\nquick_response = true\nslope_over_1_in_6 = true')
    assert {fault.place.where for fault in faults(tmp_path, text)} == {
        "criteria.hazard",
        "criteria.quick_response",
        "criteria.slope_over_1_in_6",
    }


@pytest.mark.parametrize(
    ("line", "hint"),
    [
        ("design_area = 5", "a list of tags"),
        ('design_area = "serch"', 'did you mean "search"?'),
        ("velocity_limit = 5", "a table of keys"),
    ],
)
def test_a_choice_names_all_its_forms(tmp_path: Path, line: str, hint: str) -> None:
    assert hint in str(only(faults(tmp_path, spoilt('"wet"', f'"wet"\n{line}'))))
