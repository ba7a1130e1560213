"""The odd power of the flow that every turbulent loss is made of, made smooth at zero flow."""

from __future__ import annotations

from typing import Final

import numpy as np

from supplycheck.hydraulics.numbers import Number, as_array, plain

KNEE: Final = 1e-6
"""Flow [m³/s] (0.06 L/min) below which the power is replaced by its smooth continuation."""


def smooth_power(flow: Number, exponent: float, knee: float = KNEE) -> tuple[Number, Number]:
    """Return q·\\|q\\|^(n−1) and its derivative, with a slope above zero at zero flow.

    The plain power has slope 0 at q = 0 for n > 1, which makes the Jacobian of a network with a dead
    branch singular. For \\|q\\| below ``knee`` it is replaced by ``knee**n · (a·t + b·t³)`` with
    t = q/knee, b = (n − 1)/2, a = 1 − b, which meets the power in value and slope at the knee and has
    slope ``a·knee**(n−1)`` at zero. The function is odd, C¹ and strictly increasing for 0 < n < 3.

    Parameters
    ----------
    flow : Flow, either sign. [m³/s]
    exponent : n, the flow exponent of the law. [-]
    knee : Where the plain power takes over. [m³/s]

    Returns
    -------
    The power [(m³/s)ⁿ] and its derivative with respect to the flow, both in the shape of ``flow``.

    Examples
    --------
    >>> value, slope = smooth_power(0.01, 2.0)
    >>> round(value, 9), round(slope, 9)
    (0.0001, 0.02)
    >>> smooth_power(0.0, 1.85)[1] > 0
    True
    """
    q = as_array(flow)
    size = np.abs(q)
    power = size if exponent == 2.0 else np.power(np.maximum(size, knee), exponent - 1.0)
    value = np.multiply(q, power, out=np.empty_like(q))
    slope = np.multiply(exponent, power, out=np.empty_like(q))
    small = size < knee
    if small.any():
        bend = (exponent - 1.0) / 2.0
        line = 1.0 - bend
        t = q[small] / knee
        # at the knee and beyond `power` is exact; below it only these two lines count
        value[small] = knee**exponent * t * (line + bend * t * t)
        slope[small] = knee ** (exponent - 1.0) * (line + 3.0 * bend * t * t)
    return plain(value), plain(slope)
