"""Hazen-Williams friction, in any of its published forms.

A form is three numbers: the loss for each metre of pipe is
``coefficient · q**n / (C**n · bore**m)`` [Pa/m] with q in m³/s and the bore in m, the coefficient being
the published one converted by exact factors (4.52, 1.85, 4.87 in psi/ft, gpm, in; 6.05e5, 1.85, 4.87 in
bar/m, L/min, mm; 10.67, 1.852, 4.87 in m/m, m³/s, m).

References
----------
.. [1] NFPA 13, friction loss formula (from memory; cross-checked with its annex sample calculation).
.. [2] BS EN 12845:2004, 13.2.1.
"""

from __future__ import annotations

from typing import Any

from supplycheck.hydraulics.numbers import AnyNumber, Number, plain, positive
from supplycheck.hydraulics.power import smooth_power


def hazen_williams_resistance(
    *,
    bore: AnyNumber,
    c_factor: AnyNumber,
    coefficient: float,
    flow_exponent: float,
    bore_exponent: float,
) -> Any:
    """Return the loss for each metre at unit flow, ``coefficient / (C**n · bore**m)``.

    A network multiplies it by length and by :func:`smooth_power` of the flow; it does not depend on the
    flow, so it needs computing only once for a pipe.

    Parameters
    ----------
    bore : Inside diameter. [m]
    c_factor : Hazen-Williams C. [-]
    coefficient, flow_exponent, bore_exponent : The form of the law, see the module. [SI]

    Returns
    -------
    Resistance [Pa/m/(m³/s)ⁿ], in the broadcast shape of ``bore`` and ``c_factor``.

    Raises
    ------
    DomainError
        Bore or C not above 0.
    """
    d = positive("bore", "m", bore)
    c = positive("C-factor", "", c_factor)
    return plain(coefficient / (c**flow_exponent * d**bore_exponent))


def hazen_williams_gradient(
    *,
    flow: Number,
    bore: AnyNumber,
    c_factor: AnyNumber,
    coefficient: float,
    flow_exponent: float,
    bore_exponent: float,
) -> tuple[Number, Number]:
    """Return the friction loss for each metre and its derivative with respect to the flow.

    Parameters
    ----------
    flow : Flow, either sign; the loss has the sign of the flow. [m³/s]
    bore : Inside diameter. [m]
    c_factor : Hazen-Williams C. [-]
    coefficient, flow_exponent, bore_exponent : The form of the law, see the module. [SI]

    Returns
    -------
    Loss [Pa/m] and derivative [Pa/m/(m³/s)], C¹ with a slope above zero at zero flow
    (:func:`supplycheck.hydraulics.power.smooth_power`).

    Raises
    ------
    DomainError
        Bore or C not above 0.
    """
    resistance = hazen_williams_resistance(
        bore=bore,
        c_factor=c_factor,
        coefficient=coefficient,
        flow_exponent=flow_exponent,
        bore_exponent=bore_exponent,
    )
    value, slope = smooth_power(flow, flow_exponent)
    return resistance * value, resistance * slope
