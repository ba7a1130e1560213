"""The solution of the whole original network from that of the reduced one."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from supplycheck.hydraulics import friction_factor
from supplycheck.network.arrays import Network
from supplycheck.network.assemble import Assembled, Case, Feed
from supplycheck.network.core import State
from supplycheck.network.records import FloatArray, Solution, SourceCurve
from supplycheck.network.reduce import Reduced
from supplycheck.network.restore import spread_heads


def whole_solution(
    network: Network,
    case: Case,
    feed: Feed,
    sources: Sequence[SourceCurve],
    reduced: Reduced,
    assembled: Assembled,
    state: State,
    *,
    demand: bool,
) -> Solution:
    """Return the :class:`Solution` on every node and pipe of ``network``."""
    links, nodes = network.links, len(network.node_tags)
    flow = reduced.flow(state.flow[: assembled.pipes]) + 0.0
    friction, _ = links.friction(flow)
    device, _ = links.device_drop(flow)
    head, known = assembled.heads(state, nodes)
    head = _all_heads(network, case, head, known, friction + device)
    out = case.outflow.copy()
    np.add.at(out, case.outlets, assembled.outlet_flow(state))
    leaving = np.bincount(links.start, flow, minlength=nodes) - np.bincount(
        links.end, flow, minlength=nodes
    )
    supplied = (leaving + out)[feed.rows]
    at_source = np.zeros(nodes)
    at_source[feed.rows] = supplied
    pressure = head - network.base
    source_pressure = pressure[feed.rows]
    rise = network.base[links.end] - network.base[links.start]
    energy = head[links.start] - head[links.end] - friction - device
    live = ~case.shut & ~(links.one_way & (flow == 0)) & np.isfinite(energy)
    for array in (friction, device):
        array[case.shut] = np.nan
    rise = np.where(case.shut, np.nan, rise)
    velocity = flow / links.area
    reynolds, factor = _numbers(network, flow)
    shift, governing = np.nan, ""
    if demand:
        shift = _shift(feed, state, supplied, source_pressure)
        governing = network.node_tags[
            case.floor_rows[int(np.argmin(pressure[case.floor_rows] - case.floors))]
        ]
    return Solution(
        node_tags=network.node_tags,
        pipe_tags=network.pipe_tags,
        pressure=pressure,
        outflow=out,
        pipe_flow=flow,
        friction=friction,
        elevation_loss=rise,
        device_loss=device,
        velocity=velocity,
        friction_factor=factor,
        reynolds=reynolds,
        velocity_pressure=0.5 * network.fluid.density * velocity**2,
        source_tags=tuple(source.node for source in sources),
        source_flow=supplied,
        source_pressure=source_pressure,
        shift=shift,
        governing=governing,
        iterations=state.iterations,
        mass_residual=float(np.abs(leaving + out - at_source).max()),
        energy_residual=float(np.abs(energy[live]).max(initial=0.0)),
        notes=(),
        out_of_range=tuple(
            (network.pipe_tags[link], law.tag, float(flow[link]))
            for link, law in links.devices
            if law.beyond(float(flow[link]))
        ),
    )


def _all_heads(
    network: Network, case: Case, head: FloatArray, known: np.ndarray, loss: FloatArray
) -> FloatArray:
    links = network.links
    rows = np.flatnonzero(~case.shut)
    if len(rows) == len(links):
        return spread_heads(links, head, known, loss)
    return spread_heads(links.take(rows), head, known, loss[rows])


def _shift(feed: Feed, state: State, supplied: FloatArray, pressure: FloatArray) -> float:
    if len(feed.laws) > 1:
        return -float(state.shift[0])
    fall, _ = feed.laws[0].fall(supplied)
    return float(feed.laws[0].static - fall[0] - pressure[0])


def _numbers(network: Network, flow: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return Reynolds number and Darcy friction factor of each pipe; NaN where it has none."""
    fluid = network.fluid
    reynolds = 4 * fluid.density * np.abs(flow) / (np.pi * network.bore * fluid.viscosity)
    factor = np.full(len(flow), np.nan)
    if network.law.family == "darcy-weisbach":
        moving = reynolds > 0
        rough = network.roughness[moving] / network.bore[moving]
        factor[moving], _ = friction_factor(reynolds=reynolds[moving], relative_roughness=rough)
    return reynolds, factor
