"""Computed beside printed: the laws and one-pipe problems against published figures."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

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
    OnePipeResult,
    c_multiplier,
    equivalent_length,
    friction_factor,
    hazen_williams_gradient,
    k_factor_discharge,
    pitot_discharge,
    solve_one_pipe,
    velocity,
    velocity_pressure,
    water_density,
    water_viscosity,
)
from supplycheck.model import HW_US
from supplycheck.units import FOOT, GPM, GRAVITY, INCH, METRIC, PSI, US

HORSEPOWER = 550 * FOOT * 0.45359237 * GRAVITY
SIXTY_F = 273.15 + 140 / 9


@dataclass(frozen=True, slots=True)
class Row:
    """One published figure: what it is, the figure as printed, what is computed, the remark."""

    what: str
    printed: str
    computed: float
    decimals: int
    remark: str = ""

    @property
    def line(self) -> str:
        return f"| {self.what} | {self.printed} | {self.computed:.{self.decimals}f} | {self.remark} |"


def psi_per_foot(gpm: float, inches: float, c: float = 120.0) -> float:
    """Return the US Hazen-Williams loss [psi/ft]."""
    gradient, _ = hazen_williams_gradient(
        flow=gpm * GPM,
        bore=inches * INCH,
        c_factor=c,
        coefficient=HW_US.coefficient,
        flow_exponent=HW_US.flow_exponent,
        bore_exponent=HW_US.bore_exponent,
    )
    return gradient / (PSI / FOOT)


def annex_rows() -> list[Row]:
    """Rows of the NFPA 13 annex sample calculation (from memory)."""
    printed = [
        ("19.5 gpm, 1 in", 19.5, 1.049, 120, "0.124", ""),
        ("40.2 gpm, 1¼ in", 40.2, 1.380, 120, "0.125", ""),
        ("62.2 gpm, 1½ in", 62.2, 1.610, 120, "0.132", ""),
        ("85.4 gpm, 1½ in", 85.4, 1.610, 120, "0.237", ""),
        ("85.4 gpm, 2 in", 85.4, 2.067, 120, "0.070", ""),
        ("171.9 gpm, 2½ in", 171.9, 2.469, 120, "0.107", "cut, not rounded; 0.108 is printed too"),
        ("260.2 gpm, 2½ in", 260.2, 2.469, 120, "0.232", ""),
        ("260.2 gpm, 3 in", 260.2, 3.068, 120, "0.081", ""),
        ("260.2 gpm, 3 in copper type M, C 150", 260.2, 2.981, 150, "0.061", ""),
    ]
    rows = [
        Row(f"{what}, psi/ft", text, psi_per_foot(gpm, bore, c), 4, remark)
        for what, gpm, bore, c, text, remark in printed
    ]
    length = equivalent_length(table_length=21.0, c_factor=150.0, bore=2.981, reference_bore=3.068)
    rows.append(Row("21 ft of fittings in it, ft", "27.6", length, 2, "C and bore corrections together"))
    return rows


def trade_rows() -> list[Row]:
    """Single figures of the trade."""
    k = METRIC.from_si(US.to_si(5.6, "k_factor"), "k_factor")
    head = k_factor_discharge(pressure=7 * PSI, k_factor=US.to_si(5.6, "k_factor"))[0] / GPM
    pitot = pitot_discharge(pitot=14 * PSI, diameter=2.5 * INCH, coefficient=0.9)[0] / GPM
    pressure = velocity_pressure(flow=100 * GPM, bore=2.067 * INCH, density=998.2)[0] / PSI
    speed = velocity(flow=100 * GPM, bore=2.067 * INCH)[0] / FOOT
    mu = water_viscosity(temperature=293.15)[0] * 1e3
    ratio = 100 * psi_per_foot(60, 1.380) / psi_per_foot(60, 1.610)
    return [
        Row("100 gpm in 2 in Schedule 40, psi/ft", "0.094", psi_per_foot(100, 2.067), 5),
        Row("100 ft of 1¼ in as 1½ in, ft", "211.9", ratio, 2),
        Row(
            "multiplier for C 100",
            "0.713",
            c_multiplier(c_factor=100.0),
            4,
            "printed 0.713; (100/120)^1.85 is 0.714",
        ),
        Row("multiplier for C 150", "1.51", c_multiplier(c_factor=150.0), 4),
        Row("K 5.6 gpm/psi½ in L/min/bar½", "80.6", k, 2, "14.4 printed for 14.4163"),
        Row("K 5.6 at 7 psi, gpm", "14.8", head, 2),
        Row(
            "2½ in outlet, c 0.90, pitot 14 psi, gpm",
            "627.5",
            pitot,
            1,
            "training slides; 627.8 with 29.83, 628.0 with 29.84",
        ),
        Row("velocity, 100 gpm in 2.067 in, ft/s", "9.56", speed, 3),
        Row(
            "velocity pressure of it, psi",
            "0.615",
            pressure,
            4,
            "printed form: 998.9 kg/m³, here 998.2",
        ),
        Row("water at 20 °C, mPa·s", "1.0016", mu, 4, "ISO/TR 3666"),
        Row("water at 20 °C, kg/m³", "998.2", water_density(temperature=293.15)[0], 2, "CRC Handbook"),
    ]


def chart_rows() -> list[Row]:
    """Friction factors."""
    rows = []
    for rough, name in ((1e-4, "0.0001"), (1e-3, "0.001"), (1e-2, "0.01")):
        printed = {
            1e-4: ("0.0310", "0.0185", "0.0134", "0.0122"),
            1e-3: ("0.0324", "0.0222", "0.0199", "0.0197"),
            1e-2: ("0.0431", "0.0385", "0.0380", "0.0379"),
        }[rough]
        for power, text in zip((4, 5, 6, 7), printed, strict=True):
            f, _ = friction_factor(reynolds=10.0**power, relative_roughness=rough)
            rows.append(Row(f"f, ε/d {name}, Re 10^{power}", text, f, 5, "Colebrook by hand iteration"))
    smooth = {4e3: "0.0399", 1e4: "0.0309", 1e5: "0.0180", 1e6: "0.0116", 1e7: "0.0081", 1e8: "0.0059"}
    for reynolds, text in smooth.items():
        f, _ = friction_factor(reynolds=reynolds, relative_roughness=0.0)
        rows.append(Row(f"f, smooth, Re {reynolds:,.0f}", text, f, 5, "Prandtl's law, White"))
    return rows


def fire_line(law: ConstantFactor | DarcyWeisbach) -> OnePipeResult:
    """Fox and McDonald, example 8.7."""
    rho, mu = water_density(temperature=SIXTY_F)[0], water_viscosity(temperature=SIXTY_F)[0]
    return solve_one_pipe(
        OnePipe(
            law=law,
            length=680 * FOOT,
            density=rho,
            unit_weight=rho * GRAVITY,
            viscosity=mu,
            bore=4 * INCH,
            drop=0.0,
            rise=-80 * FOOT,
            minor_k=8 * 0.031,
            start="reservoir",
            end="jet",
        )
    )


def pumped_line() -> OnePipeResult:
    """White, reservoirs joined by a pumped pipe."""
    return solve_one_pipe(
        OnePipe(
            law=DarcyWeisbach(0.001 * 2 * INCH),
            length=400 * FOOT,
            density=998.2,
            unit_weight=998.2 * GRAVITY,
            viscosity=1.0e-3,
            bore=2 * INCH,
            flow=0.2 * FOOT**3,
            drop=0.0,
            rise=100 * FOOT,
            minor_k=13.2,
            start="reservoir",
            end="reservoir",
        )
    )


def problem_rows() -> list[Row]:
    """The text-book problems."""
    given, wall, pump = (
        fire_line(ConstantFactor(0.031)),
        fire_line(DarcyWeisbach(0.02 * INCH)),
        pumped_line(),
    )
    water = OnePipe(
        law=DarcyWeisbach(2e-6), length=60.0, density=999.0, unit_weight=999 * 9.81, viscosity=1.138e-3
    )
    air = OnePipe(
        law=DarcyWeisbach(0.0),
        length=150.0,
        density=1.145,
        unit_weight=1.145 * 9.81,
        viscosity=1.655e-5 * 1.145,
        loss=20 * 1.145 * 9.81,
    )
    steel = solve_one_pipe(replace(water, bore=0.05, flow=0.006))
    duct = solve_one_pipe(replace(air, flow=0.35))
    longer = solve_one_pipe(replace(air, length=300.0, bore=0.267))
    fox, third = "Fox and McDonald 8.7", "Çengel and Cimbala 8-3"
    fourth, fifth, white = "Çengel and Cimbala 8-4", "Çengel and Cimbala 8-5", "White, ch. 6"
    return [
        Row(f"{fox}: flow with f 0.031, gpm", "350", given.flow / GPM, 1),
        Row(f"{fox}: f from ε/d 0.005", "0.031", wall.friction_factor, 5),
        Row(f"{fox}: flow with that f, gpm", "350", wall.flow / GPM, 1),
        Row(f"{third}: f", "0.0172", steel.friction_factor, 5),
        Row(f"{third}: loss, kPa", "96.2–96.5", steel.loss / 1e3, 2, "editions differ: f rounded or not"),
        Row(f"{third}: loss, m", "9.8", steel.loss / (999 * 9.81), 3),
        Row(f"{fourth}: diameter, m", "0.267", duct.bore, 5),
        Row(f"{fourth}: velocity, m/s", "6.24", duct.velocity, 3),
        Row(f"{fourth}: Re", "100 800", duct.reynolds or math.nan, 0, "printed with d rounded to 0.267"),
        Row(f"{fourth}: f", "0.0180", duct.friction_factor, 5),
        Row(f"{fifth}: flow, m³/s", "0.24", longer.flow, 4),
        Row(f"{fifth}: drop of the flow, m³/s", "0.11", 0.35 - longer.flow, 4),
        Row(
            f"{white}: pump head, ft",
            "184.7",
            pump.pump_pressure / (998.2 * GRAVITY * FOOT),
            2,
            "the book's chart gives f 0.0216 and 185 ft",
        ),
        Row(f"{white}: power, hp", "4.2", pump.fluid_power / HORSEPOWER, 3),
    ]


def more_problem_rows() -> list[Row]:
    """More text-book problems, from memory of the books."""
    cast, oil, flow = (solve_one_pipe(problem) for problem in (WHITE_6_6, WHITE_6_7, WHITE_6_9))
    second = "Çengel and Cimbala 8-2"
    size, thin, start = (solve_one_pipe(problem) for problem in (WHITE_6_11, CENGEL_8_2, FOX_8_5))
    return [
        Row("White 6.6: f", "0.02", cast.friction_factor, 4, "read off the chart"),
        Row("White 6.6: head loss, ft", "4.5", cast.loss / WHITE_6_6.unit_weight / FOOT, 2, "from f 0.02"),
        Row("White 6.6: loss, lbf/ft²", "280", cast.loss / SQUARE_FOOT_POUND, 0, "from 4.5 ft"),
        Row("White 6.7: f", "0.0225", oil.friction_factor, 5, "read off the chart"),
        Row("White 6.7: head loss, m", "117", oil.loss / WHITE_6_7.unit_weight, 1),
        Row("White 6.7: drop of pressure, kPa", "265", oil.drop / 1e3, 1, "from whole metres, 117 − 87"),
        Row("White 6.9: velocity, m/s", "4.84", flow.velocity, 3),
        Row("White 6.9: flow, m³/s", "0.342", flow.flow, 4),
        Row("White 6.9: f", "0.0201", flow.friction_factor, 5),
        Row("White 6.11: diameter, m", "0.30", size.bore, 4),
        Row(
            "Çengel and Cimbala 8-2: Re, laminar", "1803", thin.reynolds or math.nan, 0, "viscosity ±0.05 %"
        ),
        Row(f"{second}: f", "0.0355", thin.friction_factor, 5),
        Row(
            "Çengel and Cimbala 8-2: loss, lbf/ft²",
            "930",
            thin.loss / SQUARE_FOOT_POUND,
            1,
            "from f 0.0355",
        ),
        Row("Fox and McDonald 8.5: f", "0.0162", start.friction_factor, 5),
        Row("Fox and McDonald 8.5: pressure at the start, kPa", "153", start.drop / 1e3, 1),
    ]
