"""Fire pumps made by hand for the rules: 500 gpm at 100 psi on a main of 30 psi at the suction."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

from supplycheck.supply.needed import NeededPump
from supplycheck.supply.pump import PumpOption, PumpRating
from supplycheck.supply.pumping import PumpAnswer, PumpState
from supplycheck.units import GPM, PSI


def state(name: Any, gpm: float, suction: float, net: float, main: float = 40) -> PumpState:
    """Return a state from gpm and psi."""
    flow = gpm * GPM
    return PumpState(
        name, flow, suction * PSI, net * PSI, (suction + net) * PSI, main * PSI, flow / (500 * GPM)
    )


STATES = (
    state("demand", 420, 34, 104),
    state("actual supply", 480, 33, 101),
    state("150 % of rated flow", 750, 30, 70, 36),
)
ANSWER = PumpAnswer(
    tag="pump",
    title="fire pump",
    source="maker",
    pipe="R",
    inlet="B",
    outlet="T",
    fed_by="S",
    from_tank=False,
    arrangement="one pump",
    from_limits=False,
    rating=PumpRating(500 * GPM, 100 * PSI),
    churn=120 * PSI,
    net_at_rated=100 * PSI,
    net_at_overload=70 * PSI,
    curve_end=750 * GPM,
    highest_suction=50 * PSI,
    highest_discharge=170 * PSI,
    states=STATES,
    drawn_before=0.0,
    lines=(),
    points=(),
)


def pumps(**changes: Any) -> dict[str, Any]:
    """Return the change of a context to one pump with ``changes``."""
    return {"pumps": (replace(ANSWER, **changes),)}


def with_state(place: int, changed: PumpState, **changes: Any) -> dict[str, Any]:
    """Return the change to one pump of which the state at ``place`` is ``changed``."""
    return pumps(states=(*STATES[:place], changed, *STATES[place + 1 :]), **changes)


OPTION = PumpOption(PumpRating(400 * GPM, 30 * PSI), 0.9, 25 * PSI, True)
NEEDED = NeededPump("S", "", 360 * GPM, 40 * PSI, 30 * PSI, 30 * PSI, 20 * PSI, (OPTION,))
