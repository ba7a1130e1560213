"""Curves through points, and pumps."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from supplycheck.errors import DomainError
from supplycheck.hydraulics import (
    Curve,
    at_speed,
    curve_through,
    limiting_pump_curve,
    power_from_pressure,
    pressure_from_power,
    pump_curve,
    pump_pressure,
    rated_pump_curve,
)
from supplycheck.units import FOOT, GPM, GRAVITY, PSI

STEPS = st.lists(st.tuples(st.floats(1e-4, 0.1), st.floats(0, 1e5)), min_size=1, max_size=8)


def _points(steps: list[tuple[float, float]]) -> Curve:
    flows, values = [0.0], [0.0]
    for run, rise in steps:
        flows.append(flows[-1] + run)
        values.append(values[-1] + rise)
    return Curve(tuple(flows), tuple(values))


@given(STEPS)
def test_curve_is_exact_at_its_points(steps: list[tuple[float, float]]) -> None:
    curve = _points(steps)
    assert tuple(curve.at(np.array(curve.flows))[0]) == curve.values


@given(STEPS, st.floats(0, 1), st.floats(0, 1))
def test_curve_is_monotone_between(steps: list[tuple[float, float]], a: float, b: float) -> None:
    curve = _points(steps)
    low, high = sorted((a * curve.flows[-1], b * curve.flows[-1]))
    allowance = 1e-9 * max(curve.values)
    assert curve.at(low)[0] <= curve.at(high)[0] + allowance
    assert curve.at(low)[1] >= -1e-9 * (1 + abs(curve.at(low)[1]))


def test_curve_of_two_points_is_their_line() -> None:
    assert curve_through([(0.0, 0.0), (2.0, 10.0)]).at(0.5) == pytest.approx((2.5, 5.0), rel=1e-14)


def test_curve_of_one_point_is_constant() -> None:
    assert curve_through([(0.0, 5e4)]).at(0.3) == (5e4, 0.0)


def test_curve_refuses_beyond_its_points() -> None:
    curve = curve_through([(0.01, 0.0), (0.02, 10.0)])
    with pytest.raises(DomainError, match=r"given from 0\.01 to 0\.02 m³/s; asked at 0\.03 m³/s"):
        curve.at(np.array([0.015, 0.03]))
    with pytest.raises(DomainError, match="asked at 0 m³/s"):
        curve.at(0.0)
    assert curve.carried_on(0.03)[0] == pytest.approx(20.0, rel=1e-12)


@pytest.mark.parametrize(
    ("flows", "values", "words"),
    [
        ((), (), "at least one"),
        ((0.0, 1.0), (1.0,), "as many values"),
        ((0.0, 0.0), (1.0, 2.0), "must rise"),
        ((0.0, float("nan")), (1.0, 2.0), "finite"),
    ],
)
def test_curve_refuses_bad_points(flows: tuple[float, ...], values: tuple[float, ...], words: str) -> None:
    with pytest.raises(DomainError, match=words):
        Curve(flows, values)


def test_rated_curve() -> None:
    # NFPA 20 (from memory; read in trade articles): churn at most 140 % of the rated pressure, and at least
    # 65 % of it at 150 % of the rated flow. 1000 gpm at 100 psi: 140, 100, 65 psi.
    curve = limiting_pump_curve(flow=1000 * GPM, pressure=100 * PSI)
    for gpm, psi in ((0, 140), (1000, 100), (1500, 65)):
        assert pump_pressure(flow=gpm * GPM, curve=curve)[0] / PSI == pytest.approx(psi, rel=1e-12)
    with pytest.raises(DomainError):
        pump_pressure(flow=1501 * GPM, curve=curve)
    weaker = rated_pump_curve(flow=0.06, pressure=7e5, churn=8e5, overload=5e5)
    assert weaker.flows == pytest.approx((0.0, 0.06, 0.09), rel=1e-15)


@pytest.mark.parametrize(
    ("flows", "pressures", "words"),
    [
        ((0.0,), (7e5,), "at least two points"),
        ((0.0, 0.06, 0.09), (7e5, 7.1e5, 5e5), "must not rise"),
        ((0.0, 0.06), (7e5, -1.0), "0 or more"),
    ],
)
def test_pump_curve_refuses(flows: tuple[float, ...], pressures: tuple[float, ...], words: str) -> None:
    with pytest.raises(DomainError, match=words):
        pump_curve(flows=flows, pressures=pressures)


@given(st.floats(0.3, 1.5), st.floats(0, 1))
def test_affinity(ratio: float, share: float) -> None:
    # flow with the speed, pressure with its square, at every point of the curve and not only at its three
    curve = limiting_pump_curve(flow=0.06, pressure=7e5)
    flow = share * 0.09
    slower = at_speed(curve=curve, ratio=ratio)
    assert pump_pressure(flow=min(flow * ratio, slower.flows[-1]), curve=slower)[0] == pytest.approx(
        ratio**2 * pump_pressure(flow=flow, curve=curve)[0], rel=1e-9
    )
    assert at_speed(curve=slower, ratio=1 / ratio).values == pytest.approx(curve.values, rel=1e-12)


@given(st.floats(1e-4, 1), st.floats(1e3, 2e6), st.floats(0.1, 1))
def test_power_and_pressure_are_inverse(flow: float, pressure: float, efficiency: float) -> None:
    power, _ = power_from_pressure(flow=flow, pressure=pressure, efficiency=efficiency)
    assert pressure_from_power(flow=flow, power=power, efficiency=efficiency)[0] == pytest.approx(
        pressure, rel=1e-12
    )


def test_water_horsepower() -> None:
    # text books: water horsepower = gpm × ft / 3960 (rounded to four digits, ±0.013 %; the rest is the
    # difference between 8.33 lb/gal and the density used here)
    power, _ = power_from_pressure(flow=1000 * GPM, pressure=100 * FOOT * 999.0 * GRAVITY)
    horsepower = 550 * FOOT * 0.45359237 * GRAVITY
    assert power / horsepower == pytest.approx(1000 * 100 / 3960, rel=1e-3)


@pytest.mark.parametrize("efficiency", [0.0, -0.5, 1.01, float("nan")])
def test_efficiency_is_a_fraction(efficiency: float) -> None:
    with pytest.raises(DomainError, match="efficiency"):
        pressure_from_power(flow=0.01, power=1e3, efficiency=efficiency)
