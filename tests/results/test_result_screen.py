"""The answer on one screen."""

from __future__ import annotations

from dataclasses import replace

import pytest
from sample_result import MARKUP_TITLE, findings, sample

from supplycheck.findings import Finding, Measure
from supplycheck.results.display import counts_text, fill, in_order, measure_text, tags_text, visible
from supplycheck.results.screen import COLUMNS, LINES, screen_text
from supplycheck.units import METRIC, PSI, US


@pytest.mark.parametrize("units", ["us", "metric"])
@pytest.mark.parametrize("verdict", ["adequate", "not adequate", "undetermined"])
def test_fits_one_screen_without_colour(units: str, verdict: str) -> None:
    text = screen_text(sample(units, verdict=verdict, title=MARKUP_TITLE), ["result.json", "review.pdf"])
    assert len(text.splitlines()) <= LINES
    assert all(len(line) <= COLUMNS for line in text.splitlines())
    assert "\x1b" not in text
    assert f"{verdict.upper()} (for the values entered):" in text


def test_says_demand_supply_margin_and_files() -> None:
    text = screen_text(sample(), ["review.pdf"])
    for wanted in ("58.3 psi at BOR, 612.4 gpm in all", "66.1 psi", "+7.8 psi", "+2.8 psi", "review.pdf"):
        assert wanted in text
    assert "Fails       age of the flow test" in text
    assert "Open        Which edition" in text


def test_what_does_not_fit_is_counted() -> None:
    many = sample()
    fails = tuple(replace(findings()[1], check=f"check {number}") for number in range(30))
    text = screen_text(replace(many, findings=fails, open_questions=tuple(f"q{n}?" for n in range(30))))
    assert len(text.splitlines()) <= LINES
    assert text.count("more in the report") == 2
    assert "30 outside a limit" in text


@pytest.mark.parametrize("count", [1, 4, 9, 16])
def test_all_that_is_outside_a_limit_is_named_above(count: int) -> None:
    """The README promises it; at 24 to 28 letters a name, sixteen of them take five lines of 96."""
    names = [f"a check with a long name {number}" for number in range(count)]
    text = f"The supply carries the demand. But outside a limit: {', '.join(names)}; read that first."
    fails = tuple(replace(findings()[1], check=name) for name in names)
    shown = screen_text(replace(sample(), verdict_text=text, findings=fails), ["review.pdf"])
    assert len(shown.splitlines()) <= LINES
    assert f"{', '.join(names)}; read that first." in " ".join(shown.split("\n\n")[0].split())


def test_long_words_do_not_break_the_screen() -> None:
    text = screen_text(replace(sample(title="x" * 300), governs="y" * 400, verdict_text="z " * 400))
    assert len(text.splitlines()) <= LINES
    assert all(len(line) <= COLUMNS for line in text.splitlines())


def test_no_rule_is_said_so() -> None:
    result = sample()
    bare = replace(result, margin=replace(result.margin, required=None, after_rule=None))
    assert "no rule given" in screen_text(bare)


def test_filling_does_not_read_what_it_filled_in() -> None:
    finding = Finding("c", "ok", "{measured} {tag} {limit}", Measure(7 * PSI, "pressure"))
    assert fill(finding.text, finding, US) == "7.0 psi {tag} –"
    assert fill("{heads}", Finding("c", "ok", "", values={"heads": Measure(12, "count")}), METRIC) == "12"


def test_findings_show_what_needs_action_first() -> None:
    states = [finding.state for finding in in_order(findings())]
    assert states == ["fail", "missing", "ask authority", "ok", "not applicable"]
    assert counts_text(()) == "no check was run"


def test_only_what_was_held_against_a_limit_is_within_one() -> None:
    kept = Finding("a", "ok", "", Measure(7.0, "pressure"), Measure(8.0, "pressure"))
    no_limit, not_measured = replace(kept, limit=None), replace(kept, measured=None)
    assert counts_text([kept, kept]) == "2 within a limit"
    assert counts_text([kept, no_limit, not_measured]) == "1 within a limit, 2 in order (no limit to keep)"


def test_small_words() -> None:
    assert measure_text(None, US) == "–"
    assert tags_text([str(n) for n in range(20)], 3) == "0, 1, 2 and 17 more"
    assert visible("a\u00a0b\nc") == r"a b\nc"
