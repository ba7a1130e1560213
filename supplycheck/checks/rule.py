"""What a rule is: a record about it and a pure function from the context to findings."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from typing import Final, TypedDict, Unpack

from supplycheck.checks.context import CheckContext
from supplycheck.findings import Finding, Measure, State

MOST_TAGS: Final = 50
"""Nodes or pipes that a finding names, the worst first; more would not be read."""


class Parts(TypedDict, total=False):
    """What a finding may carry beside its state and text."""

    measured: Measure | None
    limit: Measure | None
    tags: tuple[str, ...]
    remedy: str
    values: Mapping[str, Measure]
    source: str


@dataclass(frozen=True, slots=True)
class About:
    """Name of a rule, what it looks at, the states it can take, its source.

    ``weight`` orders open questions: 3 can turn the verdict, 2 can shift the numbers, 1 completes the
    record.
    """

    name: str
    looks_at: str
    states: tuple[State, ...]
    source: str
    weight: int = 2

    def says(self, state: State, text: str, **parts: Unpack[Parts]) -> Finding:
        """Return a finding of this rule; ``remedy`` is a question where the state leaves one open."""
        return Finding(
            check=self.name,
            state=state,
            text=text,
            measured=parts.get("measured"),
            limit=parts.get("limit"),
            source=parts.get("source", self.source),
            tags=parts.get("tags", ())[:MOST_TAGS],
            remedy=parts.get("remedy", ""),
            values=parts.get("values", {}),
        )


@dataclass(frozen=True, slots=True)
class Rule:
    """A rule: the record about it and its function."""

    about: About
    run: Callable[[CheckContext], Finding]


def pressure(value: float) -> Measure:
    """Return ``value`` [Pa] as a measure."""
    return Measure(value, "pressure")


def flow(value: float) -> Measure:
    """Return ``value`` [m³/s] as a measure."""
    return Measure(value, "flow")


def count(value: int) -> Measure:
    """Return a number of things as a measure."""
    return Measure(float(value), "count")


def named(*tags: str, start: bool = False) -> str:
    """Return flow tests in words, with a capital at the ``start`` of a sentence.

    A tag that says "test" itself is not told so again.

    >>> named("T-1", "T-2"), named("test 1", start=True)
    ('test T-1, T-2', 'Test 1')
    """
    text = some(tags)
    text = text if text.casefold().startswith("test") else f"test {text}"
    return text[0].upper() + text[1:] if start else text


def some(tags: Iterable[str], show: int = 4) -> str:
    """Return the first tags in words and how many more there are.

    >>> some(["A", "B", "C"], show=2)
    'A, B and 1 more'
    """
    listed = list(tags)
    text = ", ".join(listed[:show])
    return f"{text} and {len(listed) - show} more" if len(listed) > show else text
