"""The general library `fluids` as rival: exact Colebrook factor, losses, and inverses by its factor.

Re 1e2 to 1e8 and relative roughness 0 to 0.05. The library switches from laminar to turbulent at Re 2040
in one step; between 2000 and 4000 only bounds and monotony can be compared.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from fluids.core import dP_from_K
from fluids.friction import Clamond, Colebrook, friction_laminar, one_phase_dP
from scipy.interpolate import make_interp_spline
from scipy.optimize import brentq
from scipy.special import wrightomega

from supplycheck.hydraulics import (
    Curve,
    DarcyWeisbach,
    OnePipe,
    darcy_weisbach_gradient,
    friction_factor,
    minor_loss,
    solve_one_pipe,
)

ROUGH = (0.0, 1e-7, 1e-6, 1e-5, 1e-4, 1e-3, 3e-3, 0.01, 0.02, 0.05)
# plain floats: the library catches OverflowError of its closed form and iterates instead
TURBULENT = tuple(np.geomspace(4000, 1e8, 25).tolist())
LAMINAR = tuple(np.geomspace(100, 2000, 7).tolist())
WATER = {"density": 998.2, "viscosity": 1.002e-3}


@pytest.mark.parametrize("rough", ROUGH)
def test_turbulent_factor(rough: float) -> None:
    # both solve one equation: the library's closed form and its iteration to 1e-9 agree to about 1e-9
    for reynolds in TURBULENT:
        f, _ = friction_factor(reynolds=reynolds, relative_roughness=rough)
        assert f == pytest.approx(Colebrook(reynolds, rough), rel=1e-9)
        assert f == pytest.approx(Clamond(reynolds, rough), rel=1e-8)


def test_factor_by_the_general_omega_function() -> None:
    """The same closed form by scipy's Wright omega function; 1e-14 is some fifty roundings."""
    c = 2 / math.log(10)
    re = np.geomspace(4000, 1e12, 2001)
    for rough in (*ROUGH, 0.5, 0.99):
        b = 2.51 / re
        omega = wrightomega(rough / 3.7 / (b * c) - np.log(b * c))
        f, _ = friction_factor(reynolds=re, relative_roughness=rough)
        assert f**-0.5 == pytest.approx(-c * np.log(b * c * omega), rel=1e-14)


def test_laminar_factor() -> None:
    for reynolds in LAMINAR:
        f, _ = friction_factor(reynolds=reynolds, relative_roughness=0.01)
        assert f == pytest.approx(friction_laminar(reynolds), rel=1e-12)


@pytest.mark.parametrize("rough", ROUGH)
def test_transition_lies_between_the_two_laws(rough: float) -> None:
    """f·Re² rises, and f never leaves the band between 64/Re and the library's Colebrook factor."""
    re = np.linspace(2000, 4000, 81)
    f, _ = friction_factor(reynolds=re, relative_roughness=rough)
    assert np.all(np.diff(f * re**2) > 0)
    colebrook = np.array([Colebrook(each, rough) for each in re])
    assert np.all(f >= 64 / re * (1 - 1e-12))
    assert np.all(f <= colebrook * (1 + 1e-9))


@pytest.mark.parametrize("rough", ROUGH)
@pytest.mark.parametrize("bore", [0.01, 0.1, 1.0])
def test_loss(rough: float, bore: float) -> None:
    for reynolds in LAMINAR[:-1] + TURBULENT:
        flow = reynolds * math.pi * bore * WATER["viscosity"] / (4 * WATER["density"])
        ours, _ = darcy_weisbach_gradient(flow=flow, bore=bore, roughness=rough * bore, **WATER)
        theirs = one_phase_dP(
            m=flow * WATER["density"],
            rho=WATER["density"],
            mu=WATER["viscosity"],
            D=bore,
            roughness=rough * bore,
            L=1.0,
            Method="Colebrook" if reynolds > 2040 else None,
        )
        assert ours == pytest.approx(theirs, rel=1e-8)


def test_minor_loss() -> None:
    speed = 4 * 0.01 / (math.pi * 0.05**2)
    ours, _ = minor_loss(flow=0.01, bore=0.05, minor_k=2.5, density=998.2)
    assert ours == pytest.approx(dP_from_K(2.5, rho=998.2, V=speed), rel=1e-12)


def _rival_loss(flow: float, bore: float, roughness: float, minor_k: float) -> float:
    """Return the loss of 100 m [Pa] by the library's factor alone."""
    speed = 4 * flow / (math.pi * bore**2)
    reynolds = WATER["density"] * speed * bore / WATER["viscosity"]
    f = Colebrook(reynolds, roughness / bore) if reynolds >= 4000 else friction_laminar(reynolds)
    return (f * 100.0 / bore + minor_k) * WATER["density"] * speed**2 / 2


def _problem(roughness: float, minor_k: float, **known: float) -> OnePipe:
    return OnePipe(
        law=DarcyWeisbach(roughness), length=100.0, minor_k=minor_k, unit_weight=9789.0, **WATER, **known
    )


CASES = [
    (flow, bore, rough, minor_k)
    for flow in (1e-6, 1e-3, 0.1, 5.0)
    for bore, rough in ((0.02, 0.0), (0.1, 1e-4), (0.1, 0.05), (0.5, 0.01))
    for minor_k in (0.0, 10.0)
    if not 1900 < 4 * flow * WATER["density"] / (math.pi * bore * WATER["viscosity"]) < 4100
]


@pytest.mark.parametrize(("flow", "bore", "rough", "minor_k"), CASES)
def test_one_pipe(flow: float, bore: float, rough: float, minor_k: float) -> None:
    """Loss, flow and diameter against the library's factor inside an independent root search."""
    roughness = rough * bore
    loss = _rival_loss(flow, bore, roughness, minor_k)
    assert solve_one_pipe(_problem(roughness, minor_k, flow=flow, bore=bore)).loss == pytest.approx(
        loss, rel=1e-8
    )
    ours = solve_one_pipe(_problem(roughness, minor_k, bore=bore, loss=loss)).flow
    rival = brentq(lambda q: _rival_loss(q, bore, roughness, minor_k) - loss, 0.9 * flow, 1.1 * flow)
    assert ours == pytest.approx(flow, rel=1e-8)
    assert ours == pytest.approx(rival, rel=1e-5)
    assert solve_one_pipe(_problem(roughness, minor_k, flow=flow, loss=loss)).bore == pytest.approx(
        bore, rel=1e-8
    )


def test_flow_without_iteration() -> None:
    """Given the loss, Colebrook's equation gives the flow in closed form: Re·√f = √(2·D³·ρ·S)/μ."""
    for bore, roughness, gradient in ((0.1, 4.6e-5, 500.0), (0.3, 2.6e-4, 30.0), (0.0525, 0.0, 8000.0)):
        group = math.sqrt(2 * bore**3 * WATER["density"] * gradient) / WATER["viscosity"]
        reynolds = -2 * group * math.log10(roughness / bore / 3.7 + 2.51 / group)
        flow = reynolds * math.pi * bore * WATER["viscosity"] / (4 * WATER["density"])
        ours = solve_one_pipe(_problem(roughness, 0.0, bore=bore, loss=100 * gradient))
        assert ours.flow == pytest.approx(flow, rel=1e-10)


def test_curve_against_scipy() -> None:
    """Straight lines between the points, as scipy draws them with a spline of degree one."""
    rng = np.random.default_rng(20)
    for count in (2, 3, 4, 9):
        for falling in (False, True):
            x = np.cumsum(rng.uniform(0.1, 3, count))
            y = np.cumsum(rng.uniform(0, 5, count))
            y = y[::-1].copy() if falling else y
            rival = make_interp_spline(x, y, k=1)
            places = np.linspace(x[0], x[-1], 201)
            value, slope = Curve(tuple(x), tuple(y)).at(places)
            assert value == pytest.approx(rival(places), rel=1e-12, abs=1e-12)
            off = ~np.isin(places, x)  # at a point two slopes meet
            assert slope[off] == pytest.approx(rival.derivative()(places[off]), rel=1e-10, abs=1e-10)
    hill = (np.array([0.0, 1, 2, 3]), np.array([0.0, 2, 1, 1]))
    value, _ = Curve(tuple(hill[0]), tuple(hill[1])).at(np.linspace(0, 3, 50))
    assert value == pytest.approx(np.interp(np.linspace(0, 3, 50), *hill), rel=1e-12, abs=1e-12)
