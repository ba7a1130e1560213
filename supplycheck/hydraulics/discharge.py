"""Discharge of sprinklers, outlets and hydrant openings.

References
----------
.. [1] NFPA 13 and EN 12845: q = K·√p.
.. [2] NFPA 291: q = 29.84·c·d²·√p in gpm, in, psi (from memory; 29.83 is also printed, 0.03 % less).
"""

from __future__ import annotations

import math
from typing import Final

import numpy as np

from supplycheck.hydraulics.numbers import (
    AnyNumber,
    Number,
    as_array,
    not_negative,
    plain,
    positive,
    spread,
)

RUN_DRY: Final = 10.0
"""Pressure [Pa] (0.1 mbar) below which the discharge of an outlet fades smoothly to nothing."""

_INCH: Final = 0.0254
_PSI: Final = 0.45359237 * 9.80665 / 0.0254**2
_GPM: Final = 231 * 0.0254**3 / 60
PITOT: Final = 29.84 * _GPM / (_INCH**2 * math.sqrt(_PSI))
"""The published 29.84 in SI [m³/s / (m²·√Pa)]; the ideal value is (π/4)·√(2/ρ)."""


def k_factor_discharge(*, pressure: Number, k_factor: AnyNumber) -> tuple[Number, Number]:
    """Return the discharge K·√p of an open outlet and its derivative with respect to the pressure.

    From 10 Pa (0.1 mbar) upward the law is exact. Below, where √p has an endless slope, a cubic takes
    it to zero with value and slope continuous; an outlet with no pressure or a negative one gives
    nothing (it cannot draw water in).

    Parameters
    ----------
    pressure : Gauge pressure at the outlet, any sign. [Pa]
    k_factor : K-factor. [m³/s/√Pa]

    Returns
    -------
    Discharge [m³/s] and derivative [m³/s/Pa], both 0 or more.

    Raises
    ------
    DomainError
        K-factor negative.
    """
    k = not_negative("K-factor", "m³/s/√Pa", k_factor)
    p = as_array(pressure)
    root = np.sqrt(np.maximum(p, RUN_DRY))
    s = np.clip(p / RUN_DRY, 0.0, 1.0)
    dry = p < RUN_DRY
    value = np.where(dry, math.sqrt(RUN_DRY) * s * s * (2.5 - 1.5 * s), root)
    slope = np.where(dry, s * (5.0 - 4.5 * s) / math.sqrt(RUN_DRY), 0.5 / root)
    return plain(k * value), plain(k * slope)


def k_factor_pressure(*, flow: Number, k_factor: AnyNumber) -> tuple[Number, Number]:
    """Return the pressure (q/K)² that an outlet needs and its derivative with respect to the flow.

    Parameters
    ----------
    flow : Discharge, 0 or more. [m³/s]
    k_factor : K-factor. [m³/s/√Pa]

    Returns
    -------
    Pressure [Pa] and derivative [Pa/(m³/s)].

    Raises
    ------
    DomainError
        K-factor not above 0, or flow negative.
    """
    k = positive("K-factor", "m³/s/√Pa", k_factor)
    q = not_negative("flow", "m³/s", flow)
    return plain((q / k) ** 2), plain(2.0 * q / k**2)


def k_factor_of(*, flow: Number, pressure: AnyNumber) -> tuple[Number, Number]:
    """Return the K-factor q/√p of an outlet, or of all that a branch feeds, and dK/dq.

    Parameters
    ----------
    flow : Discharge at ``pressure``, 0 or more. [m³/s]
    pressure : Gauge pressure. [Pa]

    Raises
    ------
    DomainError
        Pressure not above 0, or flow negative.
    """
    q = not_negative("flow", "m³/s", flow)
    root = np.sqrt(positive("pressure", "Pa", pressure))
    return plain(q / root), spread(1.0 / root, q)


def pitot_discharge(*, pitot: Number, diameter: AnyNumber, coefficient: AnyNumber) -> tuple[Number, Number]:
    """Return the discharge of a flowing hydrant outlet and its derivative with respect to the pitot.

    q = 29.84·c·d²·√p [2]_. The factor of a pumper outlet multiplies the coefficient.

    Parameters
    ----------
    pitot : Pitot (velocity) pressure, above 0. [Pa]
    diameter : Inside diameter of the opening. [m]
    coefficient : Outlet coefficient. [-]

    Returns
    -------
    Discharge [m³/s] and derivative [m³/s/Pa].

    Raises
    ------
    DomainError
        Pitot pressure, diameter or coefficient not above 0.
    """
    p = positive("pitot pressure", "Pa", pitot)
    d = positive("outlet diameter", "m", diameter)
    c = positive("outlet coefficient", "", coefficient)
    flow = PITOT * c * d**2 * np.sqrt(p)
    return plain(flow), plain(flow / (2.0 * p))
