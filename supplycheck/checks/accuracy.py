"""Rules on how far the readings of a flow test can be trusted: one line, error of the gauge."""

from __future__ import annotations

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext
from supplycheck.checks.flow_test_common import field_tests, no_reading
from supplycheck.checks.rule import About, Rule, named, pressure
from supplycheck.findings import Finding, Measure
from supplycheck.model import FlowTest
from supplycheck.supply.sources import READING, off_line

LINE = About(
    "test points on one line",
    "readings of one test against the N^1.85 line through static and the greatest flow",
    ("ok", "ask authority", "not applicable"),
    "NFPA 291: P = Ps − (Ps − Pr)(Q/Qt)^1.85; 1 psi is as closely as a gauge is read (common practice)",
)
GAUGE_ERROR = About(
    "gauge error against the drop",
    "what the gauge may be off by, against the drop that it measured and the margin that is left",
    ("ok", "fail", "ask authority", "missing", "not applicable"),
    "published: gauges in service within 3 % of full scale, test grade 0.25 to 1 % (from memory)",
)


def line(context: CheckContext) -> Finding:
    """The worst of the tests with several readings."""
    tests = [test for test in field_tests(context) if len(test.points) > 1]
    if not tests:
        return LINE.says("not applicable", "No test has several readings.")
    away = {test.tag: off_line(test) for test in tests}
    tag = max(away, key=lambda one: away[one])
    measured, limit = pressure(away[tag]), pressure(READING)
    if away[tag] <= READING * (1 + limits.ROUND_OFF):
        text = f"The readings of {named(tag)} lie within {{measured}} of one N^1.85 line."
        return LINE.says("ok", text, measured=measured, limit=limit, tags=(tag,))
    text = f"The readings of {named(tag)} lie up to {{measured}} off one N^1.85 line; the curve joins them."
    ask = f"Did demand, a valve or a pump in the main change during {named(tag)}?"
    return LINE.says("ask authority", text, measured=measured, limit=limit, tags=(tag,), remedy=ask)


def gauge_error(context: CheckContext) -> Finding:
    """A drop no larger than the error proves nothing; a margin no larger than it hangs on the gauge."""
    tests = [test for test in field_tests(context) if test.points]
    if not tests:
        return no_reading(GAUGE_ERROR, context)
    unsaid = [one.tag for one in tests if one.gauge_range is None or one.gauge_accuracy is None]
    if unsaid:
        text = f"Not run: range or accuracy of the gauge of {named(*unsaid)} is not given."
        ask = f"What are the range and the accuracy of the gauge of {named(*unsaid)}?"
        return GAUGE_ERROR.says("missing", text, tags=tuple(unsaid), remedy=ask)

    def error(test: FlowTest) -> float:
        return (test.gauge_range or 0.0) * (test.gauge_accuracy or 0.0)

    def drop(test: FlowTest) -> float:
        return test.static - min(point.residual for point in test.points)

    worst = max(tests, key=lambda test: error(test) / drop(test))
    off, tags = error(worst), (worst.tag,)
    measured, values = pressure(off), {"margin": pressure(context.comparison.margin)}
    share = Measure(off / drop(worst), "percent")
    values |= {"drop": pressure(drop(worst)), "share": share}
    said = f"The gauge of {named(worst.tag)} may be off by {{measured}}"
    if off >= drop(worst) * (1 - limits.ROUND_OFF):
        text, do = f"{said}, no less than the drop of {{drop}}.", "Have the main tested with a finer gauge."
        return GAUGE_ERROR.says("fail", text, measured=measured, tags=tags, values=values, remedy=do)
    if 0.0 <= context.comparison.margin < off:
        text = f"{said}, more than the margin of {{margin}} (before the rule)."
        ask = f"Is a margin smaller than the error of the gauge of {named(worst.tag)} accepted?"
        return GAUGE_ERROR.says(
            "ask authority", text, measured=measured, tags=tags, values=values, remedy=ask
        )
    text = f"{said}, {{share}} of the drop of {{drop}}."
    return GAUGE_ERROR.says("ok", text, measured=measured, tags=tags, values=values)


RULES = (Rule(LINE, line), Rule(GAUGE_ERROR, gauge_error))
