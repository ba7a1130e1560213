"""The governing case once more by the project's second friction law, to be printed beside the first."""

from __future__ import annotations

import math
from dataclasses import replace

from supplycheck.cases.ground import Ground
from supplycheck.cases.loads import load_of, required_of, without_hose
from supplycheck.errors import NotConvergedError
from supplycheck.model import DemandCase
from supplycheck.network import build_network, solve_demand
from supplycheck.results.records import SecondLaw
from supplycheck.supply import compare


def by_second_law(ground: Ground, case: DemandCase) -> SecondLaw | None:
    """Return demand, supply and margin of ``case`` by the second law; ``None`` where there is none.

    Pipes, devices, fluid, outlets and supplies are those of the project; only the friction differs. Other
    placements are not tried by it, and the verdict does not rest on it. Without a solution the numbers
    are not finite, and the note says why.
    """
    law = ground.project.second_law
    if law is None:
        return None
    project = replace(ground.project, law=law, second_law=None)
    try:
        network = build_network(project.system, law=law, fluid=project.fluid)
        policy = project.criteria.velocity_pressure
        solution = solve_demand(
            network, load_of(project, case), required_of(case), ground.sources, velocity_pressure=policy
        )
    except NotConvergedError as error:
        nothing = math.nan
        return SecondLaw(law.name, nothing, nothing, nothing, nothing, None, None, f"no solution: {error}")
    found = compare(without_hose(project, case), solution, ground.curves, network)
    return SecondLaw(
        law.name,
        found.demand_flow,
        found.demand_pressure,
        found.available_pressure,
        found.margin,
        found.required,
        found.after_rule,
    )
