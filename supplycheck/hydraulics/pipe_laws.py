"""The friction law of one pipe as a small record: Hazen-Williams, Darcy-Weisbach or a given factor."""

from __future__ import annotations

import math
from dataclasses import dataclass

from supplycheck.hydraulics.darcy_weisbach import darcy_weisbach_gradient
from supplycheck.hydraulics.hazen_williams import hazen_williams_gradient
from supplycheck.hydraulics.numbers import not_negative, positive, within


@dataclass(frozen=True, slots=True)
class HazenWilliams:
    """Hazen-Williams: C [-] and the three numbers of its published form in SI.

    Raises :class:`DomainError` where the coefficient is out of any range, as its two companions do.
    """

    c_factor: float
    coefficient: float
    flow_exponent: float
    bore_exponent: float

    def __post_init__(self) -> None:
        positive("C-factor", "", self.c_factor)
        within("C-factor", "", self.c_factor, 1e-3, 1e6)

    def gradient(self, *, flow: float, bore: float, density: float, viscosity: float | None) -> float:
        """Return the friction loss for each metre [Pa/m]; the fluid plays no part."""
        del density, viscosity
        return hazen_williams_gradient(
            flow=flow,
            bore=bore,
            c_factor=self.c_factor,
            coefficient=self.coefficient,
            flow_exponent=self.flow_exponent,
            bore_exponent=self.bore_exponent,
        )[0]


@dataclass(frozen=True, slots=True)
class DarcyWeisbach:
    """Darcy-Weisbach with the Colebrook factor for an absolute roughness [m]."""

    roughness: float

    def __post_init__(self) -> None:
        within("roughness", "m", not_negative("roughness", "m", self.roughness), 0.0, 1e3)

    def gradient(self, *, flow: float, bore: float, density: float, viscosity: float | None) -> float:
        """Return the friction loss for each metre [Pa/m]."""
        mu = float(positive("viscosity", "Pa·s", math.nan if viscosity is None else viscosity))
        return darcy_weisbach_gradient(
            flow=flow, bore=bore, roughness=self.roughness, density=density, viscosity=mu
        )[0]


@dataclass(frozen=True, slots=True)
class ConstantFactor:
    """Darcy-Weisbach with a friction factor [-] that is given, as text-book problems often do."""

    friction_factor: float

    def __post_init__(self) -> None:
        positive("friction factor", "", self.friction_factor)
        within("friction factor", "", self.friction_factor, 1e-15, 1e6)

    def gradient(self, *, flow: float, bore: float, density: float, viscosity: float | None) -> float:
        """Return the friction loss for each metre [Pa/m]."""
        del viscosity
        speed = 4.0 * flow / (math.pi * bore**2)
        return self.friction_factor * density * speed * abs(speed) / (2.0 * bore)


PipeLaw = HazenWilliams | DarcyWeisbach | ConstantFactor
