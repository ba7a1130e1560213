"""Faults in the user's files: collected, named once, raised all together."""

from __future__ import annotations

import difflib
import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from supplycheck.errors import SupplyCheckError
from supplycheck.findings import Fault, Place

SHOWN = 60
MOST_SHOWN = 40
"""Faults told on the screen; more would not be read."""
ROWS_SHOWN = 8
MOST_ALIKE = 4
_ROW = re.compile(r"row (\d+)(?:, column (.*))?", re.DOTALL)


class ProjectFaultsError(SupplyCheckError):
    """The project has faults; ``faults`` holds all of them in the order in which they were met."""

    def __init__(self, faults: Sequence[Fault]) -> None:
        self.faults = tuple(faults)
        count = len(self.faults)
        head = f"the project has {count} fault{'s' if count != 1 else ''}"
        groups = grouped(self.faults)
        lines = [
            f"  {group.fault}" + (f"; also in {group.also}" if group.also else "")
            for group in groups[:MOST_SHOWN]
        ]
        lines += [f"  … and {len(groups) - MOST_SHOWN} more"] if len(groups) > MOST_SHOWN else []
        super().__init__("\n".join([head, *lines]))


def quoted(value: object) -> str:
    """Return ``value`` as it was typed, shortened, with control characters escaped.

    >>> quoted("tab" + chr(9))
    '"tab\\\\t"'
    >>> quoted(12)
    '12'
    """
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        text = value if len(value) <= SHOWN else f"{value[:SHOWN]}… ({len(value)} characters)"
        escaped = "".join(char if char.isprintable() else repr(char)[1:-1] for char in text)
        return f'"{escaped}"'
    if isinstance(value, dict):
        return "a table"
    if isinstance(value, list | tuple):
        return f"a list of {len(value)}"
    text = str(value)
    return text if len(text) <= SHOWN else text[:SHOWN] + "…"


def near(word: str, allowed: Iterable[str]) -> str:
    """Return the allowed word closest to ``word``, or an empty text.

    >>> near("resdiual", ["static", "residual"])
    'residual'
    """
    folded = {choice.casefold(): choice for choice in allowed}
    close = difflib.get_close_matches(word.casefold(), list(folded), n=1, cutoff=0.6)
    return folded[close[0]] if close else ""


def listed(words: Iterable[str], limit: int = 12) -> str:
    """Return the words as a short list for a message.

    >>> listed(["a", "b"])
    'a, b'
    """
    words = list(words)
    more = len(words) - limit
    return ", ".join(words[:limit]) + (f" and {more} more" if more > 0 else "")


@dataclass(frozen=True, slots=True)
class FaultGroup:
    """A fault, and the numbers of the further rows of its table that have the same."""

    fault: Fault
    rows: tuple[int, ...] = ()

    @property
    def also(self) -> str:
        """Return the further rows in words, empty without any.

        >>> FaultGroup(Fault(Place("a.csv", "row 3"), "is empty"), tuple(range(4, 20))).also
        '16 more rows: 4, 5, 6, 7, 8, 9, 10, 11 …'
        """
        if not self.rows:
            return ""
        told = ", ".join(map(str, self.rows[:ROWS_SHOWN])) + (" …" if len(self.rows) > ROWS_SHOWN else "")
        return f"{len(self.rows)} more row{'s' if len(self.rows) > 1 else ''}: {told}"


def grouped(faults: Iterable[Fault]) -> list[FaultGroup]:
    """Return ``faults`` with those of one kind in one column of a table taken together.

    Alike are those with the same problem and value; with the same problem alone where there are many.
    """
    buckets: dict[tuple[object, ...], list[tuple[int, Fault]]] = {}
    for order, fault in enumerate(faults):
        row = _ROW.fullmatch(fault.place.where)
        key: tuple[object, ...] = (order,)
        if row:
            key = (fault.place.file, row[2] or "", fault.problem)
        buckets.setdefault(key, []).append((order, fault))
    found: list[tuple[int, FaultGroup]] = []
    for bucket in buckets.values():
        alike: dict[object, list[tuple[int, Fault]]] = {}
        for order, fault in bucket:
            same = None if len(bucket) > MOST_ALIKE else (fault.found, fault.allowed, fault.remedy)
            alike.setdefault(same, []).append((order, fault))
        for members in alike.values():
            order, first = members[0]
            rows = [_ROW.fullmatch(fault.place.where) for _, fault in members[1:]]
            found.append((order, FaultGroup(first, tuple(int(row[1]) for row in rows if row))))
    return [group for _, group in sorted(found, key=lambda one: one[0])]


class FaultList:
    """The faults met so far.

    After :meth:`seal` a key that already has a fault, and all below it, gets no further one: what
    follows from a value that could not be read is no news.
    """

    def __init__(self) -> None:
        self._faults: dict[tuple[str, str, str], Fault] = {}
        self._sealed: set[tuple[str, str]] = set()
        self._meant: set[tuple[str, str]] = set()

    def add(
        self, place: Place, problem: str, *, found: str = "", allowed: str = "", remedy: str = ""
    ) -> None:
        """Note one fault at ``place``."""
        if self.sealed(place):
            return
        key = (place.file, place.where, problem)
        self._faults.setdefault(key, Fault(place, problem, found, allowed, remedy))

    def meant(self, place: Place) -> None:
        """Note that a misspelled key was most likely meant to stand at ``place``."""
        self._meant.add((place.file, place.where))

    def seal(self) -> None:
        """Take no further faults at the places that have one, nor at those of misspelled keys."""
        for key in [key for key in self._faults if key[:2] in self._meant and "missing" in key[2]]:
            del self._faults[key]
        self._sealed = {key[:2] for key in self._faults} | self._meant

    def sealed(self, place: Place) -> bool:
        """Return whether ``place``, or the value it stands in, is sealed."""
        if not self._sealed:
            return False
        if (place.file, place.where) in self._sealed:
            return True
        ends = [number for number, char in enumerate(place.where) if char in ".["]
        return any((place.file, place.where[:end]) in self._sealed for end in ends)

    def spoiled(self, place: Place) -> bool:
        """Return whether a value at ``place`` or below it could not be read."""
        below = (f"{place.where}.", f"{place.where}[")
        return any(
            file == place.file and (where == place.where or where.startswith(below))
            for file, where in self._sealed
        )

    def touched(self, place: Place) -> bool:
        """Return whether a fault stands at ``place`` or below it."""
        below = (f"{place.where}.", f"{place.where}[")
        keys = [key[:2] for key in self._faults] + list(self._meant)
        return any(
            file == place.file and (where == place.where or where.startswith(below)) for file, where in keys
        )

    def __bool__(self) -> bool:
        return bool(self._faults)

    def __len__(self) -> int:
        return len(self._faults)

    def all(self) -> tuple[Fault, ...]:
        """Return the faults in the order in which they were met."""
        return tuple(self._faults.values())

    def stop(self) -> None:
        """Raise :class:`ProjectFaultsError` if there is any fault."""
        if self._faults:
            raise ProjectFaultsError(self.all())
