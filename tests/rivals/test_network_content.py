"""Rivals of the Newton core: minimum content by a general optimiser, and a general root finder.

The content Σ∫loss dq is written with the plain powers (no smoothing at zero flow) and minimised over the
flows that balance at every node, which the null space of the incidence gives; nothing of the network
package takes part but the resistances of the pipes.
"""

from __future__ import annotations

import numpy as np
import pytest
from network_systems import network, random_load, random_system, supply
from scipy.linalg import null_space
from scipy.optimize import minimize, root

from supplycheck.model import System
from supplycheck.network import LoadCase, Network, solve_operating


class Rival:
    """The operating problem of one supply, K outlets and fixed outflows on plain formulas."""

    def __init__(self, made: Network, load: LoadCase, static: float, curve: float) -> None:
        nodes, links = len(made.node_tags), made.links
        rows = [made.node_rows[tag] for tag in load.open_outlets]
        pipes, outs = len(links), len(rows)
        # links: pipes, outlets, supply; one balance for each node
        self.balance = np.zeros((nodes, pipes + outs + 1))
        self.balance[links.start, np.arange(pipes)] += 1
        self.balance[links.end, np.arange(pipes)] -= 1
        self.balance[rows, pipes + np.arange(outs)] += 1
        self.balance[made.node_rows["S"], -1] -= 1
        self.drawn = np.zeros(nodes)
        for tag, flow in load.fixed_flows.items():
            self.drawn[made.node_rows[tag]] -= flow
        self.r = np.concatenate([links.resistance, made.k_factor[rows] ** -2.0, [curve]])
        self.n = np.concatenate([np.full(pipes, links.exponent), np.full(outs, 2.0), [1.85]])
        self.minor = np.concatenate([links.minor, np.zeros(outs + 1)])
        self.base = np.concatenate([np.zeros(pipes), made.base[rows], [-(static + made.base[0])]])
        self.pipes = pipes

    def loss(self, q: np.ndarray) -> np.ndarray:
        return self.r * np.sign(q) * np.abs(q) ** self.n + self.minor * q * np.abs(q) + self.base

    def content(self, q: np.ndarray) -> float:
        power = self.r * np.abs(q) ** (self.n + 1) / (self.n + 1) + self.minor * np.abs(q) ** 3 / 3
        return float((power + self.base * q).sum())

    def slope(self, q: np.ndarray) -> np.ndarray:
        return self.r * self.n * np.abs(q) ** (self.n - 1) + 2 * self.minor * np.abs(q)

    def minimum(self) -> np.ndarray:
        """Return the flows of least content, by a trust-region method with exact second derivatives."""
        particular = np.linalg.lstsq(self.balance, self.drawn, rcond=None)[0]
        free = null_space(self.balance)
        scale = 1e-2

        def flows(x: np.ndarray) -> np.ndarray:
            return particular + scale * (free @ x)

        answer = minimize(
            lambda x: self.content(flows(x)),
            np.zeros(free.shape[1]),
            jac=lambda x: scale * (free.T @ self.loss(flows(x))),
            hess=lambda x: scale**2 * (free.T * self.slope(flows(x))) @ free,
            method="trust-exact",
            options={"gtol": 1e-6, "maxiter": 3000},
        )
        return flows(answer.x)


def question(seed: int, kind: str, size: int) -> tuple[System, Network, LoadCase]:
    rng = np.random.default_rng(seed)
    made_system = random_system(rng, kind, size)
    load, _ = random_load(rng, made_system)
    flows = {tag: min(flow, 5e-3) for tag, flow in load.fixed_flows.items()}
    return made_system, network(made_system), LoadCase(load.open_outlets, flows)


@pytest.mark.parametrize("kind", ["tree", "loop", "grid"])
@pytest.mark.parametrize("seed", range(8))
def test_minimum_content(kind: str, seed: int) -> None:
    """Flows agree to 1e-5 of the total, which is what the optimiser's gradient tolerance leaves."""
    _, made, load = question(seed, kind, 18)
    source = supply(static=9e5, residual=6e5)
    solution = solve_operating(made, load, [source])
    if any(solution.outflow[solution.node(tag)] == 0.0 for tag in load.open_outlets):
        pytest.skip("a head runs dry: the plain square of the rival has no one-way outlet")
    rival = Rival(made, load, source.static, source.resistance)
    flow = rival.minimum()
    total = solution.source_flow[0]
    assert flow[: rival.pipes] == pytest.approx(solution.pipe_flow, abs=1e-5 * total)
    assert flow[-1] == pytest.approx(total, rel=1e-5)


@pytest.mark.parametrize("seed", range(4))
def test_general_root_finder(seed: int) -> None:
    """scipy.optimize.root on the same equations, unknown flows and heads, from a fair start."""
    _, made, load = question(seed, "loop", 12)
    source = supply(static=9e5, residual=6e5)
    solution = solve_operating(made, load, [source])
    rival = Rival(made, load, source.static, source.resistance)
    links = rival.balance.shape[1]

    def residual(x: np.ndarray) -> np.ndarray:
        q, head = 1e-3 * x[:links], 1e5 * x[links:]
        return np.concatenate(
            [(rival.loss(q) - rival.balance.T @ head) / 1e5, (rival.balance @ q - rival.drawn) / 1e-3]
        )

    def jacobian(x: np.ndarray) -> np.ndarray:
        q = 1e-3 * x[:links]
        upper = np.hstack([np.diag(rival.slope(q)) * 1e-8, -rival.balance.T])
        lower = np.hstack([rival.balance, np.zeros((len(rival.balance),) * 2)])
        return np.vstack([upper, lower])

    begin = np.concatenate([solution.pipe_flow * 1.2e3 + 0.1, np.full(links - rival.pipes, 2.0)])
    begin = np.concatenate([begin, np.full(len(rival.balance), 4.0)])
    answer = root(residual, begin, jac=jacobian, method="hybr", options={"xtol": 1e-12})
    if not answer.success:
        answer = root(residual, begin, jac=jacobian, method="lm", options={"xtol": 1e-14, "ftol": 1e-14})
    assert np.abs(answer.fun).max() < 1e-6
    assert answer.x[: rival.pipes] * 1e-3 == pytest.approx(
        solution.pipe_flow, abs=1e-6 * solution.source_flow[0]
    )
