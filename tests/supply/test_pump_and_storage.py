"""Fire pumps and tanks against published limits and hand-worked figures.

NFPA 20 limits (churn ≤ 140 %, ≥ 65 % at 150 %); (300 + 250) gpm × 60 min = 33 000 gal; city 90/65 psi at
1000 gpm with a 1000 gpm pump of 100 psi, churn 140, 65 at 1500 (constructed): 230 psi at no flow, 165 at
1000, 102.1 at 1500 where suction is 37.1 psi.
"""

from __future__ import annotations

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq

from supplycheck.errors import DomainError
from supplycheck.hydraulics import Curve, at_speed, limiting_pump_curve, rated_pump_curve
from supplycheck.model import Tank
from supplycheck.supply.curve import constant_curve, curve_through
from supplycheck.supply.pump import (
    Boosted,
    PumpRating,
    in_parallel,
    in_series,
    needed_pumps,
    net_pressure,
    pump_facts,
)
from supplycheck.supply.storage import needed_volume, refill_time, tank_time, time_until_empty
from supplycheck.units import GALLON, GPM, PSI

CITY = curve_through("city", "S", 90 * PSI, [(1000 * GPM, 65 * PSI)])
PUMP = rated_pump_curve(flow=1000 * GPM, pressure=100 * PSI, churn=140 * PSI, overload=65 * PSI)
RATING = PumpRating(1000 * GPM, 100 * PSI)


@pytest.mark.parametrize(("gpm", "psi"), [(0, 230.0), (1000, 165.0), (1500, 102.1)])
def test_city_and_pump_together(gpm: float, psi: float) -> None:
    assert Boosted(CITY, PUMP).pressure_at(gpm * GPM) / PSI == pytest.approx(psi, abs=0.05)


def test_facts_of_the_pump_on_the_city_main() -> None:
    facts = pump_facts(PUMP, RATING, suction=CITY, highest_static=90 * PSI, demand=1000 * GPM)
    assert facts.churn_share == pytest.approx(1.40)
    assert facts.overload_share == pytest.approx(0.65)
    assert facts.suction_at_overload is not None
    assert facts.suction_at_overload / PSI == pytest.approx(37.1, abs=0.05)
    assert facts.highest_discharge == pytest.approx(230 * PSI)
    assert facts.discharge_at_demand == pytest.approx(165 * PSI)
    assert facts.demand_share == pytest.approx(1.0)
    short = pump_facts(Curve((0.0, 1000 * GPM), (140 * PSI, 100 * PSI)), RATING)
    assert short.overload_share is None


def test_combined_flow_against_a_root_of_the_written_out_formulas() -> None:
    boosted = Boosted(CITY, PUMP)
    # Between rated and overload point; the city by its published form, the pump by its own curve.
    root = brentq(
        lambda q: 90 - 25 * (q / 1000) ** 1.85 + float(PUMP.at(q * GPM)[0]) / PSI - 130,
        1000,
        1500,
        xtol=1e-9,
    )
    flow = boosted.flow_at(130 * PSI)
    assert flow is not None
    assert flow / GPM == pytest.approx(root, rel=1e-9)
    assert boosted.flow_at(231 * PSI) == 0.0
    assert boosted.flow_at(100 * PSI) is None


def test_limits_of_a_rating() -> None:
    assert RATING.highest_churn == pytest.approx(140 * PSI)
    assert RATING.lowest_overload == pytest.approx(65 * PSI)
    assert RATING.overload_flow == pytest.approx(1500 * GPM)
    assert RATING.least_pressure(500 * GPM) == 100 * PSI
    assert RATING.least_pressure(1250 * GPM) == pytest.approx(82.5 * PSI)
    with pytest.raises(DomainError, match="150 %"):
        RATING.least_pressure(1501 * GPM)
    with pytest.raises(DomainError, match="rated pressure"):
        PumpRating(1.0, 0.0)


def test_like_pumps() -> None:
    two = in_parallel([PUMP, PUMP])
    assert float(two.at(2000 * GPM)[0]) == pytest.approx(100 * PSI)
    assert two.values[0] == PUMP.values[0]
    series = in_series([PUMP, PUMP])
    for gpm in (0.0, 700.0, 1000.0, 1500.0):
        assert float(series.at(gpm * GPM)[0]) == pytest.approx(2 * float(PUMP.at(gpm * GPM)[0]), rel=1e-6)


@settings(deadline=None, max_examples=40)
@given(st.floats(0.55, 0.99), st.floats(0.0, 1.0))
def test_unlike_pumps_in_parallel_add_flows_at_one_pressure(speed: float, share: float) -> None:
    slow = at_speed(curve=PUMP, ratio=speed)
    both = in_parallel([PUMP, slow])
    low, high = PUMP.values[-1], PUMP.values[0]  # the faster pump ends at the higher pressure
    assert both.values[0] == high
    assert both.values[-1] == pytest.approx(low)
    flow = share * both.flows[-1]
    pressure = float(both.at(flow)[0])

    def flow_of(curve: Curve) -> float:
        if pressure >= curve.values[0]:
            return 0.0
        return float(brentq(lambda q: float(curve.at(q)[0]) - pressure, 0.0, curve.flows[-1], xtol=1e-15))

    # Interpolated between 48 flows of each pump; beside the kink where the slower one begins to give, the
    # smooth curve through the points differs most, a quarter of a per cent of the largest flow.
    assert flow == pytest.approx(flow_of(PUMP) + flow_of(slow), abs=3e-3 * both.flows[-1])


def test_unlike_pumps_in_series() -> None:
    slow = at_speed(curve=PUMP, ratio=0.8)
    both = in_series([PUMP, slow])
    assert both.flows[-1] == pytest.approx(1200 * GPM)
    for gpm in (0.0, 333.0, 800.0, 1200.0):
        expected = float(PUMP.at(gpm * GPM)[0]) + float(slow.at(gpm * GPM)[0])
        assert float(both.at(gpm * GPM)[0]) == pytest.approx(expected, rel=1e-5)
    # Affinity laws: at 80 % speed churn is 64 % of 140.
    assert slow.values[0] == pytest.approx(0.64 * 140 * PSI)


@pytest.mark.parametrize(
    "curve", [Curve((0.0,), (1.0,)), Curve((0.0, 1.0), (5.0, 5.0)), Curve((0.5, 1.0), (5.0, 4.0))]
)
def test_curves_that_cannot_be_combined(curve: Curve) -> None:
    with pytest.raises(DomainError, match="combined"):
        in_parallel([curve, PUMP])
    with pytest.raises(DomainError, match="combined"):
        in_series([curve, PUMP])


def test_net_pressure_by_definition() -> None:
    # 120 − 20 + (3 − 1) + 2 psi of height between the gauges.
    net = net_pressure(
        discharge=120.0,
        suction=20.0,
        discharge_velocity_pressure=3.0,
        suction_velocity_pressure=1.0,
        height=2.0,
    )
    assert net == 104.0


def test_a_pump_for_a_shortfall() -> None:
    # 1000 gpm at 120 psi; the city leaves 65: 55 psi are missing.
    options = needed_pumps(
        suction=CITY,
        flow=1000 * GPM,
        pressure=120 * PSI,
        rated_flows=[500 * GPM, 750 * GPM, 1000 * GPM, 1500 * GPM],
        suction_floor=20 * PSI,
    )
    assert [round(option.rating.flow / GPM) for option in options] == [750, 1000, 1500]
    # 1000 of 750 gpm is two thirds of the way to 150 %, where 65 % must be left: 1 − 0.35 · 2/3.
    assert options[0].rating.pressure == pytest.approx(55 * PSI / (1 - 0.35 * 2 / 3))
    assert options[1].rating.pressure == pytest.approx(55 * PSI)
    assert options[0].demand_share == pytest.approx(4 / 3)
    # Suction at 150 %: 1125 gpm 58.9 psi, 1500 gpm 37.1 psi, 2250 gpm −22 psi by 90 − 25 (Q/1000)^1.85.
    assert [option.suction_holds for option in options] == [True, True, False]
    assert options[1].suction_at_overload / PSI == pytest.approx(37.1, abs=0.05)
    for option in options[:2]:
        weakest = limiting_pump_curve(flow=option.rating.flow, pressure=option.rating.pressure)
        enough = Boosted(CITY, weakest).pressure_at(1000 * GPM)
        assert enough >= 120 * PSI * (1 - 1e-9)


def test_no_pump_where_none_is_needed_or_none_reaches() -> None:
    common = {"suction": CITY, "rated_flows": [500 * GPM], "suction_floor": 0.0}
    assert needed_pumps(flow=500 * GPM, pressure=60 * PSI, **common) == ()  # type: ignore[arg-type]
    assert needed_pumps(flow=800 * GPM, pressure=160 * PSI, **common) == ()  # type: ignore[arg-type]


def test_suction_from_a_tank() -> None:
    boosted = Boosted(constant_curve("tank", "K", 4 * PSI), PUMP)
    assert boosted.pressure_at(1500 * GPM) == pytest.approx(69 * PSI)


def test_storage_for_an_hour() -> None:
    volume = needed_volume(flow=(300 + 250) * GPM, duration=3600.0)
    assert volume / GALLON == pytest.approx(33_000)
    assert needed_volume(flow=550 * GPM, duration=3600.0, refill=50 * GPM) / GALLON == pytest.approx(30_000)
    assert needed_volume(flow=50 * GPM, duration=3600.0, refill=60 * GPM) == 0.0


def test_time_until_empty_and_refill() -> None:
    volume = 33_000 * GALLON
    assert time_until_empty(volume=volume, flow=550 * GPM) == pytest.approx(3600.0)
    assert time_until_empty(volume=volume, flow=600 * GPM, refill=50 * GPM) == pytest.approx(3600.0)
    assert time_until_empty(volume=volume, flow=50 * GPM, refill=50 * GPM) == math.inf
    assert refill_time(volume=volume, refill=50 * GPM) == pytest.approx(11 * 3600.0)


def test_a_tank_against_the_nominal_and_the_real_flow() -> None:
    tank = Tank("T", "K", 10.0, 33_000 * GALLON, 0.0)
    time = tank_time(tank, nominal_flow=550 * GPM, duration=3600.0, actual_flow=660 * GPM)
    assert time.lasts == pytest.approx(3600.0)
    assert time.actual_lasts == pytest.approx(3000.0)
    assert time.spare_volume is not None
    assert time.spare_volume / GALLON == pytest.approx(-6_600)
    assert time.refill_time is None
    unknown = tank_time(Tank("T", "K", 10.0), nominal_flow=550 * GPM, duration=None)
    assert (unknown.lasts, unknown.nominal_volume, unknown.spare_volume) == (None, None, None)


@pytest.mark.parametrize(("volume", "flow"), [(0.0, 1.0), (-1.0, 1.0), (1.0, -1.0), (math.nan, 1.0)])
def test_figures_of_no_tank(volume: float, flow: float) -> None:
    with pytest.raises(DomainError):
        time_until_empty(volume=volume, flow=flow)
    with pytest.raises(DomainError):
        refill_time(volume=1.0, refill=0.0)
