"""The margin is the same wherever demand and supply are compared and wherever heights are counted from.

The whole pipeline, from project file to result, over the chain test hydrant → main → lead-in → meter →
backflow → riser, each with its own height and its loss at the real flow.
"""

from __future__ import annotations

import tempfile
from dataclasses import dataclass
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from supplycheck.check import check_project
from supplycheck.results.records import Result

CHAIN = ("HYD", "MAIN", "LEAD", "METER", "BACK", "TOR")
HEADS = ("H1", "H2")
RULES = (
    'rule = "fixed"\npressure = 5',
    'rule = "percent"\npercent = 10\nreading = "static lowered"',
    'rule = "percent"\npercent = 10\nreading = "pressure scaled"',
    'rule = "percent"\npercent = 10\nreading = "flow scaled"',
    'rule = "of demand"\npercent = 10',
    'rule = "by static"\nbands = [{ below = 60, rule = "fixed", pressure = 3 }, '
    '{ rule = "percent", percent = 10, reading = "pressure scaled" }]',
)  # fmt: skip


@dataclass(frozen=True)
class Chain:
    heights: tuple[float, ...]
    lengths: tuple[float, ...]
    static: float
    drop: float
    hose: float
    rule: str
    pump: bool
    tank: bool = False

    def text(self, datum: float, at: str) -> str:
        gauge = self.heights[0] + 3 + datum
        pump = (
            '[device.pump]\nkind = "pump"\nsource = "made up"\nrated_flow = 300\nrated_pressure = 30\n'
            "churn_pressure = 36\npressure_at_150 = 21\n"
        )
        test = (
            f"[supply.flow_test]\nstatic = {self.static}\nresidual = {self.static - self.drop}\n"
            f"flow = 900\ndate = 2026-06-01\ngauge_elevation = {gauge}"
        )
        tank = (
            f'[[supply.tank]]\ntag = "T"\nnode = "HYD"\nwater_level = {gauge + 2.3 * self.static}\n'
            f"low_level = {gauge + 2.3 * self.static - self.drop}"
        )
        return f"""\
units = "us"
[project]
title = "Chain"
date = 2026-11-20
standard = "NFPA 13 (2022)"
[criteria]
hazard = "ordinary hazard group 1"
system = "wet"
design_area = ["H1", "H2"]
[sprinkler.A]
k_factor = 8
minimum_pressure = 7
[pipe.lines]
material = "steel schedule 40"
[device.meter]
curve = [[0, 0], [250, 3], [700, 21]]
source = "made up"
[device.backflow]
curve = [[0, 4], [250, 6], [700, 14]]
source = "made up"
{pump if self.pump else ""}
[network]
nodes = "nodes.csv"
pipes = "pipes.csv"
[supply]
node = "HYD"
compare_at = "{at}"
{tank if self.tank else test}
[supply.margin]
{self.rule}
[hose]
outside = {self.hose}
outside_node = "LEAD"
"""

    def tables(self, datum: float) -> tuple[str, str]:
        top = self.heights[-1]
        nodes = ["tag,x,y,elevation,kind,sprinkler,area"]
        for row, (tag, height) in enumerate(zip(CHAIN, self.heights, strict=True)):
            kind = "junction" if row else "supply"
            nodes.append(f"{tag},{row * 5},0,{height + datum},{kind},,")
        nodes += [f"{tag},{35 + 10 * row},0,{top + datum},sprinkler,A,100" for row, tag in enumerate(HEADS)]
        devices = ("", "", "meter", "backflow", "pump" if self.pump else "")
        pipes = ["from,to,length,kind,size,fittings,devices"]
        for start, end, length, device in zip(CHAIN, CHAIN[1:], self.lengths, devices, strict=False):
            rise = abs(self.heights[CHAIN.index(end)] - self.heights[CHAIN.index(start)])
            pipes.append(f"{start},{end},{length + rise},lines,2,1 elbow 90,{device}")
        pipes += ["TOR,H1,10,lines,1 1/4,1 tee,", "H1,H2,10,lines,1,none,"]
        return "\n".join(nodes) + "\n", "\n".join(pipes) + "\n"

    def checked(self, datum: float, at: str) -> Result:
        with tempfile.TemporaryDirectory() as name:
            folder = Path(name)
            nodes, pipes = self.tables(datum)
            (folder / "project.toml").write_text(self.text(datum, at), encoding="utf-8")
            (folder / "nodes.csv").write_text(nodes, encoding="utf-8")
            (folder / "pipes.csv").write_text(pipes, encoding="utf-8")
            return check_project(folder)


def between(low: float, high: float) -> st.SearchStrategy[float]:
    return st.floats(low, high).map(lambda number: round(number, 2))


CHAINS = st.builds(
    Chain,
    heights=st.tuples(*[between(-6, 30)] * len(CHAIN)),
    lengths=st.tuples(*[between(5, 200)] * (len(CHAIN) - 1)),
    static=between(40, 120),
    drop=between(4, 30),
    hose=st.sampled_from((0.0, 100.0, 250.0)),
    rule=st.sampled_from(RULES),
    pump=st.booleans(),
    tank=st.booleans(),
)


@settings(max_examples=15)
@given(chain=CHAINS, datum=between(-3000, 3000), at=st.sampled_from(CHAIN[1:]))
def test_margin_does_not_depend_on_datum_or_point_of_comparison(
    chain: Chain, datum: float, at: str
) -> None:
    here, there = chain.checked(0.0, "HYD"), chain.checked(datum, at)
    # A datum of 3000 ft costs digits of the elevations (1e-16 × 9e6 Pa); the solver stops at 1e-8.
    for one, other in (
        (here.margin.pressure, there.margin.pressure),
        (here.margin.required, there.margin.required),
        (here.margin.after_rule, there.margin.after_rule),
    ):
        assert one is not None and other is not None
        assert other == pytest.approx(one, rel=1e-8, abs=0.05)
    assert here.verdict == there.verdict or abs(here.margin.after_rule or 0.0) < 0.05
    for one_pump, other_pump in zip(here.pumps, there.pumps, strict=True):
        for one_state, other_state in zip(one_pump.facts.states, other_pump.facts.states, strict=True):
            assert other_state.suction == pytest.approx(one_state.suction, rel=1e-8, abs=0.05)
            assert other_state.flow == pytest.approx(one_state.flow, rel=1e-8)


def test_the_comparison_itself_does_move() -> None:
    """The test above would not see a comparison that ignores its point: demand and supply must differ."""
    chain = Chain((0, -4, -4, 2, 3, 28), (120, 60, 10, 10, 25), 80, 20, 100, RULES[0], pump=False)
    base, top = chain.checked(0.0, "HYD"), chain.checked(0.0, "TOR")
    assert base.demand.pressure > top.demand.pressure + 28 * 0.433 * 6894.757
    assert base.supply.available_pressure > top.supply.available_pressure + 28 * 0.433 * 6894.757
    assert base.demand.flow == pytest.approx(top.demand.flow, rel=1e-9)
