"""Equivalent lengths of fittings: the corrections for C and for bore, and to and from K.

A table gives the length at C 120 and at the bore of its reference pipe (Schedule 40 in NFPA 13). For
another C it is multiplied by (C/120)^1.85, for another bore by (bore/reference bore)^4.87, so that the
fitting keeps its loss at a given flow.

References
----------
.. [1] NFPA 13, equivalent pipe lengths, table of multipliers for C (0.713, 1.16, 1.33, 1.51 printed) and
   the factor for the bore (from memory; the annex sample calculation uses both: 21 ft become 27.6).
"""

from __future__ import annotations

from typing import Any, Final

from supplycheck.hydraulics.numbers import AnyNumber, not_negative, plain, positive

REFERENCE_C: Final = 120.0


def c_multiplier(*, c_factor: AnyNumber, reference_c: float = REFERENCE_C) -> Any:
    """Return (C/reference)^1.85 [-]; the table's own C is 120.

    Raises
    ------
    DomainError
        C not above 0.

    Examples
    --------
    >>> [round(c_multiplier(c_factor=c), 3) for c in (100, 120, 130, 140, 150)]
    [0.714, 1.0, 1.16, 1.33, 1.511]
    """
    c = positive("C-factor", "", c_factor)
    return plain((c / positive("reference C", "", reference_c)) ** 1.85)


def bore_factor(*, bore: AnyNumber, reference_bore: AnyNumber) -> Any:
    """Return (bore/reference bore)^4.87 [-], both in the same unit.

    Raises
    ------
    DomainError
        A bore not above 0.
    """
    d = positive("bore", "m", bore)
    return plain((d / positive("reference bore", "m", reference_bore)) ** 4.87)


def equivalent_length(
    *, table_length: AnyNumber, c_factor: AnyNumber, bore: AnyNumber, reference_bore: AnyNumber
) -> Any:
    """Return the equivalent length [m] of a fitting after both corrections.

    Parameters
    ----------
    table_length : Length as the table prints it, for C 120 and ``reference_bore``. [m]
    c_factor : C of the pipe. [-]
    bore, reference_bore : Inside diameters of the pipe and of the table's pipe. [m]

    Raises
    ------
    DomainError
        Length negative; C or a bore not above 0.
    """
    length = not_negative("table length", "m", table_length)
    factor = c_multiplier(c_factor=c_factor) * bore_factor(bore=bore, reference_bore=reference_bore)
    return plain(length * factor)


def k_of_length(*, length: AnyNumber, bore: AnyNumber, friction_factor: AnyNumber) -> Any:
    """Return the loss coefficient K = f·Le/D [-] of an equivalent length [m].

    Raises
    ------
    DomainError
        Length negative, bore or friction factor not above 0.
    """
    f = positive("friction factor", "", friction_factor)
    return plain(f * not_negative("length", "m", length) / positive("bore", "m", bore))


def length_of_k(*, minor_k: AnyNumber, bore: AnyNumber, friction_factor: AnyNumber) -> Any:
    """Return the equivalent length Le = K·D/f [m] of a loss coefficient.

    Raises
    ------
    DomainError
        K negative, bore or friction factor not above 0.
    """
    f = positive("friction factor", "", friction_factor)
    return plain(not_negative("loss coefficient", "", minor_k) * positive("bore", "m", bore) / f)
