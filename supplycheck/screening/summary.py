"""The answer of a screening on one screen, and as plain numbers."""

from __future__ import annotations

import textwrap
from typing import Any

from supplycheck.catalogue.water import hydrant_classes
from supplycheck.results.display import visible
from supplycheck.screening.marks import MARKS
from supplycheck.screening.reduce import MET, NOT_ASKED, NOT_MET
from supplycheck.screening.run import Screening


def verdict(answer: Screening) -> str:
    """Return the sentence that answers the question about the required flow."""
    statistics, units = answer.statistics, answer.question.unit_set
    met, short = statistics.by_met[MET], statistics.by_met[NOT_MET]
    at = units.text(answer.question.at_pressure, "pressure")
    if not met + short:
        return "No required flow was given: hydrants are classed, none is judged."
    parts = [f"{short:,} of {met + short:,} hydrants do not give their required flow at {at}."]
    if not short:
        parts = [f"Every hydrant that was judged ({met:,}) gives its required flow at {at}."]
    if statistics.by_met[NOT_ASKED]:
        parts.append(f"Without a required flow: {statistics.by_met[NOT_ASKED]:,}.")
    if statistics.rejected:
        parts.append(f"Rejected and not judged: {statistics.rejected:,}.")
    return " ".join(parts)


def class_limits(place: int, answer: Screening) -> str:
    """Return the flows at 20 psi of the class at ``place``, in the units of the answer."""
    units, row = answer.question.unit_set, hydrant_classes()[place]
    low = units.number(row.flow_from, "flow", 0)
    symbol = units.symbol("flow")
    if row.flow_below is None:
        return f"{low} {symbol} and more"
    high = units.number(row.flow_below, "flow", 0)
    return f"{low} to under {high} {symbol}" if row.flow_from else f"under {high} {symbol}"


def summary_text(answer: Screening, files: tuple[str, ...]) -> str:
    """Return the summary as aligned lines."""
    statistics = answer.statistics
    blank = f", and {answer.blank:,} blank lines" if answer.blank else ""
    lines = [
        f"Hydrant tests in {visible(answer.file)}, screened as of {answer.question.as_of.isoformat()}",
        "",
        f"  {answer.read:,} read = {statistics.done:,} done + {statistics.rejected:,} rejected{blank}",
        "",
        *textwrap.wrap(verdict(answer), 96, initial_indent="  ", subsequent_indent="  "),
    ]
    if statistics.done:
        lines += ["", "Classes by the flow at 20 psi (NFPA 291)"]
        for place, row in enumerate(hydrant_classes()):
            limits = class_limits(place, answer)
            lines.append(f"  {row.name:<3} {row.colour:<8} {limits:<28} {statistics.by_class[place]:>10,}")
    found = [(mark.words, statistics.by_mark[place]) for place, mark in enumerate(MARKS)]
    if any(count for _, count in found):
        lines += ["", "Findings on the quality of the tests"]
        lines += [f"  {words:<41} {count:>10,}" for words, count in found if count]
    if answer.question.maximum_age is None:
        lines += ["", "  Not checked: the age of the tests (no --maximum-age)."]
    if statistics.reasons:
        lines += ["", "Rejected rows"]
        shown = statistics.reasons[:8]
        for number, reason in shown:
            text = textwrap.shorten(visible(reason), 84, placeholder=" …")
            lines.append(f"  row {number:<7} {text}")
        if statistics.rejected > len(shown):
            lines.append(f"  and {statistics.rejected - len(shown):,} more in rejects.csv")
    lines += ["", f"Written to {answer.folder}: {', '.join(files)}"]
    lines += [f"  {note}" for note in answer.notes]
    return "\n".join(lines)


def plain_summary(answer: Screening, files: tuple[str, ...]) -> dict[str, Any]:
    """Return the summary as plain numbers in the units of the answer."""
    statistics, question = answer.statistics, answer.question
    units = question.unit_set
    judged = statistics.by_met[MET] + statistics.by_met[NOT_MET]
    required = question.required_flow
    return {
        "schema": 1,
        "units": {kind: units.symbol(kind) for kind in ("flow", "pressure")},
        "file": answer.file,
        "sha256": answer.digest,
        "as_of": question.as_of.isoformat(),
        "read": answer.read,
        "done": statistics.done,
        "rejected": statistics.rejected,
        "blank": answer.blank,
        "required_flow": None if required is None else units.from_si(required, "flow"),
        "at_pressure": units.from_si(question.at_pressure, "pressure"),
        "maximum_age_months": question.maximum_age,
        "met": statistics.by_met[MET],
        "not_met": statistics.by_met[NOT_MET],
        "not_asked": statistics.by_met[NOT_ASKED],
        "judged": judged,
        "classes": {row.name: statistics.by_class[place] for place, row in enumerate(hydrant_classes())},
        "flow_at_20_psi": {
            "least": units.from_si(statistics.least, "flow") if statistics.done else None,
            "mean": units.from_si(statistics.total_rated / statistics.done, "flow")
            if statistics.done
            else None,
            "greatest": units.from_si(statistics.most, "flow") if statistics.done else None,
        },
        "findings": {mark.words: statistics.by_mark[place] for place, mark in enumerate(MARKS)},
        "folder": str(answer.folder),
        "files": list(files),
        "notes": list(answer.notes),
    }
