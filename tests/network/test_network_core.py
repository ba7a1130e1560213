"""The Newton core on its own: step against differences, damping, and linear systems of each kind."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from network_systems import network, random_load, random_system, supply

from supplycheck.network import core
from supplycheck.network.assemble import assemble, read_case, read_feed
from supplycheck.network.nodal import CHOLESKY_BELOW, DENSE_BELOW, Nodal, _Band, _Sparse
from supplycheck.network.records import FloatArray


def problem_of(seed: int, law: str):  # type: ignore[no-untyped-def]
    rng = np.random.default_rng(seed)
    made_system = random_system(rng, "loop", 14)
    made = network(made_system, law)
    load, _ = random_load(rng, made_system)
    case = read_case(made, load)
    return assemble(made.links, made.base, case, read_feed(made, [supply()], demand=False), demand=False)


@pytest.mark.parametrize("law", ["hazen-williams", "darcy"])
@pytest.mark.parametrize("seed", range(4))
def test_jacobian_against_differences(seed: int, law: str) -> None:
    """The step solves J·step = −F with J by central differences of both residuals."""
    assembled = problem_of(seed, law)
    problem, n = assembled.problem, len(assembled.problem.outflow)
    rng = np.random.default_rng(seed)
    flow = rng.uniform(1e-3, 1e-2, len(problem.start)) * rng.choice([-1.0, 1.0], len(problem.start))
    flow[problem.one_way] = np.abs(flow[problem.one_way])
    head = np.concatenate([rng.uniform(1e5, 5e5, n), problem.fixed])
    state = core.State(flow, head, np.zeros(1), np.zeros(0), 0, False, 0.0, 0.0)

    def residual(x: np.ndarray) -> np.ndarray:
        moved = core.State(
            x[: len(flow)],
            np.concatenate([x[len(flow) :], problem.fixed]),
            np.zeros(1),
            np.zeros(0),
            0,
            False,
            0,
            0,
        )
        energy, mass, _ = core.residuals(problem, moved)
        return np.concatenate([energy, mass])

    x = np.concatenate([flow, head[:n]])
    size = np.concatenate([np.full(len(flow), 1e-7), np.full(n, 1.0)])
    columns = [(residual(x + h) - residual(x - h)) / (2 * h.max()) for h in np.diag(size)]
    expected = np.linalg.solve(np.column_stack(columns), -residual(x))
    energy, mass, slope = core.residuals(problem, state)
    step, _, _, new_head = core._step(problem, state, energy, mass, slope)
    assert step == pytest.approx(expected[: len(flow)], rel=1e-4, abs=1e-9)
    assert new_head[:n] - head[:n] == pytest.approx(expected[len(flow) :], rel=1e-4, abs=1e-3)


@pytest.mark.parametrize("seed", range(6))
def test_damped_and_full_steps_agree(seed: int) -> None:
    assembled = problem_of(seed, "hazen-williams")
    full = core.solve(assembled.problem, assembled.start)
    damped = core.solve(assembled.problem, assembled.start, damped=True, limit=300)
    assert full.converged
    assert damped.converged
    assert damped.flow == pytest.approx(full.flow, abs=1e-9 * np.abs(full.flow).max())


def spoilt(g: FloatArray) -> FloatArray:
    """Return conductances of which one is below zero, so that Cholesky gives up."""
    return np.append(g[:-1], -50.0)


@pytest.mark.parametrize(
    ("free", "change"),
    [(5, np.copy), (DENSE_BELOW + 5, np.copy), (DENSE_BELOW + 5, spoilt), (CHOLESKY_BELOW + 30, np.copy)],
)
def test_each_linear_solver_against_the_plain_matrix(
    free: int, change: Callable[[FloatArray], FloatArray]
) -> None:
    rng = np.random.default_rng(free)
    start = np.concatenate([np.arange(free), rng.integers(0, free, free)])
    end = np.concatenate([np.arange(1, free + 1), rng.integers(0, free + 1, free)])
    keep = start != end
    start, end = start[keep], end[keep]
    g = change(rng.uniform(0.1, 10, len(start)))
    matrix = np.zeros((free + 1, free + 1))
    for a, b, c in zip(start, end, g, strict=True):
        matrix[[a, b], [a, b]] += c
        matrix[[a, b], [b, a]] -= c
    rhs = rng.normal(size=(free, 2))
    expected = np.linalg.solve(matrix[:free, :free], rhs)
    nothing = np.zeros(0, dtype=np.int64)
    nodal = Nodal(start, end, free)
    assert nodal.factorise(g, nothing)(rhs) == pytest.approx(expected)
    if (g < 0).any():
        return
    entries = nodal._sign * g[nodal._source]
    for made in (
        _Band(nodal._rows, nodal._cols, nodal._diagonals, free),
        _Sparse(nodal._rows, nodal._cols, nodal._diagonals, free),
    ):
        for _ in range(2):
            solver = made.factorise(entries, nothing, 0.0)
            assert solver is not None
            assert solver(rhs) == pytest.approx(expected)


def test_singular_matrix_is_not_a_result() -> None:
    assembled = problem_of(1, "hazen-williams")
    closed = np.ones(len(assembled.problem.start), dtype=bool)
    from dataclasses import replace

    state = core.solve(replace(assembled.problem, closed=closed), assembled.start)
    assert not state.converged
