"""Names and nominal sizes as people write them."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from supplycheck.catalogue import fold, in_dn, in_inches, normalise_nominal
from supplycheck.catalogue.tables import split_standard, table
from supplycheck.errors import DomainError

SIZES = [(row["nominal_in"], row["nominal_dn"]) for row in table("nominal_sizes")]
VULGAR = {"1/4": "¼", "1/2": "½", "3/4": "¾"}


@pytest.mark.parametrize("inch", [inch for inch, _ in SIZES])
def test_every_spelling_of_an_inch_size(inch: str) -> None:
    whole, _, part = inch.rpartition(" ") if " " in inch else ("", "", inch)
    value = float(whole or 0) + (int(part[0]) / int(part[2]) if "/" in part else float(part))
    spellings: list[str | float] = [
        inch,
        f" {inch} ",
        f'{inch}"',
        f"{inch} in",
        f"{inch} inch",
        f"NPS {inch}",
        f"{inch}″",
    ]
    spellings += [value, f"{value}", f"{value:g} in", inch.replace(" ", "-"), inch.replace(" ", "  ")]
    for plain, sign in VULGAR.items():
        if part == plain:
            spellings += [f"{whole}{sign}", f"{whole} {sign}", f'{whole}{sign}"']
    assert {normalise_nominal(text) for text in spellings} == {inch}


@pytest.mark.parametrize(("inch", "dn"), SIZES)
def test_every_spelling_of_a_metric_size(inch: str, dn: str) -> None:
    for text in (f"DN {dn}", f"DN{dn}", f"dn {dn}", f"{dn} mm", f"{dn}mm"):
        assert normalise_nominal(text) == f"DN {dn}"
        assert in_inches(text) == inch
        assert in_dn(text) == f"DN {dn}"
    assert normalise_nominal(dn) == normalise_nominal(int(dn)) == dn
    assert in_dn(dn) == in_dn(inch) == f"DN {dn}"


@pytest.mark.parametrize(
    ("text", "same"),
    [
        ("4/2", "2"),
        ("2.067", "2.067"),
        ("6/8", "3/4"),
        ("1/0", "1/0"),
        ("", ""),
        ("my  size", "my size"),
        (".5", "1/2"),
    ],
)
def test_unusual_sizes(text: str, same: str) -> None:
    assert normalise_nominal(text) == same


@given(st.text(max_size=30))
def test_any_text_is_taken_and_settles_at_once(text: str) -> None:
    once = normalise_nominal(text)
    assert normalise_nominal(once) == once
    assert fold(text) == " ".join(sorted(fold(text).split()))


@given(st.floats(allow_nan=True, allow_infinity=True))
def test_any_number_is_taken(value: float) -> None:
    assert isinstance(normalise_nominal(value), str)


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("NFPA 13 (2022)", ("NFPA 13", 2022)),
        ("NFPA 13-2007", ("NFPA 13", 2007)),
        ("NFPA 13", ("NFPA 13", None)),
        ("EN 12845:2004", ("EN 12845", 2004)),
        ("BS EN 12845:2004", ("EN 12845", 2004)),
        ("UFGS 13958N", ("UFGS 13958N", None)),
    ],
)
def test_standard_and_edition(text: str, expected: tuple[str, int | None]) -> None:
    assert split_standard(text) == expected


def test_an_edition_is_a_year() -> None:
    assert split_standard("NFPA 13 (2022)", 2016) == ("NFPA 13", 2016)
    with pytest.raises(DomainError, match="write the year"):
        split_standard("NFPA 13", "latest")
