"""Loss laws of links that are not plain pipes: devices, pumps and supply curves.

Each is a C¹ function of the flow, value and derivative, for any number of links with the same curve
at once.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from supplycheck.errors import DomainError
from supplycheck.hydraulics import KNEE, Curve, smooth_power
from supplycheck.model.system import Device
from supplycheck.network.records import FloatArray, SourceCurve

_BEYOND: Final = 1e-9
LEAST_CHORD: Final = 0.3
"""Part of the chord that serves as the slope of a curve that dips."""


@dataclass(frozen=True, slots=True)
class DeviceLaw:
    """Pressure drop [Pa] of one device against the flow [m³/s] in its own direction.

    ``sign`` is −1 for a pump (its curve is a gain); ``dips`` tells that the loss falls with the flow
    somewhere, as that of many backflow preventers does. A loss that does not vanish at zero flow is
    brought to zero below :data:`supplycheck.hydraulics.KNEE`; above it the curve is exact.
    """

    tag: str
    curve: Curve | None
    sign: float
    one_way: bool
    setting: float | None
    dips: bool = False

    @classmethod
    def of(cls, device: Device) -> DeviceLaw:
        """Return the law of ``device``.

        Raises
        ------
        DomainError
            Where the points do not make a curve, the gain of a pump rises with the flow, or a
            pressure-reducing valve has no setting.
        """
        pump = device.kind == "pump"
        curve = Curve(tuple(device.flows), tuple(device.values)) if device.flows else None
        if pump and (curve is None or len(curve.flows) < 2):
            raise DomainError(f"pump {device.tag}: a pump curve needs at least two points")
        if pump and curve is not None and bool(np.any(np.diff(curve.values) > 0)):
            raise DomainError(f"pump {device.tag}: the pressure of a pump must not rise with the flow")
        if device.kind == "pressure-reducing valve" and device.setting is None:
            raise DomainError(f"pressure-reducing valve {device.tag}: no setting is given")
        setting = device.setting if device.kind == "pressure-reducing valve" else None
        one_way = device.one_way or device.kind != "loss"
        dips = not pump and curve is not None and bool(np.any(np.diff(curve.values) < 0))
        return cls(device.tag, curve, -1.0 if pump else 1.0, one_way, setting, dips)

    def drop(self, flow: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return the pressure drop [Pa] and its derivative; odd in the flow unless it is a pump.

        Where a curve dips the derivative is replaced by a part of the chord to the origin, which is
        always positive: the iteration then comes to rest more slowly, at the same place.
        """
        if self.curve is None:
            return np.zeros_like(flow), np.zeros_like(flow)
        if self.sign < 0:
            value, slope = self.curve.carried_on(np.maximum(flow, 0.0))
            return -value, np.where(flow >= 0, -slope, 0.0)
        size = np.abs(flow)
        value, slope = self.curve.carried_on(np.maximum(size, self.curve.flows[0]))
        slope = np.where(size >= self.curve.flows[0], slope, 0.0)
        small = size < KNEE
        if small.any():
            x = np.minimum(size / KNEE, 1.0)
            ramp, rise = x * (1.5 - 0.5 * x * x), (1.5 - 1.5 * x * x) / KNEE
            value, slope = value * ramp, slope * ramp + value * rise
        if self.dips:
            slope = np.maximum(slope, LEAST_CHORD * value / np.maximum(size, KNEE))
        return np.copysign(value, flow) if np.all(value >= 0) else value * np.sign(flow), slope

    def beyond(self, flow: float) -> bool:
        """Return whether ``flow`` lies outside the points of the curve (a fixed loss has no range)."""
        if self.curve is None or len(self.curve.flows) < 2:
            return False
        low, high = self.curve.flows[0], self.curve.flows[-1]
        size = abs(flow)
        return size > high * (1 + _BEYOND) or KNEE < size < low * (1 - _BEYOND)


@dataclass(frozen=True, slots=True, eq=False)
class SourceLaw:
    """How far the pressure of a supply has fallen below its no-flow value [Pa] at a flow [m³/s].

    The curve is carried on to negative flow as an odd function about its no-flow pressure.
    """

    static: float
    exponent: float
    x: FloatArray
    y: FloatArray

    @classmethod
    def of(cls, source: SourceCurve) -> SourceLaw:
        """Return the law of ``source``.

        Raises
        ------
        DomainError
            Where the curve rises with the flow or its points do not make a curve.
        """
        e, where = source.exponent, f"the supply at {source.node}"
        if not source.flows:
            if not (source.resistance >= 0 and np.isfinite(source.static)):
                raise DomainError(f"{where}: static must be finite and the curve must not rise")
            return cls(source.static, e, np.array([0.0, 1.0]), np.array([0.0, source.resistance]))
        if len(source.flows) != len(source.pressures) or len(source.flows) < 2:
            raise DomainError(f"{where}: a curve needs two or more points of flow and pressure")
        x = np.asarray(source.flows, dtype=np.float64) ** e
        p = np.asarray(source.pressures, dtype=np.float64)
        if not (np.all(np.diff(x) > 0) and x[0] >= 0):
            raise DomainError(f"{where}: the flows of the curve must rise from point to point")
        if not np.all(np.diff(p) <= 0):
            raise DomainError(f"{where}: the pressure of the curve must not rise with the flow")
        if x[0] > 0:
            p = np.insert(p, 0, p[0] + (p[0] - p[1]) / (x[1] - x[0]) * x[0])
            x = np.insert(x, 0, 0.0)
        return cls(float(p[0]), e, x, p[0] - p)

    @property
    def is_fixed(self) -> bool:
        """True where the pressure does not depend on the flow."""
        return not self.y.any()

    def fall(self, flow: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return the fall of pressure [Pa] and its derivative [Pa·s/m³]."""
        power, dpower = smooth_power(flow, self.exponent)
        size = np.abs(power)
        i = np.clip(np.searchsorted(self.x, size, side="right") - 1, 0, len(self.x) - 2)
        slope = (self.y[i + 1] - self.y[i]) / (self.x[i + 1] - self.x[i])
        return np.sign(power) * (self.y[i] + slope * (size - self.x[i])), slope * dpower
