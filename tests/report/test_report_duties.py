"""The pages on hydrants and standpipes: every number on them stands in ``result.json``."""

from __future__ import annotations

import json
import re
from dataclasses import replace
from functools import cache
from pathlib import Path
from typing import Any

import pytest

from supplycheck.check import check_project
from supplycheck.report.build import build_document
from supplycheck.report.document import Facts, Figure, Heading, Paragraph, Section, Table
from supplycheck.report.drawing import Label
from supplycheck.report.figures.plan import whole_plan
from supplycheck.report.sections.duties import duties
from supplycheck.results.json import result_json
from supplycheck.results.records import Result
from supplycheck.results.screen import screen_text
from supplycheck.results.tables import frames
from supplycheck.units import US

EXAMPLES = Path(__file__).parents[2] / "examples"
YARD, TOWER = "yard-main", "tower-standpipe"


@cache
def result_of(name: str) -> Result:
    return check_project(EXAMPLES / name)


def section_of(name: str) -> Section:
    found = duties(result_of(name), 500.0)
    assert found is not None
    return found


def record_of(name: str) -> dict[str, Any]:
    found: dict[str, Any] = json.loads(result_json(result_of(name)))
    return found


def tables_of(name: str) -> dict[str, Table]:
    return {block.title: block for block in section_of(name).blocks if isinstance(block, Table)}


def test_only_where_there_are_hydrants_or_standpipes() -> None:
    assert duties(result_of("office-floor"), 500.0) is None
    assert section_of(YARD).title == "Hydrants"
    assert section_of(TOWER).title == "Standpipes"
    titles = [section.title for section in build_document(result_of(YARD)).sections]
    assert titles.index("Hydrants") < titles.index("Plan")


def test_every_case_stands_in_the_table_with_the_numbers_of_the_record() -> None:
    for name in (YARD, TOWER):
        cases = record_of(name)["duties"]["cases"]
        rows = tables_of(name)["Cases side by side"].rows
        assert [row.cells[0] for row in rows] == [case["label"] for case in cases]
        for row, case in zip(rows, cases, strict=True):
            printed = [text.replace("−", "-") for text in row.cells[2:5]]
            wanted = [case["flow"], case["required_pressure"], case["margin"]]
            assert printed == [f"{number:.1f}" for number in wanted]
            least = min(case["outlets"], key=lambda one: one["spare"])
            assert row.cells[5:] == (
                least["node"],
                f"{least['pressure']:.1f}" if least["pressure"] >= 0 else "none",
                f"{least['required']:.1f}",
            )
        assert sum(row.strong for row in rows) == 1


def test_the_governing_case_is_the_hardest_that_counts() -> None:
    for name in (YARD, TOWER):
        found = record_of(name)
        counted = [case for case in found["duties"]["cases"] if case["counts"]]
        (hardest,) = [case for case in counted if found["governs"].endswith(f" in {case['label']}")]
        # two standpipes of the tower stand alike: a millionth of a psi is round-off
        assert hardest["margin"] <= min(case["margin"] for case in counted) + 1e-6
        assert found["margin"]["pressure"] == pytest.approx(hardest["margin"], rel=1e-6)
        assert found["demand"]["flow"] == pytest.approx(hardest["flow"], rel=1e-9)
        assert found["demand"]["outlet_flow"] == pytest.approx(hardest["flow"], rel=1e-9)


def test_a_sheet_for_each_hydrant() -> None:
    headings = [block.text for block in section_of(YARD).blocks if isinstance(block, Heading)]
    assert headings == ["Fire flow", "Hydrant A", "Hydrant B", "Hydrant C"]
    cases = record_of(YARD)["duties"]["cases"]
    for tag in "ABC":
        rows = tables_of(YARD)[f"Cases with hydrant {tag}"].rows
        flowing = [
            case["label"]
            for case in cases
            if any(one["node"] == f"H{tag}" and one["flow"] > 0 for one in case["outlets"])
        ]
        assert [row.cells[0] for row in rows] == flowing


def test_each_hydrant_by_itself() -> None:
    rows = tables_of(YARD)["Each hydrant by itself"].rows
    for row, hydrant in zip(rows, record_of(YARD)["duties"]["hydrants"], strict=True):
        numbers = ("static", "alone", "residual_alone", "greatest_flow", "greatest_flow_on_maximum_day")
        assert row.cells[2:7] == tuple(f"{hydrant[name]:.1f}" for name in numbers)
        assert row.cells[8] == f"{hydrant['class']}, {hydrant['colour']}"


def test_more_demand_elsewhere_never_lets_a_hydrant_give_more() -> None:
    for hydrant in record_of(YARD)["duties"]["hydrants"]:
        assert hydrant["greatest_flow_on_maximum_day"] < hydrant["greatest_flow"]


def test_the_graph_marks_the_hardest_case_of_each_kind() -> None:
    (figure,) = [block for block in section_of(YARD).blocks if isinstance(block, Figure)]
    texts = [item.text for item in figure.drawing.items if isinstance(item, Label)]
    for kind in ("hydrants", "maximum day", "valve shut"):
        cases = [case for case in record_of(YARD)["duties"]["cases"] if case["kind"] == kind]
        hardest = min(cases, key=lambda case: case["margin"])
        assert any(text.startswith(f"{hardest['label']}: ") for text in texts), texts


def test_every_outlet_of_the_standpipes() -> None:
    found = record_of(TOWER)["duties"]
    rows = tables_of(TOWER)["Every hose outlet"].rows
    assert len(rows) == len(found["standpipe_outlets"]) == 50
    for row, outlet in zip(rows, found["standpipe_outlets"], strict=True):
        assert row.cells[1] == outlet["node"]
        assert row.cells[6] == f"{outlet['no_flow']:.1f}"
        assert (row.cells[7] == "none") == (outlet["device"] == "")
        assert row.strong == outlet["over_limit"]


def test_the_connection_is_told_in_words_and_numbers() -> None:
    fed = record_of(TOWER)["duties"]["fire_department_connection"]
    (text,) = [block.text for block in section_of(TOWER).blocks if isinstance(block, Paragraph)]
    assert f"at {fed['node']}: {fed['pressure']:.1f} psi" in text
    assert f"{fed['flow']:.1f} gpm" in text and fed["case"] in text


def test_where_the_fire_flow_comes_from() -> None:
    facts = next(block for block in section_of(YARD).blocks if isinstance(block, Facts))
    pairs = dict(facts.pairs)
    assert pairs["Required fire flow"] == "2000.0 gpm"
    assert "IIB" in pairs["Looked up for"] and "IFC (2021)" in pairs["Looked up for"]


def test_screen_names_the_cases() -> None:
    text = screen_text(result_of(YARD), "")
    assert re.search(r"^Cases +18 of hydrants side by side in the report, 6 count", text, re.MULTILINE)
    assert "at outlets" in text and "Design area" not in text
    assert len(text.splitlines()) <= 24


def test_basis_without_sprinklers_prints_no_density() -> None:
    document = build_document(result_of(YARD))
    basis = next(section for section in document.sections if section.title == "Basis of design")
    labels = [pair[0] for block in basis.blocks if isinstance(block, Facts) for pair in block.pairs]
    assert "Density" not in labels and "Sprinklers" in labels


def test_tables_hold_every_case_outlet_and_hydrant() -> None:
    tables = frames(result_of(YARD))
    found = record_of(YARD)["duties"]
    assert list(tables["cases"]["case"]) == [case["label"] for case in found["cases"]]
    assert list(tables["cases"]["margin [psi]"]) == [case["margin"] for case in found["cases"]]
    assert len(tables["case_outlets"]) == sum(len(case["outlets"]) for case in found["cases"])
    assert list(tables["hydrants"]["greatest_flow [gpm]"]) == [
        one["greatest_flow"] for one in found["hydrants"]
    ]
    assert "hose_outlets" not in tables and len(frames(result_of(TOWER))["hose_outlets"]) == 50
    assert "cases" not in frames(result_of("office-floor"))


LEGEND = {"head in the design area", "head", "other head", "supply", "design area", "shut pipe"}


@pytest.mark.parametrize("name, outlets", [(YARD, "hydrant"), (TOWER, "outlet")])
def test_a_plan_without_sprinklers_speaks_of_none(name: str, outlets: str) -> None:
    section = next(one for one in build_document(result_of(name)).sections if one.title == "Plan")
    words = {
        item.text
        for block in section.blocks
        if isinstance(block, Figure)
        for item in block.drawing.items
        if isinstance(item, Label)
    }
    assert outlets in words
    assert not words & (LEGEND - {"supply"})


def test_the_legend_of_a_plan_holds_what_is_drawn() -> None:
    result = result_of("parcel-depot")
    hose = replace(
        result, nodes=tuple(replace(n, kind="hose") if n.tag == "S" else n for n in result.nodes)
    )
    for one, drawn in ((result, {"supply"}), (hose, {"hose"})):
        view = whole_plan(one, US, (522.0, 400.0))
        words = {item.text for item in view.drawing.items if isinstance(item, Label)}
        expected = {"head in the design area", "other head", "design area"}
        expected |= drawn if "S" not in view.outside else set()
        assert words & (LEGEND | {"hose", "hydrant", "outlet"}) == expected


def test_pages_without_sprinklers_do_not_speak_of_a_design_area() -> None:
    """Findings and the echo of the input apart, which say that it does not apply."""
    for name in (YARD, TOWER):
        sections = build_document(result_of(name)).sections
        told = [one for one in sections if one.title not in ("Findings", "Input as read")]
        assert "design area" not in repr(told).replace("the design area of", "")
        flows = next(one for one in sections if one.title.startswith("What really flows"))
        table = next(block for block in flows.blocks if isinstance(block, Table))
        assert "Lowest head" not in [column.title for column in table.columns]


def test_the_basis_names_the_section_that_holds_what_is_asked() -> None:
    for name, title in ((YARD, "hydrants"), (TOWER, "standpipes")):
        basis = next(
            one for one in build_document(result_of(name)).sections if one.title == "Basis of design"
        )
        facts = [pair for block in basis.blocks if isinstance(block, Facts) for pair in block.pairs]
        assert ("Sprinklers", f"none in this project; what is asked stands under {title}") in facts


def test_questions_on_standpipes_hold_no_key_of_the_project_file() -> None:
    asked = next(one for one in result_of(TOWER).open_questions if "assumed values" in one)
    assert "riser" not in asked
    assert "hose outlets of 2.500 in at all 5 standpipes" in asked
    assert "no fittings beyond those written in the tables" in asked
