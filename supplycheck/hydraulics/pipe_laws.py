"""The friction law of one pipe as a small record: Hazen-Williams, Darcy-Weisbach or a given factor."""

from __future__ import annotations

import math
from dataclasses import dataclass

from supplycheck.hydraulics.darcy_weisbach import darcy_weisbach_gradient
from supplycheck.hydraulics.hazen_williams import hazen_williams_gradient
from supplycheck.hydraulics.numbers import positive


@dataclass(frozen=True, slots=True)
class HazenWilliams:
    """Hazen-Williams: C [-] and the three numbers of its published form in SI."""

    c_factor: float
    coefficient: float
    flow_exponent: float
    bore_exponent: float

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

    def gradient(self, *, flow: float, bore: float, density: float, viscosity: float | None) -> float:
        """Return the friction loss for each metre [Pa/m]."""
        del viscosity
        factor = float(positive("friction factor", "", self.friction_factor))
        speed = 4.0 * flow / (math.pi * bore**2)
        return factor * density * speed * abs(speed) / (2.0 * bore)


PipeLaw = HazenWilliams | DarcyWeisbach | ConstantFactor
