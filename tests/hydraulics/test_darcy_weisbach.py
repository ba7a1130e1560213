"""Friction factor and Darcy-Weisbach loss: residual of Colebrook, bridge, monotone, domain."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from supplycheck.errors import DomainError
from supplycheck.hydraulics import darcy_weisbach_gradient, friction_factor, friction_group

ROUGH = st.one_of(st.just(0.0), st.floats(1e-7, 0.05))


@given(st.floats(4000, 1e9), ROUGH)
def test_factor_satisfies_colebrook(reynolds: float, rough: float) -> None:
    # inserted into the equation as Colebrook (1939) wrote it; 1/√f is 3 to 13, 1e-12 some 100 roundings
    f, _ = friction_factor(reynolds=reynolds, relative_roughness=rough)
    x = 1 / math.sqrt(f)
    assert x == pytest.approx(-2 * math.log10(rough / 3.7 + 2.51 / (reynolds * math.sqrt(f))), rel=1e-12)


@given(st.floats(1e-6, 2000), ROUGH)
def test_laminar_factor(reynolds: float, rough: float) -> None:
    # Hagen-Poiseuille: f = 64/Re whatever the wall
    f, slope = friction_factor(reynolds=reynolds, relative_roughness=rough)
    assert f == pytest.approx(64 / reynolds, rel=1e-14)
    assert slope == pytest.approx(-64 / reynolds**2, rel=1e-14)


@pytest.mark.parametrize("rough", [0.0, 1e-6, 1e-4, 1e-2, 0.05, 0.2])
@pytest.mark.parametrize("edge", [2000.0, 4000.0])
def test_group_is_smooth_at_both_ends_of_the_bridge(edge: float, rough: float) -> None:
    below = friction_group(reynolds=np.nextafter(edge, 0), relative_roughness=rough)
    above = friction_group(reynolds=np.nextafter(edge, 1e9), relative_roughness=rough)
    assert below[0] == pytest.approx(above[0], rel=1e-12)
    assert below[1] == pytest.approx(above[1], rel=1e-10)


@given(st.floats(0, 1e8), st.floats(0, 1e8), st.one_of(st.just(0.0), st.floats(0, 0.9)))
def test_group_rises_with_reynolds(first: float, second: float, rough: float) -> None:
    low, high = sorted((first, second))
    group_low, slope = friction_group(reynolds=low, relative_roughness=rough)
    assert slope > 0
    if high > low * (1 + 1e-9):
        assert group_low < friction_group(reynolds=high, relative_roughness=rough)[0]


@given(st.floats(2000, 4000), ROUGH)
def test_bridge_lies_between_its_ends(reynolds: float, rough: float) -> None:
    low = friction_group(reynolds=2000.0, relative_roughness=rough)[0]
    high = friction_group(reynolds=4000.0, relative_roughness=rough)[0]
    assert low <= friction_group(reynolds=reynolds, relative_roughness=rough)[0] <= high


@given(st.floats(-0.2, 0.2), st.floats(0.005, 1), st.floats(0, 1e-4))
def test_loss_has_the_sign_of_the_flow(flow: float, bore: float, roughness: float) -> None:
    fluid = {"bore": bore, "roughness": roughness, "density": 998.2, "viscosity": 1e-3}
    loss, slope = darcy_weisbach_gradient(flow=flow, **fluid)
    assert darcy_weisbach_gradient(flow=-flow, **fluid) == (-loss, slope)
    assert loss * flow >= 0 and slope > 0


def test_no_flow() -> None:
    loss, slope = darcy_weisbach_gradient(flow=0.0, bore=0.1, roughness=1e-4, density=998.2, viscosity=1e-3)
    assert loss == 0.0
    # the slope at rest is that of Hagen-Poiseuille, 128·μ/(π·D⁴)
    assert slope == pytest.approx(128 * 1e-3 / (math.pi * 0.1**4), rel=1e-12)
    assert friction_factor(reynolds=0.0, relative_roughness=0.0) == (math.inf, -math.inf)


def test_arrays_broadcast() -> None:
    loss, slope = darcy_weisbach_gradient(
        flow=np.array([0.0, 1e-5, 1e-2]),
        bore=np.array([[0.05], [0.1]]),
        roughness=0.0,
        density=998.2,
        viscosity=1e-3,
    )
    assert loss.shape == slope.shape == (2, 3)
    assert np.all(loss[0, 1:] > loss[1, 1:])


@pytest.mark.parametrize(
    ("name", "value"),
    [
        ("bore", 0.0),
        ("bore", -0.1),
        ("bore", math.nan),
        ("density", 0.0),
        ("viscosity", math.inf),
        ("viscosity", 0.0),
        ("roughness", -1e-6),
        ("roughness", 0.1),
        ("flow", math.nan),
    ],
)
def test_refuses_what_no_pipe_has(name: str, value: float) -> None:
    fine = {"flow": 0.01, "bore": 0.1, "roughness": 1e-4, "density": 998.2, "viscosity": 1e-3}
    with pytest.raises(DomainError):
        darcy_weisbach_gradient(**{**fine, name: value})


def test_message_says_what_was_found() -> None:
    with pytest.raises(DomainError, match=r"bore must be above 0 m; found -0\.1 m"):
        darcy_weisbach_gradient(
            flow=np.array([1.0, 1.0]),
            bore=np.array([0.1, -0.1]),
            roughness=0.0,
            density=998.2,
            viscosity=1e-3,
        )
