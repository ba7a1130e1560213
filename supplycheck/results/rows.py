"""Node and pipe rows of the result, from a solved network."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np

from supplycheck.hydraulics import darcy_weisbach_gradient, hazen_williams_gradient, minor_loss
from supplycheck.model import DemandCase, Fluid, FrictionLaw, Node, Pipe, PipeKind, Project
from supplycheck.model.system import Fitting
from supplycheck.network import Solution
from supplycheck.network.records import FloatArray
from supplycheck.results.records import FittingRow, NodeRow, PipeRow


@dataclass(frozen=True, slots=True)
class _Required:
    """What the demand case asks of one head or outlet."""

    flow: float
    pressure: float
    by: str


def requirements(case: DemandCase) -> Mapping[str, _Required]:
    """Return what ``case`` asks of each of its heads and outlets, by node tag."""
    columns = zip(case.heads, case.required_flow, case.required_pressure, case.required_by, strict=True)
    heads = {tag: _Required(flow, pressure, by) for tag, flow, pressure, by in columns}
    outlets = {one.node: _Required(one.flow, one.minimum_pressure, one.what) for one in case.outlets}
    return {**heads, **outlets}


def k_factor_of(project: Project, node: Node) -> float | None:
    """Return the K-factor at which ``node`` discharges [m³/s/√Pa], or ``None`` for no outlet."""
    if node.k_factor is not None or node.sprinkler is None:
        return node.k_factor
    return next(s.k_factor for s in project.system.sprinklers if s.tag == node.sprinkler)


def node_rows(project: Project, case: DemandCase, solution: Solution) -> tuple[NodeRow, ...]:
    """Return one row for each node, in the order of the project."""
    asked, inside = requirements(case), set(case.heads)
    rows = []
    for index, node in enumerate(project.system.nodes):
        required = asked.get(node.tag)
        rows.append(
            NodeRow(
                tag=node.tag,
                kind=node.kind,
                x=node.x,
                y=node.y,
                elevation=node.elevation,
                pressure=float(solution.pressure[index]),
                discharge=float(solution.outflow[index]),
                k_factor=k_factor_of(project, node),
                required_discharge=required.flow + node.fixed_flow if required else None,
                required_pressure=required.pressure if required else None,
                required_by=required.by if required else "",
                area=node.area,
                branch_line=node.branch_line,
                sprinkler=node.sprinkler,
                in_design_area=node.tag in inside,
                velocity_pressure=(
                    float(solution.outlet_velocity_pressure[index])
                    if project.criteria.velocity_pressure and required
                    else None
                ),
            )
        )
    return tuple(rows)


def fittings_text(fittings: tuple[Fitting, ...]) -> str:
    """Return fittings in words, ``2 × elbow 90, 1 × tee (inferred)``."""
    words = []
    for fitting in fittings:
        mark = " (inferred)" if fitting.origin == "inferred" else ""
        words.append(f"{fitting.count} × {fitting.name}{mark}")
    return ", ".join(words)


def fitting_rows(project: Project) -> tuple[FittingRow, ...]:
    """Return one row for each distinct fitting, nominal size, kind of pipe, bore and C, smallest first."""
    counts: dict[FittingRow, int] = {}
    for pipe in project.system.pipes:
        for fitting in pipe.fittings:
            row = FittingRow(
                name=fitting.name,
                nominal=pipe.nominal,
                pipe_kind=pipe.kind,
                bore=pipe.bore,
                c_factor=pipe.c_factor,
                table_length=fitting.table_length,
                c_multiplier=fitting.c_multiplier,
                bore_factor=fitting.bore_factor,
                length=fitting.table_length * (fitting.c_multiplier * fitting.bore_factor),
                minor_k=fitting.minor_k / fitting.count if fitting.count else 0.0,
                count=0,
                source=fitting.source,
            )
            counts[row] = counts.get(row, 0) + fitting.count
    rows = [replace(row, count=count) for row, count in counts.items()]
    return tuple(sorted(rows, key=lambda row: (row.name, row.bore, row.pipe_kind, row.c_factor or 0.0)))


def pipe_rows(project: Project, solution: Solution) -> tuple[PipeRow, ...]:
    """Return one row for each pipe in the direction of its flow, in the order of the project."""
    kinds = {kind.name: kind for kind in project.system.pipe_kinds}
    outflow = dict(zip(solution.node_tags, solution.outflow, strict=True))
    row_of = {tag: row for row, tag in enumerate(solution.node_tags)}
    second = _second_law(project, solution)
    return tuple(
        _pipe_row(project, pipe, kinds.get(pipe.kind), solution, index, outflow, row_of, second)
        for index, pipe in enumerate(project.system.pipes)
    )


def _second_law(project: Project, solution: Solution) -> FloatArray | None:
    """Return the friction by the project's second law [Pa] in the given flows, (m,)."""
    law = project.second_law
    if law is None:
        return None
    return friction_of(project.system.pipes, law=law, fluid=project.fluid, flow=solution.pipe_flow)


def friction_of(pipes: tuple[Pipe, ...], *, law: FrictionLaw, fluid: Fluid, flow: FloatArray) -> FloatArray:
    """Return the friction loss [Pa] of ``pipes`` at ``flow`` [m³/s] by ``law``, (m,).

    Straight from the laws, pipe by pipe, so that it can stand beside what the solver found. A pipe that
    lacks the C-factor or the roughness which ``law`` needs gets NaN.
    """
    bore = np.array([pipe.bore for pipe in pipes])
    length = np.array([pipe.length + pipe.equivalent_length for pipe in pipes])
    minor_k = np.array([pipe.minor_k for pipe in pipes])
    loss, _ = minor_loss(flow=flow, bore=bore, minor_k=minor_k, density=fluid.density)
    if law.family == "darcy-weisbach":
        roughness = np.array([np.nan if pipe.roughness is None else pipe.roughness for pipe in pipes])
        known = np.isfinite(roughness)
        gradient, _ = darcy_weisbach_gradient(
            flow=flow,
            bore=bore,
            roughness=np.where(known, roughness, 0.0),
            density=fluid.density,
            viscosity=fluid.viscosity,
        )
    else:
        c_factor = np.array([pipe.c_factor or np.nan for pipe in pipes])
        known = np.isfinite(c_factor)
        gradient, _ = hazen_williams_gradient(
            flow=flow,
            bore=bore,
            c_factor=np.where(known, c_factor, 1.0),
            coefficient=law.coefficient,
            flow_exponent=law.flow_exponent,
            bore_exponent=law.bore_exponent,
        )
    total: FloatArray = np.where(known, loss + gradient * length, np.nan)
    return total


def _pipe_row(
    project: Project,
    pipe: Pipe,
    kind: PipeKind | None,
    solution: Solution,
    index: int,
    outflow: Mapping[str, float],
    row_of: Mapping[str, int],
    second: FloatArray | None,
) -> PipeRow:
    flow = float(solution.pipe_flow[index])
    sign = -1.0 if flow < 0 else 1.0
    start, end = (pipe.end, pipe.start) if flow < 0 else (pipe.start, pipe.end)
    darcy = project.law.family == "darcy-weisbach"
    total = pipe.length + pipe.equivalent_length
    friction = sign * float(solution.friction[index])
    return PipeRow(
        tag=pipe.tag,
        start=start,
        end=end,
        role=pipe.role,
        flow=abs(flow),
        flow_added=float(outflow[end]),
        velocity=abs(float(solution.velocity[index])),
        nominal=pipe.nominal,
        material=kind.material if kind else pipe.kind,
        bore=pipe.bore,
        c_factor=None if darcy else pipe.c_factor,
        roughness=pipe.roughness if darcy or second is not None else None,
        friction_factor=_finite(solution.friction_factor[index]) if darcy else None,
        reynolds=_finite(solution.reynolds[index]) if darcy else None,
        length=pipe.length,
        equivalent_length=pipe.equivalent_length,
        total_length=total,
        fittings=pipe.fittings,
        devices=pipe.devices,
        friction_gradient=friction / total if total > 0 else 0.0,
        friction_loss=friction,
        elevation_loss=sign * float(solution.elevation_loss[index]),
        device_loss=sign * float(solution.device_loss[index]),
        second_law_friction_loss=None if second is None else abs(float(second[index])),
        start_pressure=float(solution.pressure[row_of[start]]),
        end_pressure=float(solution.pressure[row_of[end]]),
        valve=pipe.valve,
        fittings_text=fittings_text(pipe.fittings),
    )


def _finite(value: float) -> float | None:
    return float(value) if np.isfinite(value) else None
