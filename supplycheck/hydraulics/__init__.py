"""The laws, as keyword-only SI functions that return value and derivative; one-pipe problems.

Argument and result are scalars or arrays alike. Nothing here knows a project, a unit set or a table.
"""

from supplycheck.hydraulics.curve import Curve, curve_through
from supplycheck.hydraulics.darcy_weisbach import (
    darcy_weisbach_gradient,
    friction_factor,
    friction_group,
    friction_group_unchecked,
    reynolds_number,
)
from supplycheck.hydraulics.discharge import (
    k_factor_discharge,
    k_factor_of,
    k_factor_pressure,
    pitot_discharge,
)
from supplycheck.hydraulics.equivalent_length import (
    bore_factor,
    c_multiplier,
    equivalent_length,
    k_of_length,
    length_of_k,
)
from supplycheck.hydraulics.hazen_williams import hazen_williams_gradient, hazen_williams_resistance
from supplycheck.hydraulics.heads import elevation_pressure, minor_loss, velocity, velocity_pressure
from supplycheck.hydraulics.one_pipe import solve as solve_one_pipe
from supplycheck.hydraulics.pipe_laws import ConstantFactor, DarcyWeisbach, HazenWilliams, PipeLaw
from supplycheck.hydraulics.pipe_problem import OnePipe, OnePipeResult, Step
from supplycheck.hydraulics.power import KNEE, smooth_power
from supplycheck.hydraulics.pump import (
    at_speed,
    limiting_pump_curve,
    power_from_pressure,
    pressure_from_power,
    pump_curve,
    pump_pressure,
    rated_pump_curve,
)
from supplycheck.hydraulics.water import water_density, water_viscosity

__all__ = [
    "KNEE",
    "ConstantFactor",
    "Curve",
    "DarcyWeisbach",
    "HazenWilliams",
    "OnePipe",
    "OnePipeResult",
    "PipeLaw",
    "Step",
    "at_speed",
    "bore_factor",
    "c_multiplier",
    "curve_through",
    "darcy_weisbach_gradient",
    "elevation_pressure",
    "equivalent_length",
    "friction_factor",
    "friction_group",
    "friction_group_unchecked",
    "hazen_williams_gradient",
    "hazen_williams_resistance",
    "k_factor_discharge",
    "k_factor_of",
    "k_factor_pressure",
    "k_of_length",
    "length_of_k",
    "limiting_pump_curve",
    "minor_loss",
    "pitot_discharge",
    "power_from_pressure",
    "pressure_from_power",
    "pump_curve",
    "pump_pressure",
    "rated_pump_curve",
    "reynolds_number",
    "smooth_power",
    "solve_one_pipe",
    "velocity",
    "velocity_pressure",
    "water_density",
    "water_viscosity",
]
