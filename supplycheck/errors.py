"""The exceptions of the package.

Faults in the user's files are data (:class:`supplycheck.findings.Fault`), collected and shown all at
once. An exception is raised only where the program cannot go on.
"""

from __future__ import annotations

from collections.abc import Sequence


class SupplyCheckError(Exception):
    """Base of every exception that this package raises on purpose."""


class DomainError(SupplyCheckError, ValueError):
    """A law was asked outside the range in which it is defined."""


class NoSolutionError(SupplyCheckError):
    """The problem has no solution in the range that was searched; the message says why."""


class NotInCatalogueError(SupplyCheckError, LookupError):
    """A table has no such row; ``near`` holds what it does have that is close."""

    def __init__(self, message: str, near: Sequence[str] = ()) -> None:
        super().__init__(message)
        self.near = tuple(near)


class NotConvergedError(SupplyCheckError):
    """The network could not be solved.

    ``cause`` is ``"structure"``, ``"input"`` or ``"numbers"``; ``tags`` names the nodes or pipes
    at fault; ``remedy`` says what to do about it.
    """

    def __init__(self, message: str, *, cause: str, tags: Sequence[str], remedy: str) -> None:
        super().__init__(message)
        self.cause = cause
        self.tags = tuple(tags)
        self.remedy = remedy
