"""The supply side of a comparison as lines that can be followed by hand."""

from __future__ import annotations

import math
from collections.abc import Mapping

from supplycheck.supply.curve import SupplyCurve
from supplycheck.supply.route import Route
from supplycheck.supply.sources import NodeSupply
from supplycheck.supply.words import Step, Words


def curve_words(curve: SupplyCurve, flow: float) -> Words:
    """Return the piece of the curve on which ``flow`` lies, as a formula with its numbers."""
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


def supply_steps(
    supply: NodeSupply, flow: float, path: Route, at: str, demand: float, margin: float
) -> tuple[Step, ...]:
    """Return the steps from the test as read to the pressure available at node ``at``.

    ``flow`` [m³/s] is what the source gives, ``demand`` and ``margin`` [Pa] stand at ``at``.
    """
    steps = []
    available = supply.curve.pressure_at(flow)
    measured = supply.measured_member(flow)
    gauge = measured.lowered(measured.offset)
    if supply.tests:
        value, title = gauge.pressure_at(flow), f"Curve of {measured.name} at the demand flow"
        steps.append(Step(title, curve_words(gauge, flow), value, "pressure", "at the gauge"))
        words = Words(
            "{gauge} + {gain}", (("gauge", value, "pressure"), ("gain", measured.offset, "pressure"))
        )
        title, carried = f"Carried to node {supply.node}", value + measured.offset
        steps.append(Step(title, words, carried, "pressure", "height from the gauge to the node"))
    for stage in supply.stages[0 if supply.tank else 1 :]:
        value = stage.curve.pressure_at(flow)
        steps.append(
            Step(
                "Tank" if supply.tank else "Adjusted", stage.words, value, "pressure", "at the demand flow"
            )
        )
    if path.pipes:
        words = Words(
            "{supply} − height {height} − friction {friction} − devices {device}",
            (
                ("supply", available, "pressure"),
                ("height", path.elevation, "pressure"),
                ("friction", path.friction, "pressure"),
                ("device", path.device, "pressure"),
            ),
        )
        value = available - path.elevation - path.friction - path.device
        steps.append(Step(f"Carried to {at}", words, value, "pressure", "losses at the demand flow"))
    words = Words(
        "demand {demand} + margin {margin}",
        (("demand", demand, "pressure"), ("margin", margin, "pressure")),
    )
    steps.append(Step(f"Available at {at}", words, demand + margin, "pressure"))
    return tuple(steps)
