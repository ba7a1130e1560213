"""The report of a network whose only demands are fixed outflows."""

from __future__ import annotations

import pytest
from duty_projects import written

from supplycheck.check import check_project
from supplycheck.report.document import Table
from supplycheck.report.sections.duties import duties
from supplycheck.results.records import Result
from supplycheck.units import PSI


@pytest.fixture(scope="module")
def result(tmp_path_factory: pytest.TempPathFactory) -> Result:
    nodes = ["S,0,supply", "B,0,outlet,,100", "C,10,hose,,50"]
    return check_project(written(tmp_path_factory.mktemp("site"), "", nodes, ["x,S,B,100,2", "y,B,C,80,2"]))


def test_every_outflow_stands_in_its_table_with_the_numbers_of_the_record(result: Result) -> None:
    section = duties(result, 500.0)
    assert section is not None and section.title == "Fixed outflows"
    cases, nodes = (block for block in section.blocks if isinstance(block, Table))
    assert [row.cells[0] for row in cases.rows] == ["all fixed outflows"]
    states = {one.node: one for one in result.duties.rows[0].outlets}
    left = {node.tag: node.pressure for node in result.nodes}
    assert [row.cells[0] for row in nodes.rows] == list(states) == ["B", "C"]
    for row in nodes.rows:
        state = states[row.cells[0]]
        assert row.cells[4] == f"{abs(left[state.node] / PSI):.1f}"
        assert row.cells[5] == f"{state.pressure / PSI:.1f}"
        assert "no minimum pressure is stated" in row.note
    assert [row.cells[3] for row in nodes.rows] == ["100.0", "50.0"]


def test_the_node_that_governs_is_in_bold(result: Result) -> None:
    """C lies higher and further away than B, so that it is the first without pressure."""
    section = duties(result, 500.0)
    assert section is not None
    nodes = section.blocks[1]
    assert isinstance(nodes, Table)
    assert [row.strong for row in nodes.rows] == [False, True]
