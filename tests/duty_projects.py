"""Small projects with hydrants or standpipes, written from parts; the numbers are invented."""

from __future__ import annotations

from pathlib import Path

HEAD = """\
units = "us"
[project]
title = "small"
date = 2026-11-20
standard = "NFPA 13 (2022)"
[pipe.steel]
material = "steel schedule 40"
[network]
nodes = "nodes.csv"
pipes = "pipes.csv"
"""
SUPPLY = """
[supply.flow_test]
static = {static}
residual = {residual}
flow = {flow}
date = 2026-06-01
gauge_elevation = 0
[supply.margin]
rule = "none"
"""


def supply(static: float, residual: float, flow: float) -> str:
    return SUPPLY.format(static=static, residual=residual, flow=flow)


def written(
    folder: Path, text: str, nodes: list[str], pipes: list[str], *, top: str = HEAD, test: str = ""
) -> Path:
    """Write a project into ``folder`` and return the folder.

    Nodes are ``tag,elevation,kind`` with more columns behind, pipes ``tag,from,to,length,size,fittings,
    devices,role``; all pipes are steel schedule 40.
    """
    (folder / "project.toml").write_text(top + text + (test or supply(200, 180, 1500)), encoding="utf-8")
    rows = ["tag,elevation,kind,sprinkler,flow", *(f"{row}{',' * (4 - row.count(','))}" for row in nodes)]
    (folder / "nodes.csv").write_text("\n".join(rows) + "\n", encoding="utf-8")
    rows = ["tag,from,to,length,size,fittings,devices,role,kind"]
    rows += [f"{row}{',' * (7 - row.count(','))},steel" for row in pipes]
    (folder / "pipes.csv").write_text("\n".join(rows) + "\n", encoding="utf-8")
    return folder
