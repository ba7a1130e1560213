"""From a system to arrays: what is refused, and that devices and laws are the published ones."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from network_systems import WATER_US, network, node, pipe, supply, system, us_pipe

from supplycheck.errors import DomainError, NotConvergedError
from supplycheck.hydraulics import darcy_weisbach_gradient, smooth_power
from supplycheck.model import Device
from supplycheck.network import LoadCase, solve_demand, solve_operating
from supplycheck.network.curves import DeviceLaw, SourceLaw
from supplycheck.network.records import SourceCurve
from supplycheck.units import GPM, PSI


def two(pipes: list, devices: tuple[Device, ...] = ()):  # type: ignore[no-untyped-def, type-arg]
    return system([node("S"), node("A", 0.0, 1e-5)], pipes, devices)


@pytest.mark.parametrize(
    ("broken", "word", "tags"),
    [
        ({"end": "nowhere"}, "do not exist", ("p",)),
        ({"end": "S"}, "one node", ("p",)),
        ({"c_factor": None}, "C-factor", ("p",)),
        ({"devices": ("ghost",)}, "ghost", ("p",)),
    ],
)
def test_input_is_refused_with_tags(broken: dict[str, object], word: str, tags: tuple[str, ...]) -> None:
    bad = replace(pipe("p", "S", "A", 10, 0.05), **broken)  # type: ignore[arg-type]
    with pytest.raises(NotConvergedError, match=word) as caught:
        network(two([bad]))
    assert caught.value.cause == "input"
    assert caught.value.tags == tags
    assert caught.value.remedy


def test_darcy_needs_a_roughness() -> None:
    with pytest.raises(NotConvergedError, match="roughness"):
        network(two([pipe("p", "S", "A", 10, 0.05, roughness=None)]), "darcy")


@pytest.mark.parametrize(
    ("kind", "flows", "values"),
    [
        ("loss", (0.0, 0.02, 0.01), (0.0, 1.0, 2.0)),
        ("pump", (0.0,), (1e5,)),
        ("pump", (0.0, 0.01), (1e5, 2e5)),
        ("pressure-reducing valve", (), ()),
    ],
)
def test_devices_without_a_proper_curve_are_refused(
    kind: str, flows: tuple[float, ...], values: tuple[float, ...]
) -> None:
    with pytest.raises(DomainError):
        DeviceLaw.of(Device("d", kind, flows, values, ""))  # type: ignore[arg-type]


@pytest.mark.parametrize(
    "source",
    [
        SourceCurve("S", 5e5, -1.0),
        SourceCurve("S", 5e5, flows=(0.0, 0.01), pressures=(4e5, 5e5)),
        SourceCurve("S", 5e5, flows=(0.01, 0.0), pressures=(5e5, 4e5)),
        SourceCurve("S", 5e5, flows=(0.0,), pressures=(5e5,)),
    ],
)
def test_supply_curves_that_rise_are_refused(source: SourceCurve) -> None:
    with pytest.raises(DomainError):
        SourceLaw.of(source)


DEVICES = {
    "loss": Device("d", "loss", (0.0, 0.01, 0.03), (0.0, 2e4, 9e4), ""),
    "loss from zero flow": Device("d", "loss", (0.0, 0.01, 0.03), (4e4, 5e4, 9e4), ""),
    "fixed": Device("d", "loss", (0.0,), (3e4,), ""),
    "pump": Device("d", "pump", (0.0, 0.02, 0.04), (5e5, 4e5, 2e5), ""),
}


@pytest.mark.parametrize("name", DEVICES)
def test_device_slope_is_the_derivative(name: str) -> None:
    law = DeviceLaw.of(DEVICES[name])
    for q in (3e-7, 2e-6, 0.004, 0.0151, 0.029, 0.05, *((-0.004, -0.02) if name != "pump" else ())):
        step = 1e-4 * abs(q)
        up, down = law.drop(np.array([q + step]))[0], law.drop(np.array([q - step]))[0]
        assert law.drop(np.array([q]))[1] == pytest.approx((up - down) / (2 * step), rel=1e-5, abs=1.0)


@pytest.mark.parametrize("name", DEVICES)
def test_device_is_exact_at_its_points(name: str) -> None:
    device = DEVICES[name]
    sign = -1.0 if device.kind == "pump" else 1.0
    for flow, value in zip(device.flows, device.values, strict=True):
        if flow > 0:
            assert DeviceLaw.of(device).drop(np.array([flow]))[0] == pytest.approx(sign * value, rel=1e-14)


def test_supply_curve_through_points_is_straight_in_the_power() -> None:
    source = SourceCurve("S", 0.0, flows=(0.0, 0.05, 0.1), pressures=(6e5, 5e5, 1e5))
    law = SourceLaw.of(source)
    x = 0.075**1.85
    expected = 5e5 - 4e5 * (x - 0.05**1.85) / (0.1**1.85 - 0.05**1.85)
    assert law.static - law.fall(np.array([0.075]))[0] == pytest.approx(expected)
    beyond = 1e5 - 4e5 * (0.12**1.85 - 0.1**1.85) / (0.1**1.85 - 0.05**1.85)
    assert law.static - law.fall(np.array([0.12]))[0] == pytest.approx(beyond)


def test_every_law_of_the_network_has_its_derivative() -> None:
    made = network(
        system(
            [node("S"), node("A"), node("B")],
            [
                pipe("p", "S", "A", 10, 0.05, devices=("bf",)),
                pipe("q", "A", "B", 10, 0.05, valve="check"),
                pipe("zero", "S", "B", 0.0, 0.05),
            ],
            [Device("bf", "loss", (0.0, 0.1), (2e4, 5e4), "")],
        ),
        "darcy",
    )
    for flow in (
        np.array([0.01, 0.02, 0.5]),
        np.array([2e-5, -1e-4, -0.2]),
        np.array([-0.003, 1e-8, 1e-7]),
    ):
        step = 1e-5 * np.abs(flow)
        rise = made.links.law()(flow + step)[0] - made.links.law()(flow - step)[0]
        assert made.links.law()(flow)[1] == pytest.approx(rise / (2 * step), rel=1e-6)


def test_one_head_in_closed_form() -> None:
    """One K 5.6 head at 20 psi behind 100 ft of 1 in pipe and 5 ft lower: worked from the formulas."""
    made = network(
        system([node("S"), node("A", 3.048, 5.6 * GPM / PSI**0.5)], [us_pipe("p", "S", "A", 100, 1.049)])
    )
    solution = solve_demand(made, LoadCase(("A",)), {"A": 20 * PSI}, [supply()])
    flow = 5.6 * 20**0.5
    needed = 20 + 4.33 + 100 * 4.52 * flow**1.85 / (120**1.85 * 1.049**4.87)
    assert solution.source_pressure[0] / PSI == pytest.approx(needed, rel=1e-12)
    assert solution.source_flow[0] / GPM == pytest.approx(flow, rel=1e-12)
    assert solution.velocity[0] / 0.3048 == pytest.approx(
        0.4085 * flow / 1.049**2, rel=2e-4
    )  # printed to 4 digits
    assert smooth_power(flow * GPM, 2.0)[0] == pytest.approx((flow * GPM) ** 2, rel=1e-15)
    assert made.fluid is WATER_US


def test_open_outlet_needs_a_k_factor_and_known_tags() -> None:
    made = network(system([node("S"), node("A")], [pipe("p", "S", "A", 10, 0.05)]))
    with pytest.raises(NotConvergedError, match="K-factor"):
        solve_operating(made, LoadCase(("A",)), [supply()])
    with pytest.raises(NotConvergedError, match="do not exist"):
        solve_operating(made, LoadCase((), {"X": 0.1}), [supply()])
    with pytest.raises(NotConvergedError, match="do not exist"):
        solve_operating(made, LoadCase((), {}, ("X",)), [supply()])
    with pytest.raises(NotConvergedError, match="outflow"):
        solve_operating(made, LoadCase((), {"A": float("nan")}), [supply()])
    with pytest.raises(NotConvergedError, match="no pressure is required"):
        solve_demand(made, LoadCase((), {"A": 0.01}), {}, [supply()])


def test_darcy_pipes_lose_what_the_law_says() -> None:
    made = network(
        system([node("S"), node("A")], [pipe("p", "S", "A", 10.0, 0.05), pipe("q", "A", "S", 3.0, 0.1)]),
        "darcy",
    )
    for flow in (1e-9, 2e-5, 9e-5, 2e-3, -0.04):
        expected = [
            length
            * darcy_weisbach_gradient(
                flow=flow, bore=bore, roughness=5e-5, density=WATER_US.density, viscosity=WATER_US.viscosity
            )[0]
            for length, bore in ((10.0, 0.05), (3.0, 0.1))
        ]
        assert made.links.friction_law()(np.full(2, flow))[0] == pytest.approx(expected, rel=1e-13)
