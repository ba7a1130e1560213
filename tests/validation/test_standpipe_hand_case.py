"""A standpipe system worked line by line, after the rules of NFPA 14.

Rules (NFPA 14, published training notes): 250 gpm at each of the two topmost outlets of the most remote
standpipe, 250 gpm for each further one, at most 1000 gpm in a sprinklered building; 100 psi at a 2½ in
outlet. The system is invented. A hose valve of 2½ in counts 31 ft (NFPA 14, from memory), with 1 ft of
pipe. Friction of schedule 40 pipe at C 120 in psi/ft is a table of four digits calculated from
4.52 Q^1.85/(C^1.85 d^4.87); elevation 0.433 psi/ft. Four digits on 35 psi of friction leave 0.02 psi.
"""

from __future__ import annotations

import pytest
from duty_projects import written

from supplycheck.check import check_project
from supplycheck.results.records import Result
from supplycheck.units import GPM, PSI

LOSS = {("2 1/2", 250): 0.2154, ("4", 250): 0.01991, ("4", 500): 0.07178, ("4", 1000): 0.2588}
LOSS_6_AT_1000 = 0.03518
RISE = 0.433
FEED = {"A": 60, "B": 40, "C": 20}
TOLERANCE = 0.02

STANDPIPE = """
[standpipe]
sprinklered = true
connection = "F"
""" + "".join(
    f'\n[[standpipe.riser]]\ntag = "{tag}"\noutlets = ["{tag}90V", "{tag}80V", "{tag}20V"]\n'
    for tag in FEED
)


def tables() -> tuple[list[str], list[str]]:
    """Three standpipes with outlets at 90, 80 and 20 ft, fed from J at 10 ft; connection F at 3 ft."""
    nodes = ["S,0,supply", "J,10,junction", "F,3,junction"]
    pipes = ["main,S,J,100,6", "connection,F,J,30,4"]
    for tag, feed in FEED.items():
        nodes.append(f"{tag}10,10,junction")
        pipes.append(f"feed {tag},J,{tag}10,{feed},4")
        below = 10
        for level in (20, 80, 90):
            nodes += [f"{tag}{level},{level},junction", f"{tag}{level}V,{level},outlet"]
            pipes.append(f"{tag}{below}-{level},{tag}{below},{tag}{level},{level - below},4")
            pipes.append(f"valve {tag}{level},{tag}{level},{tag}{level}V,1,2 1/2,1 angle valve")
            below = level
    return nodes, pipes


@pytest.fixture(scope="module")
def result(tmp_path_factory: pytest.TempPathFactory) -> Result:
    return check_project(written(tmp_path_factory.mktemp("tower"), STANDPIPE, *tables()))


def at_junction(tag: str) -> float:
    """Pressure [psi] needed at J with standpipe ``tag`` most remote, line by line."""
    outlet = 100.0  # the topmost outlet, 90 ft
    top = outlet + 32 * LOSS["2 1/2", 250]  # hose valve: 1 ft of pipe and 31 ft
    level_80 = top + 10 * LOSS["4", 250] + 10 * RISE  # one outlet flows
    second = 100.0 + 32 * LOSS["2 1/2", 250]
    assert second < level_80  # the second outlet has more than it needs
    foot = level_80 + 70 * LOSS["4", 500] + 70 * RISE  # both flow
    return foot + FEED[tag] * LOSS["4", 500]


def of_further(tag: str) -> float:
    """Pressure [psi] needed at J by a further standpipe, which gives 250 gpm at its topmost outlet."""
    return 100.0 + 32 * LOSS["2 1/2", 250] + (80 + FEED[tag]) * LOSS["4", 250] + 80 * RISE


def test_demand_of_the_most_remote_standpipe(result: Result) -> None:
    assert at_junction("A") > max(of_further("B"), of_further("C"))
    at_supply = at_junction("A") + 100 * LOSS_6_AT_1000 + 10 * RISE
    assert at_supply == pytest.approx(158.91, abs=0.005)  # the sum of the lines above
    assert result.demand.pressure / PSI == pytest.approx(at_supply, abs=TOLERANCE)
    assert result.demand.flow / GPM == pytest.approx(1000, rel=1e-9)
    assert result.demand.governing_head == "A90V"


@pytest.mark.parametrize("tag", ["A", "B", "C"])
def test_each_standpipe_in_turn(result: Result, tag: str) -> None:
    row = next(row for row in result.duties.rows if row.label.startswith(f"standpipe {tag} "))
    at_supply = at_junction(tag) + 100 * LOSS_6_AT_1000 + 10 * RISE
    assert row.required_pressure / PSI == pytest.approx(at_supply, abs=TOLERANCE)
    assert row.counts and row.tried == 1


def test_pressure_at_the_fire_department_connection(result: Result) -> None:
    """From J through 30 ft of 4 in at 1000 gpm to a connection 7 ft lower."""
    fed = at_junction("A") + 30 * LOSS["4", 1000] + 7 * RISE
    row = result.duties.connection
    assert row is not None
    assert row.pressure / PSI == pytest.approx(fed, abs=TOLERANCE)
    assert row.flow / GPM == pytest.approx(1000, rel=1e-9)


def test_pressure_at_no_flow_asks_for_regulating_devices(result: Result) -> None:
    """200 psi at datum: 161.0 psi at 90 ft, 165.4 at 80 ft, 191.3 at 20 ft, above 175 psi."""
    rows = {row.node: row for row in result.duties.standpipes}
    for level in (90, 80, 20):
        assert rows[f"A{level}V"].no_flow / PSI == pytest.approx(200 - level * RISE, abs=0.01)
    assert {node for node, row in rows.items() if row.over_limit} == {"A20V", "B20V", "C20V"}
    finding = next(one for one in result.findings if one.check == "regulating devices at hose outlets")
    assert finding.state == "fail" and set(finding.tags) == {"A20V", "B20V", "C20V"}
