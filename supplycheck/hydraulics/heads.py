"""Elevation, velocity and velocity pressure; minor losses.

The trade prints velocity pressure as 0.001123·Q²/d⁴ (psi, gpm, in) and velocity as 0.4085·Q/d² (ft/s).
Here velocity pressure is ½·ρ·v² for the fluid's own density, because one law then serves water, antifreeze
and air. The printed 0.001123 is the same law for a density of 998.9 kg/m³ (:data:`PRINTED_DENSITY`); its
last digit leaves ±0.045 %, within which water from 0 to 20 °C lies.

References
----------
.. [1] NFPA 13, velocity pressure formula (from memory; checked against ½·ρ·v²).
"""

from __future__ import annotations

import math
from typing import Final

from supplycheck.hydraulics.numbers import (
    AnyNumber,
    Number,
    as_array,
    not_negative,
    plain,
    positive,
    spread,
)
from supplycheck.hydraulics.power import smooth_power

_INCH: Final = 0.0254
_PSI: Final = 0.45359237 * 9.80665 / 0.0254**2
_GPM: Final = 231 * 0.0254**3 / 60
PRINTED_DENSITY: Final = 2.0 * 0.001123 * _PSI * (math.pi / 4.0 * _INCH**2 / _GPM) ** 2
"""Density [kg/m³] with which ½·ρ·v² is exactly the printed 0.001123·Q²/d⁴."""


def elevation_pressure(*, rise: Number, unit_weight: float) -> tuple[Number, Number]:
    """Return the pressure lost to a rise, and its derivative (the unit weight).

    Parameters
    ----------
    rise : Elevation of the end above the start, either sign. [m]
    unit_weight : Weight of the fluid, ρ·g or the figure the standard prints. [Pa/m]

    Returns
    -------
    Pressure [Pa] and derivative [Pa/m].

    Raises
    ------
    DomainError
        Unit weight not above 0.
    """
    weight = positive("unit weight", "Pa/m", unit_weight)
    z = as_array(rise)
    return plain(weight * z), spread(weight, z)


def velocity(*, flow: Number, bore: AnyNumber) -> tuple[Number, Number]:
    """Return the mean velocity and its derivative with respect to the flow.

    Parameters
    ----------
    flow : Flow, either sign. [m³/s]
    bore : Inside diameter. [m]

    Returns
    -------
    Velocity [m/s], signed as the flow, and derivative [1/m²].

    Raises
    ------
    DomainError
        Bore not above 0.
    """
    slope = 4.0 / (math.pi * positive("bore", "m", bore) ** 2)
    q = as_array(flow)
    return plain(slope * q), spread(slope, q)


def velocity_pressure(*, flow: Number, bore: AnyNumber, density: AnyNumber) -> tuple[Number, Number]:
    """Return ½·ρ·v² and its derivative with respect to the flow.

    Parameters
    ----------
    flow : Flow, either sign. [m³/s]
    bore : Inside diameter. [m]
    density : Density; :data:`PRINTED_DENSITY` gives the printed US form exactly. [kg/m³]

    Returns
    -------
    Velocity pressure [Pa], never negative, and derivative [Pa/(m³/s)].

    Raises
    ------
    DomainError
        Bore or density not above 0.
    """
    rho = positive("density", "kg/m³", density)
    v, by_flow = velocity(flow=flow, bore=bore)
    speed = as_array(v)
    return plain(0.5 * rho * speed**2), plain(rho * speed * by_flow)


def minor_loss(
    *, flow: Number, bore: AnyNumber, minor_k: AnyNumber, density: AnyNumber
) -> tuple[Number, Number]:
    """Return the loss K·½·ρ·v·\\|v\\| of fittings given by a coefficient, and its derivative.

    Parameters
    ----------
    flow : Flow, either sign; the loss has the sign of the flow. [m³/s]
    bore : Inside diameter to which K refers. [m]
    minor_k : Sum of the loss coefficients, 0 or more. [-]
    density : Density. [kg/m³]

    Returns
    -------
    Loss [Pa] and derivative [Pa/(m³/s)]; smooth at zero flow as :func:`smooth_power`.

    Raises
    ------
    DomainError
        Bore or density not above 0, coefficient negative.
    """
    k = not_negative("loss coefficient", "", minor_k)
    rho = positive("density", "kg/m³", density)
    d = positive("bore", "m", bore)
    resistance = k * 0.5 * rho * (4.0 / (math.pi * d**2)) ** 2
    value, slope = smooth_power(flow, 2.0)
    return plain(resistance * value), plain(resistance * slope)
