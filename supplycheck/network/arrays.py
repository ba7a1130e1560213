"""The network of a project as frozen arrays: nodes, pipes, outlets, friction law, fluid."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

import numpy as np

from supplycheck.errors import NotConvergedError
from supplycheck.hydraulics import friction_group, hazen_williams_resistance, minor_loss, reynolds_number
from supplycheck.model.fluid import Fluid, FrictionLaw
from supplycheck.model.system import Device, Pipe, System
from supplycheck.network.curves import DeviceLaw
from supplycheck.network.links import LEAST_SLOPE, BoolArray, Links, Terms
from supplycheck.network.records import FloatArray, IntArray


@dataclass(frozen=True, slots=True, eq=False)
class Network:
    """A system ready to be solved: (n,) nodes and (m,) pipes in the order of the system.

    ``base`` is elevation × unit weight [Pa] and ``k_factor`` [m³/s/√Pa] is 0 where a node has no outlet.
    ``links`` holds every pipe, ``closed`` marks those that the project shuts. ``elevation`` [m],
    ``length`` (with equivalents) [m], ``bore`` and ``roughness`` [m].
    """

    node_tags: tuple[str, ...]
    pipe_tags: tuple[str, ...]
    node_rows: Mapping[str, int]
    pipe_rows: Mapping[str, int]
    base: FloatArray
    k_factor: FloatArray
    links: Links
    closed: BoolArray
    bore: FloatArray
    roughness: FloatArray
    law: FrictionLaw
    fluid: Fluid


def build_network(system: System, *, law: FrictionLaw, fluid: Fluid) -> Network:
    """Return the network of ``system`` under ``law`` for ``fluid``.

    Raises
    ------
    NotConvergedError
        With cause ``"input"`` where a pipe names a node that does not exist, joins a node to itself
        or lacks the C-factor or roughness that the law needs.
    DomainError
        Where a device has no proper curve, or a roughness is negative or not below its bore.
    """
    node_rows = {node.tag: row for row, node in enumerate(system.nodes)}
    pipes = system.pipes
    start, end = _ends(pipes, node_rows)
    bore = np.array([pipe.bore for pipe in pipes], dtype=np.float64)
    roughness = np.array([math.nan if p.roughness is None else p.roughness for p in pipes])
    minor_k = np.array([pipe.minor_k for pipe in pipes], dtype=np.float64)
    length = np.array([pipe.length + pipe.equivalent_length for pipe in pipes], dtype=np.float64)
    resistance, terms = _friction(pipes, length, bore, roughness, law, fluid)
    minor, _ = minor_loss(flow=np.ones(len(pipes)), bore=bore, minor_k=minor_k, density=fluid.density)
    devices = _devices(pipes, system.devices)
    one_way = np.array([pipe.valve == "check" for pipe in pipes], dtype=bool)
    for link, device in devices:
        one_way[link] |= device.one_way
    links = Links(
        start=start,
        end=end,
        resistance=resistance,
        exponent=law.flow_exponent,
        minor=minor,
        least=np.where((length > 0) | (minor > 0), 0.0, LEAST_SLOPE),
        area=math.pi / 4 * bore**2,
        one_way=one_way,
        devices=devices,
        terms=terms,
    )
    return Network(
        node_tags=tuple(node_rows),
        pipe_tags=tuple(pipe.tag for pipe in pipes),
        node_rows=MappingProxyType(node_rows),
        pipe_rows=MappingProxyType({pipe.tag: row for row, pipe in enumerate(pipes)}),
        base=np.array([node.elevation for node in system.nodes]) * fluid.unit_weight,
        k_factor=np.array([node.k_factor or 0.0 for node in system.nodes]),
        links=links,
        closed=np.array([pipe.valve == "closed" for pipe in pipes], dtype=bool),
        bore=bore,
        roughness=roughness,
        law=law,
        fluid=fluid,
    )


def _input_error(problem: str, tags: list[str], remedy: str) -> NotConvergedError:
    return NotConvergedError(problem, cause="input", tags=tags, remedy=remedy)


def _ends(pipes: tuple[Pipe, ...], rows: Mapping[str, int]) -> tuple[IntArray, IntArray]:
    lost = [pipe.tag for pipe in pipes if pipe.start not in rows or pipe.end not in rows]
    if lost:
        raise _input_error(
            "pipes end at nodes that do not exist", lost, "add the nodes or correct the ends"
        )
    looped = [pipe.tag for pipe in pipes if pipe.start == pipe.end]
    if looped:
        raise _input_error("pipes start and end at one node", looped, "give them two different ends")
    start = np.array([rows[pipe.start] for pipe in pipes], dtype=np.int64)
    return start, np.array([rows[pipe.end] for pipe in pipes], dtype=np.int64)


def _friction(
    pipes: tuple[Pipe, ...],
    length: FloatArray,
    bore: FloatArray,
    roughness: FloatArray,
    law: FrictionLaw,
    fluid: Fluid,
) -> tuple[FloatArray, Terms | None]:
    if law.family == "hazen-williams":
        c_factor = np.array([pipe.c_factor or math.nan for pipe in pipes], dtype=np.float64)
        _need(pipes, np.isfinite(c_factor), "C-factor")
        gradient = hazen_williams_resistance(
            bore=bore,
            c_factor=c_factor,
            coefficient=law.coefficient,
            flow_exponent=law.flow_exponent,
            bore_exponent=law.bore_exponent,
        )
        return gradient * length, None
    _need(pipes, np.isfinite(roughness), "roughness")
    sorts, sort = np.unique(np.column_stack([bore, roughness]), axis=0, return_inverse=True)
    sort_bore, sort_roughness = sorts[:, 0], sorts[:, 1]
    by_flow, _ = reynolds_number(
        flow=np.ones(len(sorts)), bore=sort_bore, density=fluid.density, viscosity=fluid.viscosity
    )
    relative = sort_roughness / sort_bore
    # refuses what is no roughness
    friction_group(reynolds=np.zeros(len(sorts)), relative_roughness=relative)
    terms = Terms(
        link=np.arange(len(pipes)),
        sort=sort.reshape(-1),
        length=length,
        relative=relative,
        by_flow=by_flow,
        scale=fluid.viscosity**2 / (2 * fluid.density * sort_bore**3),
    )
    return np.zeros(len(pipes)), terms


def _need(pipes: tuple[Pipe, ...], known: BoolArray, what: str) -> None:
    lacking = [pipe.tag for pipe, good in zip(pipes, known, strict=True) if not good]
    if lacking:
        raise _input_error(f"pipes have no {what}", lacking, f"give each pipe or its kind a {what}")


def _devices(pipes: tuple[Pipe, ...], devices: tuple[Device, ...]) -> tuple[tuple[int, DeviceLaw], ...]:
    laws = {device.tag: DeviceLaw.of(device) for device in devices}
    found = []
    for row, pipe in enumerate(pipes):
        for tag in pipe.devices:
            if tag not in laws:
                raise _input_error(
                    f"pipe holds the unknown device {tag!r}", [pipe.tag], "define the device"
                )
            found.append((row, laws[tag]))
    return tuple(found)
