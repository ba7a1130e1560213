"""The solution of the whole original network from that of the reduced one."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from supplycheck.hydraulics import friction_factor
from supplycheck.network.arrays import Network
from supplycheck.network.assemble import Assembled, Case, Feed
from supplycheck.network.core import State
from supplycheck.network.curves import DeviceLaw
from supplycheck.network.links import BoolArray
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
    flow[links.one_way & (flow < 0)] = 0.0  # rounding: a one-way link is closed exactly before this
    friction, _ = links.friction(flow)
    device, _ = links.device_drop(flow)
    taken_off = np.zeros(nodes)
    taken_off[case.outlets] = case.offset
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
    holding = _holding(network, flow)
    device = device + np.where(holding, energy, 0.0)
    live = ~case.shut & ~holding & np.isfinite(energy)
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
        notes=_notes(network, case, feed, flow, supplied, device, pressure),
        out_of_range=tuple(
            (network.pipe_tags[link], law.tag, float(flow[link]))
            for link, law in links.devices
            if law.beyond(float(flow[link]))
        ),
        outlet_velocity_pressure=taken_off,
    )


def _all_heads(
    network: Network, case: Case, head: FloatArray, known: BoolArray, loss: FloatArray
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


def _holding(network: Network, flow: FloatArray) -> BoolArray:
    """Return the pipes that hold a difference of pressure: closed one-way ones, regulating valves."""
    links = network.links
    holding = links.one_way & (flow <= 0)
    for link, law in links.devices:
        if law.setting is not None:
            holding[link] = True
    return holding


def _notes(
    network: Network,
    case: Case,
    feed: Feed,
    flow: FloatArray,
    supplied: FloatArray,
    device: FloatArray,
    pressure: FloatArray,
) -> tuple[str, ...]:
    """Return what a reader should know about the state, one sentence each."""
    links, pipes, nodes = network.links, network.pipe_tags, network.node_tags
    notes = [
        f"water runs into the supply at {nodes[row]}: another one is stronger"
        for row, inflow in zip(feed.rows.tolist(), supplied.tolist(), strict=True)
        if inflow < 0
    ]
    dry = [nodes[row] for row in case.outlets[pressure[case.outlets] <= 0].tolist()]
    if dry:
        notes.append(f"open outlets that run dry: {', '.join(dry)}")
    regulating = {
        link: law for link, law in links.devices if law.setting is not None and not case.shut[link]
    }
    for link, law in regulating.items():
        notes.append(_valve_note(network, link, law, flow, pressure))
    held = np.flatnonzero(links.one_way & ~case.shut & (flow <= 0) & (device < -1.0)).tolist()
    notes += [
        f"the one-way valve in pipe {pipes[link]} is closed by the pressure behind it"
        for link in held
        if link not in regulating
    ]
    return tuple(notes)


def _valve_note(network: Network, link: int, law: DeviceLaw, flow: FloatArray, pressure: FloatArray) -> str:
    name = f"pressure-reducing valve {law.tag} in pipe {network.pipe_tags[link]}"
    setting = law.setting if law.setting is not None else np.nan
    behind = pressure[network.links.end[link]]
    if abs(behind - setting) <= 1.0:
        return f"{name} holds its setting"
    if behind > setting:
        return f"{name} is shut: the pressure behind it is above its setting"
    if pressure[network.links.start[link]] < setting:
        return f"{name} is fully open: it is set above its inlet pressure"
    return f"{name} is fully open" if flow[link] > 0 else f"{name} passes nothing"
