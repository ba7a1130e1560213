"""Darcy-Weisbach friction: laminar, transition and the exact Colebrook factor.

The law is written with the group ``f·Re²``, which is proportional to the loss and, unlike f, finite at
zero flow: loss for each metre = f·Re² · μ²/(2·ρ·D³).

* Re ≤ 2000: f = 64/Re, so f·Re² = 64·Re.
* Re ≥ 4000: 1/√f = −2·log₁₀(ε/(3.7·D) + 2.51/(Re·√f)) [1]_, solved exactly. With c = 2/ln 10,
  a = ε/(3.7·D), b = 2.51/Re and a + b/√f = b·c·ω it reads ω + ln ω = a/(b·c) − ln(b·c), which is the
  definition of the Wright omega function [2]_ of the right-hand side; then
  1/√f = −c·ln(b·c·ω) and d ln f/d ln Re = −2/(1 + ω).
* Between: the cubic of Hermite in Re through both ends, values and slopes. It is monotone: the slope at
  either end is less than three times the mean slope of the interval (Fritsch and Carlson 1980).

No published law covers the transition; flow there is unsteady, and the cubic is a bridge that keeps
loss continuous, smooth and increasing. A result with 2000 < Re < 4000 deserves a remark.

References
----------
.. [1] Colebrook (1939), J. Inst. Civ. Eng. 11, 133-156.
.. [2] Corless and Jeffrey (2002), The Wright omega function, LNCS 2385.
.. [3] Fritsch, Shafer and Crowley (1973), Algorithm 443, Commun. ACM 16, 123.
"""

from __future__ import annotations

import math
from typing import Final

import numpy as np

from supplycheck.errors import DomainError
from supplycheck.hydraulics.numbers import (
    AnyNumber,
    FloatArray,
    Number,
    as_array,
    not_negative,
    plain,
    positive,
    spread,
)

LAMINAR_END: Final = 2000.0
TURBULENT_START: Final = 4000.0
_C: Final = 2.0 / math.log(10.0)


def friction_factor(*, reynolds: Number, relative_roughness: AnyNumber) -> tuple[Number, Number]:
    """Return the Darcy friction factor and its derivative with respect to the Reynolds number.

    Parameters
    ----------
    reynolds : Reynolds number, 0 or more. [-]
    relative_roughness : Roughness over bore, 0 up to 1 (the chart of Moody ends at 0.05). [-]

    Returns
    -------
    Factor f and df/dRe [-], in the broadcast shape; at Re = 0 they are +inf and −inf.

    Raises
    ------
    DomainError
        Reynolds number negative, relative roughness negative or 1 and more.

    Examples
    --------
    >>> f, slope = friction_factor(reynolds=1000.0, relative_roughness=0.0)
    >>> round(f, 6), round(slope, 9)
    (0.064, -6.4e-05)
    """
    group, slope = friction_group(reynolds=reynolds, relative_roughness=relative_roughness)
    shape = np.shape(group)
    re = np.broadcast_to(as_array(reynolds), shape)
    with np.errstate(divide="ignore", invalid="ignore", over="ignore", under="ignore"):
        factor = np.where(re <= LAMINAR_END, 64.0 / re, group / re**2)
        turbulent = slope / re**2 - 2.0 * factor / re
        derivative = np.where(re <= LAMINAR_END, -64.0 / re**2, turbulent)
    return plain(factor), plain(derivative)


def friction_group(*, reynolds: Number, relative_roughness: AnyNumber) -> tuple[Number, Number]:
    """Return f·Re² and its derivative with respect to Re: continuous, smooth and increasing from 0.

    Parameters
    ----------
    reynolds : Reynolds number, 0 or more. [-]
    relative_roughness : Roughness over bore, 0 up to 1. [-]

    Returns
    -------
    Group f·Re² and d(f·Re²)/dRe [-], in the broadcast shape.

    Raises
    ------
    DomainError
        Reynolds number negative, relative roughness negative or 1 and more.
    """
    re = not_negative("Reynolds number", "", reynolds)
    rough = not_negative("relative roughness", "", relative_roughness)
    if np.any(rough >= 1.0):
        raise DomainError(
            "relative roughness must be below 1 (the chart of Moody ends at 0.05); "
            f"found {float(rough.max()):g}"
        )
    if re.shape != rough.shape:
        re, rough = np.broadcast_arrays(re, rough)
    value, slope = friction_group_unchecked(re, rough)
    return plain(value), plain(slope)


def friction_group_unchecked(
    reynolds: FloatArray, relative_roughness: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return :func:`friction_group` of arrays of one shape that are known to be in range."""
    value, slope = _colebrook(np.maximum(reynolds, TURBULENT_START), relative_roughness)
    low = reynolds < TURBULENT_START
    if low.any():
        value, slope = np.array(value), np.array(slope)  # a scalar of numpy takes no assignment
        # below the turbulent range `value` and `slope` hold the Colebrook end of the bridge
        value[low], slope[low] = _bridge(reynolds[low], value[low], slope[low])
    return value, slope


def _colebrook(re: FloatArray, rough: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return f·Re² and its derivative by the exact Colebrook factor."""
    bc = (2.51 * _C) / re
    omega = _wright_omega(rough / (3.7 * bc) - np.log(bc))
    x = -_C * np.log(bc * omega)  # 1/√f
    value = (re / x) ** 2
    return value, value / re * (2.0 * omega / (1.0 + omega))


def _wright_omega(z: FloatArray) -> FloatArray:
    """Return ω with ω + ln ω = z, for real z of 7 and more, which is all that Re ≥ 4000 asks for.

    The start is its asymptotic series, right to 0.2 % here; one step of the fourth order by Fritsch,
    Shafer and Crowley [3]_ brings it to the last digit. Written out because it is three times as fast
    on arrays as the general function for complex numbers, and spares loading a library.
    """
    log = np.log(z)
    start = z - log + log / z
    left = z - start - np.log(start)
    one = 1.0 + start
    step = one * (one + (2.0 / 3.0) * left)
    return start * (1.0 + left / one * (step - 0.5 * left) / (step - left))


def _bridge(re: FloatArray, end: FloatArray, end_slope: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return f·Re² and its derivative for Re below the turbulent range.

    The laminar line, plus what the cubic adds to it: nothing, with slope zero, up to the laminar end.
    """
    width = TURBULENT_START - LAMINAR_END
    u = np.maximum(re - LAMINAR_END, 0.0) / width
    rise = end - 64.0 * TURBULENT_START
    turn = width * (end_slope - 64.0)
    c2 = 3.0 * rise - turn
    c3 = u * (turn - 2.0 * rise)
    return 64.0 * re + u * u * (c2 + c3), 64.0 + u / width * (2.0 * c2 + 3.0 * c3)


def reynolds_number(
    *, flow: Number, bore: AnyNumber, density: AnyNumber, viscosity: AnyNumber
) -> tuple[Number, Number]:
    """Return the Reynolds number 4·ρ·\\|q\\|/(π·D·μ) and its derivative with respect to \\|q\\|.

    Parameters
    ----------
    flow : Flow, either sign. [m³/s]
    bore : Inside diameter. [m]
    density : Density. [kg/m³]
    viscosity : Dynamic viscosity. [Pa·s]

    Raises
    ------
    DomainError
        Bore, density or viscosity not above 0.
    """
    d = positive("bore", "m", bore)
    rho = positive("density", "kg/m³", density)
    mu = positive("viscosity", "Pa·s", viscosity)
    slope = 4.0 * rho / (math.pi * d * mu)
    size = np.abs(as_array(flow))
    return plain(slope * size), spread(slope, size)


def darcy_weisbach_gradient(
    *, flow: Number, bore: AnyNumber, roughness: AnyNumber, density: AnyNumber, viscosity: AnyNumber
) -> tuple[Number, Number]:
    """Return the friction loss for each metre and its exact derivative with respect to the flow.

    Parameters
    ----------
    flow : Flow, either sign; the loss has the sign of the flow. [m³/s]
    bore : Inside diameter. [m]
    roughness : Absolute roughness. [m]
    density : Density. [kg/m³]
    viscosity : Dynamic viscosity. [Pa·s]

    Returns
    -------
    Loss [Pa/m] and derivative [Pa/m/(m³/s)]; at zero flow the laminar slope, which is above zero.

    Raises
    ------
    DomainError
        Bore, density or viscosity not above 0; roughness negative or not below the bore.

    Examples
    --------
    Laminar oil, against the law of Hagen and Poiseuille, 128·μ·q/(π·D⁴):

    >>> loss, _ = darcy_weisbach_gradient(
    ...     flow=0.001, bore=0.1, roughness=0.0, density=900.0, viscosity=0.1
    ... )
    >>> round(loss, 3), round(128 * 0.1 * 0.001 / (math.pi * 0.1**4), 3)
    (40.744, 40.744)
    """
    d = positive("bore", "m", bore)
    rho = positive("density", "kg/m³", density)
    mu = positive("viscosity", "Pa·s", viscosity)
    q = as_array(flow)
    by_flow = 4.0 * rho / (math.pi * d * mu)
    group, slope = friction_group(
        reynolds=by_flow * np.abs(q), relative_roughness=not_negative("roughness", "m", roughness) / d
    )
    scale = mu**2 / (2.0 * rho * d**3)
    return plain(np.sign(q) * group * scale), plain(slope * scale * by_flow)
