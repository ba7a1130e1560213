"""Small sprinkler systems built straight from the records, for the tests of the design area."""

from __future__ import annotations

import datetime as dt
import math
from collections.abc import Sequence
from dataclasses import replace
from typing import Any

from supplycheck import model
from supplycheck.units import FOOT, GPM, PSI, US

FT2 = FOOT**2
K56 = US.to_si(5.6, "k_factor")


def criteria(**changes: Any) -> model.Criteria:
    """0.20 gpm/ft² over 1500 ft², any of it changed; ``required_area`` follows the modifiers."""
    base = model.Criteria(
        standard="NFPA 13",
        edition="2022",
        hazard="ordinary hazard group 2",
        density=0.20 * GPM / FT2,
        base_area=1500 * FT2,
        modifiers=(),
        required_area=0.0,
        minimum_heads=1,
        shape_factor=1.2,
        design_area="search",
        system="wet",
        minimum_pressure=7 * PSI,
        duration=None,
        maximum_coverage=None,
        maximum_spacing=None,
        velocity=model.VelocityPolicy("off", None, None, ""),
        maximum_pressure=None,
        velocity_pressure=False,
        source="test",
    )
    base = replace(base, **changes)
    if "required_area" in changes:
        return base
    return replace(base, required_area=base.base_area * math.prod(m.factor for m in base.modifiers))


def project(system: model.System, design: model.Criteria) -> model.Project:
    facts = model.ProjectFacts("t", "s", "preliminary", dt.date(2026, 1, 1), "NFPA 13 (2022)", "")
    supply = model.Supply((), (), (), None, "S")
    hose = model.HoseAllowance(0.0, None, 0.0, None, "", "given")
    water = model.Fluid("water", 998.0, 1e-3, 9795.0, None, "")
    return model.Project(facts, "us", design, system, supply, hose, water, model.HW_US, None, (), (), ())


def sprinkler_type(tag: str = "A", k: float = K56, minimum: float = 7 * PSI) -> model.Sprinkler:
    return model.Sprinkler(tag, k, minimum)


def head(
    tag: str, x: float, y: float, area: float | None, line: str | None = None, **more: Any
) -> model.Node:
    elevation = more.pop("elevation", 6.0)
    return model.Node(
        tag, elevation, x, y, "sprinkler", more.pop("sprinkler", "A"), area=area, branch_line=line, **more
    )


def point(tag: str, x: float | None, y: float | None, elevation: float = 6.0) -> model.Node:
    return model.Node(tag, elevation, x, y)


def pipe(start: str, end: str, role: Any = "pipe", length: float = 3.0) -> model.Pipe:
    return model.Pipe(f"{start}>{end}", start, end, length, 0.027, "1", "branch", 120.0, None, role=role)


def system(nodes: Sequence[model.Node], pipes: Sequence[model.Pipe]) -> model.System:
    return model.System(tuple(nodes), tuple(pipes), (sprinkler_type(),), (), ())


def tree(
    left: Sequence[int],
    right: Sequence[int],
    *,
    along: float = 13 * FOOT,
    between: float = 10 * FOOT,
    tagged: bool = True,
    roles: bool = True,
    elevation: float = 6.0,
    prefix: str = "",
    turn: float = 0.0,
    nipple: bool = False,
) -> model.System:
    """Lines along x on a cross main along y: ``left[i]`` and ``right[i]`` heads on line i."""
    nodes, pipes = [point(f"{prefix}S", 0.0, -between, elevation)], []
    before = f"{prefix}S"
    line_role, main_role = ("branch line", "cross main") if roles else ("pipe", "pipe")

    def place(x: float, y: float) -> tuple[float, float]:
        return x * math.cos(turn) - y * math.sin(turn), x * math.sin(turn) + y * math.cos(turn)

    for i, (west, east) in enumerate(zip(left, right, strict=True)):
        y = i * between
        main = f"{prefix}M{i}"
        nodes.append(point(main, *place(0.0, y), elevation - (0.3 if nipple else 0.0)))
        pipes.append(pipe(before, main, main_role))
        before = start = main
        if nipple:
            start = f"{prefix}N{i}"
            nodes.append(point(start, *place(0.0, y), elevation))
            pipes.append(pipe(main, start, "riser nipple" if roles else "pipe", 0.3))
        for sign, count, side in ((-1, west, "W"), (1, east, "E")):
            inner = start
            for j in range(count):
                tag = f"{prefix}{side}{i}.{j}"
                line = f"{prefix}L{i}" if tagged else None
                x, yy = place(sign * along * (j + 0.5), y)
                nodes.append(head(tag, x, yy, along * between, line, elevation=elevation))
                pipes.append(pipe(inner, tag, line_role))
                inner = tag
    return system(nodes, pipes)


def grid(
    rows: int,
    columns: int,
    *,
    along: float = 3.0,
    between: float = 3.0,
    tagged: bool = True,
    roles: bool = True,
) -> model.System:
    """``rows`` lines of ``columns`` heads between a near and a far main."""
    nodes, pipes = [point("S", 0.0, -between)], []
    near, far = "S", None
    line_role, main_role = ("branch line", "cross main") if roles else ("pipe", "pipe")
    for i in range(rows):
        y = i * between
        nodes += [point(f"N{i}", 0.0, y), point(f"F{i}", along * columns, y)]
        pipes.append(pipe(near, f"N{i}", main_role))
        if far:
            pipes.append(pipe(far, f"F{i}", main_role))
        near, far = f"N{i}", f"F{i}"
        inner = near
        for j in range(columns):
            tag = f"H{i}.{j}"
            nodes.append(head(tag, along * (j + 0.5), y, along * between, f"L{i}" if tagged else None))
            pipes.append(pipe(inner, tag, line_role))
            inner = tag
        pipes.append(pipe(inner, far, line_role))
    return system(nodes, pipes)
