"""What a head needs: density over its own area, listing, general minimum."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest
from demand_systems import FT2, K56, criteria, head, pipe, point, project, sprinkler_type, system

from supplycheck.demand import required_at_head
from supplycheck.errors import DomainError
from supplycheck.units import FOOT, GPM, PSI


def needs(node, **changes):
    built = system([point("S", 0, 0), node], [pipe("S", node.tag)])
    kinds = changes.pop("kinds", None)
    built = replace(built, sprinklers=kinds) if kinds else built
    return required_at_head(project(built, criteria(**changes)), node)


def test_density_governs_where_the_area_is_large() -> None:
    # 0.20 gpm/ft² × 130 ft² = 26 gpm; (26/5.6)² = 21.556 psi, worked by hand.
    flow, pressure, by = needs(head("H", 1, 0, 130 * FT2))
    assert by == "density"
    assert flow / GPM == pytest.approx(26.0, rel=1e-12)
    assert pressure / PSI == pytest.approx(676 / 31.36, rel=1e-9)


def test_general_minimum_governs_where_the_area_is_small() -> None:
    # 0.20 × 60 = 12 gpm would need 4.6 psi; at 7 psi a K 5.6 head gives 5.6√7 = 14.816 gpm.
    flow, pressure, by = needs(head("H", 1, 0, 60 * FT2))
    assert by == "minimum pressure"
    assert pressure / PSI == pytest.approx(7.0, rel=1e-12)
    assert flow / GPM == pytest.approx(5.6 * math.sqrt(7), rel=1e-9)


@pytest.mark.parametrize("where", ["type", "node"])
def test_the_listing_governs_where_it_asks_most(where: str) -> None:
    node = head("H", 1, 0, 60 * FT2, minimum_pressure=11 * PSI if where == "node" else None)
    kinds = (sprinkler_type(minimum=11 * PSI if where == "type" else 7 * PSI),)
    flow, pressure, by = needs(node, kinds=kinds)
    assert (by, pressure / PSI) == ("listing", pytest.approx(11.0, rel=1e-12))
    assert flow / GPM == pytest.approx(5.6 * math.sqrt(11), rel=1e-9)


def test_the_own_k_factor_overrides_the_type() -> None:
    node = head("H", 1, 0, 130 * FT2, k_factor=2 * K56)
    flow, pressure, by = needs(node, minimum_pressure=0.0, kinds=(sprinkler_type(minimum=0.0),))
    assert by == "density"
    assert flow / GPM == pytest.approx(26.0, rel=1e-12)
    assert pressure / PSI == pytest.approx((26 / 11.2) ** 2, rel=1e-9)


def test_the_coverage_of_the_type_stands_in_for_a_missing_area() -> None:
    kinds = (replace(sprinkler_type(), coverage_area=130 * FT2),)
    assert needs(head("H", 1, 0, None), kinds=kinds)[0] / GPM == pytest.approx(26.0, rel=1e-12)


@pytest.mark.parametrize(
    ("node", "words"),
    [
        (head("H7", 1, 0, None), "H7.*floor area"),
        (head("H7", 1, 0, 0.0), "H7.*greater than zero"),
        (head("H7", 1, 0, math.nan), "H7.*greater than zero"),
        (head("H7", 1, 0, 9.0, sprinkler=None), "H7.*K-factor"),
        (point("J", 1.0, 0.0, 3 * FOOT), "J is a junction"),
    ],
)
def test_what_is_missing_is_named(node, words: str) -> None:
    with pytest.raises(DomainError, match=words):
        needs(node)
