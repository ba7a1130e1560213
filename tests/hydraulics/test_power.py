"""The smooth odd power."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from supplycheck.hydraulics import KNEE, smooth_power

EXPONENTS = (1.85, 1.852, 2.0, 0.5, 1.0)


@pytest.mark.parametrize("exponent", EXPONENTS)
def test_equals_the_plain_power_beyond_the_knee(exponent: float) -> None:
    for q in (KNEE, 1e-5, 0.016, 3.0):
        assert smooth_power(q, exponent)[0] == pytest.approx(q**exponent, rel=1e-14)
        assert smooth_power(-q, exponent)[0] == pytest.approx(-(q**exponent), rel=1e-14)


@pytest.mark.parametrize("exponent", EXPONENTS)
def test_meets_itself_at_the_knee(exponent: float) -> None:
    below, above = np.nextafter(KNEE, 0), KNEE
    low, high = smooth_power(below, exponent), smooth_power(above, exponent)
    assert low[0] == pytest.approx(high[0], rel=1e-12)
    assert low[1] == pytest.approx(high[1], rel=1e-12)


@pytest.mark.parametrize("exponent", EXPONENTS)
def test_slope_at_zero_is_above_zero(exponent: float) -> None:
    value, slope = smooth_power(0.0, exponent)
    bend = (exponent - 1) / 2
    assert value == 0.0
    assert slope == pytest.approx((1 - bend) * KNEE ** (exponent - 1), rel=1e-14)
    assert slope > 0


@given(st.floats(-1, 1), st.floats(-1, 1), st.sampled_from(EXPONENTS))
def test_is_odd_and_increasing(first: float, second: float, exponent: float) -> None:
    a, b = smooth_power(first, exponent), smooth_power(second, exponent)
    assert smooth_power(-first, exponent) == (-a[0], a[1])
    if first < second:
        assert a[0] <= b[0]
    if first + 1e-9 < second:
        assert a[0] < b[0]
    assert a[1] > 0


def test_another_knee() -> None:
    assert smooth_power(1e-4, 2.0, knee=1e-3)[0] != pytest.approx(1e-8, rel=1e-3)
    assert smooth_power(1e-3, 2.0, knee=1e-3)[0] == pytest.approx(1e-6, rel=1e-14)
