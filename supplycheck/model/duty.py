"""Duties beside sprinklers: standpipes, hydrants, fixed outflows. What is asked, what was found. All SI."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from supplycheck.findings import Place
from supplycheck.model.system import Origin

StandpipeKind = Literal["risers", "horizontal", "with sprinklers"]
HydrantKind = Literal["hydrants", "maximum day", "with sprinklers", "valve shut"]


@dataclass(frozen=True, slots=True)
class RegulatingDevice:
    """A pressure-regulating device at hose outlets: its outlet pressure [Pa] by inlet pressure [Pa].

    ``inlet``/``outlet`` hold while water flows, ``static_inlet``/``static_outlet`` at no flow (empty
    where not given). Between the rows the table is straight; outside its rows it says nothing.
    """

    tag: str
    inlet: tuple[float, ...]
    outlet: tuple[float, ...]
    static_inlet: tuple[float, ...]
    static_outlet: tuple[float, ...]
    source: str
    place: Place | None = None


@dataclass(frozen=True, slots=True)
class StandpipeOutlet:
    """A hose outlet: its node, its size [m], the pressure it needs [Pa], its regulating device."""

    node: str
    size: float
    required_pressure: float
    device: str | None = None


@dataclass(frozen=True, slots=True)
class Riser:
    """A standpipe with its outlets, those of a vertical one from the top down."""

    tag: str
    outlets: tuple[StandpipeOutlet, ...]
    horizontal: bool = False
    place: Place | None = None


@dataclass(frozen=True, slots=True)
class StandpipeDuty:
    """What standpipes must give; flows [m³/s], pressures [Pa].

    The most remote riser gives ``outlet_flow`` at each of its two topmost outlets, every further one
    ``outlet_flow`` at its topmost, until ``greatest_flow`` is reached; a horizontal one with three or
    more outlets gives ``horizontal_flow``. ``regulating_pressure`` is the pressure at an outlet above
    which a regulating device is asked. ``connection`` is the node of the fire department connection.
    ``added_flows`` flow at the same time; ``counts`` names the kinds of case that the verdict rests on.
    """

    risers: tuple[Riser, ...]
    sprinklered: bool
    outlet_flow: float
    greatest_flow: float
    horizontal_flow: float
    regulating_pressure: float
    devices: tuple[RegulatingDevice, ...]
    connection: str | None
    added_flows: tuple[tuple[str, float], ...]
    counts: tuple[StandpipeKind, ...]
    source: str
    place: Place | None = None


@dataclass(frozen=True, slots=True)
class FireFlow:
    """The required fire flow [m³/s] for ``duration`` [s], and where it comes from.

    ``table_flow`` is the figure of the table before the ``reduction`` (a fraction) for sprinklers and
    its ``floor``; with ``origin`` ``"given"`` there is none.
    """

    flow: float
    duration: float | None
    origin: Origin
    source: str
    construction: str = ""
    area: float | None = None
    edition: str = ""
    table_flow: float | None = None
    reduction: float = 0.0
    floor: float | None = None


@dataclass(frozen=True, slots=True)
class Hydrant:
    """A private hydrant at its node; ``device`` gives the loss of lateral and body that are not drawn."""

    tag: str
    node: str
    device: str | None = None
    location: str = ""
    place: Place | None = None


@dataclass(frozen=True, slots=True)
class HydrantDuty:
    """What the hydrants of a private main must give; flows [m³/s], pressures [Pa].

    ``at_once`` hydrants share the fire flow; none is asked for more than ``greatest_each``.
    ``residual`` is the pressure kept at every flowing hydrant and at ``highest_point``. ``valves`` are
    pipes that may be shut, one at a time; ``maximum_day`` is drawn by node on the day of greatest use.
    ``hydrants_asked`` is the number that the code asks for this flow.
    """

    hydrants: tuple[Hydrant, ...]
    fire_flow: FireFlow
    at_once: int
    greatest_each: float
    residual: float
    highest_point: str | None
    valves: tuple[str, ...]
    maximum_day: tuple[tuple[str, float], ...]
    counts: tuple[HydrantKind, ...]
    place: Place | None = None
    hydrants_asked: int | None = None
    asked_source: str = ""


@dataclass(frozen=True, slots=True)
class OutflowDuty:
    """Fixed outflows where a project asks for nothing else.

    ``drawn`` are the nodes that draw; ``unstated`` those of them that state no minimum pressure: they
    are asked for 0 Pa.
    """

    drawn: tuple[str, ...]
    unstated: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class OutletState:
    """A fixed outlet in a case, with the supply as it is.

    ``pressure`` [Pa] is at its node, ``required`` what it needs there, ``flow`` [m³/s] what it gives.
    """

    name: str
    node: str
    flow: float
    pressure: float
    required: float

    @property
    def spare(self) -> float:
        """What is left at the node beyond what it needs [Pa]."""
        return self.pressure - self.required


@dataclass(frozen=True, slots=True)
class DutyRow:
    """One demand case beside the others; flows [m³/s], pressures [Pa].

    ``required_pressure`` is at the point of comparison (at the first source where a shut valve cuts that
    off), ``margin`` what the supply has more there at ``flow``; NaN where the case has no solution, which
    ``note`` explains. ``counts`` says whether the verdict rests on it, ``tried`` how many cases of the same
    sort this one is the hardest of. ``outlets`` is the state with the supply as it is.
    """

    duty: str
    kind: str
    label: str
    counts: bool
    flow: float
    required_pressure: float
    margin: float
    governing: str
    governing_by: str
    tried: int
    outlets: tuple[OutletState, ...]
    closed_pipes: tuple[str, ...] = ()
    note: str = ""


@dataclass(frozen=True, slots=True)
class HydrantRow:
    """One hydrant by itself; flows [m³/s], pressures [Pa] at its outlet after lateral and body.

    ``static`` without flow; ``share`` is what it gives when the required number flows at once, ``alone``
    what is asked of it alone, with ``residual_alone`` left. ``greatest_flow`` leaves exactly the residual
    asked (at it, or at the highest point: ``limited_by``); 0 where even no flow leaves that, ``None``
    where nothing limits it or it could not be worked out (``note``); ``greatest_on_maximum_day``
    is the same with the maximum-day demand drawn. ``rank`` and ``colour`` are its class by NFPA 291.
    """

    tag: str
    node: str
    location: str
    static: float
    alone: float
    residual_alone: float
    share: float
    greatest_flow: float | None
    greatest_on_maximum_day: float | None
    limited_by: str
    device_loss: float
    device_in_range: bool
    rank: str
    colour: str
    source: str
    note: str = ""


@dataclass(frozen=True, slots=True)
class StandpipeRow:
    """One hose outlet; pressures [Pa]: at no flow before and after its regulating device, as needed.

    ``after_device`` is ``None`` where there is no device or its table does not reach so far.
    ``needed_at_node`` is what its inlet needs so that ``required`` is left (``None``: the device never
    gives it). ``lowest_flowing`` is the lowest pressure at its node in the cases in which it flows.
    """

    riser: str
    node: str
    size: float
    required: float
    needed_at_node: float | None
    no_flow: float
    device: str
    after_device: float | None
    over_limit: bool
    lowest_flowing: float | None


@dataclass(frozen=True, slots=True)
class ConnectionRow:
    """What the fire department connection must be fed: ``pressure`` [Pa] at its node, ``flow`` [m³/s]."""

    node: str
    pressure: float
    flow: float
    case: str
    governing: str
    note: str = ""


@dataclass(frozen=True, slots=True)
class DutyAnswer:
    """All that was found for the duties of a project beside its sprinklers."""

    rows: tuple[DutyRow, ...] = ()
    hydrants: tuple[HydrantRow, ...] = ()
    standpipes: tuple[StandpipeRow, ...] = ()
    connection: ConnectionRow | None = None
