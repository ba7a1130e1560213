"""Design areas against published examples.

Sources
-------
[1] Jensen Hughes course page 13.10: 0.20 gpm/ft² over 3000 ft², heads 10 × 12 ft, K 5.6.
[2] NICET practice item (Friedman 2007; NFPA 13-2007, 11.2.3.1.1): ordinary hazard group 2, 130 ft² a head.
[3] NFPA 13, annex sample calculation, 1500 ft², 130 ft² a head, 13 ft along the line (from memory).
[4] Anvil fire-protection blog 2020: dry and sloped, 1500 × 1.3 × 1.3 ft².
[5] Sprinkler notes 485 and 444 (practitioners' newsletter): quick response, 900 ft² at 10 ft, ceilings to
    20 ft, five heads at least, +30 % for dry systems (1950 ft²).
"""

from __future__ import annotations

import datetime as dt
import math

import pytest

from supplycheck import model
from supplycheck.catalogue import hazard_class, rule
from supplycheck.demand import Candidates, demand_cases
from supplycheck.units import FOOT, GPM, PSI, US

FT2 = FOOT**2


def array(lines: int, heads: int, along: float, between: float, k_factor: float) -> model.System:
    """An end-fed tree: ``lines`` lines of ``heads`` heads, spacings [ft], K [gpm/psi½]."""
    nodes = [model.Node("M0", 6.0, 0.0, 0.0)]
    pipes = []

    def pipe(start: str, end: str, role: model.system.PipeRole) -> None:
        pipes.append(model.Pipe(f"{start}>{end}", start, end, 1.0, 0.05, "2", "p", 120.0, None, role=role))

    for i in range(1, lines + 1):
        y = i * between * FOOT
        nodes.append(model.Node(f"M{i}", 6.0, 0.0, y))
        pipe(f"M{i - 1}", f"M{i}", "cross main")
        before = f"M{i}"
        for j in range(heads):
            tag = f"H{i}.{j}"
            x = (j + 0.5) * along * FOOT
            area = along * between * FT2
            nodes.append(model.Node(tag, 6.0, x, y, "sprinkler", "A", area=area, branch_line=f"L{i}"))
            pipe(before, tag, "branch line")
            before = tag
    kind = model.Sprinkler("A", US.to_si(k_factor, "k_factor"), 7 * PSI)
    return model.System(tuple(nodes), tuple(pipes), (kind,), (), ())


def search(
    system: model.System,
    *,
    density: float,
    area: float,
    modifiers: tuple[model.AreaModifier, ...] = (),
    minimum_heads: int = 1,
    velocity_pressure: bool = False,
) -> Candidates:
    """Candidates under NFPA 13; density [gpm/ft²], area [ft²]."""
    shape = rule("shape factor", "NFPA 13", 2022).value
    design = model.Criteria(
        standard="NFPA 13",
        edition="2022",
        hazard="as published",
        density=density * GPM / FT2,
        base_area=area * FT2,
        modifiers=modifiers,
        required_area=area * FT2 * math.prod(m.factor for m in modifiers),
        minimum_heads=minimum_heads,
        shape_factor=shape,
        design_area="search",
        system="wet",
        minimum_pressure=7 * PSI,
        duration=None,
        maximum_coverage=None,
        maximum_spacing=None,
        velocity=model.VelocityPolicy("off", None, None, ""),
        maximum_pressure=None,
        velocity_pressure=velocity_pressure,
        source="",
    )
    facts = model.ProjectFacts("", "", "", dt.date(2026, 1, 1), "NFPA 13 (2022)", "")
    supply = model.Supply((), (), (), None, "M0")
    hose = model.HoseAllowance(0.0, None, 0.0, None, "", "given")
    water = model.Fluid("water", 998.0, 1e-3, 9795.0, None, "")
    project = model.Project(facts, "us", design, system, supply, hose, water, model.HW_US, None, (), (), ())
    return demand_cases(project)


def step(found: Candidates, text: str) -> float:
    return next(each.value for each in found.steps if each.step == text)


def test_course_page_twenty_five_heads_at_18_4_psi() -> None:
    """[1] prints 120 ft², 25 heads, 24 gpm and 18.4 psi (one decimal: ± 0.05)."""
    found = search(array(9, 9, 12, 10, 5.6), density=0.20, area=3000)
    assert step(found, "Area per head") / FT2 == pytest.approx(120, rel=1e-12)
    assert step(found, "Heads in the area") == 25
    for case in found.cases:
        assert len(case.heads) == 25
        assert case.required_flow[0] / GPM == pytest.approx(24, rel=1e-9)
        assert case.required_pressure[0] / PSI == pytest.approx(18.4, abs=0.05)
        assert set(case.required_by) == {"density"}


@pytest.mark.parametrize("velocity_pressure", [False, True])
def test_practice_item_no_head_below_26_gpm(velocity_pressure: bool) -> None:
    """[2] prints 26.0 gpm for every head, whether velocity pressure is used or not."""
    density = hazard_class("ordinary hazard group 2", "NFPA 13 (2007)").density_at(1500 * FT2)
    found = search(
        array(8, 8, 13, 10, 5.6),
        density=density / (GPM / FT2),
        area=1500,
        velocity_pressure=velocity_pressure,
    )
    assert found.cases
    for case in found.cases:
        assert [flow / GPM for flow in case.required_flow] == pytest.approx(
            [26.0] * len(case.heads), abs=1e-9
        )


def test_annex_tree_three_lines_of_four() -> None:
    """[3] 1500/130 = 11.54, so 12 heads; 1.2√1500/13 = 3.58, so 4 a line."""
    found = search(array(10, 6, 13, 10, 5.65), density=0.15, area=1500)
    assert step(found, "Heads in the area") == 12
    assert step(found, "Length along the lines") / (13 * FOOT) == pytest.approx(3.58, abs=0.005)
    assert step(found, "Heads along a line") == 4
    assert step(found, "Lines") == 3
    assert {(len(c.heads), c.lines, c.along_line) for c in found.cases} == {(12, 3, 4)}
    # the annex takes the four end heads of the three farthest lines; 19.5 gpm and 11.9 psi at each
    remote = frozenset(f"H{i}.{j}" for i in (8, 9, 10) for j in (2, 3, 4, 5))
    (case,) = [c for c in found.cases if frozenset(c.heads) == remote]
    assert case.required_flow[0] / GPM == pytest.approx(19.5, abs=0.05)
    assert case.required_pressure[0] / PSI == pytest.approx(11.9, abs=0.05)


def modifier(name: str) -> model.AreaModifier:
    found = rule(name, "NFPA 13", 2022)
    return model.AreaModifier(name, found.value, found.source)


def test_dry_and_sloped_factors_are_multiplied() -> None:
    """[4] 2535 ft², and 304 to 305 gpm with 20 % more than the density asks (printed as a range)."""
    modifiers = (modifier("area factor, dry"), modifier("area factor, slope over 1 in 6"))
    found = search(array(12, 12, 13, 10, 5.6), density=0.10, area=1500, modifiers=modifiers)
    area = step(found, "Required area")
    assert area / FT2 == pytest.approx(2535, rel=1e-9)
    assert step(found, "Area after area factor, dry") / FT2 == pytest.approx(1950, rel=1e-9)  # [5]
    assert 304 <= area * step(found, "Density") * 1.20 / GPM <= 305
    assert all(case.area / FT2 >= 2535 for case in found.cases)


def quick_response_reduction(ceiling: float) -> float:
    """Reduction of the area at a ceiling height [ft]: the published line, with the catalogue's figures."""
    slope = rule("quick response reduction, slope", "NFPA 13", 2022).value
    return rule("quick response reduction, intercept", "NFPA 13", 2022).value + slope * ceiling * FOOT


@pytest.mark.parametrize(("ceiling", "percent"), [(10, 40.0), (15, 32.5), (20, 25.0)])
def test_quick_response_line(ceiling: float, percent: float) -> None:
    """y = 55 − 1.5x: 40 % at 10 ft, 32.5 % at 15 ft, 25 % at 20 ft (from memory; [5] for 10 ft)."""
    assert quick_response_reduction(ceiling) * 100 == pytest.approx(percent, abs=1e-9)


def test_quick_response_area_at_ten_feet() -> None:
    """[5] 900 ft² at 10 ft from 1500 ft²."""
    least = int(rule("quick response reduction, fewest sprinklers", "NFPA 13", 2022).value)
    factor = 1 - quick_response_reduction(10)
    reduced = (model.AreaModifier("quick response", factor, ""),)
    found = search(
        array(8, 8, 13, 10, 5.6), density=0.20, area=1500, modifiers=reduced, minimum_heads=least
    )
    assert step(found, "Required area") / FT2 == pytest.approx(900, rel=1e-9)
    assert step(found, "Heads in the area") == 7  # 900/130 = 6.9


def test_quick_response_never_takes_fewer_than_five_heads() -> None:
    """[5] five heads at least: 900 ft² would be four heads of 225 ft² (light hazard, 15 × 15 ft)."""
    least = int(rule("quick response reduction, fewest sprinklers", "NFPA 13", 2022).value)
    reduced = (model.AreaModifier("quick response", 1 - quick_response_reduction(10), ""),)
    found = search(
        array(6, 6, 15, 15, 5.6), density=0.10, area=1500, modifiers=reduced, minimum_heads=least
    )
    assert 900 / 225 == 4
    assert {len(case.heads) for case in found.cases} == {5}
    assert step(found, "Heads in the area") == 5
