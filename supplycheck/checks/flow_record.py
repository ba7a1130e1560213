"""Rules on the record of a flow test: who, when, which hydrants and main, which gauge."""

from __future__ import annotations

from collections.abc import Callable

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext
from supplycheck.checks.flow_test_common import NO_TEST, age, field_tests, last_day, no_reading
from supplycheck.checks.rule import About, Rule, named, some
from supplycheck.findings import Finding, Measure
from supplycheck.model import FlowTest

_291 = "NFPA 291 (from memory)"
_FAR_GAUGE = 10 * limits.FOOT

PEOPLE = About(
    "test conducted and witnessed",
    "who ran the test and who witnessed it",
    ("ok", "missing", "not applicable"),
    "reviewers' practice, no source",
    weight=1,
)
TIME = About(
    "time of day of the test",
    "the hour of the test, to be judged against the daily demand on the main",
    ("ok", "missing", "not applicable"),
    "reviewers' practice, no source",
    weight=1,
)
HYDRANTS = About(
    "two hydrants",
    "a gauge hydrant and a flowing hydrant, named and different",
    ("ok", "fail", "missing", "not applicable"),
    _291,
)
CALIBRATION = About(
    "gauge calibration",
    "calibration of the gauges within 12 months before the test",
    ("ok", "missing", "ask authority", "not applicable"),
    _291,
    weight=1,
)
MAIN = About(
    "main of the test",
    "which main the hydrants stand on",
    ("ok", "missing", "not applicable"),
    "reviewers' practice, no source",
    weight=1,
)
GAUGE = About(
    "gauge elevation",
    "elevation of the gauge: given, and near the node where the test applies",
    ("ok", "missing", "ask authority", "not applicable"),
    "reviewers' practice, no source: an elevation without its datum is among the commonest errors",
)
MODELLED = About(
    "modelled supply",
    "whether supply values were computed by the utility instead of measured",
    ("ask authority", "not applicable"),
    "reviewers' practice, no source",
    weight=3,
)


def _facts(
    about: About, context: CheckContext, lack: Callable[[FlowTest], str], fine: str, ask: str
) -> Finding:
    tests = field_tests(context)
    if not tests:
        return no_reading(about, context)
    lacking = {test.tag: lack(test) for test in tests if lack(test)}
    if not lacking:
        return about.says("ok", fine, tags=tuple(test.tag for test in tests))
    what = next(iter(lacking.values()))
    text = f"Not run: {named(*lacking)} does not say {what}."
    return about.says("missing", text, tags=tuple(lacking), remedy=ask.format(tests=named(*lacking)))


def people(context: CheckContext) -> Finding:
    """Both names are wanted."""

    def lack(test: FlowTest) -> str:
        return " or ".join(
            word
            for word, name in (("who ran it", test.conducted_by), ("who witnessed it", test.witnessed_by))
            if not name.strip()
        )

    ask = "Who ran {tests}, and who witnessed it?"
    return _facts(PEOPLE, context, lack, "Those who ran and witnessed the test are named.", ask)


def time_of_day(context: CheckContext) -> Finding:
    """Any text that is not empty will do."""
    ask = "At what hour was {tests} run?"
    fine = "The hour of the test is given."
    return _facts(TIME, context, lambda test: "" if test.time.strip() else "the hour", fine, ask)


def hydrants(context: CheckContext) -> Finding:
    """Static and residual read at one hydrant while another flows."""

    def flowing(test: FlowTest) -> list[str]:
        named = [outlet.hydrant for point in test.points for outlet in point.outlets if outlet.hydrant]
        return [test.flow_hydrant] if test.flow_hydrant.strip() else named

    def lack(test: FlowTest) -> str:
        first = "" if test.static_hydrant.strip() else "the gauge hydrant"
        second = "" if flowing(test) else "the flowing hydrant"
        return " or ".join(word for word in (first, second) if word)

    def same(test: FlowTest) -> bool:
        gauge = test.static_hydrant.strip().casefold()
        return bool(gauge) and gauge in [name.strip().casefold() for name in flowing(test)]

    one = tuple(test.tag for test in field_tests(context) if same(test))
    if one:
        text = f"In {named(*one)} the gauge stood on the hydrant that flowed."
        return HYDRANTS.says(
            "fail", text, tags=one, remedy="Test again with the gauge on a second hydrant."
        )
    ask = "Which hydrant carried the gauge and which one flowed in {tests}?"
    return _facts(HYDRANTS, context, lack, "Gauge and flowing hydrants are named and differ.", ask)


def calibration(context: CheckContext) -> Finding:
    """The oldest calibration counts."""
    tests = field_tests(context)
    if not tests:
        return no_reading(CALIBRATION, context)
    dated = [(test, test.gauge_calibrated) for test in tests if test.gauge_calibrated is not None]
    if len(dated) < len(tests):
        lacking = [test.tag for test in tests if test.gauge_calibrated is None]
        text = f"Not run: {named(*lacking)} does not say when the gauges were calibrated."
        ask = f"When were the gauges of {named(*lacking)} last calibrated?"
        return CALIBRATION.says("missing", text, tags=tuple(lacking), remedy=ask)
    test, day = max(dated, key=lambda one: (one[0].date - one[1]).days)
    after = next((test for test, day in dated if day > test.date), None)
    if after is not None:
        ask = f"Were the gauges of {named(after.tag)} in calibration on the day of the test?"
        text = f"The gauges of {named(after.tag)} were calibrated after the test."
        return CALIBRATION.says("ask authority", text, tags=(after.tag,), remedy=ask)
    measured, limit = age(day, test.date), Measure(limits.GAUGE_YEARS, "age")
    text = f"The gauges of {named(test.tag)} were calibrated {{measured}} before it"
    if test.date > last_day(day, 12):
        ask = f"Is the gauge calibration of {day} accepted for {named(test.tag)}?"
        return CALIBRATION.says(
            "ask authority",
            f"{text}; {{limit}} is usual.",
            measured=measured,
            limit=limit,
            tags=(test.tag,),
            remedy=ask,
        )
    return CALIBRATION.says("ok", f"{text}.", measured=measured, limit=limit, tags=(test.tag,))


def main(context: CheckContext) -> Finding:
    """Any text that is not empty will do."""
    ask = "On which main, of what size, do the hydrants of {tests} stand?"
    fine = "The main of the test is named."
    return _facts(MAIN, context, lambda test: "" if test.main.strip() else "the main", fine, ask)


def gauge(context: CheckContext) -> Finding:
    """A gauge far above or below its node hints at two datums."""
    tests = context.project.supply.tests
    if not tests:
        return GAUGE.says("not applicable", NO_TEST)
    keys = [note.key for note in context.project.assumptions if "gauge_elevation" in note.key]
    if keys:
        text = "Not run: the elevation of the gauge is assumed."
        ask = "At what elevation, on the datum of the plans, stood the gauge?"
        return GAUGE.says("missing", text, tags=tuple(keys), remedy=ask)
    placed = [(test, context.nodes[test.node]) for test in tests if test.node in context.nodes]
    if not placed:
        return GAUGE.says("not applicable", "The test stands at no node of the calculation.")
    test, node = max(placed, key=lambda one: abs(one[0].gauge_elevation - one[1].elevation))
    apart = abs(test.gauge_elevation - node.elevation)
    values = {
        "gauge": Measure(test.gauge_elevation, "length"),
        "node": Measure(node.elevation, "length"),
    }
    text = f"The gauge of {named(test.tag)} stands at {{gauge}}, node {node.tag} at {{node}}"
    if apart > _FAR_GAUGE:
        return GAUGE.says(
            "ask authority",
            f"{text}: {{measured}} apart.",
            measured=Measure(apart, "length"),
            limit=Measure(_FAR_GAUGE, "length"),
            tags=(test.tag, node.tag),
            values=values,
            remedy=f"Are the gauge of {named(test.tag)} and node {node.tag} measured from one datum?",
        )
    return GAUGE.says("ok", f"{text}.", measured=values["gauge"], tags=(test.tag,), values=values)


def modelled(context: CheckContext) -> Finding:
    """Computed values describe no hour of any day."""
    tags = tuple(test.tag for test in context.project.supply.tests if test.model)
    if not tags:
        return MODELLED.says("not applicable", "No supply value was computed by a utility.")
    text = f"Supply {some(tags)} was computed by the utility, not measured."
    ask = f"Is the computed supply {some(tags)} accepted in place of a flow test, and for what demand day?"
    return MODELLED.says("ask authority", text, tags=tags, remedy=ask)


RULES = (
    Rule(PEOPLE, people),
    Rule(TIME, time_of_day),
    Rule(HYDRANTS, hydrants),
    Rule(CALIBRATION, calibration),
    Rule(MAIN, main),
    Rule(GAUGE, gauge),
    Rule(MODELLED, modelled),
)
