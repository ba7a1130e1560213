"""Rules on the readings of a flow test: its age, its drop, its pitot readings and outlets."""

from __future__ import annotations

import datetime as dt

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext
from supplycheck.checks.flow_test_common import NO_TEST, age, field_tests, last_day, no_reading, outlets_of
from supplycheck.checks.rule import About, Rule, named, pressure
from supplycheck.findings import Finding, Measure
from supplycheck.model import FlowTest

_291 = "NFPA 291 (from memory)"

TEST_AGE = About(
    "test age",
    "time from each flow test to the submittal against the limit of the project",
    ("ok", "fail", "missing", "ask authority", "not applicable"),
    "authority practice: 12 months is usual; 6 months, 180 days and 5 years exist",
    weight=3,
)
DROP = About(
    "pressure drop of the test",
    "fall from static to the lowest residual as a share of the static",
    ("ok", "fail", "ask authority", "not applicable"),
    "NFPA 291: 10 % in later editions (from memory), 25 % or the full demand in the 2010 edition",
    weight=3,
)
PITOT = About(
    "pitot readings",
    "pitot pressure on 2½ in outlets, 10 to 30 psi (0.7 to 2.1 bar) preferred",
    ("ok", "ask authority", "not applicable"),
    _291,
)
DIAMETER = About(
    "outlet diameter",
    "whether the inside diameter of each flowing outlet was measured on site",
    ("ok", "missing", "ask authority", "not applicable"),
    "reviewers' practice: 1/16 in on a 2½ in outlet is 5 % of the flow",
)
PUMPER = About(
    "pumper outlet factor",
    "whether outlets of 4 in and more carry the factor that their pitot reading asks for",
    ("ok", "fail", "ask authority", "not applicable"),
    "NFPA 291, pumper outlet coefficients (from memory; 0.83 also in a published example)",
    weight=3,
)


def _months(first: dt.date, last: dt.date) -> Measure:
    return Measure(age(first, last).value, "months")


def age_of_test(context: CheckContext) -> Finding:
    """The clock runs from the test to the submittal; the oldest test counts."""
    supply = context.project.supply
    if not supply.tests:
        return TEST_AGE.says("not applicable", NO_TEST)
    oldest = min(supply.tests, key=lambda test: test.date)
    tags = (oldest.tag,)
    months = supply.maximum_test_age_months
    limit = None if months is None else Measure(months / 12, "months")
    submittal = supply.submittal_date
    if submittal is None:
        old = _months(oldest.date, context.project.facts.date)
        said = f"{named(oldest.tag, start=True)} is {{measured}} old at the project's date."
        text = f"Not run: no submittal date. {said}"
        ask = "On which date are the documents submitted?"
        return TEST_AGE.says("missing", text, measured=old, limit=limit, tags=tags, remedy=ask)
    old = _months(oldest.date, submittal)
    newest = max(supply.tests, key=lambda test: test.date)
    if newest.date > submittal:
        text = (
            f"{named(newest.tag, start=True)} is dated after the submittal ({newest.date} and {submittal})."
        )
        return TEST_AGE.says("fail", text, tags=(newest.tag,), remedy="Correct one of the two dates.")
    said = f"{named(oldest.tag, start=True)} is {{measured}} old at submittal"
    if months is None:
        ask = f"How old may a flow test be at submittal ({named(oldest.tag)} is of {oldest.date})?"
        return TEST_AGE.says(
            "ask authority", f"{said}; no limit is given.", measured=old, tags=tags, remedy=ask
        )
    if submittal > last_day(oldest.date, months):
        text, do = f"{said}; at most {{limit}} is allowed.", "Have the main tested again."
        return TEST_AGE.says("fail", text, measured=old, limit=limit, tags=tags, remedy=do)
    return TEST_AGE.says("ok", f"{said}; up to {{limit}} is allowed.", measured=old, limit=limit, tags=tags)


def drop(context: CheckContext) -> Finding:
    """The smallest drop of all tests against both editions of the practice."""
    tests = [test for test in field_tests(context) if test.points and test.static > 0]
    if not tests:
        return no_reading(DROP, context)

    def share(test: FlowTest) -> float:
        return 1 - min(point.residual for point in test.points) / test.static

    worst = min(tests, key=share)
    measured, tags = Measure(share(worst), "percent"), (worst.tag,)
    values = {"new": Measure(limits.DROP_NOW, "percent"), "old": Measure(limits.DROP_OLD, "percent")}
    said = f"{named(worst.tag, start=True)} pulled the static down by {{measured}}"
    limit = values["new"]
    if share(worst) < limits.DROP_NOW * (1 - limits.ROUND_OFF):
        do = "Have it tested again with more outlets open; the curve is not proven by so small a drop."
        return DROP.says(
            "fail",
            f"{said}; at least {{limit}} is wanted.",
            measured=measured,
            limit=limit,
            tags=tags,
            remedy=do,
        )
    if share(worst) >= limits.DROP_OLD * (1 - limits.ROUND_OFF):
        text, limit = f"{said}, at least {{limit}}.", values["old"]
        return DROP.says("ok", text, measured=measured, limit=limit, tags=tags)
    if max(point.flow for point in worst.points) >= context.comparison.demand_flow:
        text = f"{said}, at least {{limit}}, and flowed the full demand."
        return DROP.says("ok", text, measured=measured, limit=limit, tags=tags)
    text = f"{said}: enough for later editions ({{new}}), not for older ones ({{old}} or the full demand)."
    ask = f"Is a drop under 25 % accepted for {named(worst.tag)}, which did not flow the full demand?"
    return DROP.says(
        "ask authority", text, measured=measured, limit=limit, tags=tags, remedy=ask, values=values
    )


def pitot(context: CheckContext) -> Finding:
    """Readings on outlets between 2¼ and 2¾ in; larger ones belong to the pumper rule."""
    low, high = 2.25 * limits.INCH, 2.75 * limits.INCH
    read = [
        (test, outlet)
        for test, outlet in outlets_of(field_tests(context))
        if low <= outlet.diameter <= high and outlet.kind != "diffuser"
    ]
    if not read:
        return PITOT.says("not applicable", "No 2½ in outlet with a pitot reading.")
    slack = limits.PSI * limits.ROUND_OFF
    off = [
        (test, outlet)
        for test, outlet in read
        if not limits.PITOT_LOW - slack <= outlet.pitot <= limits.PITOT_HIGH + slack
    ]
    values = {"low": pressure(limits.PITOT_LOW), "high": pressure(limits.PITOT_HIGH)}
    if not off:
        text = "All 2½ in outlets were read between {low} and {high}."
        return PITOT.says("ok", text, values=values, tags=tuple({test.tag: 0 for test, _ in read}))
    test, outlet = max(
        off, key=lambda one: max(limits.PITOT_LOW - one[1].pitot, one[1].pitot - limits.PITOT_HIGH)
    )
    side = "under {low}" if outlet.pitot < limits.PITOT_LOW else "over {high}"
    do = "open fewer outlets" if outlet.pitot < limits.PITOT_LOW else "open more outlets"
    return PITOT.says(
        "ask authority",
        f"A 2½ in outlet of {named(test.tag)} was read at {{measured}}, {side}.",
        measured=pressure(outlet.pitot),
        limit=pressure(limits.PITOT_LOW if outlet.pitot < limits.PITOT_LOW else limits.PITOT_HIGH),
        tags=(test.tag,),
        values=values,
        remedy=f"Is the reading of {named(test.tag)} accepted, or should a new test {do}?",
    )


def outlet_diameter(context: CheckContext) -> Finding:
    """Measured on site, taken as nominal, or not said."""
    tests = field_tests(context)
    if not tests:
        return no_reading(DIAMETER, context)
    bare = [test.tag for test in tests if not any(point.outlets for point in test.points)]
    if bare:
        text = f"Not run: the flow of {named(*bare)} is a number without its readings."
        ask = f"Which outlets flowed in {named(*bare)}, of what measured diameter, at what pitot?"
        return DIAMETER.says("missing", text, tags=tuple(bare), remedy=ask)
    unsaid = [test.tag for test in tests if test.outlet_diameter_measured is None]
    if unsaid:
        text = f"Not run: whether the outlets of {named(*unsaid)} were measured is not said."
        ask = f"Was the inside diameter of each outlet measured in {named(*unsaid)}?"
        return DIAMETER.says("missing", text, tags=tuple(unsaid), remedy=ask)
    nominal = [test.tag for test in tests if not test.outlet_diameter_measured]
    if nominal:
        text = f"The outlets of {named(*nominal)} were taken at nominal size."
        ask = f"Are nominal outlet diameters accepted for {named(*nominal)}?"
        return DIAMETER.says("ask authority", text, tags=tuple(nominal), remedy=ask)
    return DIAMETER.says("ok", "The flowing outlets were measured.", tags=tuple(t.tag for t in tests))


def pumper(context: CheckContext) -> Finding:
    """A large outlet without the factor overstates its flow by up to a fifth."""
    large = [
        (test, outlet)
        for test, outlet in outlets_of(field_tests(context))
        if outlet.diameter >= limits.PUMPER_DIAMETER * (1 - limits.ROUND_OFF)
        and outlet.kind in ("", "pumper outlet")
    ]
    if not large:
        return PUMPER.says("not applicable", "No outlet of 4 in or more was flowed.")
    without = tuple({test.tag: 0 for test, outlet in large if outlet.pumper_factor >= 1})
    table = "Use the factor of its pitot reading (0.83 at 7 psi and more); the flow is too high by a fifth."
    if without:
        text = f"{named(*without, start=True)} flows an outlet of 4 in or more without its pumper factor."
        one = Measure(1.0, "ratio")
        return PUMPER.says("fail", text, measured=one, tags=without, remedy=table)
    for test, outlet in large:
        published = limits.published_pumper_factor(outlet.pitot)
        used = Measure(outlet.pumper_factor, "ratio")
        if published is None or abs(outlet.pumper_factor - published) > 0.0101:
            limit = None if published is None else Measure(published, "ratio")
            printed = "the table starts at 2 psi" if published is None else "the table gives {limit}"
            return PUMPER.says(
                "ask authority",
                f"{named(test.tag, start=True)} uses a pumper factor of {{measured}}; {printed}.",
                measured=used,
                limit=limit,
                tags=(test.tag,),
                remedy=f"What is the pumper factor of {named(test.tag)} taken from?",
            )
    lowest = min(outlet.pumper_factor for _, outlet in large)
    tags = tuple({test.tag: 0 for test, _ in large})
    text = "Outlets of 4 in and more carry their factor, down to {measured}."
    return PUMPER.says("ok", text, measured=Measure(lowest, "ratio"), tags=tags)


RULES = (
    Rule(TEST_AGE, age_of_test),
    Rule(DROP, drop),
    Rule(PITOT, pitot),
    Rule(DIAMETER, outlet_diameter),
    Rule(PUMPER, pumper),
)
