"""The network: arrays, exact reduction, Newton, demand and operating solutions, diagnosis."""

from supplycheck.network.arrays import Network, build_network
from supplycheck.network.records import DemandSummary, LoadCase, Solution, SourceCurve
from supplycheck.network.search import demand_many
from supplycheck.network.solve import solve_demand, solve_operating
from supplycheck.network.walk import NotApplicableError, WalkBack, WalkStep, walk_back

__all__ = [
    "DemandSummary",
    "LoadCase",
    "Network",
    "NotApplicableError",
    "Solution",
    "SourceCurve",
    "WalkBack",
    "WalkStep",
    "build_network",
    "demand_many",
    "solve_demand",
    "solve_operating",
    "walk_back",
]
