"""Pairs of hydrant and day that were met already, for files of any length in bounded memory."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Final

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Keys = NDArray[np.uint64]
    Rows = NDArray[np.int64]

MOST_HELD: Final = 2_000_000
"""Keys held in memory; beyond them, sorted runs are laid down in a file each."""


class SeenPairs:
    """Remembers 64-bit keys with the row that brought them first.

    Two different pairs share a key by chance about once in 370,000 files of ten million rows.
    """

    def __init__(self, folder: Path, most_held: int = MOST_HELD) -> None:
        self._folder = folder
        self._most_held = most_held
        self._keys: Keys = np.empty(0, dtype=np.uint64)
        self._rows: Rows = np.empty(0, dtype=np.int64)
        self._runs = 0

    def add(self, keys: Keys, rows: Rows) -> dict[int, int]:
        """Remember ``keys`` of ``rows`` and return row → earlier row for those that were met before."""
        if not len(keys):
            return {}
        order = np.argsort(keys, kind="stable")
        keys, rows = keys[order], rows[order]
        first = np.concatenate(([True], keys[1:] != keys[:-1]))
        starts = np.flatnonzero(first)[np.cumsum(first) - 1]
        earlier = np.where(first, -1, rows[starts])
        for known, places in [(self._keys, self._rows), *(self._run(run) for run in range(self._runs))]:
            if len(known):
                found = np.minimum(np.searchsorted(known, keys), len(known) - 1)
                hit = known[found] == keys
                earlier[hit] = places[found[hit]]
        fresh = earlier < 0
        self._remember(keys[fresh], rows[fresh])
        again = ~fresh
        return dict(zip(rows[again].tolist(), earlier[again].tolist(), strict=True))

    def _remember(self, keys: Keys, rows: Rows) -> None:
        at = np.searchsorted(self._keys, keys)
        self._keys = np.insert(self._keys, at, keys)
        self._rows = np.insert(self._rows, at, rows)
        if len(self._keys) >= self._most_held:
            np.save(self._folder / f"keys-{self._runs}.npy", self._keys)
            np.save(self._folder / f"rows-{self._runs}.npy", self._rows)
            self._runs += 1
            self._keys, self._rows = np.empty(0, dtype=np.uint64), np.empty(0, dtype=np.int64)

    def _run(self, run: int) -> tuple[Keys, Rows]:
        names = (self._folder / f"{kind}-{run}.npy" for kind in ("keys", "rows"))
        keys, rows = (np.load(name, mmap_mode="r") for name in names)
        return keys, rows
