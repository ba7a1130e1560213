"""What the laws share: the type of their numbers and the checks on their arguments."""

from __future__ import annotations

from typing import Any, TypeVar

import numpy as np
from numpy.typing import NDArray

from supplycheck.errors import DomainError

FloatArray = NDArray[np.float64]
Number = TypeVar("Number", float, FloatArray)
"""A law answers in the shape of its first argument (scalar in, scalar out)."""

AnyNumber = float | FloatArray


def as_array(value: Any) -> FloatArray:
    """Return ``value`` as an array of floats, 0-dimensional for a scalar."""
    return np.asarray(value, dtype=np.float64)


def plain(value: Any) -> Any:
    """Return ``value`` as a Python float where it is a scalar, unchanged where it is an array."""
    return value.item() if value.ndim == 0 else value


def spread(value: Any, other: FloatArray) -> Any:
    """Return ``value`` in the broadcast shape of itself and ``other``, as :func:`plain` does."""
    return plain(np.broadcast_to(value, np.broadcast_shapes(np.shape(value), other.shape)))


def positive(name: str, unit: str, value: AnyNumber) -> FloatArray:
    """Return ``value`` as an array; :class:`DomainError` unless all of it is above 0 and finite."""
    array = as_array(value)
    if not np.all((array > 0) & (array < np.inf)):
        raise DomainError(
            f"{name} must be above 0{_unit(unit)}; found {_worst(array, array > 0)}{_unit(unit)}"
        )
    return array


def not_negative(name: str, unit: str, value: AnyNumber) -> FloatArray:
    """Return ``value`` as an array; :class:`DomainError` unless all of it is 0 or more and finite."""
    array = as_array(value)
    if not np.all((array >= 0) & (array < np.inf)):
        unit = _unit(unit)
        raise DomainError(f"{name} must be 0{unit} or more; found {_worst(array, array >= 0)}{unit}")
    return array


def within(name: str, unit: str, value: AnyNumber, low: float, high: float) -> FloatArray:
    """Return ``value`` as an array; :class:`DomainError` unless all of it is in ``low`` … ``high``."""
    array = as_array(value)
    inside = (array >= low) & (array <= high)
    if not np.all(inside):
        unit, found = _unit(unit), _worst(array, inside)
        raise DomainError(f"{name} must be from {low:g} to {high:g}{unit}; found {found}{unit}")
    return array


def _unit(unit: str) -> str:
    return f" {unit}" if unit else ""


def _worst(array: FloatArray, allowed: NDArray[np.bool_]) -> str:
    wrong = array[~(allowed & np.isfinite(array))]
    return f"{float(wrong.flat[0]):g}"
