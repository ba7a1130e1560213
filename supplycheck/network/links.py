"""Links and their loss laws: the pipes of a network, whole or reduced, as arrays.

The loss of a link is the sum of

* ``resistance`` times the smooth power of the flow (Hazen-Williams), or its Darcy-Weisbach *terms*:
  length times gradient for each different pair of bore and roughness it is made of;
* ``minor`` times the smooth square of the flow (fittings given by a coefficient);
* ``least`` times the flow: :data:`LEAST_SLOPE` for a pipe of no loss at all, else 0;
* the drop of its devices, in its own direction.

All but the devices are odd in the flow and add up exactly in series, which is what the reduction uses.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Final

import numpy as np
from numpy.typing import NDArray

from supplycheck.hydraulics import friction_group_unchecked, smooth_power
from supplycheck.network.curves import DeviceLaw
from supplycheck.network.records import FloatArray, IntArray

LEAST_SLOPE: Final = 1e-2
"""Slope given to a pipe whose law has none (no length) [Pa·s/m³]; 0.1 m³/s makes it 1e-3 Pa."""

STEEP: Final = 1e13
"""Slope of a one-way link against its direction [Pa·s/m³]; such a link is then closed exactly."""

BoolArray = NDArray[np.bool_]
Law = Callable[[FloatArray], tuple[FloatArray, FloatArray]]
"""Losses [Pa] and their slopes [Pa·s/m³] as a function of the flows [m³/s], one for each link."""


def sums(row: IntArray, value: FloatArray, count: int) -> FloatArray:
    """Return (``count``,) the sum of ``value`` over equal ``row``."""
    return np.bincount(row, value, minlength=count).astype(np.float64, copy=False)


@dataclass(frozen=True, slots=True, eq=False)
class Terms:
    """Darcy-Weisbach terms: (t,) each ``length`` [m] of pipe sort ``sort`` on ``link``.

    For each sort (s,): ``relative`` roughness [-], Reynolds number for each flow ``by_flow`` [s/m³],
    and ``scale`` [Pa/m], the loss for each metre where f·Re² is 1.
    """

    link: IntArray
    sort: IntArray
    length: FloatArray
    relative: FloatArray
    by_flow: FloatArray
    scale: FloatArray

    def law(self, count: int) -> Law:
        """Return loss [Pa] and slope on each of ``count`` links as a function of their flow."""
        link, by_flow, relative = self.link, self.by_flow[self.sort], self.relative[self.sort]
        weight = self.weight()
        slope_weight = weight * by_flow
        one_each = len(link) == count and bool((link == np.arange(count)).all())

        def law(flow: FloatArray) -> tuple[FloatArray, FloatArray]:
            here = flow if one_each else flow[link]
            group, rise = friction_group_unchecked(by_flow * np.abs(here), relative)
            value, slope = np.copysign(weight * group, here), slope_weight * rise
            return (value, slope) if one_each else (sums(link, value, count), sums(link, slope, count))

        return law

    def weight(self) -> FloatArray:
        """Return (t,) the loss of each term [Pa] where its f·Re² is 1."""
        return self.scale[self.sort] * self.length

    def numbers(self, flow: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return (t,) Reynolds number and f·Re² [-] of each term where it carries ``flow`` (t,)."""
        reynolds = self.by_flow[self.sort] * np.abs(flow)
        group, _ = friction_group_unchecked(reynolds, self.relative[self.sort])
        return reynolds, group

    def merged(self, to: IntArray) -> Terms:
        """Return the terms with link ``i`` become part of link ``to[i]`` (negative: dropped)."""
        target = to[self.link]
        kept = target >= 0
        sorts = len(self.scale)
        key, index = np.unique(target[kept] * sorts + self.sort[kept], return_inverse=True)
        length = sums(index, self.length[kept], len(key))
        return replace(self, link=key // sorts, sort=key % sorts, length=length)


@dataclass(frozen=True, slots=True, eq=False)
class Links:
    """Links (m,) between node rows ``start`` and ``end``; positive flow runs from start to end.

    ``area`` [m²] is the smallest bore area, used for a first guess only. ``devices`` pairs a link with
    a device in it; ``one_way`` marks links that pass no flow from end to start.
    """

    start: IntArray
    end: IntArray
    resistance: FloatArray
    exponent: float
    minor: FloatArray
    least: FloatArray
    area: FloatArray
    one_way: BoolArray
    devices: tuple[tuple[int, DeviceLaw], ...]
    terms: Terms | None

    def __len__(self) -> int:
        return len(self.start)

    def friction_law(self) -> Law:
        """Return the friction loss [Pa] and its slope, without devices, as a function of the flow."""
        along = self._power_law if self.terms is None else self.terms.law(len(self))
        besides = self._besides()

        def law(flow: FloatArray) -> tuple[FloatArray, FloatArray]:
            value, slope = along(flow)
            if besides is not None:
                more, rise = besides(flow)
                value += more
                slope += rise
            return value, slope

        return law

    def friction_of(self, flow: FloatArray, along: FloatArray) -> FloatArray:
        """Return the friction loss [Pa] where that along the pipes themselves is known."""
        besides = self._besides()
        return along if besides is None else along + besides(flow)[0]

    def _power_law(self, flow: FloatArray) -> tuple[FloatArray, FloatArray]:
        power, dpower = smooth_power(flow, self.exponent)
        return self.resistance * power, self.resistance * dpower

    def _besides(self) -> Law | None:
        """Return the loss of fittings with a coefficient and of pipes without a law, or ``None``."""
        if not self.minor.any():
            return (lambda flow: (self.least * flow, self.least)) if self.least.any() else None

        def law(flow: FloatArray) -> tuple[FloatArray, FloatArray]:
            square, dsquare = smooth_power(flow, 2.0)
            return self.least * flow + self.minor * square, self.least + self.minor * dsquare

        return law

    def device_law(self) -> Law:
        """Return the drop of the devices in each link [Pa] and its slope as a function of the flow."""
        places: dict[int, tuple[DeviceLaw, list[int]]] = {}
        for link, device in self.devices:
            places.setdefault(id(device), (device, []))[1].append(link)

        def law(flow: FloatArray) -> tuple[FloatArray, FloatArray]:
            value, slope = np.zeros(len(flow)), np.zeros(len(flow))
            for device, rows in places.values():
                drop, rise = device.drop(flow[rows])
                np.add.at(value, rows, drop)
                np.add.at(slope, rows, rise)
            return value, slope

        return law

    def law(self) -> Law:
        """Return the whole loss [Pa] and its slope as a function of the flow.

        Against its direction a one-way link is steep.
        """
        friction, devices, one_way = self.friction_law(), self.device_law(), self.one_way
        valves = bool(one_way.any())
        if not (self.devices or valves):
            return friction

        def law(flow: FloatArray) -> tuple[FloatArray, FloatArray]:
            value, slope = friction(flow)
            drop, rise = devices(flow)
            value += drop
            slope += rise
            if valves:
                back = one_way & (flow < 0)
                value[back] += STEEP * flow[back]
                slope[back] += STEEP
            return value, slope

        return law

    def marked(self) -> BoolArray:
        """Return which links hold a device or are one-way: they are never merged with others."""
        mark = self.one_way.copy()
        mark[[link for link, _ in self.devices]] = True
        return mark

    def copies(self, count: int, index: IntArray, size: int) -> Links:
        """Return ``count`` copies side by side: node row r of copy i becomes index[r] + i × size."""
        shift = np.repeat(np.arange(count), len(self))
        terms = self.terms
        if terms is not None:
            step = np.repeat(np.arange(count) * len(self), len(terms.link))
            terms = replace(
                terms,
                link=np.tile(terms.link, count) + step,
                sort=np.tile(terms.sort, count),
                length=np.tile(terms.length, count),
            )
        return Links(
            np.tile(index[self.start], count) + shift * size,
            np.tile(index[self.end], count) + shift * size,
            np.tile(self.resistance, count),
            self.exponent,
            np.tile(self.minor, count),
            np.tile(self.least, count),
            np.tile(self.area, count),
            np.tile(self.one_way, count),
            tuple((link + i * len(self), law) for i in range(count) for link, law in self.devices),
            terms,
        )

    def take(self, rows: IntArray) -> Links:
        """Return the links ``rows``, in this order."""
        to = np.full(len(self), -1)
        to[rows] = np.arange(len(rows))
        return Links(
            self.start[rows],
            self.end[rows],
            self.resistance[rows],
            self.exponent,
            self.minor[rows],
            self.least[rows],
            self.area[rows],
            self.one_way[rows],
            tuple((int(to[link]), law) for link, law in self.devices if to[link] >= 0),
            self.terms.merged(to) if self.terms is not None else None,
        )
