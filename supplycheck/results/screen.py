"""The answer on one screen: aligned words, no colour needed, at most 24 lines of 100 columns."""

from __future__ import annotations

import textwrap
from collections.abc import Sequence
from typing import Final

from supplycheck.results.display import (
    VERDICT_TITLES,
    area_text,
    available_text,
    counts_text,
    demand_parts,
    demand_text,
    duties_text,
    finding_text,
    read_test_text,
    residual_text,
    second_law_text,
    visible,
)
from supplycheck.results.records import Result
from supplycheck.supply.point import NOTABLE
from supplycheck.units import UNIT_SETS, UnitSet

COLUMNS: Final = 96
LINES: Final = 24
_LABEL: Final = 12
_LISTS: Final = 2
"""Lines that the lists of failures and questions have at least, one each."""


def screen_text(result: Result, files: str | Sequence[str] = ()) -> str:
    """Return the one-screen answer; ``files`` are the names of the files or folders that were written.

    Every number is the one in ``result.json`` after display rounding. What does not fit is counted,
    never dropped silently.
    """
    units = UNIT_SETS[result.project.units]
    title = _wrapped("", result.project.facts.title, 1)
    tail = _files([files] if isinstance(files, str) else files) if files else []
    verdict = f"{_headline(result)}: {result.verdict_text}"
    body, spare = _body(result, units, verdict, LINES - len(title) - 1 - len(tail) - _LISTS)
    head = [*title, *_wrapped("", verdict, spare), ""]
    room = LINES - len(head) - len(body) - len(tail)
    fails = [f"{one.check}: {finding_text(one, units)}" for one in result.findings if one.state == "fail"]
    questions = list(result.open_questions)
    for_fails = max(room - min(len(questions), 2), 1)
    fail_lines = _list("Fails", fails, for_fails)
    question_lines = _list("Open", questions, max(room - len(fail_lines), 1))
    return "\n".join([*head, *body, *fail_lines, *question_lines, *tail])


def _body(result: Result, units: UnitSet, verdict: str, room: int) -> tuple[list[str], int]:
    """Return the lines below the verdict, and how many of ``room`` the verdict may take.

    The verdict names what is outside a limit: where it needs the lines, the others keep to one each.
    """
    entries, needed = _entries(result, units), len(_wrapped("", verdict, LINES))
    body: list[str] = []
    for longest in (2, 1):
        body = [line for label, text, most in entries for line in _wrapped(label, text, min(most, longest))]
        if len(body) + needed <= room:
            break
    return body, max(room - len(body), 2)


def _entries(result: Result, units: UnitSet) -> list[tuple[str, str, int]]:
    """Return label, text and the most lines that the text may take."""
    demand, supply, margin, balance = result.demand, result.supply, result.margin, result.balance
    parts = demand_parts(demand, units)
    read = "tank"
    if supply.residual is not None and supply.test_flow is not None:
        residual = f"residual {_t(units, supply.residual)} at {_t(units, supply.test_flow, 'flow')}"
        read = f"{read_test_text(result) or 'test'}: static {_t(units, supply.static)}, {residual}"
    asked = "no rule given" if margin.required is None else f"{_t(units, margin.required)} asked"
    after = "" if margin.after_rule is None else f", {_signed(units, margin.after_rule)} left after it"
    kept = margin.pressure - (supply.available_pressure - demand.pressure)
    where = " at the supply" if abs(kept) > NOTABLE else ""  # a valve throttles, or a main ends
    ends = f"; lowered further, nothing is left at {margin.limited_at}" if margin.limited_at else ""
    flow_gap = residual_text(balance.largest_flow_imbalance, "flow", units)
    gap = residual_text(balance.largest_pressure_imbalance, "pressure", units)
    return [
        (
            "Demand",
            f"{_t(units, demand.pressure)} at {demand.node}, {demand_text(result, units)} ({parts})",
            2,
        ),
        (
            "Available",
            _available(supply.available_pressure, units) + f" ({read})",
            2,
        ),
        ("Margin", f"{_signed(units, margin.pressure)}{where} before the rule; {asked}{after}{ends}", 2),
        ("Rule", margin.rule, 2),
        *([("Second law", second_law_text(result, units), 2)] if result.second_law else []),
        ("Governs", result.governs, 2),
        *_asked(result),
        ("Balance", f"flows disagree by {flow_gap}, pressures by {gap}", 1),
        ("Findings", counts_text(result.findings), 2),
    ]


def _available(pressure: float, units: UnitSet) -> str:
    return available_text(pressure, units) + ("" if pressure < 0 else " at that flow")


def _headline(result: Result) -> str:
    word, _, rest = VERDICT_TITLES[result.verdict].partition(" – ")
    return f"{word.upper()} ({rest})"


def _asked(result: Result) -> list[tuple[str, str, int]]:
    """Return the design area, where there are sprinklers, and the cases of other duties."""
    sprinklers = result.project.criteria.has_sprinklers
    lines = [("Design area", area_text(result.design_area), 2)] if sprinklers else []
    return lines + ([("Cases", duties_text(result.duties), 2)] if result.duties.rows else [])


def _t(units: UnitSet, value: float, kind: str = "pressure") -> str:
    return units.text(value, kind)


def _signed(units: UnitSet, value: float) -> str:
    text = units.text(value, "pressure")
    return f"+{text}" if value > 0 and text[:1].isdigit() else text


def _wrapped(label: str, text: str, most: int) -> list[str]:
    """Return ``text`` behind ``label`` on at most ``most`` lines, three dots where it is longer."""
    indent = _LABEL if label else 0
    lines = textwrap.wrap(visible(text), COLUMNS - indent, break_on_hyphens=False) or ["–"]
    if len(lines) > most:
        last = textwrap.shorten(" ".join(lines[most - 1 :]), COLUMNS - indent, placeholder=" …")
        if len(last) < 8:
            last = lines[most - 1][: COLUMNS - indent - 2] + " …"
        lines = [*lines[: most - 1], last]
    return [f"{label if place == 0 else '':<{indent}}{line}" for place, line in enumerate(lines)]


def _list(label: str, texts: list[str], room: int) -> list[str]:
    """Return ``texts`` in at most ``room`` lines; the last line counts what did not fit."""
    for most in (2, 1):
        rows = [line for text in texts for line in _wrapped(label, text, most)]
        if len(rows) <= room:
            return _once(label, rows)
    shown = texts[: max(room - 1, 0)]
    rows = [_wrapped(label, text, 1)[0] for text in shown]
    return _once(label, [*rows, f"{label:<{_LABEL}}… {len(texts) - len(shown)} more in the report"])


def _once(label: str, rows: list[str]) -> list[str]:
    """Return ``rows`` with ``label`` on the first of them alone."""
    blank = " " * _LABEL
    rest = (blank + row[_LABEL:] if row.startswith(label) else row for row in rows[1:])
    return [*rows[:1], *rest]


def _files(files: Sequence[str]) -> list[str]:
    return _wrapped("Files", ", ".join(files), 2) if files else []
