"""The page of the checks, made from their registry."""

from __future__ import annotations

from typing import Final

from supplycheck.checks.registry import DISPLAY_ORDER, RULES

_HEAD: Final = """# Findings

Each rule looks at one thing and reports one state:

| state | meaning |
|---|---|
| fail | a limit is broken; what to do stands beside it |
| ask authority | a person has to decide; the question stands beside it |
| missing | the check was not run, because its data are not given; the question stands beside it |
| ok | the limit is kept, with what was measured; or all is in order where there is no limit to keep |
| not applicable | the rule has no object in this project |

Rules on heads and on the design area are also not applicable where no sprinkler is part of the demand.

"No fail" does not mean that a system complies: many rules of a standard cannot be seen in a hydraulic
calculation, and the authority and its adopted edition govern. A source marked "from memory" was not read
in the publication for this page.

"""


def findings_page() -> str:
    """Return the page as Markdown."""
    rows = ["| check | looks at | states | source |", "|---|---|---|---|"]
    for rule in RULES:
        about = rule.about
        states = ", ".join(state for state in DISPLAY_ORDER if state in about.states)
        rows.append(f"| {about.name} | {about.looks_at} | {states} | {about.source} |")
    return _HEAD + "\n".join(rows) + "\n"
