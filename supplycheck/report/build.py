"""From a `Result` to the neutral `Document`. Texts and figures only; every number is the result's own."""

from __future__ import annotations

from typing import Final, Literal

from supplycheck.report.document import Document, Section
from supplycheck.report.sections.answer import answer
from supplycheck.report.sections.basis import basis
from supplycheck.report.sections.closing import assumptions, cautions, echo
from supplycheck.report.sections.duties import duties
from supplycheck.report.sections.judged import findings, flows
from supplycheck.report.sections.layout_plan import placements, plan
from supplycheck.report.sections.pressure import hand_check, pressure
from supplycheck.report.sections.rows import node_analysis, pipe_information
from supplycheck.report.sections.sources import sources
from supplycheck.report.sections.water import water
from supplycheck.results.records import Result

STANDING: Final = "preliminary engineering aid – not an approval"
_WIDTHS: Final = {"letter": 522.0, "a4": 505.0}


def build_document(result: Result) -> Document:
    """Return the report on ``result``; pages in the order in which a reviewer reads them."""
    facts = result.project.facts
    paper: Literal["letter", "a4"] = "a4" if facts.paper == "a4" else "letter"
    width = _WIDTHS[paper]
    sections: tuple[Section, ...] = (
        answer(result, width),
        basis(result),
        water(result, width),
        *_if_any(sources(result, width)),
        *_if_any(duties(result, width)),
        plan(result, width),
        pressure(result, width),
        node_analysis(result),
        pipe_information(result),
        hand_check(result),
        findings(result),
        flows(result),
        assumptions(result),
        cautions(result),
        *_if_any(placements(result)),
        echo(result),
    )
    parts = [facts.site, facts.stage, f"calculated {facts.date.isoformat()}"]
    return Document(
        title=facts.title,
        subtitle=" · ".join(part for part in parts if part),
        date=facts.date.isoformat(),
        paper=paper,
        standing=STANDING,
        producer=f"supplycheck {result.version}",
        sections=sections,
    )


def _if_any(section: Section | None) -> tuple[Section, ...]:
    return () if section is None else (section,)
