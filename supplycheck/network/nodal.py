"""The linear system of the nodes: one symmetric matrix pattern, refilled and factorised many times.

The matrix is A·G·Aᵀ with A the incidence of the links on the free nodes and G their conductances.
Small systems are dense; larger ones keep one fill-reducing order, found with the first factorisation,
so that later ones only refill the values.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, Final

import numpy as np

from supplycheck.network.links import sums
from supplycheck.network.records import FloatArray, IntArray

DENSE_BELOW: Final = 48
"""Number of free nodes below which the matrix is dense."""

Solver = Callable[[FloatArray], FloatArray]


class Nodal:
    """Matrix of ``free`` nodes joined by links ``start``–``end`` (rows of ``free`` and above: fixed)."""

    def __init__(self, start: IntArray, end: IntArray, free: int) -> None:
        self.free = free
        self._links = len(start)
        links = np.arange(self._links)
        s_free, e_free = start < free, end < free
        both = s_free & e_free
        self._rows = np.concatenate([start[s_free], end[e_free], start[both], end[both]])
        self._cols = np.concatenate([start[s_free], end[e_free], end[both], start[both]])
        self._source = np.concatenate([links[s_free], links[e_free], links[both], links[both]])
        diagonals = int(s_free.sum() + e_free.sum())
        self._weight = np.ones(len(self._rows))
        self._weight[diagonals:] = -1.0
        self._order: IntArray | None = None
        self._ordered: Any = None

    def factorise(self, conductance: FloatArray, ground: IntArray | None = None) -> Solver:
        """Return the solver of the matrix for ``conductance`` (m,); ``ground`` ties floating nodes down."""
        entries = self._weight * conductance[self._source]
        if self.free < DENSE_BELOW:
            return self._dense(entries, ground)
        return self._sparse(entries, ground)

    def _dense(self, entries: FloatArray, ground: IntArray | None) -> Solver:
        n = self.free
        flat = sums(self._rows * n + self._cols, entries, n * n)
        matrix = flat.reshape(n, n)
        if ground is not None and len(ground):
            matrix[ground, ground] += _tie(entries)
        return lambda rhs: np.asarray(np.linalg.solve(matrix, rhs), dtype=np.float64)

    def _sparse(self, entries: FloatArray, ground: IntArray | None) -> Solver:
        from scipy.sparse.linalg import splu

        options = {"SymmetricMode": True}
        if self._order is None:
            plain = self._pattern(np.arange(self.free))
            self._fill(plain, entries, ground)
            first = splu(plain[0], permc_spec="MMD_AT_PLUS_A", diag_pivot_thresh=0.0, options=options)
            self._order = np.asarray(first.perm_c, dtype=np.int64)
            self._ordered = self._pattern(self._order)
            return lambda rhs: np.asarray(first.solve(rhs))
        self._fill(self._ordered, entries, ground)
        order = self._order
        factor = splu(self._ordered[0], permc_spec="NATURAL", diag_pivot_thresh=0.0, options=options)

        def solve(rhs: FloatArray) -> FloatArray:
            moved = np.empty_like(rhs)
            moved[order] = rhs
            return np.asarray(factor.solve(moved)[order])

        return solve

    def _pattern(self, order: IntArray) -> tuple[Any, IntArray, IntArray]:
        from scipy.sparse import csc_array

        n = self.free
        rows, cols = order[self._rows], order[self._cols]
        key, slot = np.unique(cols * n + rows, return_inverse=True)
        pointers = np.searchsorted(key // n, np.arange(n + 1))
        matrix = csc_array(
            (np.zeros(len(key)), (key % n).astype(np.int32), pointers.astype(np.int32)), (n, n)
        )
        diagonal = np.searchsorted(key, order * n + order)
        return matrix, slot, diagonal

    def _fill(self, pattern: Any, entries: FloatArray, ground: IntArray | None) -> None:
        matrix, slot, diagonal = pattern
        matrix.data[:] = np.bincount(slot, entries, minlength=len(matrix.data))
        if ground is not None and len(ground):
            matrix.data[diagonal[ground]] += _tie(entries)


def _tie(entries: FloatArray) -> float:
    return float(np.median(np.abs(entries)))
