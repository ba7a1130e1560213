"""Rules on backflow preventers, meters and valves."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext
from supplycheck.checks.rule import About, Rule, flow, pressure, some
from supplycheck.checks.standing import no_flow_pressures
from supplycheck.findings import Finding, Measure
from supplycheck.model import Device, Pipe
from supplycheck.supply.beyond import Beyond, beyond_curves

ON_PATH = About(
    "devices on the way",
    "whether any device with a loss stands between supply and heads",
    ("ok", "ask authority"),
    "reviewers' practice, no source: backflow forgotten or guessed is among the commonest errors",
    weight=3,
)
FIXED = About(
    "device loss at actual flow",
    "whether each device has a loss curve instead of one fixed loss",
    ("ok", "ask authority", "not applicable"),
    "reviewers' practice, no source: loss at the flow that passes, from the maker's curve",
)
CURVE = About(
    "device curve range",
    "flow through each device against the range of its curve",
    ("ok", "fail", "not applicable"),
    "the curve as given; outside it nothing is known",
    weight=3,
)
REAL_CURVE = About(
    "device curve range in real flow",
    "flow through each device with the actual supply, and in the scenarios, against the range of its curve",
    ("ok", "fail", "not applicable"),
    "the curve as given; outside it nothing is known",
    weight=3,
)
REDUCING = About(
    "pressure-reducing valve",
    "pressure before each pressure-reducing valve without flow against its setting",
    ("ok", "fail", "not applicable"),
    "the valve's setting as given",
)


def _flowing(context: CheckContext) -> Iterator[tuple[Pipe, Device, float]]:
    for pipe in context.project.system.pipes:
        amount = context.flow(pipe)
        if abs(amount) > limits.ROUND_OFF * context.comparison.demand_flow:
            for tag in pipe.devices:
                yield pipe, context.devices[tag], amount


def on_path(context: CheckContext) -> Finding:
    """No device at all is unusual enough to ask."""
    used = tuple({device.tag: 0 for _, device, _ in _flowing(context)})
    if used:
        return ON_PATH.says("ok", f"On the way of the flow: {some(used)}.", tags=used)
    ask = "Does no backflow preventer, meter or alarm valve stand between supply and heads?"
    return ON_PATH.says("ask authority", "No device stands between supply and heads.", remedy=ask)


def fixed(context: CheckContext) -> Finding:
    """The largest fixed loss is shown."""
    devices = {
        device.tag: device
        for _, device, _ in _flowing(context)
        if device.kind in ("loss", "check valve") and device.flows
    }
    if not devices:
        return FIXED.says("not applicable", "No flow passes a device with a loss.")
    guessed = sorted(
        (device for device in devices.values() if len(device.flows) == 1), key=lambda one: -one.values[0]
    )
    if not guessed:
        return FIXED.says("ok", "Each device takes its loss from a curve.", tags=tuple(devices))
    tags = tuple(device.tag for device in guessed)
    through = max((abs(q) for _, device, q in _flowing(context) if device.tag == tags[0]), default=0.0)
    text = f"Fixed loss at {some(tags)}: {{measured}} whatever the flow; {{flow}} passes {tags[0]}."
    return FIXED.says(
        "ask authority",
        text,
        measured=pressure(guessed[0].values[0]),
        tags=tags,
        values={"flow": flow(through)},
        remedy=f"What does the maker's curve of {some(tags)} give at the actual flow?",
    )


def _use(device: Device, amount: float) -> tuple[float, float]:
    """Return how far ``amount`` goes to the end of the curve (above 1 outside it) and that end."""
    low, high = min(device.flows), max(device.flows)
    return (low / amount, low) if amount < low else (amount / high, high)


def curve(context: CheckContext) -> Finding:
    """Below the first point and above the last are both outside."""
    seen = sorted(
        (
            (*_use(device, abs(signed)), device.tag, abs(signed))
            for _, device, signed in _flowing(context)
            if len(device.flows) > 1
        ),
        reverse=True,
    )
    if not seen:
        return CURVE.says("not applicable", "No flow passes a device with a curve.")
    outside = tuple({tag: 0 for share, _, tag, _ in seen if share > 1 + limits.ROUND_OFF})
    _, limit, tag, amount = seen[0]
    if outside:
        side = "ends at" if amount > limit else "starts at"
        text = f"{{measured}} passes {tag}; its curve {side} {{limit}}."
        do = f"Give a curve of {some(outside)} that covers the flow, or choose another size."
        return CURVE.says("fail", text, measured=flow(amount), limit=flow(limit), tags=outside, remedy=do)
    text = f"Nearest to the end of its curve is {tag}: {{measured}} of {{limit}}."
    return CURVE.says("ok", text, measured=flow(amount), limit=flow(limit), tags=(tag,))


def real_curve(context: CheckContext) -> Finding:
    """What really flows is often more than the demand; the flow furthest outside its curve is told."""
    state = context.operating
    here = () if state is None else beyond_curves(context.devices.values(), state)
    told = dict.fromkeys(here, "with the actual supply")
    for name, one in context.beyond:
        told.setdefault(one, f"in {name}")
    if told:
        return _beyond(told)
    if state is None:
        return REAL_CURVE.says("not applicable", "What really flows was not solved.")
    amounts = dict(zip(state.pipe_tags, state.pipe_flow.tolist(), strict=True))
    curved = {tag for tag, device in context.devices.items() if len(device.flows) > 1}
    passed = [tag for pipe in context.project.system.pipes if amounts[pipe.tag] for tag in pipe.devices]
    seen = tuple(dict.fromkeys(tag for tag in passed if tag in curved))
    if not seen:
        return REAL_CURVE.says("not applicable", "No flow passes a device with a curve.")
    too = ", in the scenarios too," if context.scenarios else ""
    text = f"What really flows{too} stays on the curve of {some(seen)}."
    return REAL_CURVE.says("ok", text, tags=seen)


def _beyond(told: Mapping[Beyond, str]) -> Finding:
    worst = max(told, key=lambda one: one.share)
    outside = tuple(dict.fromkeys(one.device for one in sorted(told, key=lambda one: -one.share)))
    return REAL_CURVE.says(
        "fail",
        f"{{measured}} passes {worst.device} {told[worst]}; its curve {worst.side} {{limit}}. "
        "What is read there is not to be relied on: see the scenarios.",
        measured=flow(worst.flow),
        limit=flow(worst.end),
        tags=outside,
        remedy=f"Give a curve of {some(outside)} that covers what really flows.",
    )


def reducing(context: CheckContext) -> Finding:
    """A valve set above what stands before it without flow never reduces anything.

    That it stands open at the design flow, where less than its setting is left, is as it should be.
    """
    standing = no_flow_pressures(context)
    valves = [
        (standing[pipe.start] + _churn_before(context, pipe, tag), setting, device, pipe)
        for pipe in context.project.system.pipes
        for tag in pipe.devices
        for device in (context.devices[tag],)
        if device.kind == "pressure-reducing valve"
        and (setting := device.setting) is not None
        and pipe.start in standing
    ]
    if not valves:
        return REDUCING.says("not applicable", "There is no pressure-reducing valve.")
    inlet, setting, device, pipe = min(valves, key=lambda one: one[0] - one[1])
    measured, limit = Measure(inlet, "pressure"), pressure(setting)
    text = f"Without flow {{measured}} stands before {device.tag} in {pipe.tag}; it is set to {{limit}}"
    if inlet < setting:
        never = tuple(one.tag for before, held, one, _ in valves if before < held)
        do = "It never reduces the pressure: lower its setting, or leave it out."
        return REDUCING.says("fail", f"{text}.", measured=measured, limit=limit, tags=never, remedy=do)
    open_there = not _churn_before(context, pipe, device.tag) and _stands_open(context, pipe, setting)
    text += " and stands fully open at the design flow." if open_there else "."
    return REDUCING.says("ok", text, measured=measured, limit=limit, tags=(device.tag,))


def _churn_before(context: CheckContext, pipe: Pipe, tag: str) -> float:
    """Return what pumps named before the device ``tag`` add in its pipe without flow [Pa]."""
    before = [context.devices[one] for one in pipe.devices[: pipe.devices.index(tag)]]
    return sum(max(one.values, default=0.0) for one in before if one.kind == "pump")


def _stands_open(context: CheckContext, pipe: Pipe, setting: float) -> bool:
    """Return whether less than ``setting`` [Pa] stands before the valve with the actual supply."""
    state = context.operating
    return state is not None and float(state.pressure[state.node(pipe.start)]) < setting


RULES = (
    Rule(ON_PATH, on_path),
    Rule(FIXED, fixed),
    Rule(CURVE, curve),
    Rule(REAL_CURVE, real_curve),
    Rule(REDUCING, reducing),
)
