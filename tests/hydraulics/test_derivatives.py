"""Every law's derivative against central differences of its own value."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

from supplycheck.hydraulics import (
    Curve,
    darcy_weisbach_gradient,
    elevation_pressure,
    friction_factor,
    friction_group,
    hazen_williams_gradient,
    k_factor_discharge,
    k_factor_of,
    k_factor_pressure,
    minor_loss,
    pitot_discharge,
    power_from_pressure,
    pressure_from_power,
    reynolds_number,
    smooth_power,
    velocity,
    velocity_pressure,
    water_density,
    water_viscosity,
)
from supplycheck.model import HEAD_FORM, HW_METRIC, HW_US

Law = Callable[[Any], tuple[Any, Any]]

WATER = {"density": 998.2, "viscosity": 1.002e-3}
BORE = 0.0525
DEVICE = Curve((0.0, 0.004, 0.01, 0.02, 0.03), (0.0, 9e3, 2e4, 9e4, 2.5e5))

# 50 mm pipe: Re = 24 200 a L/s, so laminar below 0.083 L/s and the bridge ends at 0.165 L/s
FLOWS = np.array([3e-7, 9e-7, 1.1e-6, 1e-5, 8.0e-5, 8.4e-5, 1.2e-4, 1.6e-4, 1.7e-4, 1e-3, 0.02, 0.5])
PRESSURES = np.array([0.5, 4.0, 9.9, 10.1, 300.0, 5e4, 1e6])


def _hazen(form: Any) -> Law:
    return lambda q: hazen_williams_gradient(
        flow=q,
        bore=BORE,
        c_factor=120.0,
        coefficient=form.coefficient,
        flow_exponent=form.flow_exponent,
        bore_exponent=form.bore_exponent,
    )


def _darcy(roughness: float) -> Law:
    return lambda q: darcy_weisbach_gradient(flow=q, bore=BORE, roughness=roughness, **WATER)


BOTH = np.concatenate([-FLOWS, FLOWS])
REYNOLDS = np.array([5.0, 1990.0, 2010.0, 2700.0, 3300.0, 3990.0, 4010.0, 1e5, 1e8])

CASES: dict[str, tuple[Law, np.ndarray]] = {
    "power 1.85": (lambda q: smooth_power(q, 1.85), BOTH),
    "power 2": (lambda q: smooth_power(q, 2.0), BOTH),
    "power 1/2": (lambda q: smooth_power(q, 0.5), BOTH),
    "hazen-williams us": (_hazen(HW_US), BOTH),
    "hazen-williams metric": (_hazen(HW_METRIC), BOTH),
    "hazen-williams head": (_hazen(HEAD_FORM), BOTH),
    "darcy smooth": (_darcy(0.0), BOTH),
    "darcy steel": (_darcy(4.6e-5), BOTH),
    "darcy rough": (_darcy(2.6e-3), BOTH),
    "group": (lambda re: friction_group(reynolds=re, relative_roughness=0.002), REYNOLDS),
    "factor": (lambda re: friction_factor(reynolds=re, relative_roughness=0.002), REYNOLDS),
    "k-factor": (lambda p: k_factor_discharge(pressure=p, k_factor=1.34e-6), PRESSURES),
    "k-factor pressure": (lambda q: k_factor_pressure(flow=q, k_factor=1.34e-6), FLOWS),
    "k-factor of": (lambda q: k_factor_of(flow=q, pressure=5e4), FLOWS),
    "pitot": (lambda p: pitot_discharge(pitot=p, diameter=0.0635, coefficient=0.9), PRESSURES),
    "elevation": (lambda z: elevation_pressure(rise=z, unit_weight=9795.0), BOTH),
    "velocity": (lambda q: velocity(flow=q, bore=BORE), BOTH),
    "velocity pressure": (lambda q: velocity_pressure(flow=q, bore=BORE, density=998.2), BOTH),
    "minor": (lambda q: minor_loss(flow=q, bore=BORE, minor_k=3.0, density=998.2), BOTH),
    "reynolds": (lambda q: reynolds_number(flow=q, bore=BORE, **WATER), FLOWS),
    "pump power": (lambda q: pressure_from_power(flow=q, power=9e3, efficiency=0.7), FLOWS),
    "power of pump": (lambda q: power_from_pressure(flow=q, pressure=4e5, efficiency=0.7), FLOWS),
    "device": (DEVICE.at, np.array([1e-4, 0.0039, 0.0041, 0.012, 0.0299])),
    "device beyond": (DEVICE.carried_on, np.array([-0.01, 0.05])),
    "water density": (lambda t: water_density(temperature=t), np.array([274.0, 277.2, 300.0, 370.0])),
    "water viscosity": (lambda t: water_viscosity(temperature=t), np.array([274.0, 300.0, 370.0])),
}


@pytest.mark.parametrize("name", CASES)
def test_derivative_is_the_slope_of_the_value(name: str) -> None:
    # Central differences with a step of 1e-5 x err by about x² times 1e-10 times the third derivative
    # (1e-9 of the value here) plus rounding 1e-16/1e-5: five digits are safely true.
    law, places = CASES[name]
    step = 1e-5 * np.abs(places)
    above, below = law(places + step)[0], law(places - step)[0]
    by_difference = (above - below) / (2 * step)
    scale = np.abs(by_difference) + 1e-9 * np.max(np.abs(by_difference))
    assert np.all(np.abs(law(places)[1] - by_difference) <= 2e-5 * scale), name


@pytest.mark.parametrize("name", CASES)
def test_scalars_and_arrays_agree(name: str) -> None:
    law, places = CASES[name]
    values, slopes = law(places)
    for place, value, slope in zip(places, values, slopes, strict=True):
        scalar = law(float(place))
        assert isinstance(scalar[0], float) and isinstance(scalar[1], float)
        assert scalar == pytest.approx((value, slope), rel=1e-14)


def test_difference_check_can_fail() -> None:
    # the same measure, given a slope that is 0.01 % off, is beyond the allowance
    law, places = CASES["power 1.85"]
    step = 1e-5 * np.abs(places)
    by_difference = (law(places + step)[0] - law(places - step)[0]) / (2 * step)
    assert np.any(np.abs(1.0001 * law(places)[1] - by_difference) > 2e-5 * np.abs(by_difference))
