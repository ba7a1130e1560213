"""The linear system of the nodes: one symmetric matrix pattern, refilled and factorised many times.

The matrix is A·G·Aᵀ with A the incidence of the links on the free nodes and G their conductances: symmetric
and positive definite. Small systems are dense, cases side by side a stack of such; long narrow ones
(mains with lines between them) are brought into a narrow band [1]_ and factorised by Cholesky; the rest
keep one fill-reducing order, found with the first sparse factorisation, so that later ones only refill
the values.

References
----------
.. [1] Cuthill, E. and McKee, J. (1969). Reducing the bandwidth of sparse symmetric matrices. Proc. 24th
   National Conference of the ACM, 157–172.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, Final

import numpy as np

from supplycheck.network.graphs import parts_of, two_way_graph
from supplycheck.network.links import sums
from supplycheck.network.records import FloatArray, IntArray

DENSE_BELOW: Final = 48
"""Number of free nodes below which the matrix is dense and numpy solves it."""
CHOLESKY_BELOW: Final = 80
"""Number of free nodes below which it is dense and factorised by Cholesky: half the work, once the library
that has it is loaded."""
NARROW: Final = 64
"""Greatest half bandwidth at which the band is quicker than the sparse factorisation. Beyond it the blocks
of LAPACK are large enough for OpenBLAS to share among threads, which costs many times what it brings."""

MOST_STACKED: Final = 1024
"""Most nodes in all whose parts are looked for; sixteen cases of :data:`SMALL_BLOCK` nodes side by side."""
SMALL_BLOCK: Final = 64
"""Most nodes in each unconnected part up to which all parts are solved as one stack of dense matrices."""

Solver = Callable[[FloatArray], FloatArray]


class Nodal:
    """Matrix of ``free`` nodes joined by links ``start``–``end`` (rows of ``free`` and above: fixed).

    ``copies`` cases that nothing joins may lie in it side by side.
    """

    def __init__(self, start: IntArray, end: IntArray, free: int, copies: int = 1) -> None:
        self.free, self.copies = free, copies
        links = np.arange(len(start))
        s_free, e_free = start < free, end < free
        both = s_free & e_free
        self._diagonals = int(s_free.sum() + e_free.sum())
        self._rows = np.concatenate([start[s_free], end[e_free], start[both]])
        self._cols = np.concatenate([start[s_free], end[e_free], end[both]])
        self._source = np.concatenate([links[s_free], links[e_free], links[both]])
        self._sign = np.ones(len(self._rows))
        self._sign[self._diagonals :] = -1.0
        self._flat: IntArray | None = None
        self._blocks: _Blocks | None = None
        self._band: _Band | None = None
        self._sparse: _Sparse | None = None

    def factorise(self, conductance: FloatArray, ground: IntArray) -> Solver:
        """Return the solver of the matrix for ``conductance`` (m,); ``ground`` ties floating nodes down.

        Raises
        ------
        LinAlgError, RuntimeError
            Where the matrix is singular.
        """
        entries = self._sign * conductance[self._source]
        tie = float(np.median(conductance)) if len(ground) else 0.0
        if self.free < DENSE_BELOW or (self.free < CHOLESKY_BELOW and self.copies == 1):
            return self._dense(entries, ground, tie)
        if self.copies > 1 and self._blocks is None and self.free <= MOST_STACKED:
            self._blocks = _Blocks(self._rows, self._cols, self._diagonals, self.free)
        if self._blocks is not None and self._blocks.largest <= SMALL_BLOCK:
            return self._blocks.factorise(entries, ground, tie)
        if self._sparse is None:
            self._band = self._band or _Band(self._rows, self._cols, self._diagonals, self.free)
            if self._band.half <= NARROW:
                solver = self._band.factorise(entries, ground, tie)
                if solver is not None:
                    return solver
            self._sparse = _Sparse(self._rows, self._cols, self._diagonals, self.free)
        return self._sparse.factorise(entries, ground, tie)

    def _dense(self, entries: FloatArray, ground: IntArray, tie: float) -> Solver:
        n = self.free
        if self._flat is None:
            low, high = np.minimum(self._rows, self._cols), np.maximum(self._rows, self._cols)
            self._flat = low * n + high
        upper = sums(self._flat, entries, n * n).reshape(n, n)
        if len(ground):
            upper[ground, ground] += tie
        solver = _cholesky(upper) if n >= DENSE_BELOW else None
        if solver is not None:
            return solver
        matrix = upper + upper.T
        np.fill_diagonal(matrix, upper.diagonal())
        return lambda rhs: np.asarray(np.linalg.solve(matrix, rhs), dtype=np.float64)


def _cholesky(upper: FloatArray) -> Solver | None:
    """Return the solver for the upper half of a matrix, or ``None`` where rounding spoils definiteness."""
    from scipy.linalg.lapack import dpotrf, dpotrs

    factor, info = dpotrf(upper.T, lower=1, clean=0)
    if info != 0:
        return None
    return lambda rhs: np.asarray(dpotrs(factor, rhs, lower=1)[0])


class _Blocks:
    """Unconnected parts, such as cases laid side by side, as a stack of small dense matrices.

    The stack holds every part padded to the largest with a diagonal of one, which changes nothing.
    """

    def __init__(self, rows: IntArray, cols: IntArray, diagonals: int, free: int) -> None:
        count, label = parts_of(rows[diagonals:], cols[diagonals:], free)
        sizes = np.bincount(label, minlength=count)
        self.largest = int(sizes.max(initial=0))
        order = np.argsort(label, kind="stable")
        first = np.concatenate([[0], np.cumsum(sizes)[:-1]])
        inside = np.empty(free, dtype=np.int64)
        inside[order] = np.arange(free) - first[label[order]]
        self._shape = (count, self.largest, self.largest)
        self._spot = label * self.largest + inside
        self._flat = self._spot[rows] * self.largest + inside[cols]
        self._mirror = self._spot[cols[diagonals:]] * self.largest + inside[rows[diagonals:]]
        self._diagonal = self._spot * self.largest + inside
        self._diagonals = diagonals
        used = np.zeros(count * self.largest, dtype=bool)
        used[self._spot] = True
        spare = np.flatnonzero(~used)
        self._padding = spare * self.largest + spare % self.largest

    def factorise(self, entries: FloatArray, ground: IntArray, tie: float) -> Solver:
        count, size, _ = self._shape
        values = sums(self._flat, entries, count * size * size)
        values += sums(self._mirror, entries[self._diagonals :], count * size * size)
        values[self._diagonal[ground]] += tie
        values[self._padding] = 1.0
        stack = values.reshape(self._shape)

        def solve(rhs: FloatArray) -> FloatArray:
            whole = np.zeros((count * size, *rhs.shape[1:]))
            whole[self._spot] = rhs
            answer = np.linalg.solve(stack, whole.reshape(count, size, -1))
            return np.asarray(answer.reshape(whole.shape)[self._spot])

        return solve


class _Band:
    """The lower half of the matrix as a band, in the order of Cuthill and McKee.

    In the lower half the columns are contiguous, as the rank-one updates of the factorisation want them;
    with the upper half OpenBLAS starts its threads for each, which makes it up to ten times slower.
    """

    def __init__(self, rows: IntArray, cols: IntArray, diagonals: int, free: int) -> None:
        from scipy.sparse.csgraph import reverse_cuthill_mckee

        graph = two_way_graph(rows[diagonals:], cols[diagonals:], free)
        self.order = np.asarray(reverse_cuthill_mckee(graph, symmetric_mode=True), dtype=np.int64)
        self.place = np.empty(free, dtype=np.int64)
        self.place[self.order] = np.arange(free)
        a, b = self.place[rows], self.place[cols]
        low, high = np.minimum(a, b), np.maximum(a, b)
        self.half = int((high - low).max(initial=0))
        self.free = free
        self._flat = low * (self.half + 1) + high - low

    def factorise(self, entries: FloatArray, ground: IntArray, tie: float) -> Solver | None:
        """Return the solver, or ``None`` where rounding spoils the definiteness."""
        from scipy.linalg.lapack import dpbtrf, dpbtrs

        width = self.half + 1
        band = sums(self._flat, entries, width * self.free).reshape(self.free, width)
        band[self.place[ground], 0] += tie
        factor, info = dpbtrf(band.T, lower=1, overwrite_ab=1)
        if info != 0:
            return None

        def solve(rhs: FloatArray) -> FloatArray:
            answer, _ = dpbtrs(factor, rhs[self.order], lower=1)
            return np.asarray(answer[self.place])

        return solve


class _Sparse:
    """The whole matrix in compressed columns, in the order that the first factorisation finds."""

    def __init__(self, rows: IntArray, cols: IntArray, diagonals: int, free: int) -> None:
        self.free = free
        self._rows = np.concatenate([rows, cols[diagonals:]])
        self._cols = np.concatenate([cols, rows[diagonals:]])
        self._diagonals = diagonals
        self._order: IntArray | None = None
        self._pattern = self._columns(np.arange(free))

    def factorise(self, entries: FloatArray, ground: IntArray, tie: float) -> Solver:
        from scipy.sparse.linalg import splu

        matrix, slot, diagonal = self._pattern
        whole = np.concatenate([entries, entries[self._diagonals :]])
        matrix.data[:] = sums(slot, whole, len(matrix.data))
        matrix.data[diagonal[ground]] += tie
        how = "MMD_AT_PLUS_A" if self._order is None else "NATURAL"
        options = {"SymmetricMode": True}
        factor = splu(matrix, permc_spec=how, diag_pivot_thresh=0.0, relax=4, panel_size=1, options=options)
        order = self._order
        if order is None:
            self._order = np.asarray(factor.perm_c, dtype=np.int64)
            self._pattern = self._columns(self._order)
            return lambda rhs: np.asarray(factor.solve(rhs))

        def solve(rhs: FloatArray) -> FloatArray:
            moved = np.empty_like(rhs)
            moved[order] = rhs
            return np.asarray(factor.solve(moved)[order])

        return solve

    def _columns(self, order: IntArray) -> tuple[Any, IntArray, IntArray]:
        """Return the empty matrix, the slot of each entry and of each diagonal in its values."""
        from scipy.sparse import csc_array

        n = self.free
        key, slot = _slots(order[self._cols] * n + order[self._rows])
        pointers = np.searchsorted(key // n, np.arange(n + 1)).astype(np.int32)
        matrix = csc_array((np.zeros(len(key)), (key % n).astype(np.int32), pointers), (n, n))
        return matrix, slot, np.searchsorted(key, order * (n + 1))


def _slots(key: IntArray) -> tuple[IntArray, IntArray]:
    """Return the different keys in order, and for each key its place among them."""
    order = np.argsort(key)
    ranked = key[order]
    first = np.ones(len(key), dtype=bool)
    first[1:] = ranked[1:] != ranked[:-1]
    slot = np.empty(len(key), dtype=np.int64)
    slot[order] = np.cumsum(first) - 1
    return ranked[first], slot
