"""The solution of the whole original network from that of the reduced one."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from supplycheck.network.arrays import Network
from supplycheck.network.assemble import Assembled, Case, Feed
from supplycheck.network.core import State
from supplycheck.network.curves import DeviceLaw
from supplycheck.network.links import BoolArray
from supplycheck.network.records import FloatArray, Solution, SourceCurve
from supplycheck.network.reduce import Reduced
from supplycheck.network.restore import spread_heads


@dataclass(frozen=True, slots=True, eq=False)
class Found:
    """A solved case: what was asked, the reduced network it was solved on, and its state."""

    network: Network
    case: Case
    feed: Feed
    reduced: Reduced
    assembled: Assembled
    state: State

    def pipe_flow(self) -> FloatArray:
        """Return the flow in every pipe of the original [m³/s]."""
        return self.reduced.flow(self.state.flow[: self.assembled.pipes])

    def heads(self, loss: FloatArray) -> FloatArray:
        """Return the head at every node [Pa] (NaN where cut off), given the loss in every pipe."""
        links, rows = self.network.links, np.flatnonzero(~self.case.shut)
        head, known = self.assembled.heads(self.state, len(self.network.node_tags))
        if len(rows) == len(links):
            return spread_heads(links, head, known, loss)
        return spread_heads(links.take(rows), head, known, loss[rows])

    def requirement(self, supplied: FloatArray, pressure: FloatArray) -> tuple[float, str]:
        """Return the shift of the supplies [Pa] and the governing node."""
        rows = self.case.floor_rows
        governing = self.network.node_tags[rows[int(np.argmin(pressure[rows] - self.case.floors))]]
        if len(self.feed.laws) > 1:
            return -float(self.state.shift[0]), governing
        law = self.feed.laws[0]
        fall, _ = law.fall(supplied)
        return float(law.static - fall[0] - pressure[self.feed.rows[0]]), governing


def whole_solution(found: Found, sources: Sequence[SourceCurve], *, demand: bool) -> Solution:
    """Return the :class:`Solution` on every node and pipe of the original network."""
    network, case, feed, state = found.network, found.case, found.feed, found.state
    links, nodes = network.links, len(network.node_tags)
    flow = found.pipe_flow() + 0.0
    flow[links.one_way & (flow < 0)] = 0.0  # rounding: a one-way link is closed exactly before this
    friction, reynolds, factor = _friction(network, flow)
    device, _ = links.device_law()(flow)
    taken_off = np.zeros(nodes)
    taken_off[case.outlets] = case.offset
    head = found.heads(friction + device)
    out = case.outflow.copy()
    np.add.at(out, case.outlets, found.assembled.outlet_flow(state))
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
    shift, governing = found.requirement(supplied, pressure) if demand else (np.nan, "")
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
        notes=_notes(found, flow, supplied, device, pressure),
        out_of_range=tuple(
            (network.pipe_tags[link], law.tag, float(flow[link]))
            for link, law in links.devices
            if law.beyond(float(flow[link]))
        ),
        outlet_velocity_pressure=taken_off,
    )


def _friction(network: Network, flow: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return friction loss [Pa], Reynolds number and Darcy factor of each pipe; NaN where it has none."""
    links, fluid = network.links, network.fluid
    factor = np.full(len(flow), np.nan)
    if links.terms is None:
        reynolds = 4 * fluid.density * np.abs(flow) / (np.pi * network.bore * fluid.viscosity)
        friction, _ = links.friction_law()(flow)
        return friction, reynolds, factor
    reynolds, group = links.terms.numbers(flow)  # one term for each pipe, in their order
    moving = reynolds > 0
    factor[moving] = group[moving] / reynolds[moving] / reynolds[moving]
    along = np.copysign(links.terms.weight() * group, flow)
    return links.friction_of(flow, along), reynolds, factor


def _holding(network: Network, flow: FloatArray) -> BoolArray:
    """Return the pipes that hold a difference of pressure: closed one-way ones, regulating valves."""
    links = network.links
    holding = links.one_way & (flow <= 0)
    for link, law in links.devices:
        if law.setting is not None:
            holding[link] = True
    return holding


def _notes(
    found: Found, flow: FloatArray, supplied: FloatArray, device: FloatArray, pressure: FloatArray
) -> tuple[str, ...]:
    """Return what a reader should know about the state, one sentence each."""
    network, case, feed = found.network, found.case, found.feed
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
        notes.append(_valve_note(network, link, law, flow, (pressure, device)))
    held = np.flatnonzero(links.one_way & ~case.shut & (flow <= 0) & (device < -1.0)).tolist()
    notes += [
        f"the one-way valve in pipe {pipes[link]} is closed by the pressure behind it"
        for link in held
        if link not in regulating
    ]
    return tuple(notes)


def _valve_note(
    network: Network, link: int, law: DeviceLaw, flow: FloatArray, found: tuple[FloatArray, FloatArray]
) -> str:
    """Return what the valve does, by the (pressure at nodes, device loss in pipes) ``found``."""
    name = f"pressure-reducing valve {law.tag} in pipe {network.pipe_tags[link]}"
    setting = law.setting if law.setting is not None else np.nan
    pressure, device = found
    behind = pressure[network.links.start[link]] - device[link] + _lost_after(network, link, law, flow)
    if abs(behind - setting) <= 1.0:
        return f"{name} holds its setting"
    if behind > setting:
        return f"{name} is shut: the pressure behind it is above its setting"
    if pressure[network.links.start[link]] < setting:
        return f"{name} is fully open: it is set above its inlet pressure"
    return f"{name} is fully open" if flow[link] > 0 else f"{name} passes nothing"


def _lost_after(network: Network, link: int, law: DeviceLaw, flow: FloatArray) -> float:
    """Return the loss [Pa] of the devices named after ``law`` in the pipe ``link``."""
    laws = [other for row, other in network.links.devices if row == link]
    after = laws[laws.index(law) + 1 :]
    return sum(float(other.drop(flow[link : link + 1])[0][0]) for other in after)
