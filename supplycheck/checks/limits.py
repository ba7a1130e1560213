"""Published limits that the rules compare with, in SI, each with its source.

Factors are exact (NIST SP 811 (2008): inch, pound, gallon 231 in³, g_n 9.806 65 m/s²).
"""

from __future__ import annotations

import itertools
from types import MappingProxyType
from typing import Final

INCH: Final = 0.0254
FOOT: Final = 12 * INCH
PSI: Final = 0.45359237 * 9.80665 / INCH**2
BAR: Final = 1e5
LPM: Final = 1e-3 / 60
GPM: Final = 231 * INCH**3 / 60
YEAR_DAYS: Final = 365.25

MINIMUM_PRESSURE_NFPA: Final = 7 * PSI
"""NFPA 13 (from memory)."""

MINIMUM_PRESSURE_EN: Final = MappingProxyType(
    {"light": 0.70 * BAR, "ordinary": 0.35 * BAR, "high": 0.50 * BAR}
)
"""EN 12845: LH and high hazard from memory; OH 0.35 bar in a published OH3 example."""

COMPONENT_RATING: Final = MappingProxyType({"NFPA 13": 175 * PSI, "EN 12845": 12 * BAR})
"""Pressure that every component stands unless it is rated otherwise; both from memory."""

MAIN_FLOOR: Final = 20 * PSI
"""Residual to be kept in a main; common practice of utilities."""

DROP_NOW, DROP_OLD = 0.10, 0.25
"""NFPA 291: later editions (from memory) and the 2010 edition (25 % or the full demand)."""

PITOT_LOW, PITOT_HIGH = 10 * PSI, 30 * PSI
"""NFPA 291 (from memory): preferred readings on 2½ in outlets."""

PUMPER_DIAMETER: Final = 3.9 * INCH
"""A 4 in outlet may measure a little less."""

PUMPER_FACTORS: Final = ((2.0, 0.97), (3.0, 0.92), (4.0, 0.89), (5.0, 0.86), (6.0, 0.84), (7.0, 0.83))
"""NFPA 291: factor by pitot in psi, the last one for all above (0.83 also in a published example)."""

GAUGE_YEARS: Final = 1.0
"""NFPA 291 (from memory): gauges calibrated within the last 12 months."""

QUICK_CEILING: Final = 20 * FOOT
QUICK_HEADS: Final = 5
"""NFPA 13: 20 ft ceiling at most, five heads at least (20 ft: practitioners' list; rest from memory)."""

BALANCE_NFPA: Final = 0.5 * PSI
"""NFPA 13 (from memory): pressures at a junction agree within 0.5 psi."""

BALANCE_EN, BALANCE_FLOW_EN = 100.0, 0.1 * LPM
"""CEA 4001, p. 134, and EN 12845: 1 mbar and 0.1 L/min at each junction."""

BALANCE_FLOW_NFPA: Final = 0.1 * GPM
"""NFPA 13 has no figure; one unit of the last digit that reports print (common practice, no source)."""

CLOSEST_HEADS: Final = MappingProxyType({"NFPA 13": 6 * FOOT, "EN 12845": 2.0})
"""Least distance between heads without baffles; both standards from memory."""

DRY_STEEL_C: Final = 100.0
"""NFPA 13 (2019, 2022, from memory): black or galvanized steel in dry and preaction systems."""

DRY_FACTOR: Final = 1.3
"""NFPA 13: area of dry and double interlock preaction systems (1,500 to 1,950 ft², published)."""

PUMP_CHURN, PUMP_FLOW, PUMP_PRESSURE = 1.40, 1.5, 0.65
"""NFPA 20: churn at most 140 %, at least 65 % of rated pressure at 150 % of rated flow (Huggins)."""

SUCTION_MAIN, SUCTION_TANK = 0.0, -3 * PSI
"""NFPA 20: at 150 % of rated flow no less than 0 psi at the suction, −3 psi from a tank at its level."""

REFILL, REFILL_CURTAILED = 48 * 3600.0, 24 * 3600.0
"""UFC practice (2006): refilled within 48 h, or 24 h where operations would be curtailed meanwhile."""

ROUND_OFF: Final = 1e-6
"""Relative tolerance for what the solver meets exactly: a hundred times its own 1e-8, and a thousandth of
the last digit printed, so that a figure met on the nose is never failed for round-off."""

TYPED_LENGTH: Final = 0.005
"""Half of the hundredth of a foot or metre to which lengths and elevations are typed, both ends [m]."""


def published_pumper_factor(pitot: float) -> float | None:
    """Return the factor of a pumper outlet at ``pitot`` [Pa], ``None`` below 2 psi; straight between.

    >>> published_pumper_factor(10 * PSI)
    0.83
    """
    reading = pitot / PSI
    if reading < PUMPER_FACTORS[0][0]:
        return None
    for (low, first), (high, second) in itertools.pairwise(PUMPER_FACTORS):
        if reading <= high:
            return first + (second - first) * (reading - low) / (high - low)
    return PUMPER_FACTORS[-1][1]
