"""Density and viscosity of water at atmospheric pressure, 0 to 100 °C.

Only water has a correlation here. Antifreeze needs density and viscosity from its maker: published tables
of mixtures differ by volume and weight basis, and none of viscosity is carried.

References
----------
.. [1] Kell (1975), J. Chem. Eng. Data 20, 97: density of water at 1 atm (coefficients from memory; checked
   against handbook values at ten temperatures).
.. [2] IAPWS SR6-08 (2011), liquid water at 0.1 MPa: viscosity (coefficients from memory; checked against
   handbook values). Stated uncertainty 1 %.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from supplycheck.hydraulics.numbers import Number, plain, within

ZERO_CELSIUS: Final = 273.15
_LOW: Final = ZERO_CELSIUS
_HIGH: Final = ZERO_CELSIUS + 100.0
_KELL: Final = (999.83952, 16.945176, -7.9870401e-3, -46.170461e-6, 105.56302e-9, -280.54253e-12)
_KELL_BELOW: Final = 16.879850e-3
_IAPWS: Final = ((280.68e-6, -1.9), (511.45e-6, -7.7), (61.131e-6, -19.6), (0.45903e-6, -40.0))


def water_density(*, temperature: Number) -> tuple[Number, Number]:
    """Return the density of water and its derivative with respect to the temperature.

    Parameters
    ----------
    temperature : 273.15 to 373.15. [K]

    Returns
    -------
    Density [kg/m³] and derivative [kg/m³/K], by Kell [1]_.

    Raises
    ------
    DomainError
        Temperature outside 0 … 100 °C.

    Examples
    --------
    >>> round(water_density(temperature=293.15)[0], 2)
    998.2
    """
    t = within("water temperature", "K", temperature, _LOW, _HIGH) - ZERO_CELSIUS
    top = np.polynomial.polynomial.polyval(t, _KELL)
    slope = np.polynomial.polynomial.polyval(t, np.polynomial.polynomial.polyder(_KELL))
    below = 1.0 + _KELL_BELOW * t
    return plain(top / below), plain((slope - top / below * _KELL_BELOW) / below)


def water_viscosity(*, temperature: Number) -> tuple[Number, Number]:
    """Return the dynamic viscosity of water and its derivative with respect to the temperature.

    Parameters
    ----------
    temperature : 273.15 to 373.15. [K]

    Returns
    -------
    Viscosity [Pa·s] and derivative [Pa·s/K], by the IAPWS sum of powers [2]_.

    Raises
    ------
    DomainError
        Temperature outside 0 … 100 °C.

    Examples
    --------
    >>> round(water_viscosity(temperature=293.15)[0] * 1e3, 3)
    1.002
    """
    t = within("water temperature", "K", temperature, _LOW, _HIGH) / 300.0
    value = sum((a * t**b for a, b in _IAPWS), start=np.zeros_like(t))
    slope = sum((a * b * t ** (b - 1.0) / 300.0 for a, b in _IAPWS), start=np.zeros_like(t))
    return plain(value), plain(slope)
