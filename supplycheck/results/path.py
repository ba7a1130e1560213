"""The walk from the governing head to the supply, and the same as lines for a pocket calculator."""

from __future__ import annotations

import math
from collections import defaultdict

from supplycheck.model import Project
from supplycheck.results.records import HandStep, NodeRow, PathStep, PipeRow
from supplycheck.units import UNIT_SETS, UnitSet

_STILL = 1e-9  # m³/s: below this a pipe carries nothing


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
    project: Project, nodes: tuple[NodeRow, ...], path: tuple[PathStep, ...]
) -> tuple[HandStep, ...]:
    """Return the path as formulas with their numbers filled in, in the project's units."""
    if not path:
        return ()
    units = UNIT_SETS[project.units]
    row_of = {node.tag: node for node in nodes}
    lines = [_head_line(row_of[path[0].start], units)]
    for step in path:
        lines += _segment_lines(project, step, row_of, units)
    return tuple(lines)


def _head_line(head: NodeRow, units: UnitSet) -> HandStep:
    if not head.k_factor:
        needed = units.text(head.required_pressure, "pressure")
        formula = f"P = {units.text(head.pressure, 'pressure', 3)}, needed {needed}; Q is fixed"
        return HandStep(head.tag, formula, head.discharge, "flow", f"set by {head.required_by}")
    k_factor = head.k_factor
    pressure = head.pressure - (head.velocity_pressure or 0.0)
    what = "Pn = Pt − Pv" if head.velocity_pressure else "P"
    formula = (
        f"q = K√P = {units.number(k_factor, 'k_factor')} × √{units.number(pressure, 'pressure', 3)}"
        f" ({what})"
    )
    return HandStep(f"head {head.tag}", formula, head.discharge, "flow", f"set by {head.required_by}")


def _segment_lines(
    project: Project, step: PathStep, row_of: dict[str, NodeRow], units: UnitSet
) -> list[HandStep]:
    name = f"{step.start} → {step.end}"
    lines = []
    if step.flow_added > _STILL and step.flow - step.flow_added > _STILL:
        joined = step.flow - step.flow_added
        formula = f"Q = {units.number(joined, 'flow', 2)} + {units.number(step.flow_added, 'flow', 2)}"
        lines.append(
            HandStep(name, formula, step.flow, "flow", _added_note(step, row_of[step.start], units))
        )
    elif step.flow_added < -_STILL:
        note = "flow splits here: another way round carries the rest"
        formula = f"Q = {units.number(step.flow, 'flow', 2)}"
        lines.append(HandStep(name, formula, step.flow, "flow", note))
    lines.append(_gradient_line(project, step, name, units))
    total = step.friction + step.fitting_friction
    formula = (
        f"Pf = {units.number(step.friction_gradient, 'gradient', 5)} × "
        f"({units.number(step.length, 'length')} + {units.number(step.equivalent_length, 'length')})"
    )
    lines.append(HandStep(name, formula, total, "pressure", step.fittings_text))
    if step.elevation:
        weight = units.number(project.fluid.unit_weight, "gradient", 4)
        rise = row_of[step.start].elevation - row_of[step.end].elevation
        formula = f"Pe = {weight} × ({units.number(rise, 'length')})"
        lines.append(
            HandStep(name, formula, step.elevation, "pressure", "height of head side above supply side")
        )
    if step.device:
        lines.append(HandStep(name, "loss of the devices at this flow", step.device, "pressure", step.note))
    formula = " + ".join(
        units.number(part, "pressure", 3)
        for part in (step.pressure_start, total, step.elevation, step.device)
        if part or part is step.pressure_start
    )
    lines.append(HandStep(name, f"P at {step.end} = {formula}", step.pressure_end, "pressure"))
    return lines


def _added_note(step: PathStep, node: NodeRow, units: UnitSet) -> str:
    if node.discharge > _STILL and node.k_factor:
        return (
            f"discharge of {node.tag}: {units.number(node.k_factor, 'k_factor')} × "
            f"√{units.number(node.pressure, 'pressure', 3)}"
        )
    if node.discharge > _STILL:
        return f"drawn at {node.tag}"
    if node.pressure > 0:
        k_side = step.flow_added / math.sqrt(node.pressure)
        return f"other side of {node.tag}: K = Q/√P = {units.number(k_side, 'k_factor', 3)}"
    return ""


def _gradient_line(project: Project, step: PathStep, name: str, units: UnitSet) -> HandStep:
    flow, bore = units.number(step.flow, "flow", 2), units.number(step.bore, "size")
    if project.law.family == "darcy-weisbach":
        formula = f"pf = f ρ v² / (2 d), f = {step.friction_factor or 0:.5f}, Q = {flow}, d = {bore}"
        return HandStep(name, formula, step.friction_gradient, "gradient", "Colebrook")
    law = project.law
    published = {"us": "4.52", "metric": "6.05e8"}[project.units]
    formula = (
        f"pf = {published} × {flow}^{law.flow_exponent} / "
        f"({step.c_factor or 0:.0f}^{law.flow_exponent} × {bore}^{law.bore_exponent})"
    )
    note = "in mbar/m (6.05e5 in bar/m)" if project.units == "metric" else ""
    return HandStep(name, formula, step.friction_gradient, "gradient", note)
