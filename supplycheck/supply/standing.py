"""Pressures with nothing flowing: the highest that can stand at each node.

Losses are nothing at no flow, fixed ones too, so that the figures are the greatest there can be.
"""

from __future__ import annotations

from collections import deque
from collections.abc import Collection, Iterator, Mapping
from typing import Final

from supplycheck.model import Device, Pipe, System

ONE_WAY: Final = frozenset({"check valve", "pump", "pressure-reducing valve"})
"""Kinds of device that let no water pass against their direction, as the network solver has it."""


def is_one_way(pipe: Pipe, devices: Mapping[str, Device]) -> bool:
    """Return whether no water passes ``pipe`` from its end to its start."""
    if pipe.valve == "check":
        return True
    return any(devices[tag].one_way or devices[tag].kind in ONE_WAY for tag in pipe.devices)


def standing_pressures(
    system: System, statics: Mapping[str, float], unit_weight: float, closed: Collection[str] = ()
) -> dict[str, float]:
    """Return the highest pressure [Pa] that can stand at each node with nothing flowing.

    ``statics`` [Pa] stand at the nodes of the sources, ``unit_weight`` [Pa/m] carries heights. A pump adds
    its pressure at no flow once, a pressure-reducing valve holds its setting; closed pipes and pipes in
    ``closed`` are not passed, one-way ones only forwards, and behind one the higher pressure stands. Where
    sources join openly the strongest is taken everywhere, as when the others are shut off. A node that
    no source reaches is left out.
    """
    devices = {device.tag: device for device in system.devices}
    levels = {node.tag: node.elevation for node in system.nodes}
    beside: dict[str, list[tuple[Pipe, str, int]]] = {tag: [] for tag in levels}
    for pipe in system.pipes:
        if pipe.valve == "closed" or pipe.tag in closed:
            continue
        beside[pipe.start].append((pipe, pipe.end, 1))
        if not is_one_way(pipe, devices):
            beside[pipe.end].append((pipe, pipe.start, -1))
    found = dict(statics)
    came: dict[str, str] = {}
    row = deque(statics)
    while row:
        here = row.popleft()
        for pipe, there, sense in beside[here]:
            pressure = _past(pipe, found[here], devices, sense)
            pressure -= unit_weight * (levels[there] - levels[here])
            if there not in found or pressure > found[there] + 1e-6:
                if there in _way_back(came, here):
                    continue  # round a pump: it adds its pressure once
                found[there], came[there] = pressure, here
                row.append(there)
    return found


def _way_back(came: Mapping[str, str], node: str) -> Iterator[str]:
    yield node
    while node in came:
        node = came[node]
        yield node


def _past(pipe: Pipe, pressure: float, devices: Mapping[str, Device], sense: int) -> float:
    for device in (devices[tag] for tag in pipe.devices[::sense]):
        if device.kind == "pump" and device.values:
            pressure += device.values[0]
        elif device.kind == "pressure-reducing valve" and device.setting is not None:
            pressure = min(pressure, device.setting)
    return pressure
