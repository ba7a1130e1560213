"""From the tests and tanks of a project to the supply curve of each source node.

Every stage is kept: each test as measured, the low-supply curve (the lowest test at each flow), and
that curve after each adjustment in the order given.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Final

from supplycheck.errors import DomainError
from supplycheck.model import Adjustment, FlowTest, Project, Supply, System, Tank
from supplycheck.model.words import Words
from supplycheck.network.records import SourceCurve
from supplycheck.supply.curve import SupplyCurve, constant_curve, curve_through, lower_envelope

_PSI: Final = 0.45359237 * 9.80665 / 0.0254**2
READING: Final = 1.0 * _PSI
"""How closely a test gauge is read [Pa]: 1 psi (common practice, no source)."""


@dataclass(frozen=True, slots=True)
class Stage:
    """One stage of the curve that is compared: what was done, and the curve after it, at the node."""

    words: Words
    curve: SupplyCurve
    adjustment: Adjustment | None = None


@dataclass(frozen=True, slots=True)
class NodeSupply:
    """Everything that feeds one node.

    ``measured`` holds one curve a test (or the tank's), carried in height from its gauge to the node;
    ``adjusted`` the same after all adjustments. ``stages`` starts with the lowest measured curve and
    goes on with one stage an adjustment; the last one is compared with the demand.
    """

    node: str
    tests: tuple[FlowTest, ...]
    tank: Tank | None
    measured: tuple[SupplyCurve, ...]
    adjusted: tuple[SupplyCurve, ...]
    stages: tuple[Stage, ...]
    notes: tuple[Words, ...] = ()

    @property
    def unadjusted(self) -> SupplyCurve:
        """The lowest measured curve before any adjustment."""
        return self.stages[0].curve

    @property
    def curve(self) -> SupplyCurve:
        """The curve that is compared with the demand."""
        return self.stages[-1].curve

    def test_at(self, flow: float) -> FlowTest | None:
        """Return the test that governs the compared curve at ``flow`` [m³/s]; ``None`` for a tank."""
        return self.test(self.curve.member_at(flow)) if self.tests else None

    def test(self, tag: str) -> FlowTest:
        """Return the test named ``tag``; :class:`KeyError` where there is none."""
        for test in self.tests:
            if test.tag == tag:
                return test
        raise KeyError(tag)

    def rated_flow(self, pressure: float, *, adjusted: bool = False) -> float | None:
        """Return the flow [m³/s] at which ``pressure`` [Pa] is left at the gauge, the least of the tests.

        A tank is read at its node. ``None`` where no curve falls so far.
        """
        curves = self.adjusted if adjusted else self.measured
        flows = [flow for one in curves if (flow := one.flow_at(pressure + one.offset)) is not None]
        return min(flows, default=None)

    def adjusted_member(self, flow: float) -> SupplyCurve:
        """Return the adjusted curve of the test or tank that governs at ``flow`` [m³/s]."""
        return self._member(self.adjusted, flow)

    def measured_member(self, flow: float) -> SupplyCurve:
        """Return the measured curve of the test or tank that governs at ``flow`` [m³/s]."""
        return self._member(self.measured, flow)

    def _member(self, curves: tuple[SupplyCurve, ...], flow: float) -> SupplyCurve:
        governing = self.curve.member_at(flow)
        return next(curve for curve in curves if curve.name == governing)


def gauge_curve(test: FlowTest) -> SupplyCurve:
    """Return the curve of one test as read at its gauge.

    Raises :class:`DomainError` naming the test where its readings give no curve.
    """
    try:
        return curve_through(
            test.tag, test.node, test.static, [(point.flow, point.residual) for point in test.points]
        )
    except DomainError as error:
        raise DomainError(f"flow test {test.tag}: {error}") from None


def adjust(curve: SupplyCurve, adjustment: Adjustment) -> SupplyCurve:
    """Return ``curve`` (as read at the gauge) after one adjustment."""
    if adjustment.kind == "low supply":
        return curve.lowered(adjustment.pressure)
    if adjustment.kind == "static cap":
        return curve.capped(adjustment.pressure)
    return curve.pressure_scaled(adjustment.factor)


def adjustment_words(adjustment: Adjustment) -> Words:
    """Return what an adjustment does, in words and numbers, with the reason as typed."""
    reason = " ({reason})" if adjustment.reason else ""
    if adjustment.kind == "low supply":
        text = "low supply: static and residual lowered by {pressure}"
    elif adjustment.kind == "static cap":
        text = "static cap: no pressure at the gauge above {pressure}"
    else:
        text = "percent: every pressure at the gauge multiplied by {factor}"
    values = (
        ("pressure", adjustment.pressure, "pressure"),
        ("factor", adjustment.factor, "ratio"),
        ("reason", adjustment.reason, ""),
    )
    return Words(text + reason, values)


def off_line(test: FlowTest) -> float:
    """Return how far [Pa] the readings lie from one N^1.85 line through static and the largest flow.

    0 for a test with one reading. Compare with :data:`READING`, the closeness of reading.
    """
    last = max(test.points, key=lambda point: (point.flow, -point.residual))
    line = curve_through(test.tag, test.node, test.static, [(last.flow, last.residual)])
    return max(abs(point.residual - line.pressure_at(point.flow)) for point in test.points)


def _test_notes(tests: Iterable[FlowTest]) -> list[Words]:
    text = (
        "The readings of {tag} do not lie on one N^1.85 line: they are up to {deviation} from "
        "the line through static and the largest flow. The curve is straight between the readings; beyond "
        "them it follows the steeper of the last piece and that line."
    )
    return [
        Words(text, (("tag", test.tag, ""), ("deviation", away, "pressure")))
        for test in tests
        if (away := off_line(test)) > READING
    ]


def _from_tests(
    node: str, tests: tuple[FlowTest, ...], elevation: float, supply: Supply, unit_weight: float
) -> NodeSupply:
    gains = [unit_weight * (test.gauge_elevation - elevation) for test in tests]
    at_gauge = [gauge_curve(test) for test in tests]
    notes = _test_notes(tests)
    name = tests[0].tag if len(tests) == 1 else "lowest of the flow tests"
    words = "as measured"
    if len(tests) > 1:
        words += f": the lowest of {len(tests)} tests at each flow (low-supply curve)"
        text = f"has {len(tests)} flow tests; the lowest at each flow is used."
        notes.append(Words("Node {node} " + text, (("node", node, ""),)))

    def placed() -> tuple[SupplyCurve, ...]:
        return tuple(curve.at_height(gain, node) for curve, gain in zip(at_gauge, gains, strict=True))

    measured = placed()
    stages = [Stage(Words(words), lower_envelope(name, measured))]
    for adjustment in supply.adjustments:
        at_gauge = [adjust(curve, adjustment) for curve in at_gauge]
        stages.append(Stage(adjustment_words(adjustment), lower_envelope(name, placed()), adjustment))
    return NodeSupply(node, tests, None, measured, placed(), tuple(stages), tuple(notes))


def _from_tank(tank: Tank, elevation: float, unit_weight: float) -> NodeSupply:
    def at(level: float) -> SupplyCurve:
        return constant_curve(tank.tag, tank.node, unit_weight * (level - elevation))

    curve, full = at(tank.lowest_level), at(tank.water_level)
    words = Words(
        "{kind} {tag}: water level {level}, node at {elevation}",
        (
            ("kind", "reservoir" if tank.kind == "reservoir" else f"{tank.kind} tank", ""),
            ("tag", tank.tag, ""),
            ("level", tank.lowest_level, "length"),
            ("elevation", elevation, "length"),
        ),
    )
    measured = (curve,) if full == curve else (curve, full)
    return NodeSupply(tank.node, (), tank, measured, (curve,), (Stage(words, curve),))


def _checked(supply: Supply, elevations: Mapping[str, float]) -> None:
    if not supply.tests and not supply.tanks:
        raise DomainError("the project has no flow test and no tank: there is nothing to compare with")
    tags = [test.tag for test in supply.tests]
    if len(set(tags)) < len(tags):
        raise DomainError("two flow tests carry the same tag; give each its own")
    tested = {test.node for test in supply.tests}
    taken = set(tested)
    for tank in supply.tanks:
        if tank.node in taken:
            raise DomainError(
                f"tank {tank.tag} shares node {tank.node} with another supply; give it its own"
            )
        taken.add(tank.node)
    missing = sorted(taken - set(elevations))
    if missing:
        raise DomainError(f"no such node for a supply: {', '.join(missing)}")


def supplies_of(supply: Supply, system: System, unit_weight: float) -> tuple[NodeSupply, ...]:
    """Return what feeds each source node, tests first; ``unit_weight`` [Pa/m] carries heights.

    Adjustments speak of the main and so change the tests, not the tanks.
    Raises :class:`DomainError` for readings that give no curve, or for two supplies at one node.
    """
    elevations = {node.tag: node.elevation for node in system.nodes}
    _checked(supply, elevations)
    by_node: dict[str, list[FlowTest]] = {}
    for test in supply.tests:
        by_node.setdefault(test.node, []).append(test)
    found = [
        _from_tests(node, tuple(tests), elevations[node], supply, unit_weight)
        for node, tests in by_node.items()
    ]
    found += [_from_tank(tank, elevations[tank.node], unit_weight) for tank in supply.tanks]
    return tuple(found)


def supply_curves(project: Project) -> tuple[NodeSupply, ...]:
    """Return what feeds each source node of a project; raises like :func:`supplies_of`."""
    return supplies_of(project.supply, project.system, project.fluid.unit_weight)


def source_curves(curves: Iterable[NodeSupply], *, adjusted: bool = True) -> tuple[SourceCurve, ...]:
    """Return the curves as the network solver takes them, adjusted or as measured."""
    return tuple((one.curve if adjusted else one.unadjusted).to_source() for one in curves)
