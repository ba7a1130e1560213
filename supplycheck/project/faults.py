"""Faults in the user's files: collected, named once, raised all together."""

from __future__ import annotations

import difflib
from collections.abc import Iterable, Sequence

from supplycheck.errors import SupplyCheckError
from supplycheck.findings import Fault, Place

SHOWN = 60
MOST_SHOWN = 500


class ProjectFaultsError(SupplyCheckError):
    """The project has faults; ``faults`` holds all of them in the order in which they were met."""

    def __init__(self, faults: Sequence[Fault]) -> None:
        self.faults = tuple(faults)
        count = len(self.faults)
        head = f"the project has {count} fault{'s' if count != 1 else ''}"
        lines = [f"  {fault}" for fault in self.faults[:MOST_SHOWN]]
        lines += [f"  … and {count - MOST_SHOWN} more"] if count > MOST_SHOWN else []
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
