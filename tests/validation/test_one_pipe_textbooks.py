"""One-pipe problems of the text books, solved by this package and compared with what they print.

.. [1] Fox and McDonald, Introduction to Fluid Mechanics, example 8.7.
.. [2] Çengel and Cimbala, Fluid Mechanics, examples 8-3, 8-4 and 8-5.
.. [3] White, Fluid Mechanics, ch. 6, reservoirs joined by a pumped pipe; examples 6.6, 6.7, 6.9, 6.11
   (from memory).

Fox and McDonald 8.5 and Çengel and Cimbala 8-2 are from memory too.
"""

from __future__ import annotations

import math

import pytest
from one_pipe_problems import (
    CENGEL_8_2,
    FOX_8_5,
    SQUARE_FOOT_POUND,
    WHITE_6_6,
    WHITE_6_7,
    WHITE_6_9,
    WHITE_6_11,
)

from supplycheck.hydraulics import (
    ConstantFactor,
    DarcyWeisbach,
    OnePipe,
    PipeLaw,
    k_of_length,
    solve_one_pipe,
    water_density,
    water_viscosity,
)
from supplycheck.units import FOOT, GPM, GRAVITY, INCH

HORSEPOWER = 550 * FOOT * 0.45359237 * GRAVITY
COLD = 273.15 + 15.6  # 60 °F
RHO, MU = water_density(temperature=COLD)[0], water_viscosity(temperature=COLD)[0]


def fire_line(law: PipeLaw, minor_k: float) -> OnePipe:
    """A fire line from an elevated tank: 80 ft of fall, 680 ft of 4 in pipe, free jet, no entrance loss."""
    return OnePipe(
        law=law,
        length=680 * FOOT,
        density=RHO,
        unit_weight=RHO * GRAVITY,
        viscosity=MU,
        bore=4 * INCH,
        drop=0.0,
        rise=-80 * FOOT,
        minor_k=minor_k,
        start="reservoir",
        end="jet",
    )


def test_fox_mcdonald_8_7_with_the_printed_factor() -> None:
    """350 gpm printed for f 0.031 and Le/D 8 of the gate valve.

    f has two digits: half of its last one, 1.6 %, is worth 0.8 % of the flow, or 3 gpm.
    Worked by hand: v = √(2·g·h/(f·(L/D + 8) + 1)).
    """
    k = k_of_length(length=8 * 4 * INCH, bore=4 * INCH, friction_factor=0.031)
    result = solve_one_pipe(fire_line(ConstantFactor(0.031), k))
    by_hand = math.sqrt(2 * GRAVITY * 80 * FOOT / (0.031 * (680 * FOOT / (4 * INCH) + 8) + 1))
    assert result.velocity == pytest.approx(by_hand, rel=1e-9)
    assert result.flow / GPM == pytest.approx(350, abs=0.5 + 0.008 * 350)


def test_fox_mcdonald_8_7_from_the_wall() -> None:
    """Old cast iron, relative roughness doubled to 0.005: f 0.031 printed to three decimals, 350 gpm.

    The chart of the book is read to half a unit of the last digit, 0.0005 (1.6 %, 0.8 % of the flow).
    """
    law = DarcyWeisbach(0.005 * 4 * INCH)
    result = solve_one_pipe(fire_line(law, 0.031 * 8))
    assert result.friction_factor == pytest.approx(0.031, abs=0.0005)
    assert result.flow / GPM == pytest.approx(350, abs=0.5 + 0.008 * 350)
    assert result.regime == "turbulent"


def test_cengel_8_3_loss() -> None:
    """Stainless pipe: f 0.0172 (0.00005), 96.2 to 96.5 kPa, head loss 9.8 m (0.05).

    The editions print 96.2 and 96.5 kPa: the latter follows from f rounded to 0.0172 and g of 9.81.
    """
    result = solve_one_pipe(
        OnePipe(
            law=DarcyWeisbach(0.002e-3),
            length=60.0,
            density=999.0,
            unit_weight=999.0 * 9.81,
            viscosity=1.138e-3,
            bore=0.05,
            flow=0.006,
        )
    )
    assert result.friction_factor == pytest.approx(0.0172, abs=0.00005)
    assert 96.15 <= result.loss / 1e3 <= 96.55
    assert result.loss / (999.0 * 9.81) == pytest.approx(9.8, abs=0.05)
    # the book (from memory) has Re 134 300 from a velocity rounded to 3.06 m/s, worth 0.16 %
    assert result.reynolds == pytest.approx(134_300, rel=0.0017)


AIR = {"density": 1.145, "unit_weight": 1.145 * 9.81, "viscosity": 1.655e-5 * 1.145}
TWENTY_METRES = 20 * 1.145 * 9.81


def test_cengel_8_4_diameter() -> None:
    """Air duct: D 0.267 m, v 6.24 m/s, Re 100 800, f 0.0180, each to half a unit of its last digit.

    The book works with D rounded to 0.267, which moves v by 0.2 % and Re by 0.1 %.
    """
    result = solve_one_pipe(
        OnePipe(law=DarcyWeisbach(0.0), length=150.0, flow=0.35, loss=TWENTY_METRES, **AIR)
    )
    assert result.bore == pytest.approx(0.267, abs=0.0005)
    assert result.velocity == pytest.approx(6.24, abs=0.005 + 0.002 * 6.24)
    assert result.reynolds == pytest.approx(100_800, abs=50 + 0.001 * 100_800)
    assert result.friction_factor == pytest.approx(0.0180, abs=0.00005)


def test_cengel_8_5_flow() -> None:
    """The same duct at twice the length: the flow drops by 0.11 to 0.24 m³/s (two decimals each).

    D is 0.267, three digits: half of the last is 0.19 %, worth 2.6 times that, 0.5 %, in the flow.
    """
    result = solve_one_pipe(
        OnePipe(law=DarcyWeisbach(0.0), length=300.0, bore=0.267, loss=TWENTY_METRES, **AIR)
    )
    assert result.flow == pytest.approx(0.24, abs=0.005)
    assert 0.35 - result.flow == pytest.approx(0.11, abs=0.005)


def pumped(viscosity: float) -> OnePipe:
    """Reservoirs: 0.2 ft³/s, 400 ft of 2 in, ε/D 0.001, lift 100 ft, ΣK 13.2 with entrance and exit."""
    return OnePipe(
        law=DarcyWeisbach(0.001 * 2 * INCH),
        length=400 * FOOT,
        density=998.2,
        unit_weight=998.2 * GRAVITY,
        viscosity=viscosity,
        bore=2 * INCH,
        flow=0.2 * FOOT**3,
        drop=0.0,
        rise=100 * FOOT,
        minor_k=13.2,
        start="reservoir",
        end="reservoir",
    )


def test_white_pump() -> None:
    """184.7 ft and 4.2 hp given to the water, with water at 20 °C (1.0e-3 Pa·s)."""
    result = solve_one_pipe(pumped(1.0e-3))
    assert result.pump_pressure / (998.2 * GRAVITY * FOOT) == pytest.approx(184.7, abs=0.05)
    assert result.fluid_power / HORSEPOWER == pytest.approx(4.2, abs=0.05)


def test_white_pump_with_the_book_s_chart() -> None:
    """The book reads f 0.0216 and goes on with 185 ft: half a foot, and half a unit of f (0.2 ft)."""
    result = solve_one_pipe(
        OnePipe(
            law=ConstantFactor(0.0216),
            length=400 * FOOT,
            density=998.2,
            unit_weight=998.2 * GRAVITY,
            bore=2 * INCH,
            flow=0.2 * FOOT**3,
            drop=0.0,
            rise=100 * FOOT,
            minor_k=13.2,
            start="reservoir",
            end="reservoir",
        )
    )
    assert result.pump_pressure / (998.2 * GRAVITY * FOOT) == pytest.approx(185, abs=0.5 + 0.2)


def test_white_pump_found_back_from_its_power() -> None:
    """The power found drives the same flow through the same pipe: the other direction of the problem."""
    found = solve_one_pipe(pumped(1.0e-3))
    again = OnePipe(
        law=DarcyWeisbach(0.001 * 2 * INCH),
        length=400 * FOOT,
        density=998.2,
        unit_weight=998.2 * GRAVITY,
        viscosity=1.0e-3,
        bore=2 * INCH,
        drop=0.0,
        rise=100 * FOOT,
        minor_k=13.2,
        start="reservoir",
        end="reservoir",
        pump_power=found.fluid_power / 0.7,
        efficiency=0.7,
    )
    assert solve_one_pipe(again).flow / FOOT**3 == pytest.approx(0.2, rel=1e-9)


def test_white_6_6_loss() -> None:
    """f 0.02, 4.5 ft, 280 lbf/ft²: two digits each; f read off the chart to 0.0005 (2.5 %)."""
    result = solve_one_pipe(WHITE_6_6)
    assert result.reynolds == pytest.approx(270_000, rel=0.02)
    assert result.friction_factor == pytest.approx(0.020, abs=0.0005)
    assert result.loss / WHITE_6_6.unit_weight / FOOT == pytest.approx(4.5, abs=0.05 + 0.025 * 4.5)
    assert result.loss / SQUARE_FOOT_POUND == pytest.approx(280, abs=5)


def test_white_6_7_loss_and_fall() -> None:
    """f 0.0225, 117 m; the drop 265 kPa is 900·9.81·(117 − 87), each head to half a metre."""
    result = solve_one_pipe(WHITE_6_7)
    assert result.velocity == pytest.approx(6.4, abs=0.05)
    assert result.friction_factor == pytest.approx(
        0.0225, rel=0.0125
    )  # chart: 0.0225 between 0.022 and 0.023
    assert result.loss / (900 * 9.81) == pytest.approx(117, abs=0.5)
    assert result.drop == pytest.approx(265_000, abs=900 * 9.81 * (0.5 + 0.5))


def test_white_6_9_flow() -> None:
    """4.84 m/s, 0.342 m³/s, Re 72 600, f 0.0201, each to half a unit of its last digit."""
    result = solve_one_pipe(WHITE_6_9)
    assert result.velocity == pytest.approx(4.84, abs=0.005)
    assert result.flow == pytest.approx(0.342, abs=0.0005)
    assert result.reynolds == pytest.approx(72_600, abs=50)
    assert result.friction_factor == pytest.approx(0.0201, abs=0.00005)


def test_white_6_11_diameter() -> None:
    """0.3 m, for a flow of three digits (0.15 %, 0.06 % of the diameter)."""
    assert solve_one_pipe(WHITE_6_11).bore == pytest.approx(0.300, abs=0.0005)


def test_cengel_8_2_laminar() -> None:
    """Re 1803, f 0.0355, 930 lbf/ft², 14.9 ft, 0.30 W: half a unit of the last digit, and of f in the loss.

    Viscosity has four digits, ±0.05 %; Re 1803 is 1804.0 from the figures printed.
    """
    result = solve_one_pipe(CENGEL_8_2)
    assert result.regime == "laminar"
    assert result.reynolds == pytest.approx(1803, abs=0.5 + 0.0005 * 1803)
    assert result.friction_factor == pytest.approx(0.0355, abs=0.00005)
    assert result.loss / SQUARE_FOOT_POUND == pytest.approx(930, abs=0.5 + 930 * 0.00005 / 0.0355)
    assert result.loss / CENGEL_8_2.unit_weight / FOOT == pytest.approx(14.9, abs=0.05)
    assert result.loss * result.flow == pytest.approx(0.30, abs=0.005)


def test_fox_8_5_pressure_at_the_start() -> None:
    """2.26 m/s, Re 1.70e5, f 0.0162, 153 kPa; f to half a digit is 0.3 % of the friction, 0.2 kPa."""
    result = solve_one_pipe(FOX_8_5)
    assert result.velocity == pytest.approx(2.26, abs=0.005)
    assert result.reynolds == pytest.approx(1.70e5, abs=500)
    assert result.friction_factor == pytest.approx(0.0162, abs=0.00005)
    assert result.drop / 1e3 == pytest.approx(153, abs=0.5 + 0.2)
