"""A monotone curve through published points: loss of a device, or pressure of a pump, against flow.

The curve is the piecewise cubic of Fritsch and Carlson [1]_ with the slopes of Fritsch and Butland [2]_
(known as PCHIP): exact at its points, C¹, and monotone wherever the points are, so that it never
overshoots between two readings. It is written out here, twenty lines, because importing an
interpolation library costs more time than checking a small system.

References
----------
.. [1] Fritsch and Carlson (1980), SIAM J. Numer. Anal. 17, 238.
.. [2] Fritsch and Butland (1984), SIAM J. Sci. Stat. Comput. 5, 300.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from itertools import pairwise

import numpy as np

from supplycheck.errors import DomainError
from supplycheck.hydraulics.numbers import FloatArray, Number, as_array, plain, spread


@dataclass(frozen=True)
class Curve:
    """Points (``flows`` [m³/s], ``values`` [Pa]) with flows rising; one point is a constant.

    Raises :class:`DomainError` where there is no point, the lengths differ, a number is not finite
    or the flows do not rise.
    """

    flows: tuple[float, ...]
    values: tuple[float, ...]

    def __post_init__(self) -> None:
        if not self.flows or len(self.flows) != len(self.values):
            raise DomainError(
                f"a curve needs as many values as flows and at least one; "
                f"found {len(self.flows)} flows and {len(self.values)} values"
            )
        if not np.all(np.isfinite(self.flows)) or not np.all(np.isfinite(self.values)):
            raise DomainError("a curve needs finite numbers")
        for before, after in pairwise(self.flows):
            if after <= before:
                raise DomainError(
                    f"the flows of a curve must rise; found {after:g} m³/s after {before:g} m³/s"
                )

    @cached_property
    def _slopes(self) -> FloatArray:
        return _pchip_slopes(as_array(self.flows), as_array(self.values))

    def at(self, flow: Number) -> tuple[Number, Number]:
        """Return value [Pa] and slope [Pa/(m³/s)] at ``flow`` [m³/s].

        Raises
        ------
        DomainError
            ``flow`` outside the points; a curve of one point holds everywhere.

        Examples
        --------
        >>> value, slope = Curve((0.0, 0.01, 0.02), (0.0, 1e4, 5e4)).at(0.01)
        >>> value, slope > 0
        (10000.0, True)
        """
        q = as_array(flow)
        low, high = self.flows[0], self.flows[-1]
        if len(self.flows) > 1 and not np.all((q >= low) & (q <= high)):
            wrong = q[~((q >= low) & (q <= high))].flat[0]
            raise DomainError(
                f"the curve is given from {low:g} to {high:g} m³/s; asked at {float(wrong):g} m³/s"
            )
        return self.carried_on(flow)

    def carried_on(self, flow: Number) -> tuple[Number, Number]:
        """Return value and slope as :meth:`at`, carried on as a straight line beyond the end points.

        For the steps of an iteration only: whoever reports a result asks :meth:`at`, which refuses.
        """
        q = as_array(flow)
        if len(self.flows) == 1:
            return spread(as_array(self.values[0]), q), spread(as_array(0.0), q)
        x, y, m = as_array(self.flows), as_array(self.values), self._slopes
        inside = np.clip(q, x[0], x[-1])
        i = np.clip(np.searchsorted(x, inside, side="right") - 1, 0, len(x) - 2)
        h = x[i + 1] - x[i]
        t = (inside - x[i]) / h
        rise, m0, m1 = y[i + 1] - y[i], h * m[i], h * m[i + 1]
        c2, c3 = 3.0 * rise - 2.0 * m0 - m1, m0 + m1 - 2.0 * rise
        slope = (m0 + t * (2.0 * c2 + 3.0 * t * c3)) / h
        value = y[i] + t * (m0 + t * (c2 + t * c3)) + (q - inside) * slope
        value = np.where(q == x[i + 1], y[i + 1], value)
        return plain(value), plain(slope)


def _pchip_slopes(x: FloatArray, y: FloatArray) -> FloatArray:
    """Return the slope at each point: harmonic mean inside, three-point formula at the ends."""
    h, d = np.diff(x), np.diff(y) / np.diff(x)
    if len(d) == 1:
        return np.array([d[0], d[0]])
    slopes = np.zeros_like(x)
    before, after = d[:-1], d[1:]
    same = np.sign(before) * np.sign(after) > 0
    w1, w2 = 2.0 * h[1:] + h[:-1], h[1:] + 2.0 * h[:-1]
    swap = np.abs(before) > np.abs(after)  # divide by the larger slope: the smaller may be next to nothing
    small, large = np.where(swap, after, before)[same], np.where(swap, before, after)[same]
    w_small, w_large = np.where(swap, w2, w1)[same], np.where(swap, w1, w2)[same]
    slopes[1:-1][same] = (w1 + w2)[same] * small / (w_small + w_large * (small / large))
    slopes[0] = _end_slope(h[0], h[1], d[0], d[1])
    slopes[-1] = _end_slope(h[-1], h[-2], d[-1], d[-2])
    return slopes


def _end_slope(h0: float, h1: float, d0: float, d1: float) -> float:
    """Return the one-sided slope at an end, limited so that the first interval stays monotone."""
    slope = ((2.0 * h0 + h1) * d0 - h0 * d1) / (h0 + h1)
    if slope * d0 <= 0:
        return 0.0
    if d0 * d1 <= 0 and abs(slope) > 3.0 * abs(d0):
        return 3.0 * d0
    return slope


def curve_through(points: Sequence[tuple[float, float]]) -> Curve:
    """Return the :class:`Curve` through ``points`` of (flow [m³/s], value [Pa])."""
    return Curve(tuple(p[0] for p in points), tuple(p[1] for p in points))
