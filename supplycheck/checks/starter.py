"""The rule on what a project still holds of the starter: marked texts and invented figures."""

from __future__ import annotations

from collections.abc import Iterable

from supplycheck.checks.context import CheckContext
from supplycheck.checks.rule import About, Rule, count, some
from supplycheck.findings import Finding
from supplycheck.model import Unedited

UNEDITED = About(
    "values of the starter",
    "texts and figures that still stand as `new` wrote them: `missing` under the starter's own title or "
    "where texts are left, `fail` where a project with a title of its own rests on the invented figures",
    ("ok", "fail", "missing"),
    "common practice, no source",
    weight=4,
)


def unedited(context: CheckContext) -> Finding:
    """The starter itself is told as such; its figures under another title are a fault of the project."""
    left = context.project.unedited
    number = count(len(left))
    if not left:
        return UNEDITED.says("ok", "Nothing of the starter is left.", measured=number)
    figures = [one for one in left if one.figure]
    ask = f"What belongs in place of the starter's values: {_places(left)}?"
    if any(one.key == "project.title" for one in left):
        text = (
            "Not run: this is the unedited starter: {measured} of its values stand, its figures invented."
        )
        return UNEDITED.says("missing", text, measured=number, remedy=ask)
    if not figures:
        text = "Not run: texts of the starter that are not replaced yet: {measured}."
        return UNEDITED.says("missing", text, measured=number, remedy=ask)
    rests = "so the supply is nobody's test" if _on_supply(figures) else "and the answer rests on them"
    text = f"Values of the starter that still stand: {{measured}}, invented figures among them, {rests}."
    do = f"Put your own values in place of the starter's: {_places(left)}."
    return UNEDITED.says("fail", text, measured=number, limit=count(0), remedy=do)


def _on_supply(figures: Iterable[Unedited]) -> bool:
    return any(one.key.startswith("supply.flow_test") for one in figures)


def _places(left: Iterable[Unedited]) -> str:
    return some((f"{one.key} (line {one.line})" for one in left), show=_SHOWN)


_SHOWN = 40
RULES = (Rule(UNEDITED, unedited),)
