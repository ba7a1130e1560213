"""The walk from the governing head to the supply, and the same as lines for a pocket calculator."""

from __future__ import annotations

import math
from collections import defaultdict
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Final

from supplycheck.hydraulics import minor_loss
from supplycheck.model import Device, Pipe, Project
from supplycheck.results.hand import (
    Pen,
    darcy_constant,
    device_step,
    device_value,
    law_constant,
    signed_sum,
    significant_decimals,
)
from supplycheck.results.records import HandStep, NodeRow, PathStep, PipeRow
from supplycheck.units import UNIT_SETS

_STILL: Final = 1e-9  # m³/s: below this a pipe carries nothing
_NOTHING: Final = 0.5  # Pa: below this a loss is not worth a line
_GRADIENT_DIGITS: Final = 4


def path_to_supply(
    nodes: tuple[NodeRow, ...],
    pipes: tuple[PipeRow, ...],
    start: str,
    sources: tuple[str, ...],
) -> tuple[PathStep, ...]:
    """Return the segments from node ``start`` to a supply node, against the flow.

    At a node that is fed from several sides the pipe that brings most is followed; in a loop the
    pressure at every node is the same along any way.
    """
    feeding: dict[str, list[PipeRow]] = defaultdict(list)
    for pipe in pipes:
        if pipe.flow > _STILL:
            feeding[pipe.end].append(pipe)
    row_of = {node.tag: node for node in nodes}
    steps: list[PathStep] = []
    here, seen, before = start, {start}, 0.0
    while here not in sources and feeding[here]:
        pipe = max(feeding[here], key=lambda row: row.flow)
        if pipe.start in seen:
            break
        steps.append(_step(pipe, row_of[here], pipe.flow - before))
        before, here = pipe.flow, pipe.start
        seen.add(here)
    return tuple(steps)


def _step(pipe: PipeRow, node: NodeRow, added: float) -> PathStep:
    fitting_friction = pipe.friction_gradient * pipe.equivalent_length
    return PathStep(
        start=pipe.end,
        end=pipe.start,
        pipe=pipe.tag,
        nominal=pipe.nominal,
        bore=pipe.bore,
        c_factor=pipe.c_factor,
        friction_factor=pipe.friction_factor,
        flow_added=added,
        flow=pipe.flow,
        length=pipe.length,
        equivalent_length=pipe.equivalent_length,
        total_length=pipe.total_length,
        fittings_text=pipe.fittings_text,
        friction_gradient=pipe.friction_gradient,
        pressure_start=pipe.end_pressure,
        friction=pipe.friction_loss - fitting_friction,
        fitting_friction=fitting_friction,
        elevation=pipe.elevation_loss,
        device=pipe.device_loss,
        pressure_end=pipe.start_pressure,
        k_at_start=pipe.flow / math.sqrt(node.pressure) if node.pressure > 0 else None,
        note=", ".join(pipe.devices),
    )


def hand_check(
    project: Project,
    nodes: tuple[NodeRow, ...],
    pipes: tuple[PipeRow, ...],
    path: tuple[PathStep, ...],
) -> tuple[HandStep, ...]:
    """Return the path as formulas with their numbers filled in, in the project's units.

    Every flow that joins or splits on the way has a line of its own before it is added or taken away.
    """
    if not path:
        return ()
    ground = _Ground.of(project, nodes, pipes)
    lines = _head_lines(ground, path[0].start)
    below = ""
    for step in path:
        lines += _flow_lines(ground, step.start, below, step.pipe, step.flow)
        lines += _segment_lines(ground, step)
        below = step.pipe
    return tuple(lines + _flow_lines(ground, path[-1].end, below, "", None))


@dataclass(frozen=True, slots=True)
class _Ground:
    """What the lines are worked from."""

    project: Project
    pen: Pen
    node: dict[str, NodeRow]
    leaving: dict[str, list[PipeRow]]
    entering: dict[str, list[PipeRow]]
    pipe: dict[str, Pipe]
    device: dict[str, Device]

    @classmethod
    def of(cls, project: Project, nodes: Iterable[NodeRow], pipes: Iterable[PipeRow]) -> _Ground:
        leaving: dict[str, list[PipeRow]] = defaultdict(list)
        entering: dict[str, list[PipeRow]] = defaultdict(list)
        for pipe in pipes:
            if pipe.flow > _STILL:
                leaving[pipe.start].append(pipe)
                entering[pipe.end].append(pipe)
        return cls(
            project,
            Pen(UNIT_SETS[project.units]),
            {node.tag: node for node in nodes},
            leaving,
            entering,
            {pipe.tag: pipe for pipe in project.system.pipes},
            {device.tag: device for device in project.system.devices},
        )


# --- flows ------------------------------------------------------------------------------------------


def _driving(node: NodeRow) -> float:
    """Return the pressure [Pa] that drives the outlet: without velocity pressure where that counts."""
    return node.pressure - (node.velocity_pressure or 0.0)


def _by_k(node: NodeRow) -> bool:
    """True where all that leaves at ``node`` is its K-factor times the root of its pressure."""
    if not node.k_factor or _driving(node) <= 0:
        return False
    return math.isclose(node.k_factor * math.sqrt(_driving(node)), node.discharge, rel_tol=1e-6)


def _head_lines(ground: _Ground, tag: str) -> list[HandStep]:
    """Return how the governing outlet comes to its pressure and its flow."""
    pen, node = ground.pen, ground.node[tag]
    note = f"set by {node.required_by}" if node.required_by else ""
    if not _by_k(node):
        return [
            pen.step(f"{tag}", f"P = {pen.pressure(node.pressure)}", node.pressure, "pressure", note),
            pen.step(f"{tag}", f"Q = {pen.flow(node.discharge)}", node.discharge, "flow", "fixed flow"),
        ]
    lines = []
    density, required = ground.project.criteria.density, node.required_discharge
    if node.area and required and math.isclose(density * node.area, required, rel_tol=1e-9):
        formula = f"q = {pen.exact(density, 'density')} × {pen.exact(node.area, 'area')}"
        lines.append(
            pen.step(f"head {tag}", formula, required, "flow", "density × area: the least it must give")
        )
        if math.isclose(node.discharge, required, rel_tol=1e-9) and node.k_factor:
            formula = f"P = ({pen.flow(required)} / {pen.exact(node.k_factor, 'k_factor')})^2"
            lines.append(pen.step(f"head {tag}", formula, _driving(node), "pressure", note))
            if node.velocity_pressure:
                lines.append(_total_pressure(pen, node))
            return [*lines, _outlet_line(ground, node)]
    lines.append(
        pen.step(f"head {tag}", f"P = {pen.pressure(_driving(node))}", _driving(node), "pressure", note)
    )
    if node.velocity_pressure:
        lines.append(_total_pressure(pen, node))
    return [*lines, _outlet_line(ground, node)]


def _total_pressure(pen: Pen, node: NodeRow) -> HandStep:
    """Return the line from the pressure that drives the outlet to the total pressure in the pipe."""
    velocity = node.velocity_pressure or 0.0
    formula = f"Pt = {pen.pressure(_driving(node))} + {pen.pressure(velocity)}"
    return pen.step(f"head {node.tag}", formula, node.pressure, "pressure", "with the velocity pressure")


def _outlet_line(ground: _Ground, node: NodeRow, note: str = "") -> HandStep:
    """Return the line of what leaves at ``node`` itself."""
    pen = ground.pen
    if not _by_k(node):
        hose = ground.project.hose
        what = "hose" if node.tag in {hose.inside_node, hose.outside_node} else node.required_by
        told = f"drawn at {node.tag}: {what}" if what else f"drawn at {node.tag}"
        return pen.step(node.tag, f"Q = {pen.flow(node.discharge)}", node.discharge, "flow", note or told)
    k_factor = pen.exact(node.k_factor or 0.0, "k_factor")
    formula = f"q = K√P = {k_factor} × √{pen.pressure(_driving(node))}"
    if node.velocity_pressure:
        note = "; ".join(part for part in (note, "with Pn = Pt − Pv") if part)
    return pen.step(f"head {node.tag}", formula, node.discharge, "flow", note)


def _flow_lines(ground: _Ground, tag: str, below: str, above: str, flow: float | None) -> list[HandStep]:
    """Return the flows that meet at node ``tag`` between the pipes ``below`` and ``above``, and their sum.

    ``flow`` [m³/s] is that of the pipe ``above``; ``None`` at the supply, where it is what is drawn there.
    """
    pen, node = ground.pen, ground.node[tag]
    lines: list[HandStep] = []
    first = next((pipe.flow for pipe in ground.leaving[tag] if pipe.tag == below), node.discharge)
    parts: list[tuple[float, str]] = []
    if below and node.discharge > _STILL:
        lines.append(_outlet_line(ground, node))
        parts.append((1.0, pen.flow(node.discharge)))
    for pipe in ground.leaving[tag]:
        if pipe.tag != below:
            lines.append(_side_line(ground, node, pipe))
            parts.append((1.0, pen.flow(pipe.flow)))
    for pipe in ground.entering[tag]:
        if pipe.tag != above:
            name = f"splits at {tag}"
            note = f"comes from {pipe.start} by the other way, pipe {pipe.tag}: see pipe information"
            lines.append(pen.step(name, f"Q = {pen.flow(pipe.flow)}", pipe.flow, "flow", note))
            parts.append((-1.0, pen.flow(pipe.flow)))
    if not parts:
        return lines
    if flow is None:
        flow = node.discharge + sum(pipe.flow for pipe in ground.leaving[tag])
        flow -= sum(pipe.flow for pipe in ground.entering[tag])
        name, note = f"at {tag}", "all that is drawn from this supply"
    else:
        name, note = f"at {tag}", ""
    return [*lines, pen.step(name, f"Q = {signed_sum(pen.flow(first), parts)}", flow, "flow", note)]


def _side_line(ground: _Ground, node: NodeRow, pipe: PipeRow) -> HandStep:
    """Return the line of a flow that leaves the path by ``pipe``: its only head, or its K at the node."""
    pen = ground.pen
    way, outlet = _only_outlet(ground, pipe)
    if outlet is not None and _by_k(outlet):
        note = f"reaches {node.tag} by way of {way}; its pressure: node analysis"
        return _outlet_line(ground, outlet, note)
    if outlet is not None:
        return _outlet_line(ground, outlet, f"fixed flow of {outlet.tag}, by way of {way}")
    name = f"joins at {node.tag}"
    note = f"all that goes by way of {way}: see pipe information"
    if node.pressure <= 0:
        return pen.step(name, f"Q = {pen.flow(pipe.flow)}", pipe.flow, "flow", note)
    k_side = pen.units.from_si(pipe.flow / math.sqrt(node.pressure), "k_factor")
    formula = f"Q = K√P = {pen.significant(k_side, 6)} × √{pen.pressure(node.pressure)}"
    return pen.step(name, formula, pipe.flow, "flow", f"{note}; K = Q/√P there")


def _only_outlet(ground: _Ground, pipe: PipeRow) -> tuple[str, NodeRow | None]:
    """Return the way from ``pipe`` on in words, and the outlet at its end where it is the only one."""
    first, count = pipe, 1
    while len(ground.entering[pipe.end]) == 1 and count <= len(ground.pipe):
        node, onward = ground.node[pipe.end], ground.leaving[pipe.end]
        if node.discharge > _STILL and not onward:
            return (f"pipe {first.tag}" if count == 1 else f"pipes {first.tag} to {pipe.tag}"), node
        if node.discharge > _STILL or len(onward) != 1:
            break
        pipe, count = onward[0], count + 1
    return f"pipe {first.tag}", None


# --- pressures --------------------------------------------------------------------------------------


def _segment_lines(ground: _Ground, step: PathStep) -> list[HandStep]:
    """Return friction, height, devices and the pressure at the far end of one segment."""
    pen, name = ground.pen, f"{step.start} → {step.end}"
    friction = step.friction + step.fitting_friction
    lines = _friction_lines(ground, step, name)
    if abs(step.elevation) > _NOTHING:
        lines.append(_height_line(ground, step, name))
    if step.device:
        lines += _device_lines(ground, step, name)
    parts = [(part, pen.pressure(abs(part))) for part in (friction, step.elevation, step.device)]
    parts = [part for part in parts if abs(part[0]) > _NOTHING]
    formula = f"P at {step.end} = {signed_sum(pen.pressure(step.pressure_start), parts)}"
    return [*lines, pen.step(name, formula, step.pressure_end, "pressure")]


def _friction_lines(ground: _Ground, step: PathStep, name: str) -> list[HandStep]:
    pen, pipe, fluid = ground.pen, ground.pipe[step.pipe], ground.project.fluid
    friction = step.friction + step.fitting_friction
    minor = 0.0
    if pipe.minor_k:
        loss, _ = minor_loss(flow=step.flow, bore=pipe.bore, minor_k=pipe.minor_k, density=fluid.density)
        minor = float(loss)
    lines = []
    along = friction - minor
    if step.total_length > 0:
        gradient = along / step.total_length
        lines.append(_gradient_line(ground, step, gradient, name))
        number = pen.units.from_si(gradient, "gradient")
        shown = pen.significant(number, _gradient_digits(pen, step, gradient))
        formula = f"Pf = {shown} × ({pen.length(step.length)} + {pen.length(step.equivalent_length)})"
        formula += " / 1000" if pen.units.name == "metric" else ""
        lines.append(pen.step(name, formula, along, "pressure", step.fittings_text))
    if minor:
        density, bore = pen.exact(fluid.density, "mass_density"), pen.exact(step.bore, "size")
        formula = (
            f"Pk = {darcy_constant(pen.units, per_length=False)} × {pipe.minor_k:.6g} × {density} × "
            f"{pen.flow(step.flow)}^2 / {bore}^4"
        )
        lines.append(pen.step(name, formula, minor, "pressure", "K ρ v² / 2 of the fittings given by K"))
        total = f"Pf = {pen.pressure(along)} + {pen.pressure(minor)}"
        lines.append(pen.step(name, total, friction, "pressure"))
    return lines


def _gradient_digits(pen: Pen, step: PathStep, gradient: float) -> int:
    """Return the significant digits of a loss per length: four, or what its product needs."""
    loss = pen.units.from_si(gradient * step.total_length, "pressure")
    if loss <= 0:
        return _GRADIENT_DIGITS
    return max(_GRADIENT_DIGITS, math.floor(math.log10(loss)) + 1 + pen.fine)


def _gradient_line(ground: _Ground, step: PathStep, gradient: float, name: str) -> HandStep:
    pen, law, units = ground.pen, ground.project.law, ground.pen.units
    flow, bore = pen.flow(step.flow), pen.exact(step.bore, "size")
    if law.family == "darcy-weisbach":
        density = pen.exact(ground.project.fluid.density, "mass_density")
        formula = (
            f"pf = {darcy_constant(units)} × {step.friction_factor or 0:.6f} × {density} × "
            f"{flow}^2 / {bore}^5"
        )
        note = "f ρ v² / (2 d); f by Colebrook"
    else:
        power, constant = f"{law.flow_exponent:g}", law_constant(law, units)
        formula = (
            f"pf = {constant} × {flow}^{power} / "
            f"({step.c_factor or 0:g}^{power} × {bore}^{law.bore_exponent:g})"
        )
        printed = constant.partition("e")[0] in law.name
        note = "" if printed else f"{law.name}, its constant turned into these units"
    digits = _gradient_digits(pen, step, gradient)
    decimals = significant_decimals(units.from_si(gradient, "gradient"), digits)
    return HandStep(name, formula, gradient, "gradient", note, decimals)


def _height_line(ground: _Ground, step: PathStep, name: str) -> HandStep:
    pen, weight = ground.pen, ground.project.fluid.unit_weight
    shown = pen.units.from_si(weight, "gradient") / (1000 if pen.units.name == "metric" else 1)
    rise = ground.node[step.start].elevation - ground.node[step.end].elevation
    formula = f"Pe = {shown:.6g} × {pen.length(abs(rise))}"
    if rise < 0:
        formula = f"Pe = −{shown:.6g} × {pen.length(abs(rise))}"
    side = "higher" if rise > 0 else "lower"
    note = f"{step.start} lies {pen.units.text(abs(rise), 'length')} {side} than {step.end}"
    return pen.step(name, formula, step.elevation, "pressure", note)


def _device_lines(ground: _Ground, step: PathStep, name: str) -> list[HandStep]:
    """Return a line for each device, read from its curve; what no curve tells gets the rest."""
    pen = ground.pen
    devices = [ground.device[tag] for tag in ground.pipe[step.pipe].devices if tag in ground.device]
    read = {one.tag: _signed(one, step.flow) for one in devices}
    silent = [one for one in devices if read[one.tag] is None]
    rest = step.device - sum(value for value in read.values() if value is not None)
    if len(silent) > 1 or (not silent and abs(rest) > 1e-6 * abs(step.device) + _NOTHING):
        names = ", ".join(one.title or one.tag for one in devices)
        formula = f"Pd = {pen.pressure(step.device)}"
        return [pen.step(name, formula, step.device, "pressure", f"held or lost in: {names}")]
    lines = [device_step(one, step.flow, name, pen) for one in devices if read[one.tag]]
    for one in silent:
        note = f"{one.title or one.tag}: what it holds back"
        if one.setting is not None:
            note += f" to leave {pen.units.text(one.setting, 'pressure')} behind it"
        lines.append(pen.step(name, f"Pd = {pen.pressure(rest)}", rest, "pressure", note))
    if len(lines) > 1:
        parts = [(line.value, pen.pressure(abs(line.value))) for line in lines]
        first = ("−" if parts[0][0] < 0 else "") + parts[0][1]
        formula = f"Pd = {signed_sum(first, parts[1:])}"
        lines.append(pen.step(name, formula, step.device, "pressure", "all devices of this pipe"))
    return lines


def _signed(device: Device, flow: float) -> float | None:
    """Return the loss [Pa] of ``device`` at ``flow`` by its curve, a gain below zero, else ``None``."""
    if device.kind == "pressure-reducing valve":
        return None
    value = device_value(device, flow)
    if value is None:
        return 0.0
    return -value if device.kind == "pump" else value
