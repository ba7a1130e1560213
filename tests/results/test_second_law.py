"""Demand, supply and margin by the second friction law, beside the first, which decides."""

from __future__ import annotations

import json
import math
from dataclasses import replace
from pathlib import Path

import fluids
import pytest
from duty_projects import HEAD, written

from supplycheck.check import check, check_project
from supplycheck.project import read_project
from supplycheck.report.build import build_document
from supplycheck.report.document import Facts, Table
from supplycheck.results.display import second_law_text
from supplycheck.results.json import result_json
from supplycheck.results.records import Result
from supplycheck.results.screen import screen_text
from supplycheck.units import GPM, INCH, METRIC, PSI

OFFICE = Path(__file__).parents[2] / "examples" / "office-floor"
FOOT = 0.3048
ROUGHNESS = 0.0018 * INCH


@pytest.fixture(scope="module")
def office() -> Result:
    return check_project(OFFICE)


def test_one_pipe_by_hand(tmp_path: Path) -> None:
    """A level pipe of 2.067 in (ASTM A53), 100 ft, 150 gpm to an outlet that needs no pressure.

    The loss is ρ f L v² / 2D with the friction factor of the fluids library (exact Colebrook).
    """
    steel = "[pipe.steel]\nroughness = '0.0018 in'"
    top = (
        HEAD.replace("[pipe.steel]", steel) + '[criteria]\nhazard = "none"\nsecond_law = "darcy-weisbach"\n'
    )
    folder = written(tmp_path, "", ["S,0,supply", "B,0,outlet,,150"], ["x,S,B,100,2"], top=top)
    result = check_project(folder)
    bore, fluid = 2.067 * INCH, result.project.fluid
    velocity = 150 * GPM / (math.pi * bore**2 / 4)
    reynolds = fluid.density * velocity * bore / fluid.viscosity
    factor = fluids.friction_factor(Re=reynolds, eD=ROUGHNESS / bore, Method="Colebrook")
    loss = fluid.density * factor * 100 * FOOT / bore * velocity**2 / 2
    second = result.second_law
    assert second is not None
    assert second.pressure == pytest.approx(loss, rel=1e-6)
    assert second.flow == pytest.approx(150 * GPM, rel=1e-9)
    # NFPA 13: 4.52 Q^1.85 / (C^1.85 d^4.87) psi a foot, C 120
    first = 4.52 * 150**1.85 / (120**1.85 * 2.067**4.87) * 100 * PSI
    assert result.demand.pressure == pytest.approx(first, rel=1e-6)
    # static 200 psi, residual 180 psi at 1500 gpm
    available = (200 - 20 * (150 / 1500) ** 1.85) * PSI
    assert second.available_pressure == pytest.approx(available, rel=1e-6)
    assert second.margin == pytest.approx(available - loss, rel=1e-6)


def test_it_is_the_answer_of_the_same_project_by_that_law_alone(office: Result) -> None:
    project = read_project(OFFICE)
    law = project.second_law
    assert law is not None
    alone = check(replace(project, law=law, second_law=None))
    assert alone.design_area.governing.heads == office.design_area.governing.heads
    second = office.second_law
    assert second is not None
    assert second.flow == pytest.approx(alone.demand.flow, rel=1e-6)
    assert second.pressure == pytest.approx(alone.demand.pressure, rel=1e-6)
    assert second.margin == pytest.approx(alone.margin.pressure, rel=1e-6)
    assert second.after_rule == pytest.approx(alone.margin.after_rule, rel=1e-6)


def test_the_record_holds_it_with_the_difference_and_which_decides(office: Result) -> None:
    record = json.loads(result_json(office))
    second, first = record["second_law"], record["demand"]
    assert second["decides"].startswith("Hazen-Williams")
    assert second["name"].startswith("Darcy-Weisbach")
    assert second["difference"]["pressure"] == pytest.approx(second["pressure"] - first["pressure"])
    assert second["difference"]["flow"] == pytest.approx(second["flow"] - first["flow"])
    gap = second["margin"] - record["margin"]["pressure"]
    assert second["difference"]["margin"] == pytest.approx(gap)


def test_without_a_second_law_there_is_none() -> None:
    result = check_project(OFFICE.with_name("parcel-depot"))
    assert result.second_law is None
    assert json.loads(result_json(result))["second_law"] is None
    assert "Second law" not in screen_text(result)
    assert "Both friction laws" not in repr(build_document(result))


def test_the_report_and_the_screen_say_both_and_which_decides(office: Result) -> None:
    second = office.second_law
    assert second is not None
    sections = {one.title: one for one in build_document(office).sections}
    tables = [one for one in sections["Water supply analysis"].blocks if isinstance(one, Table)]
    table = next(one for one in tables if one.title == "Both friction laws")
    assert [row.cells[0] for row in table.rows] == [
        "Hazen-Williams",
        "Darcy-Weisbach",
        "Darcy-Weisbach less Hazen-Williams",
    ]
    assert table.rows[0].cells[2] == METRIC.number(office.demand.pressure, "pressure")
    assert table.rows[1].cells[2] == METRIC.number(second.pressure, "pressure")
    assert "The verdict rests on Hazen-Williams." in table.note
    told = second_law_text(office, METRIC)
    assert METRIC.text(second.pressure, "pressure") in told
    assert "Hazen-Williams decides" in told
    facts = [pair for one in sections["The answer"].blocks if isinstance(one, Facts) for pair in one.pairs]
    assert ("Second law", told) in facts
    assert "Second law" in screen_text(office)


def test_another_answer_by_the_second_law_is_pointed_out(office: Result) -> None:
    second = office.second_law
    assert second is not None
    short = replace(office, second_law=replace(second, margin=-1.0e4, after_rule=-6.0e4))
    assert second_law_text(short, METRIC).endswith("By Darcy-Weisbach alone the answer would be another.")
    assert "alone" not in second_law_text(office, METRIC)


def test_a_case_without_a_solution_by_the_second_law_says_why(office: Result) -> None:
    nothing = math.nan
    second = office.second_law
    assert second is not None
    lost = replace(second, flow=nothing, pressure=nothing, margin=nothing, note="no solution: of no use")
    result = replace(office, second_law=lost)
    assert "no solution: of no use" in second_law_text(result, METRIC)
    assert json.loads(result_json(result))["second_law"]["pressure"] is None
    assert "Both friction laws: by Darcy-Weisbach no solution: of no use." in repr(build_document(result))
