"""Texts of findings and other words, filled with numbers in the project's units.

One door for every reader-facing text: screen, PDF, HTML, tables and ``result.json`` all call these
functions, so that they show the same words and the same digits.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterable
from types import MappingProxyType
from typing import Final

from supplycheck.findings import Finding, Measure, State
from supplycheck.model.duty import DutyAnswer
from supplycheck.results.records import DemandRecord, DesignAreaRecord, Result
from supplycheck.units import UnitSet

STATES: Final[tuple[State, ...]] = ("fail", "missing", "ask authority", "ok", "not applicable")
"""The states of a finding in the order in which they are shown: what needs action first."""

VERDICT_TITLES: Final = MappingProxyType(
    {
        "adequate": "Supply adequate – for the values entered",
        "not adequate": "Supply not adequate – for the values entered",
        "undetermined": "Undetermined – for the values entered",
    }
)
"""The verdict in a line: it holds for the input, it is no approval."""

STEP_DECIMALS: Final = MappingProxyType({"us": 2, "metric": 3})
"""Decimals of a pressure in steps, so that their sums close."""

SMALLEST_DN: Final = 15

STATE_TITLES: Final = MappingProxyType(
    {
        "fail": "Outside a limit",
        "missing": "Not run: data missing",
        "ask authority": "To be put to the authority",
        "ok": "Within a limit, or in order where there is no limit",
        "not applicable": "Not applicable here",
    }
)

STATE_WORDS: Final = MappingProxyType(
    {
        "fail": "outside a limit",
        "missing": "not run for want of data",
        "ask authority": "for the authority",
        "ok": "within a limit",
        "not applicable": "not applicable",
    }
)

NO_LIMIT: Final = "in order (no limit to keep)"
"""What is said of findings that are in order without a value to be held against a limit."""

NOT_AT_ALL: Final = "none: the supply cannot give this flow"
NONE_LEFT: Final = "none"
"""What stands for a pressure below zero: at this flow none is left. The margin still counts from below."""

_FIELD: Final = re.compile(r"\{([A-Za-z_]\w*)\}")


def measure_text(measure: Measure | None, units: UnitSet) -> str:
    """Return ``measure`` as text with its unit; a dash for ``None``.

    A kind that the unit set does not know (a count, say) prints as a plain number.
    """
    if measure is None:
        return "–"
    return value_text(measure.value, measure.kind, units)


def value_text(value: float | None, kind: str, units: UnitSet) -> str:
    """Return ``value`` [SI] of ``kind`` as text with its unit; a dash for ``None``.

    >>> from supplycheck.units import US
    >>> value_text(12, "count", US)
    '12'
    """
    if value is None:
        return "–"
    if kind in units.units:
        return _never_nothing(value, kind, units) or units.text(value, kind)
    if not math.isfinite(value):
        return "–"
    return f"{value:.6g}".replace("-", "−")


def _never_nothing(value: float, kind: str, units: UnitSet) -> str:
    """Return ``< 0.001 psi`` for a value that is not zero but would print as zero, else nothing."""
    shown = units.number(value, kind)
    if value <= 0 or not math.isfinite(value) or any(digit in shown for digit in "123456789"):
        return ""
    least = 10.0 ** -units.unit(kind).decimals
    return f"< {least:.{units.unit(kind).decimals}f} {units.symbol(kind)}".rstrip()


def residual_text(value: float, kind: str, units: UnitSet) -> str:
    """Return what is left over in the calculation, to three decimals; below them the bound it keeps.

    >>> from supplycheck.units import US
    >>> residual_text(1e-12, "pressure", US), residual_text(12.0, "pressure", US)
    ('< 1e-9 psi', '0.002 psi')
    """
    number = units.from_si(value, kind)
    bounds = ((1e-9, "< 1e-9"), (1e-6, "< 1e-6"), (5e-4, "< 0.001"))
    shown = next((text for bound, text in bounds if 0 <= number < bound), f"{number:.3f}")
    return f"{shown} {units.symbol(kind)}"


def step_text(value: float | None, kind: str, units: UnitSet) -> str:
    """Return ``value`` as :func:`value_text`, pressures with the decimals that steps need to close."""
    if value is None or kind != "pressure":
        return value_text(value, kind, units)
    return units.text(value, kind, STEP_DECIMALS[units.name])


def nominal_text(nominal: str, units: UnitSet) -> str:
    """Return a nominal size so that it cannot be misread: ``DN 100``, ``4 in`` in metric projects.

    >>> from supplycheck.units import METRIC, US
    >>> nominal_text("100", METRIC), nominal_text("4", METRIC), nominal_text("4", US)
    ('DN 100', '4 in', '4')
    """
    if units.name != "metric" or not re.fullmatch(r"[\d. /]+", nominal):
        return nominal
    return f"DN {nominal}" if nominal.isdigit() and int(nominal) >= SMALLEST_DN else f"{nominal} in"


def passing(result: Result) -> float:
    """Return the flow [m³/s] that passes the point of comparison in the demand solution."""
    node = result.demand.node
    arriving = sum(pipe.flow for pipe in result.pipes if pipe.end == node)
    leaving = sum(pipe.flow for pipe in result.pipes if pipe.start == node)
    drawn = sum(row.discharge for row in result.nodes if row.tag == node)
    return max(arriving, leaving + drawn)


def demand_text(result: Result, units: UnitSet) -> str:
    """Return the flow of the demand in words: how much in all, and how much of it passes the node."""
    demand = result.demand
    text = f"{units.text(demand.flow, 'flow')} in all"
    here = passing(result)
    if here and abs(here - demand.flow) > 1e-6 * demand.flow:
        if here < demand.flow:
            text += f", of which {units.text(here, 'flow')} pass {demand.node}"
        else:
            text += f"; {units.text(here, 'flow')} pass {demand.node}, more than is drawn: some runs into "
            text += "another supply or in a circle"
    return text


def available_text(pressure: float, units: UnitSet) -> str:
    """Return the pressure [Pa] that the supply has at a flow; none where it cannot give the flow at all."""
    return NOT_AT_ALL if pressure < 0 else units.text(pressure, "pressure")


def left_text(pressure: float | None, units: UnitSet, *, unit: bool = True) -> str:
    """Return the pressure [Pa] that is left at a flow, with or without its ``unit``; none below zero.

    >>> from supplycheck.units import US
    >>> left_text(-7000.0, US), left_text(70000.0, US), left_text(70000.0, US, unit=False)
    ('none', '10.2 psi', '10.2')
    """
    if pressure is not None and pressure < 0:
        return NONE_LEFT
    return units.text(pressure, "pressure") if unit else units.number(pressure, "pressure")


def read_test_text(result: Result) -> str:
    """Return which of several tests is read at the demand, where and of when; empty for a single one."""
    tests = result.project.supply.tests
    if len(tests) < 2:
        return ""
    read = next((test for test in tests if test.tag == result.supply.governing), None)
    return "" if read is None else f"{read.tag} at {read.node}, {read.date.isoformat()}"


def law_names(first: str, second: str) -> tuple[str, str]:
    """Return the names of two friction laws, short where they differ without the form they are written in.

    >>> law_names("Hazen-Williams, 4.52 Q^1.85 / (C^1.85 d^4.87) psi/ft", "Darcy-Weisbach with Colebrook")
    ('Hazen-Williams', 'Darcy-Weisbach')
    >>> law_names("Hazen-Williams, 4.52 …", "Hazen-Williams, 10.67 …")
    ('Hazen-Williams, 4.52 …', 'Hazen-Williams, 10.67 …')
    """
    short, other = (re.split(r",| with ", name)[0] for name in (first, second))
    return (first, second) if short == other else (short, other)


def second_law_text(result: Result, units: UnitSet) -> str:
    """Return in one sentence what the second law asks, what it leaves, and that the first decides."""
    second = result.second_law
    if second is None:
        return ""
    first, name = law_names(result.project.law.name, second.name)
    if not math.isfinite(second.pressure):
        return f"{name}: {second.note}. {first} decides."
    margin, own = units.text(second.margin, "pressure"), units.text(result.margin.pressure, "pressure")
    text = (
        f"{name} needs {units.text(second.pressure, 'pressure')} at {units.text(second.flow, 'flow')}, "
        f"margin {margin} instead of {own}; {first} decides."
    )
    return text + ("" if _alike(result) else f" By {name} alone the answer would be another.")


def _alike(result: Result) -> bool:
    """True where both laws are on the same side of the demand and of the margin rule."""
    second, margin = result.second_law, result.margin
    pairs = [(second.margin, margin.pressure), (second.after_rule, margin.after_rule)] if second else []
    return all(a is None or b is None or (a < 0) == (b < 0) for a, b in pairs)


def fill(text: str, finding: Finding, units: UnitSet) -> str:
    """Return ``text`` with ``{measured}``, ``{limit}`` and the keys of ``finding.values`` filled in.

    Braces that name nothing known stay as they were typed, and what is filled in is not read again.
    """
    known = {**finding.values, "measured": finding.measured, "limit": finding.limit}

    def replaced(match: re.Match[str]) -> str:
        name = match.group(1)
        return measure_text(known[name], units) if name in known else match.group(0)

    return _FIELD.sub(replaced, text)


def finding_text(finding: Finding, units: UnitSet) -> str:
    """Return the text of ``finding`` with its numbers."""
    return fill(finding.text, finding, units)


def remedy_text(finding: Finding, units: UnitSet) -> str:
    """Return the remedy of ``finding`` with its numbers."""
    return fill(finding.remedy, finding, units)


def in_order(findings: Iterable[Finding]) -> list[Finding]:
    """Return ``findings`` grouped by state, what needs action first, otherwise in their own order."""
    return sorted(findings, key=lambda finding: STATES.index(finding.state))


def counts(findings: Iterable[Finding]) -> dict[State, int]:
    """Return how many findings there are of each state, in display order."""
    found = list(findings)
    return {state: sum(one.state == state for one in found) for state in STATES}


def counts_text(findings: Iterable[Finding]) -> str:
    """Return how many findings there are of each state, in words.

    Only what was measured and held against a limit is said to be within one.
    """
    found = list(findings)
    loose = sum(one.state == "ok" and None in (one.measured, one.limit) for one in found)
    parts = []
    for state, number in counts(found).items():
        groups = [(number, STATE_WORDS[state])]
        if state == "ok":
            groups = [(number - loose, STATE_WORDS[state]), (loose, NO_LIMIT)]
        parts += [f"{many} {words}" for many, words in groups if many]
    return ", ".join(parts) or "no check was run"


def area_text(area: DesignAreaRecord) -> str:
    """Return in one sentence which heads are in the design area and how it was found."""
    if area.mode == "given" or not area.tried:
        return area.statement
    count = "The only placement" if area.tried == 1 else f"Most demanding of {area.tried} placements tried"
    return f"{count}: {area.governing.label}."


def demand_parts(demand: DemandRecord, units: UnitSet) -> str:
    """Return what the demand flow is made of, in words and numbers."""
    parts = [(demand.sprinkler_flow, "sprinklers"), (demand.hose_flow, "hose")]
    if demand.outlet_flow > 0:
        parts = [(flow, what) for flow, what in parts if flow > 0] + [(demand.outlet_flow, "at outlets")]
    return " + ".join(f"{units.number(flow, 'flow')} {what}" for flow, what in parts)


def duties_text(duties: DutyAnswer) -> str:
    """Return in one sentence how many cases of other duties than sprinklers were solved and count."""
    if all(row.duty == "outflows" for row in duties.rows):
        nodes = sum(len(row.outlets) for row in duties.rows)
        return f"All fixed outflows at once; a pressure is asked at {nodes} node{'s' * (nodes != 1)}."
    counted = sum(row.counts for row in duties.rows)
    names = " and ".join(dict.fromkeys(row.duty for row in duties.rows))
    return f"{len(duties.rows)} of {names} side by side in the report, {counted} count for the verdict."


def visible(text: str) -> str:
    """Return ``text`` with control characters, which a page cannot carry, written out.

    >>> visible("a" + chr(7) + "b")
    'a\\\\x07b'
    """
    if text.isprintable():
        return text
    return "".join(char if char.isprintable() else _written_out(char) for char in text)


def _written_out(char: str) -> str:
    if char in "\u00a0\u2007\u202f\u2009\u2003\u2002":
        return " "
    return char.encode("unicode_escape").decode("ascii")


def tags_text(tags: Iterable[str], most: int = 12) -> str:
    """Return ``tags`` joined by commas, cut after ``most`` with the number left out."""
    shown = list(tags)
    text = ", ".join(shown[:most])
    return f"{text} and {len(shown) - most} more" if len(shown) > most else text
