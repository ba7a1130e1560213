"""One-pipe problems: of loss, flow, diameter and pump, three are known and the fourth is found.

What a pipe takes less what there is (:mod:`supplycheck.hydraulics.pipe_problem`) is strictly monotone
in the flow and in the diameter, through the laminar, transition and turbulent ranges, so a root that
exists is the only one. It is enclosed by steps of a fixed ratio, then narrowed by the method of
Brent [1]_; every trial is kept.

References
----------
.. [1] Brent (1973), Algorithms for Minimization without Derivatives, ch. 4 (``scipy.optimize.brentq``).
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace
from types import MappingProxyType
from typing import Final, Literal

from supplycheck.errors import DomainError, NoSolutionError
from supplycheck.hydraulics.darcy_weisbach import LAMINAR_END, TURBULENT_START, reynolds_number
from supplycheck.hydraulics.heads import velocity, velocity_pressure
from supplycheck.hydraulics.numbers import not_negative, positive, within
from supplycheck.hydraulics.pipe_laws import DarcyWeisbach, HazenWilliams
from supplycheck.hydraulics.pipe_problem import OnePipe, OnePipeResult, Regime, Step, Unknown
from supplycheck.hydraulics.pump import power_from_pressure

SMALLEST_FLOW: Final = 1e-15
LARGEST_FLOW: Final = 1e6
SMALLEST_BORE: Final = 1e-5
LARGEST_BORE: Final = 1e3
_LARGEST: Final = 1e15
_LIMITS: Final = MappingProxyType(
    {
        "flow": (SMALLEST_FLOW, LARGEST_FLOW),
        "bore": (SMALLEST_BORE, LARGEST_BORE),
        "viscosity": (1e-9, 1e9),
        "efficiency": (1e-6, 1.0),
        "density": (1e-6, 1e6),
        "unit weight": (1e-6, 1e9),
    }
)
"""Far beyond any pipe: within them no intermediate number of the search overflows."""
WATER_LIKE: Final = 1e-6
"""Kinematic viscosity of water at 20 °C, rounded [m²/s]; from 0 to 100 °C it is 1.8 to 0.3 times this."""


def solve(problem: OnePipe) -> OnePipeResult:
    """Return the solved ``problem``.

    Raises
    ------
    DomainError
        A number outside the range of the laws, too little or too much given, nothing that resists.
    NoSolutionError
        No flow, diameter or pump meets what is given; the message says why.
    """
    unknown = problem.unknown
    _check(problem)
    if unknown == "flow":
        flow, steps = _find_flow(problem)
        return _result(replace(problem, flow=flow), problem, unknown, steps)
    if unknown == "diameter":
        bore, steps = _find_bore(problem)
        return _result(replace(problem, bore=bore), problem, unknown, steps)
    return _result(problem, problem, unknown, ())


def _check(problem: OnePipe) -> None:
    """Refuse numbers that no pipe has, and questions that do not fit together."""
    for name, unit, value in (
        ("flow", "m³/s", problem.flow),
        ("bore", "m", problem.bore),
        ("viscosity", "Pa·s", problem.viscosity),
        ("efficiency", "", problem.efficiency),
        ("density", "kg/m³", problem.density),
        ("unit weight", "Pa/m", problem.unit_weight),
    ):
        if value is not None:
            positive(name, unit, value)
            within(name, unit, value, *_LIMITS[name])
    for name, unit, value in (
        ("length", "m", problem.length),
        ("equivalent length", "m", problem.equivalent_length),
        ("loss coefficient", "", problem.minor_k),
        ("pump pressure", "Pa", problem.pump_pressure),
        ("pump power", "W", problem.pump_power),
    ):
        if value is not None:
            not_negative(name, unit, value)
            within(name, unit, value, 0.0, _LARGEST)
    for name, unit, value in (
        ("rise", "m", problem.rise),
        ("pressure drop", "Pa", problem.drop),
        ("loss", "Pa", problem.loss),
    ):
        if value is not None:
            within(name, unit, value, -_LARGEST, _LARGEST)
    if isinstance(problem.law, DarcyWeisbach) and problem.viscosity is None:
        raise DomainError("Darcy-Weisbach needs the viscosity of the fluid")
    if problem.pump_power is not None and problem.pump_pressure is not None:
        raise DomainError("give either the pressure or the power of the pump, not both")
    if problem.pump_power is not None and problem.efficiency is None:
        raise DomainError(
            "a pump given by its power needs an efficiency; 1 where the power is what the fluid gets"
        )
    if problem.kinetic < 0 and problem.minor_k < 1:
        raise DomainError(
            "a pipe that ends in a reservoir loses its velocity pressure there: include the exit, 1.0, "
            f"in the sum of loss coefficients; found {problem.minor_k:g}"
        )


def _losses(problem: OnePipe, flow: float, bore: float) -> tuple[float, float, float]:
    """Return friction gradient [Pa/m], minor loss [Pa] and velocity pressure [Pa]."""
    gradient = problem.law.gradient(
        flow=flow, bore=bore, density=problem.density, viscosity=problem.viscosity
    )
    dynamic = velocity_pressure(flow=flow, bore=bore, density=problem.density)[0]
    return gradient, problem.minor_k * dynamic, dynamic


def _imbalance(problem: OnePipe, flow: float, bore: float) -> float:
    """Return what the pipe takes less what there is [Pa]: rises with the flow, falls with the bore."""
    gradient, minor, dynamic = _losses(problem, flow, bore)
    loss = gradient * (problem.length + problem.equivalent_length) + minor
    if problem.loss is not None:
        return loss - problem.loss
    given = problem.pump_at(flow) if problem.pump_power is not None else 0.0
    return loss + problem.kinetic * dynamic - problem.driving_pressure - given


def _find_flow(problem: OnePipe) -> tuple[float, tuple[Step, ...]]:
    bore = problem.bore
    if bore is None:
        raise DomainError("the diameter is missing")
    _need_resistance(problem)
    if problem.driving_pressure <= 0 and (problem.pump_power is None or problem.loss is not None):
        raise NoSolutionError(_nothing_drives(problem, "flow"))
    start = math.pi / 4.0 * bore**2  # 1 m/s
    return _search(
        lambda q: _imbalance(problem, q, bore), start, (SMALLEST_FLOW, LARGEST_FLOW), 4.0, "flow"
    )


def _find_bore(problem: OnePipe) -> tuple[float, tuple[Step, ...]]:
    flow = problem.flow
    if flow is None:
        raise DomainError("the flow is missing")
    _need_resistance(problem)
    pump = problem.pump_at(flow) if problem.pump_power is not None and problem.loss is None else 0.0
    if problem.driving_pressure + pump <= 0:
        raise NoSolutionError(_nothing_drives(problem, "diameter"))
    smallest = SMALLEST_BORE
    if isinstance(problem.law, DarcyWeisbach):
        smallest = max(smallest, 1.001 * problem.law.roughness)
    start = max(math.sqrt(4.0 * flow / (2.0 * math.pi)), 1.5 * smallest)  # 2 m/s
    return _search(
        lambda d: -_imbalance(problem, flow, d), start, (smallest, LARGEST_BORE), 1.5, "diameter"
    )


def _need_resistance(problem: OnePipe) -> None:
    kinetic = problem.kinetic if problem.loss is None else 0
    if problem.length + problem.equivalent_length == 0 and problem.minor_k + kinetic <= 0:
        raise DomainError(
            "nothing resists the flow: give a length, an equivalent length or a loss coefficient"
        )


def _nothing_drives(problem: OnePipe, what: str) -> str:
    none = "no flow follows" if what == "flow" else "no diameter is large enough"
    if problem.loss is not None:
        return f"the loss given is not above zero, so {none}"
    return (
        "nothing drives the flow: pressure at the start and pump together do not exceed pressure at the "
        f"end and rise, so {none}"
    )


def _search(
    function: Callable[[float], float],
    start: float,
    limits: tuple[float, float],
    ratio: float,
    what: str,
) -> tuple[float, tuple[Step, ...]]:
    """Return the root of a rising ``function`` and the trials; enclose from ``start``, then narrow."""
    from scipy.optimize import brentq  # imported where it is used: it takes long to load

    steps: list[Step] = []
    sign = 1.0 if what == "flow" else -1.0
    phase: Literal["enclose", "narrow"] = "enclose"

    known: dict[float, float] = {}

    def trial(x: float) -> float:
        if x not in known:
            known[x] = function(x)
            steps.append(Step(phase, x, sign * known[x]))
        return known[x]

    low = high = min(max(start, limits[0]), limits[1])
    value = trial(low)
    while value < 0 and high < limits[1]:
        low, high = high, min(high * ratio, limits[1])
        value = trial(high)
    if value < 0:
        raise NoSolutionError(f"even the largest {what} of the search does not use up what there is")
    if low == high:
        while value > 0 and low > limits[0]:
            high, low = low, max(low / ratio, limits[0])
            value = trial(low)
        if value > 0:
            raise NoSolutionError(_too_small(what))
    if low == high:
        return low, tuple(steps)
    phase = "narrow"
    root = brentq(trial, low, high, xtol=1e-15 * low, rtol=8.9e-16, maxiter=200)
    return float(root), tuple(steps)


def _too_small(what: str) -> str:
    if what == "diameter":
        return (
            "no diameter is small enough: even the smallest one searched (the roughness of the wall, "
            "or 0.01 mm) loses less than is given"
        )
    return "even the smallest flow of the search loses more than there is"


def _result(problem: OnePipe, asked: OnePipe, found: Unknown, steps: tuple[Step, ...]) -> OnePipeResult:
    """Return the full answer for a problem whose flow and bore are known."""
    flow, bore = problem.flow, problem.bore
    if flow is None or bore is None:
        raise DomainError("flow and diameter must both be known here")
    gradient, minor, dynamic = _losses(problem, flow, bore)
    pipe, fitting = gradient * problem.length, gradient * problem.equivalent_length
    loss = pipe + fitting + minor
    elevation, kinetic = problem.rise * problem.unit_weight, problem.kinetic * dynamic
    needed = loss + elevation + kinetic
    pump = problem.pump_at(flow)
    if found == "pump":
        pump = needed - (problem.drop or 0.0)
        if pump < 0:
            raise NoSolutionError(
                "no pump is needed: the pressure at the start already exceeds what the pipe takes"
            )
    drop = problem.drop if problem.drop is not None else needed - pump
    reynolds = None
    if problem.viscosity is not None:
        reynolds = reynolds_number(
            flow=flow, bore=bore, density=problem.density, viscosity=problem.viscosity
        )[0]
    rough = problem.law.roughness / bore if isinstance(problem.law, DarcyWeisbach) else None
    power = power_from_pressure(flow=flow, pressure=pump)[0]
    return OnePipeResult(
        problem=asked,
        found=found,
        flow=flow,
        bore=bore,
        velocity=velocity(flow=flow, bore=bore)[0],
        velocity_pressure=dynamic,
        reynolds=reynolds,
        regime=regime_of(reynolds),
        relative_roughness=rough,
        friction_factor=gradient * bore / dynamic,
        gradient=gradient,
        pipe_loss=pipe,
        fitting_loss=fitting,
        minor_loss=minor,
        loss=loss,
        elevation=elevation,
        kinetic=kinetic,
        drop=drop,
        pump_pressure=pump,
        fluid_power=power,
        pump_power=None if problem.efficiency is None else power / problem.efficiency,
        steps=steps,
        remarks=_remarks(problem, reynolds, rough),
    )


def regime_of(reynolds: float | None) -> Regime | None:
    """Return the range in which a Reynolds number lies; ``None`` where it is not known."""
    if reynolds is None:
        return None
    if reynolds <= LAMINAR_END:
        return "laminar"
    return "transition" if reynolds < TURBULENT_START else "turbulent"


def _remarks(problem: OnePipe, reynolds: float | None, rough: float | None) -> tuple[str, ...]:
    """Return what a reader should know about the ground on which the answer stands."""
    remarks = []
    if regime_of(reynolds) == "transition" and isinstance(problem.law, DarcyWeisbach):
        remarks.append("the flow is between laminar and turbulent (Re 2000 to 4000): the loss is uncertain")
    if regime_of(reynolds) in {"laminar", "transition"} and not isinstance(problem.law, DarcyWeisbach):
        remarks.append("the flow is not turbulent: this law does not hold there, use Darcy-Weisbach")
    thick = (
        problem.viscosity is not None and not 0.2 < problem.viscosity / problem.density / WATER_LIKE < 2.0
    )
    if isinstance(problem.law, HazenWilliams) and thick:
        remarks.append("Hazen-Williams holds for water: this fluid's viscosity plays no part in the loss")
    if rough is not None and rough > 0.05:
        remarks.append("the relative roughness is above 0.05, where the published chart ends")
    if problem.end == "reservoir" and problem.minor_k < 1:
        remarks.append(
            "the pipe ends in still water but the loss coefficients do not include the exit, 1.0"
        )
    return tuple(remarks)
