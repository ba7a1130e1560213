"""The supply side of a comparison as lines that can be followed by hand."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import Final

from supplycheck.hydraulics import pitot_discharge
from supplycheck.model import FlowTest
from supplycheck.model.words import Step, Value, Words
from supplycheck.supply.curve import SupplyCurve
from supplycheck.supply.outlets import outlet_flow
from supplycheck.supply.route import Route
from supplycheck.supply.sources import NodeSupply

_FORMS: Final = {
    "us": (231 * 0.0254**3 / 60, 0.0254, 0.45359237 * 9.80665 / 0.0254**2, "gpm, in and psi"),
    "metric": (1e-3 / 60, 1e-3, 1e5, "L/min, mm and bar"),
}
"""Units [SI] of flow, diameter and pitot in which the law of an outlet is printed, and their names."""


BETWEEN: Final = "straight in Q^1.85 between its points, the last piece carried on beyond them"
"""How a curve of several points is read."""


def curve_words(curve: SupplyCurve, flow: float) -> Words:
    """Return the piece of the curve on which ``flow`` lies, as a formula with its numbers.

    A negative flow runs into the source: the curve then rises above static as far as it falls below it.
    """
    if flow < 0.0 and len(curve.flows) > 1:
        taken: tuple[Value, ...] = (
            ("p0", curve.static, "pressure"),
            ("p1", curve.pressure_at(-flow), "pressure"),
            ("q", -flow, "flow"),
        )
        text = "{p0} + ({p0} − {p1}): {q} run into it, and {p1} would be left with as much drawn"
        return Words(text, taken)
    values = [("q", flow, "flow"), ("p0", curve.pressures[0], "pressure")]
    flows = curve.flows
    if len(flows) == 1:
        return Words("{p0} at every flow", tuple(values))
    piece = min(max(sum(1 for point in flows if point < flow) - 1, 0), len(flows) - 2)
    if flow > flows[-1] and len(flows) > 2:
        values += [("pe", curve.pressures[-1], "pressure"), ("qe", flows[-1], "flow")]
        values += [("now", curve.pressure_at(flow), "pressure")]
        return Words("{pe} at {qe}, carried on straight in Q^1.85 to {q}: {now}", tuple(values))
    if piece == 0:
        values += [("p1", curve.pressures[1], "pressure"), ("q1", flows[1], "flow")]
        return Words("{p0} − ({p0} − {p1}) × ({q} / {q1})^1.85", tuple(values))
    values += [("pa", curve.pressures[piece], "pressure"), ("pb", curve.pressures[piece + 1], "pressure")]
    values += [("qa", flows[piece], "flow"), ("qb", flows[piece + 1], "flow")]
    text = "{pa} − ({pa} − {pb}) × ({q}^1.85 − {qa}^1.85) / ({qb}^1.85 − {qa}^1.85)"
    return Words(text, tuple(values))


def demand_step(parts: Mapping[str, float]) -> Step:
    """Return what is drawn, by what draws it [m³/s], as one sum; parts that draw nothing are left out."""
    drawn = [(name, flow) for name, flow in parts.items() if abs(flow) > 1e-9]
    formula = " + ".join(f"{name} {{v{index}}}" for index, (name, _) in enumerate(drawn))
    values = tuple((f"v{index}", flow, "flow") for index, (_, flow) in enumerate(drawn))
    return Step(
        "Demand flow", Words(formula, values), math.fsum(parts.values()), "flow", "each counted once"
    )


def scaled_step(at: str, demand: float, given: Mapping[str, float], flow: float) -> Step:
    """Return how the flow at the demand pressure was found: every draw scaled alike.

    ``given`` [m³/s] is what each source gives at the demand, ``flow`` [m³/s] what all give where ``demand``
    [Pa] is left at node ``at``.
    """
    total = math.fsum(given.values())
    values = (
        ("total", total, "flow"),
        ("share", flow / total, "percent"),
        ("demand", demand, "pressure"),
    )
    note = f"all outflows and hose scaled alike until the pressure at {at} is the demand pressure"
    note += "; the total of all supplies" if len(given) > 1 else ""
    words = Words("{total} × {share}, where {demand} is left", values)
    return Step("Flow at the demand pressure", words, flow, "flow", note)


def pitot_steps(test: FlowTest, units: str) -> tuple[Step, ...]:
    """Return how each outlet's flow follows from its pitot reading, and their sum where several flowed.

    ``units`` ("us" or "metric") chooses the form of the law whose factor is printed.
    """
    flow_unit, diameter_unit, pitot_unit, named = _FORMS[units]
    law, _ = pitot_discharge(pitot=pitot_unit, diameter=diameter_unit, coefficient=1.0)
    factor = f"{float(law) / flow_unit:.4g}"
    note = f"NFPA 291, in {named}"
    steps = []
    for point in test.points:
        for number, outlet in enumerate(point.outlets, 1):
            values = (
                ("c", outlet.coefficient, "ratio"),
                ("d", outlet.diameter, "size"),
                ("p", outlet.pitot, "pressure"),
                ("f", outlet.pumper_factor, "ratio"),
            )
            text = factor + " × {c} × ({d})² × √({p})"
            text += " × {f}" if outlet.pumper_factor != 1.0 else ""
            name = f"outlet {number}" + (f" of {outlet.hydrant}" if outlet.hydrant else "")
            flow = outlet_flow(outlet).flow
            steps.append(Step(f"{test.tag}: flow of {name}", Words(text, values), flow, "flow", note))
        if len(point.outlets) > 1:
            flows = [outlet_flow(outlet).flow for outlet in point.outlets]
            words = Words(
                " + ".join(f"{{v{index}}}" for index in range(len(flows))),
                tuple((f"v{index}", flow, "flow") for index, flow in enumerate(flows)),
            )
            steps.append(Step(f"{test.tag}: flow of the test", words, math.fsum(flows), "flow"))
    return tuple(steps)


def rating_steps(supply: NodeSupply, pressure: float) -> tuple[Step, ...]:
    """Return the flow at ``pressure`` [Pa] at the gauge: as measured, and adjusted where that differs.

    A tank has no such flow; neither has a curve that never falls so far.
    """
    if supply.tank is not None:
        return ()
    steps = []
    sides = (("as measured", supply.measured), ("adjusted", supply.adjusted))
    for name, curves in sides if len(supply.stages) > 1 else sides[:1]:
        at_gauge = [curve.lowered(curve.offset) for curve in curves]
        flows = [(flow, one) for one in at_gauge if (flow := one.flow_at(pressure)) is not None]
        if not flows:
            continue
        flow, curve = min(flows, key=lambda found: found[0])
        steps.append(
            Step(
                f"Flow of {curve.name} at 20 psi (1.38 bar), {name}",
                _projection(curve, pressure),
                flow,
                "flow",
                "at the gauge",
            )
        )
    return tuple(steps)


def _projection(curve: SupplyCurve, pressure: float) -> Words:
    values = [("s", curve.pressures[0], "pressure"), ("f", pressure, "pressure")]
    if len(curve.flows) != 2:
        return Words(f"where its curve, at the gauge, falls to {{f}}: {BETWEEN}", tuple(values))
    values += [("q", curve.flows[1], "flow"), ("r", curve.pressures[1], "pressure")]
    return Words("{q} × (({s} − {f}) / ({s} − {r}))^(1/1.85)", tuple(values))


def sharing_step(shares: Sequence[tuple[str, float]]) -> Step:
    """Return what each of several sources gives or takes [m³/s], as one sum."""
    return _sharing("Given by the sources", shares, "each on its own curve, at its own flow")


def state_sharing_step(shares: Sequence[tuple[str, float]]) -> Step:
    """Return the same where the demand is drawn from the supplies as they are."""
    return _sharing("Given by the supplies as they are", shares, "the same draws, no supply lowered")


def _sharing(title: str, shares: Sequence[tuple[str, float]], note: str) -> Step:
    ordered = sorted(shares, key=lambda share: share[1] < 0.0)
    parts = [
        f"{node} {{v{index}}}" if flow >= 0.0 else f"{{v{index}}} that run into {node}"
        for index, (node, flow) in enumerate(ordered)
    ]
    text = parts[0] + "".join(
        (" + " if flow >= 0.0 else " − ") + part
        for part, (_, flow) in zip(parts[1:], ordered[1:], strict=True)
    )
    values = tuple((f"v{index}", abs(flow), "flow") for index, (_, flow) in enumerate(ordered))
    return Step(title, Words(text, values), math.fsum(flow for _, flow in shares), "flow", note)


def source_steps(supply: NodeSupply, flow: float, units: str, rating: float) -> tuple[Step, ...]:
    """Return the steps from the test as read to the pressure at the node of the source.

    ``flow`` [m³/s] is what the source gives, negative where water runs into it; ``rating`` [Pa] the
    pressure at which a main is rated.
    """
    given = max(flow, 0.0)
    test = supply.test_at(given)
    steps = [] if test is None else [*pitot_steps(test, units)]
    steps += rating_steps(supply, rating)
    measured = supply.measured_member(given)
    gauge = measured.lowered(measured.offset)
    if supply.tests:
        value, title = gauge.either_way(flow), f"Curve of {measured.name} at the demand flow"
        note = "at the gauge" + (f"; {BETWEEN}" if len(gauge.flows) > 2 else "")
        steps.append(Step(title, curve_words(gauge, flow), value, "pressure", note))
        words = Words(
            "{gauge} + {gain}", (("gauge", value, "pressure"), ("gain", measured.offset, "pressure"))
        )
        title, carried = f"Carried to node {supply.node}", value + measured.offset
        steps.append(Step(title, words, carried, "pressure", "height from the gauge to the node"))
    for stage in supply.stages[0 if supply.tank else 1 :]:
        value = stage.curve.either_way(flow)
        title = "Tank" if supply.tank else "Adjusted"
        steps.append(Step(title, stage.words, value, "pressure", "at the demand flow"))
    return tuple(steps)


def left_over_step(node: str, available: float, demand: float) -> Step:
    """Return what one of several sources has left [Pa] at its own node."""
    words = Words(
        "{available} − {demand}", (("available", available, "pressure"), ("demand", demand, "pressure"))
    )
    title, note = f"Left over at {node}", "the same at every source: all are lowered alike"
    return Step(title, words, available - demand, "pressure", note)


def carried_step(start: tuple[str, float], path: Route, at: str, note: str) -> Step:
    """Return the step from a pressure [Pa], named as in a formula, along ``path`` to node ``at``."""
    name, pressure = start
    height = "− height {height}" if path.elevation >= 0.0 else "+ height {height}"
    device = "− devices {device}" if path.device >= 0.0 else "+ devices with pump {device}"
    words = Words(
        f"{name}{{supply}} {height} − friction {{friction}} {device}",
        (
            ("supply", pressure, "pressure"),
            ("height", abs(path.elevation), "pressure"),
            ("friction", path.friction, "pressure"),
            ("device", abs(path.device), "pressure"),
        ),
    )
    value = pressure - path.elevation - path.friction - path.device
    return Step(f"Carried to {at}", words, value, "pressure", note)


def arrival_steps(
    supply: NodeSupply, flow: float, path: Route, at: str, demand: float, margin: float
) -> tuple[Step, ...]:
    """Return the steps from the node of the source to the pressure available at node ``at``.

    ``flow`` [m³/s] is what the source gives, ``demand`` and ``margin`` [Pa] stand at ``at``.
    """
    steps = []
    if path.pipes:
        start = ("", supply.curve.either_way(flow))
        steps.append(carried_step(start, path, at, f"from {supply.node}, losses at the demand flow"))
    words = Words(
        "demand {demand} + margin {margin}",
        (("demand", demand, "pressure"), ("margin", margin, "pressure")),
    )
    steps.append(Step(f"Available at {at}", words, demand + margin, "pressure"))
    return tuple(steps)


def way_in_steps(supply: NodeSupply, flow: float, path: Route, at: str) -> tuple[Step, ...]:
    """Return the steps to node ``at`` from a source that gives ``flow`` [m³/s] in a solved state."""
    curve = supply.curve
    title, at_source = f"Curve of {curve.name} at {supply.node}", curve.either_way(flow)
    note = "as it is, at what it gives"
    steps = [Step(title, curve_words(curve, flow), at_source, "pressure", note)]
    if path.pipes:
        steps.append(carried_step(("", at_source), path, at, "losses at the flows of that state"))
    return tuple(steps)


def behind_valve_steps(valve: str, setting: float, path: Route, at: str) -> tuple[Step, ...]:
    """Return the step to node ``at`` from a regulating valve that holds its ``setting`` [Pa] before it."""
    return (carried_step((f"set by {valve} ", setting), path, at, "the valve holds its setting"),)


def shown_step(at: str, available: float, demand: float, left: float | None) -> tuple[Step, ...]:
    """Return what a gauge at ``at`` shows in the solved state.

    ``left`` [Pa] is what that leaves above the demand; ``None`` where it is the margin, which a regulating
    valve may change.
    """
    note = "a gauge there, with the demand drawn from the supplies as they are: network solved"
    shown = Words("{shown}", (("shown", available, "pressure"),))
    steps = [Step(f"Available at {at}", shown, available, "pressure", note)]
    if left is not None:
        values = (("available", available, "pressure"), ("demand", demand, "pressure"))
        note = "not the margin: a regulating valve throttles more while no supply is lowered"
        steps.append(Step(f"Left at {at}", Words("{available} − {demand}", values), left, "pressure", note))
    return tuple(steps)
