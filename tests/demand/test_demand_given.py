"""Design areas named head by head."""

from __future__ import annotations

from dataclasses import replace

import pytest
from demand_systems import FT2, criteria, project, tree

from supplycheck.demand import demand_cases
from supplycheck.errors import DomainError

REMOTE = tuple(f"E{i}.{j}" for i in (2, 3, 4) for j in (2, 3, 4, 5))


def given(tags, **changes):
    return demand_cases(project(tree([0] * 5, [6] * 5), criteria(design_area=tags, **changes)))


def test_a_full_area_has_no_note() -> None:
    found = given(REMOTE)
    (case,) = found.cases
    assert (found.mode, case.heads, case.lines, case.along_line, case.note) == ("given", REMOTE, 3, 4, "")
    assert case.area / FT2 == pytest.approx(12 * 130, rel=1e-12)
    assert "not tried" in found.statement


def test_an_area_short_by_a_head_says_so() -> None:
    (case,) = given(REMOTE[:-1]).cases
    assert "cover 95.3% of the required area" in case.note  # 11 × 130 = 1430 of 1500 ft²


def test_an_area_too_short_along_the_lines_says_so() -> None:
    tags = tuple(f"E{i}.{j}" for i in range(5) for j in (3, 4, 5))  # 39 ft where 46.5 ft are asked
    (case,) = given(tags).cases
    assert "83.9% of the length" in case.note
    assert "area short" not in case.note


def test_too_few_heads_say_so() -> None:
    (case,) = given(REMOTE[:4], base_area=500 * FT2, minimum_heads=5).cases
    assert "4 heads, fewer than the 5" in case.note


def test_all_wrong_tags_are_named_at_once() -> None:
    with pytest.raises(
        DomainError, match=r"no such node: X1, X2; not a sprinkler: M0 .junction.; named twice: E0.0"
    ):
        given(("X1", "E0.0", "M0", "X2", "E0.0"))


def test_an_empty_list_is_refused() -> None:
    with pytest.raises(DomainError, match="empty list"):
        given(())


def test_heads_without_coordinates_can_be_given() -> None:
    plan = tree([0] * 5, [6] * 5)
    blind = replace(plan, nodes=tuple(replace(n, x=None, y=None) for n in plan.nodes))
    (case,) = demand_cases(project(blind, criteria(design_area=REMOTE))).cases
    assert (case.lines, case.along_line, case.note) == (3, 4, "")
