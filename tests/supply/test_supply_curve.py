"""Supply curves: straight in q^1.85, and kept straight by everything that is done to them."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from supplycheck.errors import DomainError
from supplycheck.network.curves import SourceLaw
from supplycheck.supply import SupplyCurve, constant_curve, curve_through, lower_envelope
from supplycheck.units import GPM, PSI


def formula(static: float, residual: float, tested: float, flow: float) -> float:
    """P = Ps − (Ps − Pr)(Q/Qt)^1.85, the published form."""
    return static - (static - residual) * (flow / tested) ** 1.85


@st.composite
def mains(draw: st.DrawFn) -> SupplyCurve:
    """A curve through one to three readings, not always on one line."""
    static = draw(st.floats(20.0, 200.0))
    count = draw(st.integers(1, 3))
    flows = draw(st.lists(st.floats(50.0, 5000.0), min_size=count, max_size=count, unique_by=round))
    drops = draw(st.lists(st.floats(0.5, 0.95 * static), min_size=count, max_size=count))
    readings = [(flow * GPM, (static - drop) * PSI) for flow, drop in zip(flows, drops, strict=True)]
    name = draw(st.sampled_from("abcdefgh"))
    return curve_through(name, "S", static * PSI, readings)


FLOWS = st.floats(0.0, 8000.0)


@given(st.floats(30, 150), st.floats(0.05, 0.95), st.floats(100, 3000), FLOWS)
def test_one_reading_is_the_published_form(static: float, left: float, tested: float, flow: float) -> None:
    curve = curve_through("t", "S", static * PSI, [(tested * GPM, static * left * PSI)])
    expected = formula(static, static * left, tested, flow)
    assert curve.pressure_at(flow * GPM) / PSI == pytest.approx(expected, rel=1e-9, abs=1e-9)


def test_passes_through_every_reading_and_takes_the_steeper_line_beyond() -> None:
    readings = [(500.0, 70.0), (1000.0, 65.0)]  # flatter than one line from 80
    curve = curve_through("t", "S", 80 * PSI, [(flow * GPM, p * PSI) for flow, p in readings])
    for flow, pressure in readings:
        assert curve.pressure_at(flow * GPM) == pytest.approx(pressure * PSI)
    # Straight between in Q^1.85: halfway in the power is halfway in pressure.
    middle = ((500**1.85 + 1000**1.85) / 2) ** (1 / 1.85)
    assert curve.pressure_at(middle * GPM) == pytest.approx(67.5 * PSI)
    # Beyond: the line from static (−15 psi at 1000 gpm) is steeper than the last piece.
    assert curve.pressure_at(2000 * GPM) == pytest.approx((65 - 15 * (2**1.85 - 1)) * PSI)
    steep = curve_through("t", "S", 80 * PSI, [(500 * GPM, 78 * PSI), (1000 * GPM, 60 * PSI)])
    slope = 18 / (1000**1.85 - 500**1.85)
    assert steep.pressure_at(2000 * GPM) == pytest.approx((60 - slope * (2000**1.85 - 1000**1.85)) * PSI)


def test_a_reading_above_the_one_before_is_held_down() -> None:
    curve = curve_through("t", "S", 80 * PSI, [(500 * GPM, 60 * PSI), (800 * GPM, 66 * PSI)])
    assert curve.pressure_at(800 * GPM) == pytest.approx(60 * PSI)
    assert curve.pressure_at(1600 * GPM) < 60 * PSI


@pytest.mark.parametrize(
    ("readings", "problem"),
    [
        ([(500.0, 80.0)], "below its static"),
        ([(500.0, 90.0)], "below its static"),
        ([(0.0, 50.0)], "must be above 0"),
        ([(-5.0, 50.0)], "must be above 0"),
        ([(math.nan, 50.0)], "must be above 0"),
        ([(500.0, math.nan)], "below its static"),
        ([], "at least one residual"),
    ],
)
def test_readings_that_make_no_curve(readings: list[tuple[float, float]], problem: str) -> None:
    with pytest.raises(DomainError, match=problem):
        curve_through("t", "S", 80 * PSI, [(flow * GPM, p * PSI) for flow, p in readings])


@given(mains(), FLOWS)
def test_never_rises(curve: SupplyCurve, flow: float) -> None:
    assert curve.pressure_at(flow * GPM) >= curve.pressure_at(1.1 * flow * GPM + 1e-6) - 1e-6


@given(mains(), st.floats(1.0, 300.0))
def test_flow_at_is_the_largest_flow_with_that_pressure(curve: SupplyCurve, psi: float) -> None:
    flow = curve.flow_at(psi * PSI)
    assert flow is not None  # every tested main runs out
    if psi * PSI > curve.static:
        assert flow == 0.0
        return
    assert curve.pressure_at(flow) == pytest.approx(psi * PSI, rel=1e-7)
    assert curve.pressure_at(1.001 * flow + 1e-4) < psi * PSI


@settings(max_examples=200)
@given(mains(), st.floats(5.0, 150.0), FLOWS)
def test_a_cap_is_the_lower_of_curve_and_cap(curve: SupplyCurve, cap: float, flow: float) -> None:
    expected = min(cap * PSI, curve.pressure_at(flow * GPM))
    assert curve.capped(cap * PSI).pressure_at(flow * GPM) == pytest.approx(expected, rel=1e-7, abs=1e-3)


@given(mains(), st.floats(0.5, 1.0), st.floats(-20.0, 20.0), FLOWS)
def test_scaling_and_height(curve: SupplyCurve, factor: float, gain: float, flow: float) -> None:
    at = flow * GPM
    plain = curve.pressure_at(at)
    moved = curve.at_height(gain * PSI, "N").pressure_scaled(factor)
    assert moved.node == "N"
    assert moved.pressure_at(at) == pytest.approx(plain * factor + gain * PSI, rel=1e-9, abs=1e-3)
    assert curve.lowered(gain * PSI).pressure_at(at) == pytest.approx(plain - gain * PSI, abs=1e-3)
    scaled = curve.flow_scaled(factor)
    assert scaled.pressure_at(at * factor) == pytest.approx(plain, rel=1e-9, abs=1e-3)
    assert scaled.tested_flow == pytest.approx(curve.tested_flow * factor)


@settings(max_examples=200)
@given(st.lists(mains(), min_size=2, max_size=4), FLOWS)
def test_the_envelope_is_the_lowest_everywhere(curves: list[SupplyCurve], flow: float) -> None:
    low = lower_envelope("low", curves)
    expected = min(curve.pressure_at(flow * GPM) for curve in curves)
    assert low.pressure_at(flow * GPM) == pytest.approx(expected, rel=1e-6, abs=1e-2)


def test_the_envelope_is_tested_as_far_as_the_governing_test() -> None:
    short = curve_through("short", "S", 60 * PSI, [(400 * GPM, 50 * PSI)])
    long = curve_through("long", "S", 80 * PSI, [(1500 * GPM, 40 * PSI)])
    low = lower_envelope("low", [short, long])
    assert low.member_at(400 * GPM) == "short"
    assert low.tested_flow == pytest.approx(400 * GPM)
    other = curve_through("short", "S", 90 * PSI, [(400 * GPM, 88 * PSI)])
    assert lower_envelope("low", [other, long]).tested_flow == pytest.approx(1500 * GPM)


def test_curves_at_two_nodes_have_no_envelope() -> None:
    here, there = constant_curve("a", "S", PSI), constant_curve("b", "T", PSI)
    with pytest.raises(DomainError, match="one node"):
        lower_envelope("low", [here, there])


@settings(max_examples=300)
@given(mains(), st.sampled_from(["plain", "cap", "percent", "low", "envelope"]), FLOWS)
def test_the_network_sees_the_same_curve(curve: SupplyCurve, change: str, flow: float) -> None:
    other = curve_through("other", "S", 60 * PSI, [(900 * GPM, 30 * PSI)])
    changed = {
        "plain": lambda: curve,
        "cap": lambda: curve.capped(0.6 * curve.static),
        "percent": lambda: curve.pressure_scaled(0.9),
        "low": lambda: curve.lowered(7 * PSI),
        "envelope": lambda: lower_envelope("low", [curve, other]),
    }[change]()
    law = SourceLaw.of(changed.to_source())
    fall, _ = law.fall(np.array([flow * GPM]))
    # The solver's power law is smoothed below a litre a minute or so; 1 Pa is 0.00015 psi.
    expected = changed.pressure_at(flow * GPM)
    assert law.static - float(fall[0]) == pytest.approx(expected, rel=1e-9, abs=1.0)


def test_a_tank_holds_its_pressure_and_never_falls() -> None:
    tank = constant_curve("tank", "K", 30 * PSI)
    assert tank.pressure_at(1.0) == 30 * PSI
    assert tank.flow_at(30 * PSI) is None
    assert tank.flow_at(31 * PSI) == 0.0
    assert tank.tested_ratio(1.0) is None
    assert not tank.is_extrapolated(1.0)
    assert tank.to_source().resistance == 0.0


def test_a_negative_flow_is_refused() -> None:
    with pytest.raises(DomainError, match="0 or more"):
        constant_curve("tank", "K", 30 * PSI).pressure_at(-0.001)
