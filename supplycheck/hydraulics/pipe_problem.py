"""A one-pipe problem and its answer.

The balance of energy from start to end, all in pressure [Pa]::

    drop + pump = friction + minor + rise · unit weight + kinetic · ½·ρ·v²

``drop`` is the gauge pressure at the start less that at the end. ``kinetic`` is 1 where still water
leaves as a jet (or enters a pipe whose pressure is read beyond the entrance), −1 where a pipe ends in
still water, 0 where both ends are alike; the losses of entrance and exit belong in ``minor_k``.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from supplycheck.errors import DomainError
from supplycheck.hydraulics.pipe_laws import PipeLaw
from supplycheck.hydraulics.pump import pressure_from_power

Unknown = Literal["loss", "flow", "diameter", "pump"]
Start = Literal["pipe", "reservoir"]
End = Literal["pipe", "reservoir", "jet"]
Regime = Literal["laminar", "transition", "turbulent"]


@dataclass(frozen=True, slots=True)
class OnePipe:
    """A one-pipe problem; what is ``None`` is not known.

    ``law`` friction law; ``length`` and ``equivalent_length`` of its fittings [m]; ``density`` [kg/m³];
    ``unit_weight`` [Pa/m], ρ·g or what a standard prints; ``viscosity`` [Pa·s], needed by
    Darcy-Weisbach; ``flow`` [m³/s]; ``bore`` [m]; ``drop`` pressure at the start less pressure at the
    end [Pa]; ``loss`` friction and minor loss alone [Pa], an alternative to ``drop``; ``rise`` of the
    end above the start [m]; ``minor_k`` sum of the loss coefficients [-]; ``start``/``end`` what is
    there; ``pump_pressure`` [Pa] or shaft ``pump_power`` [W] with ``efficiency`` [-] of a pump between.
    """

    law: PipeLaw
    length: float
    density: float
    unit_weight: float
    viscosity: float | None = None
    flow: float | None = None
    bore: float | None = None
    drop: float | None = None
    loss: float | None = None
    rise: float = 0.0
    minor_k: float = 0.0
    equivalent_length: float = 0.0
    start: Start = "pipe"
    end: End = "pipe"
    pump_pressure: float | None = None
    pump_power: float | None = None
    efficiency: float | None = None

    @property
    def kinetic(self) -> int:
        """Velocity pressures that the fluid carries away at the end more than it brought [-]."""
        return int(self.end != "reservoir") - int(self.start != "reservoir")

    @property
    def has_pump(self) -> bool:
        """True where a pump is given by its pressure or its power."""
        return self.pump_pressure is not None or self.pump_power is not None

    @property
    def unknown(self) -> Unknown:
        """What is to be found; :class:`DomainError` where too little or too much is known."""
        ends = self.drop is not None or self.loss is not None
        if self.drop is not None and self.loss is not None:
            raise DomainError("give either the loss or the pressures at the ends, not both")
        if self.flow is None and self.bore is None:
            raise DomainError("both flow and diameter are missing; give one of them")
        if self.flow is None or self.bore is None:
            missing: Unknown = "flow" if self.flow is None else "diameter"
            if not ends:
                raise DomainError(f"to find the {missing}, give the loss or the pressures at the ends")
            return missing
        if not ends:
            return "loss"
        if self.loss is not None or self.has_pump:
            raise DomainError(
                "flow, diameter, loss or end pressures are all given: nothing is left to find"
            )
        return "pump"

    def pump_at(self, flow: float) -> float:
        """Return the pressure [Pa] that the given pump adds at ``flow`` [m³/s]; 0 without a pump."""
        if self.pump_power is None:
            return 0.0 if self.pump_pressure is None else self.pump_pressure
        efficiency = 1.0 if self.efficiency is None else self.efficiency
        return pressure_from_power(flow=flow, power=self.pump_power, efficiency=efficiency)[0]

    @property
    def driving_pressure(self) -> float:
        """Pressure [Pa] free for losses and velocity before a pump given by power adds to it."""
        if self.loss is not None:
            return self.loss
        pump = 0.0 if self.pump_pressure is None else self.pump_pressure
        return (self.drop or 0.0) + pump - self.rise * self.unit_weight


@dataclass(frozen=True, slots=True)
class Step:
    """One trial of the search: the flow [m³/s] or bore [m] tried and what was left over [Pa].

    ``imbalance`` above 0: the trial loses more than there is.
    """

    phase: Literal["enclose", "narrow"]
    trial: float
    imbalance: float


@dataclass(frozen=True, slots=True)
class OnePipeResult:
    """The solved pipe; pressures [Pa], flow [m³/s], bore [m], velocity [m/s], power [W].

    ``loss`` = ``pipe_loss`` (length) + ``fitting_loss`` (equivalent length) + ``minor_loss`` (K).
    ``drop`` + ``pump_pressure`` = ``loss`` + ``elevation`` + ``kinetic``. ``fluid_power`` is what the
    fluid receives, ``pump_power`` at the shaft (``None`` without an efficiency). For Hazen-Williams the
    friction factor is the equivalent one, computed back from the loss.
    """

    problem: OnePipe
    found: Unknown
    flow: float
    bore: float
    velocity: float
    velocity_pressure: float
    reynolds: float | None
    regime: Regime | None
    relative_roughness: float | None
    friction_factor: float
    gradient: float
    pipe_loss: float
    fitting_loss: float
    minor_loss: float
    loss: float
    elevation: float
    kinetic: float
    drop: float
    pump_pressure: float
    fluid_power: float
    pump_power: float | None
    steps: tuple[Step, ...]
    remarks: tuple[str, ...]
