"""The fluid in the pipes and the friction law of the project."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal


@dataclass(frozen=True, slots=True)
class Fluid:
    """Density [kg/m³], dynamic viscosity [Pa·s] and unit weight [Pa/m] of the fluid.

    ``unit_weight`` is kept apart from the density because the trade rounds it: 0.433 psi/ft under
    NFPA 13, 0.098 bar/m under EN 12845.
    """

    name: str
    density: float
    viscosity: float
    unit_weight: float
    temperature: float | None
    source: str


@dataclass(frozen=True, slots=True)
class FrictionLaw:
    """A friction law in one of its published forms.

    For Hazen-Williams the loss per length is
    ``coefficient · q**flow_exponent / (C**flow_exponent · bore**bore_exponent)`` [Pa/m] with q in m³/s
    and bore in m; ``coefficient`` is the published number converted by exact factors.
    For Darcy-Weisbach the three numbers are zero.
    """

    family: Literal["hazen-williams", "darcy-weisbach"]
    name: str
    coefficient: float
    flow_exponent: float
    bore_exponent: float
    source: str


_PSI: Final = 0.45359237 * 9.80665 / 0.0254**2
_GPM: Final = 231 * 0.0254**3 / 60

HW_US: Final = FrictionLaw(
    "hazen-williams",
    "Hazen-Williams, 4.52 Q^1.85 / (C^1.85 d^4.87) psi/ft",
    4.52 * (_PSI / 0.3048) / _GPM**1.85 * 0.0254**4.87,
    1.85,
    4.87,
    "NFPA 13 (from memory; cross-checked with the annex sample calculation)",
)
HW_METRIC: Final = FrictionLaw(
    "hazen-williams",
    "Hazen-Williams, 6.05e5 Q^1.85 / (C^1.85 d^4.87) bar/m",
    6.05e5 * 1e5 * 60000.0**1.85 * 0.001**4.87,
    1.85,
    4.87,
    "BS EN 12845:2004, 13.2.1",
)
HEAD_FORM_WEIGHT: Final = 9810.0
"""Unit weight [Pa/m] that turns the metres of the head form into pressure."""
HEAD_FORM: Final = FrictionLaw(
    "hazen-williams",
    "Hazen-Williams, 10.67 Q^1.852 / (C^1.852 D^4.871) m/m",
    10.67 * HEAD_FORM_WEIGHT,
    1.852,
    4.871,
    "water-works head form; several secondary sources, unit weight 9.81 kPa/m",
)
DARCY: Final = FrictionLaw(
    "darcy-weisbach",
    "Darcy-Weisbach with the Colebrook friction factor",
    0.0,
    2.0,
    5.0,
    "Colebrook (1939), J. Inst. Civ. Eng. 11",
)
