"""A small sound project, as a layout and as tables, for the tests to spoil."""

from __future__ import annotations

from pathlib import Path

from supplycheck.findings import Fault
from supplycheck.model import Project
from supplycheck.project import ProjectFaultsError, read_project

HEAD = """\
units = "us"
[project]
title = "Test"
date = 2026-11-20
standard = "NFPA 13 (2022)"
[criteria]
hazard = "ordinary hazard group 1"
system = "wet"
[sprinkler.A]
k_factor = 5.6
minimum_pressure = 7
[pipe.lines]
material = "steel schedule 40"
[supply.flow_test]
static = 72
residual = 60
flow = 1000
date = 2026-06-01
gauge_elevation = 0
[supply.margin]
rule = "none"
"""
LAYOUT = """\
[device.backflow]
curve = [[0, 2], [500, 6]]
source = "data sheet"
[layout]
lines = 3
line_spacing = 10
heads = [2, 2]
head_spacing = 13
first_head = 6.5
sprinkler = "A"
head_elevation = 15
branch = { pipe = "lines", sizes = ["1", "1 1/4"] }
cross_main = { pipe = "lines", sizes = ["2"], feed = "end" }
feed_main = { pipe = "lines", size = "3", length = 20 }
riser = { pipe = "lines", size = "3", bottom_elevation = 1, devices = ["backflow"] }
underground = { pipe = "lines", size = "4", length = 50, elevation = -4 }
"""
NETWORK = """\
[network]
nodes = "nodes.csv"
pipes = "pipes.csv"
"""
NODES = """\
tag,x,y,elevation,kind,sprinkler,area
001,0,10,10,sprinkler,A,130
002,0,0,10,sprinkler,A,130
T,10,0,10,junction,,
S,10,0,0,supply,,
"""
PIPES = """\
from,to,length,kind,size,fittings
001,002,10,lines,1,
002,T,10,lines,1 1/4,1 tee
T,S,10,lines,2,1 elbow 90
"""
ONE_HEAD = """\
units = "us"
[project]
title = "One head"
date = 2026-11-16
standard = "NFPA 13 (2022)"
authority = "Fire marshal"
[criteria]
hazard = "ordinary hazard group 1"
system = "wet"
design_area = ["H"]
[sprinkler.A]
k_factor = 5.6
minimum_pressure = 7
coverage_area = 130
[pipe.p]
material = "steel schedule 40"
c_factor = 120
[network]
nodes = "nodes.csv"
pipes = "pipes.csv"
[hose]
outside = 0
source = "invented for this test"
"""
"""One head H by density in tables that the test adds, with its supply and margin rule."""
LAYOUT_PROJECT = HEAD + LAYOUT
TABLE_PROJECT = HEAD + NETWORK


def write(folder: Path, text: str = TABLE_PROJECT, nodes: str = NODES, pipes: str = PIPES) -> Path:
    """Write a project into ``folder`` and return its file."""
    path = folder / "project.toml"
    path.write_text(text, encoding="utf-8")
    (folder / "nodes.csv").write_text(nodes, encoding="utf-8")
    (folder / "pipes.csv").write_text(pipes, encoding="utf-8")
    return path


def read(folder: Path, text: str = LAYOUT_PROJECT, nodes: str = NODES, pipes: str = PIPES) -> Project:
    """Return the project."""
    return read_project(write(folder, text, nodes, pipes))


def faults(folder: Path, text: str = TABLE_PROJECT, nodes: str = NODES, pipes: str = PIPES) -> list[Fault]:
    """Return the faults of the project; an empty list where there are none."""
    try:
        read_project(write(folder, text, nodes, pipes))
    except ProjectFaultsError as caught:
        return list(caught.faults)
    return []
