"""Numbers as people write them. Expected values follow from the definitions of the units (NIST SP 811)."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from supplycheck.project.quantity import LARGEST, NumberError, read_number
from supplycheck.units import METRIC, US, UnitSet

FOOT = 0.3048
INCH = 0.0254


@pytest.mark.parametrize(
    ("text", "kind", "units", "expected"),
    [
        ("10'-6\"", "length", US, 10.5 * FOOT),
        ("10' 6\"", "length", METRIC, 10.5 * FOOT),
        ("10 ft 6 in", "length", METRIC, 10.5 * FOOT),
        ("10ft-6 1/2in", "length", US, (10 + 6.5 / 12) * FOOT),
        ("10′-6 1/2″", "length", US, (10 + 6.5 / 12) * FOOT),
        ("-4'-3\"", "length", US, -4.25 * FOOT),
        ("−4 ft", "length", US, -4 * FOOT),
        ("12'", "length", METRIC, 12 * FOOT),
        ("1 1/4", "size", US, 1.25 * INCH),
        ("1-1/4 in", "size", METRIC, 1.25 * INCH),
        ("3/4", "size", US, 0.75 * INCH),
        ("50", "size", METRIC, 0.05),
        ("8 in", "length", US, 8 * INCH),
        ("5.5 bar", "pressure", US, 550_000.0),
        ("80 psi", "pressure", METRIC, 80 * 6894.757293168361),
        ("1.5e3 mbar", "pressure", US, 150_000.0),
        ("20 L/s", "flow", US, 0.02),
        ("10 %", "percent", US, 0.1),
        ("1 h", "time", US, 3600.0),
        ("68 °F", "temperature", METRIC, 293.15),
        ("0.1 mm", "roughness", US, 1e-4),
        (2, "size", US, 2 * INCH),
    ],
)
def test_a_number_is_read_as_it_is_written(
    text: object, kind: str, units: UnitSet, expected: float
) -> None:
    assert read_number(text, kind, "any").si(units) == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize(
    ("value", "kind", "problem"),
    [
        (True, "pressure", "is not a pressure"),
        (None, "pressure", "is not a pressure"),
        ([1], "pressure", "is not a pressure"),
        (math.nan, "pressure", "not a finite number"),
        (math.inf, "pressure", "not a finite number"),
        (10**400, "pressure", "not a finite number"),
        ("1e400", "pressure", "not a finite number"),
        (1e300, "pressure", "too large"),
        (-1, "length", "is negative"),
        (0, "length", "is zero"),
        ("-10'-6\"", "length", "is negative"),
        ("0 ft", "length", "is zero"),
        ("1/0", "size", "divides by zero"),
        ("80 ft", "pressure", "the unit ft is a length, not a pressure"),
        ("80 psi", "length", "the unit psi is a pressure, not a length"),
        ("80 psj", "pressure", "cannot be read"),
        ("1,000", "flow", "cannot be read"),
        ("5,5", "pressure", "cannot be read"),
        ("ten", "flow", "cannot be read"),
        ("", "flow", "cannot be read"),
        ("10'-6\"-3", "length", "cannot be read"),
        ("١٢ ft 3 5", "length", "cannot be read"),
    ],
)
def test_a_wrong_number_is_refused(value: object, kind: str, problem: str) -> None:
    with pytest.raises(NumberError) as caught:
        read_number(value, kind)
    assert problem in caught.value.problem
    assert caught.value.allowed


def test_a_comma_gets_advice() -> None:
    with pytest.raises(NumberError) as caught:
        read_number("1,000", "flow")
    assert "without a separator" in caught.value.remedy


@given(st.integers(0, 500), st.integers(0, 11), st.integers(0, 15))
def test_feet_inches_and_sixteenths(feet: int, inches: int, sixteenths: int) -> None:
    written = read_number(f"{feet}'-{inches} {sixteenths}/16\"", "length", "any")
    assert written.si(US) == pytest.approx((feet * 12 + inches + sixteenths / 16) * INCH, abs=1e-12)


@given(st.text(max_size=30), st.sampled_from(["length", "size", "pressure", "flow", "ratio", "percent"]))
def test_any_text_is_a_number_or_a_fault(text: str, kind: str) -> None:
    try:
        number = read_number(text, kind, "any").number
    except NumberError as fault:
        assert fault.problem
    else:
        assert abs(number) <= LARGEST
