"""Demand cases of standpipes and hydrants: who flows, how much, which pressure is kept."""

from __future__ import annotations

from dataclasses import replace
from math import comb

import pytest

from supplycheck.demand.hydrants import flow_of_each, hydrant_cases
from supplycheck.demand.standpipes import (
    MOST,
    is_complete,
    left_by,
    lowest_inlet,
    needed_at_node,
    standpipe_cases,
)
from supplycheck.errors import DomainError
from supplycheck.model import DemandCase, Device
from supplycheck.model.duty import (
    FireFlow,
    Hydrant,
    HydrantDuty,
    RegulatingDevice,
    Riser,
    StandpipeDuty,
    StandpipeOutlet,
)
from supplycheck.units import GPM, INCH, PSI

TABLE = RegulatingDevice(
    "RV", (110 * PSI, 150 * PSI, 200 * PSI), (101 * PSI, 112 * PSI, 124 * PSI), (), (), "invented"
)


def riser(name: str, floors: int = 4, *, horizontal: bool = False, device: str | None = None) -> Riser:
    outlets = (
        StandpipeOutlet(f"{name}{floor}", 2.5 * INCH, 100 * PSI, device) for floor in range(floors, 0, -1)
    )
    return Riser(name, tuple(outlets), horizontal)


def standpipes(*risers: Riser, sprinklered: bool = True) -> StandpipeDuty:
    """NFPA 14 (published training notes): 250 gpm an outlet, at most 1000 or 1250 gpm, 750 horizontal."""
    return StandpipeDuty(
        risers=risers,
        sprinklered=sprinklered,
        outlet_flow=250 * GPM,
        greatest_flow=(1000 if sprinklered else 1250) * GPM,
        horizontal_flow=750 * GPM,
        regulating_pressure=175 * PSI,
        devices=(TABLE,),
        connection=None,
        added_flows=(),
        counts=("risers", "horizontal"),
        source="",
    )


def total(case: DemandCase) -> float:
    """Flow of all outlets [gpm]."""
    return sum(outlet.flow for outlet in case.outlets) / GPM


@pytest.mark.parametrize(
    ("count", "sprinklered", "gpm"),
    [
        (1, True, 500),
        (2, True, 750),
        (3, True, 1000),
        (5, True, 1000),
        (3, False, 1000),
        (4, False, 1250),
        (6, False, 1250),
    ],
)
def test_flows_of_the_standard(count: int, sprinklered: bool, gpm: float) -> None:
    """NFPA 14: 500 + 250 for each further standpipe, cap 1000 sprinklered and 1250 not."""
    cases = standpipe_cases(standpipes(*(riser(f"R{n}") for n in range(count)), sprinklered=sprinklered))
    assert {round(total(one.case), 6) for one in cases} == {gpm}
    further = round((gpm - 500) / 250)
    assert len(cases) == count * comb(count - 1, further)
    assert {one.members[0] for one in cases} == {f"R{n}" for n in range(count)}


def test_the_two_topmost_flow_on_the_most_remote_and_one_on_the_others() -> None:
    cases = standpipe_cases(standpipes(riser("A"), riser("B")))
    by_remote = {one.members[0]: [outlet.node for outlet in one.case.outlets] for one in cases}
    assert by_remote == {"A": ["A4", "A3", "B4"], "B": ["B4", "B3", "A4"]}
    assert all(not one.case.with_hose and not one.case.heads for one in cases)


def test_horizontal_standpipe_gives_750_with_three_outlets() -> None:
    (one,) = standpipe_cases(standpipes(riser("H", 5, horizontal=True)))
    assert [outlet.flow / GPM for outlet in one.case.outlets] == pytest.approx([250, 250, 250])
    (two,) = standpipe_cases(standpipes(riser("H", 2, horizontal=True)))
    assert total(two.case) == pytest.approx(500)


def test_every_choice_is_tried_until_there_are_too_many() -> None:
    few = standpipes(*(riser(f"R{n}", 1) for n in range(10)))
    assert is_complete(few)
    many = standpipes(*(riser(f"R{n}", 2) for n in range(40)))
    assert not is_complete(many)
    assert len(standpipe_cases(many)) == 40 * (MOST // 40)


def test_sprinklers_flow_beside_every_case() -> None:
    heads = DemandCase("area 1", ("H1",), (1e-3,), (7e4,), ("density",), 12.0, 1, 1)
    cases = standpipe_cases(standpipes(riser("A")), heads)
    plain, both = cases
    assert not plain.case.heads and both.case.heads == ("H1",)
    assert both.kind == "with sprinklers" and not both.counts
    assert both.case.outlets == plain.case.outlets


@pytest.mark.parametrize(
    ("needed", "inlet"),
    [(90, 110), (101, 110), (106.5, 130), (112, 150), (118, 175), (124, 200), (124.1, None)],
)
def test_inlet_that_a_regulating_device_needs(needed: float, inlet: float | None) -> None:
    """Straight between the rows, read by hand: 106.5 is half way from 101 to 112, so is 130."""
    found = lowest_inlet(TABLE, needed * PSI)
    assert (found is None) == (inlet is None)
    if inlet is not None and found is not None:
        assert found == pytest.approx(inlet * PSI, rel=1e-12)
        there = left_by(TABLE.inlet, TABLE.outlet, found)
        assert there is not None and there >= needed * PSI * (1 - 1e-12)


def test_a_table_says_nothing_outside_its_rows() -> None:
    assert left_by(TABLE.inlet, TABLE.outlet, 109 * PSI) is None
    assert left_by(TABLE.inlet, TABLE.outlet, 201 * PSI) is None
    assert left_by((), (), 150 * PSI) is None


def test_outlets_with_a_device_ask_more_at_their_node() -> None:
    with_device = standpipes(riser("A", device="RV"))
    outlet = with_device.risers[0].outlets[0]
    assert needed_at_node(outlet, with_device) == pytest.approx(110 * PSI)
    short = replace(with_device.risers[0].outlets[0], required_pressure=130 * PSI)
    broken = replace(with_device, risers=(replace(with_device.risers[0], outlets=(short,)),))
    with pytest.raises(DomainError, match="never leaves"):
        standpipe_cases(broken)


BODY = Device("body", "loss", (0.0, 1000 * GPM), (0.0, 4 * PSI), "invented")


def hydrants(count: int, at_once: int, **changes: object) -> HydrantDuty:
    duty = HydrantDuty(
        hydrants=tuple(Hydrant(name, f"N{name}", "body") for name in "ABCD"[:count]),
        fire_flow=FireFlow(2000 * GPM, 7200.0, "given", ""),
        at_once=at_once,
        greatest_each=2000 * GPM,
        residual=20 * PSI,
        highest_point="TOP",
        valves=(),
        maximum_day=(),
        counts=("hydrants", "maximum day"),
    )
    return replace(duty, **changes)  # type: ignore[arg-type]


def test_alone_and_in_pairs() -> None:
    cases = hydrant_cases(hydrants(3, 2), (BODY,))
    assert [one.members for one in cases] == [
        ("A",),
        ("B",),
        ("C",),
        ("A", "B"),
        ("A", "C"),
        ("B", "C"),
    ]
    assert [one.counts for one in cases] == [False] * 3 + [True] * 3
    assert {round(total(one.case)) for one in cases} == {2000}


def test_what_each_hydrant_asks() -> None:
    """20 psi, and 4 psi of lateral and body at 1000 gpm: 24 psi at the tee; 20 psi at the top."""
    case = hydrant_cases(hydrants(2, 2), (BODY,))[-1].case
    asked = {one.node: (one.flow / GPM, one.minimum_pressure / PSI) for one in case.outlets}
    assert asked["NA"] == asked["NB"] == pytest.approx((1000, 24))
    assert asked["TOP"] == pytest.approx((0, 20))


def test_one_hydrant_is_asked_for_no_more_than_its_most() -> None:
    duty = hydrants(3, 2, greatest_each=1200 * GPM)
    assert flow_of_each(duty, 1) == pytest.approx(1200 * GPM)
    assert flow_of_each(duty, 2) == pytest.approx(1000 * GPM)


def test_kinds_of_case() -> None:
    heads = DemandCase("area 1", ("H1",), (1e-3,), (7e4,), ("density",), 12.0, 1, 1)
    duty = hydrants(3, 2, valves=("V1", "V2"), maximum_day=(("T", 1e-3),))
    cases = hydrant_cases(duty, (BODY,), heads)
    kinds = [one.kind for one in cases]
    assert {kind: kinds.count(kind) for kind in kinds} == {
        "hydrants": 6,
        "maximum day": 3,
        "with sprinklers": 3,
        "valve shut": 6,
    }
    assert {one.case.closed_pipes for one in cases if one.kind == "valve shut"} == {("V1",), ("V2",)}
    assert {one.case.flows for one in cases if one.kind == "maximum day"} == {(("T", 1e-3),)}
    assert sum(one.counts for one in cases) == 6
    assert len({one.case.label for one in cases}) == len(cases)


def test_a_hydrant_at_the_highest_point_asks_once() -> None:
    duty = hydrants(1, 1, highest_point="NA")
    (one,) = hydrant_cases(duty, (BODY,))
    (outlet,) = one.case.outlets
    assert outlet.what == "hydrant A and the highest point of the main"
    assert outlet.minimum_pressure == pytest.approx(28 * PSI)


def test_a_loss_beyond_the_curve_of_a_hydrant_is_said() -> None:
    """The curve ends at 1000 gpm: a hydrant alone at 2000 is beyond it, two at 1000 each are not."""
    notes = {one.members: one.case.note for one in hydrant_cases(hydrants(2, 2), (BODY,))}
    assert "beyond its curve" in notes["A",] and "beyond its curve" in notes["B",]
    assert notes["A", "B"] == ""
