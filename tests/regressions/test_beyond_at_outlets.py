"""Hydrants, nodes and pumps once were read beyond the curve of a device without a word.

All water of these networks passes one pipe with the device, so that its flow is the sum of what is drawn.
"""

from __future__ import annotations

from pathlib import Path

import pytest
from duty_projects import supply, written

from supplycheck.check import check_project
from supplycheck.results.json import result_record
from supplycheck.results.records import Result
from supplycheck.units import GPM

FLOW = """
[fire_flow]
flow = 500
duration = 120
hydrants_at_once = 1
[[hydrant]]
tag = "A"
node = "A"
[device.meter]
curve = [[0, 1], [{end}, 6]]
source = "maker"
"""
SHUT = '[[scenario]]\nname = "loop shut"\nclosed_pipes = ["second"]\n'
NODES = ["S,0,supply", "B,0,junction", "A,0,hydrant"]
PIPES = [
    "main,S,B,100,8,,meter,underground",
    "first,B,A,300,6,,,underground",
    "second,B,A,300,6,,,underground",
]


def hydrant(folder: Path, end: int, more: str = "") -> Result:
    text = FLOW.format(end=end) + more
    return check_project(written(folder, text, NODES, PIPES, test=supply(100, 90, 1500)))


@pytest.mark.parametrize(("end", "said"), [(600, True), (9000, False)])
def test_greatest_flow_of_a_hydrant(tmp_path: Path, end: int, said: bool) -> None:
    """500 gpm lie on the curve to 600; the greatest flow, above the 1500 gpm of the test, does not."""
    result = hydrant(tmp_path, end)
    (row,) = result.duties.hydrants
    assert row.greatest_flow is not None and row.greatest_flow > 1500 * GPM
    assert ("beyond the curve of meter" in row.note) == said
    assert all("beyond" not in one.note for one in result.duties.rows)


def test_what_a_hydrant_case_leaves(tmp_path: Path) -> None:
    result = hydrant(tmp_path, 400)
    assert result.verdict == "undetermined"
    assert all("beyond the curve of meter" in one.note for one in result.duties.rows)


def test_a_scenario_without_heads_or_flows_draws_what_the_case_draws(tmp_path: Path) -> None:
    """The hydrant gives its 500 gpm, whichever pipe of the loop is shut."""
    result = hydrant(tmp_path, 9000, SHUT + '[[scenario]]\nname = "less"\nflows = { A = 200 }\n')
    drawn = {one.name: one.total_flow / GPM for one in result.scenarios}
    assert drawn["loop shut"] == pytest.approx(500, rel=1e-9)
    assert drawn["less"] == pytest.approx(200, rel=1e-9)


PUMP = """
[device.booster]
kind = "pump"
rated_flow = 100
rated_pressure = 40
curve = [[0, 47], [100, 40], [150, 28]]
source = "maker"
"""


def test_nodes_that_ask_for_a_pressure_and_pumps(tmp_path: Path) -> None:
    """200 gpm are drawn through a pump whose curve ends at 150."""
    nodes = ["S,0,supply", "B,0,outlet,,200"]
    folder = written(tmp_path, PUMP, nodes, ["x,S,B,100,4,,booster"], test=supply(100, 90, 1500))
    lines = (folder / "nodes.csv").read_text(encoding="utf-8").splitlines()
    lines = [f"{line},{end}" for line, end in zip(lines, ("minimum_pressure", "", "20"), strict=True)]
    (folder / "nodes.csv").write_text("\n".join(lines) + "\n", encoding="utf-8")
    texts = {one["check"]: one["text"] for one in result_record(check_project(folder))["findings"]}
    assert "beyond the curve of booster" in texts["pressure asked at nodes"]
    assert "(200.0 gpm, beyond the end of its curve)" in texts["pump suction"]
