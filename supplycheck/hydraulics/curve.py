"""Straight lines through published points: loss of a device, or pressure of a pump, against flow.

Between two points the value lies on the straight line that joins them, as a reviewer reads it with a ruler
(common practice, no source). It is monotone wherever the points are and exact at them. Where losses grow
faster than the flow, and where the pressure of a pump falls faster and faster, which is the usual shape of
both, the line lies on the safe side of the true curve: more loss, less pressure.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from supplycheck.errors import DomainError
from supplycheck.hydraulics.numbers import Number, as_array, plain, spread


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

    def at(self, flow: Number) -> tuple[Number, Number]:
        """Return value [Pa] and slope [Pa/(m³/s)] at ``flow`` [m³/s]; at a point the slope after it.

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
        """Return value and slope as :meth:`at`, the end lines carried on beyond the end points.

        For the steps of an iteration only: whoever reports a result asks :meth:`at`, which refuses.
        """
        q = as_array(flow)
        if len(self.flows) == 1:
            return spread(as_array(self.values[0]), q), spread(as_array(0.0), q)
        x, y = as_array(self.flows), as_array(self.values)
        i = np.clip(np.searchsorted(x, q, side="right") - 1, 0, len(x) - 2)
        slope = (y[i + 1] - y[i]) / (x[i + 1] - x[i])
        value = np.where(q == x[i + 1], y[i + 1], y[i] + (q - x[i]) * slope)
        return plain(value), plain(slope)


def curve_through(points: Sequence[tuple[float, float]]) -> Curve:
    """Return the :class:`Curve` through ``points`` of (flow [m³/s], value [Pa])."""
    return Curve(tuple(p[0] for p in points), tuple(p[1] for p in points))
