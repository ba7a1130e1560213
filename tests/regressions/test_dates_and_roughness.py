"""A date in another order, and a roughness in another unit, once got no help, or passed in silence."""

from __future__ import annotations

from pathlib import Path

import pytest
from project_texts import LAYOUT_PROJECT, faults

from supplycheck.findings import Fault

METRIC = LAYOUT_PROJECT.replace('units = "us"', 'units = "metric"')


def dated(written: str) -> str:
    return LAYOUT_PROJECT.replace("date = 2026-06-01", f"date = {written}")


def rough(written: str, material: str = "steel schedule 40", text: str = LAYOUT_PROJECT) -> str:
    old = 'material = "steel schedule 40"'
    assert old in text
    return text.replace(old, f'material = "{material}"\nroughness = {written}')


def only(found: list[Fault]) -> Fault:
    assert len(found) == 1, "\n".join(map(str, found))
    return found[0]


@pytest.mark.parametrize(
    "written", ["08/12/2026", '"08/12/2026"', "08-12-2026", '"8.12.2026"', "8.12.2026"]
)
def test_day_and_month_that_may_be_exchanged(tmp_path: Path, written: str) -> None:
    fault = only(faults(tmp_path, dated(written)))
    assert fault.problem == "is not a date as it must be written"
    assert "12 August" in fault.remedy and "8 December" in fault.remedy
    assert "2026-08-12" in fault.remedy and "2026-12-08" in fault.remedy
    assert "the order of day and month" in fault.remedy
    assert "TOML" not in str(fault) and "backslash" not in str(fault)


@pytest.mark.parametrize(
    "written",
    [
        "13/06/2026",
        '"06/13/2026"',
        "2026/06/13",
        '"13 June 2026"',
        '"June 13, 2026"',
        '"13. Jun. 2026"',
        "13.6.2026",
    ],
)
def test_a_date_that_can_be_read_one_way_only(tmp_path: Path, written: str) -> None:
    fault = only(faults(tmp_path, dated(written)))
    assert fault.remedy == "write 2026-06-13"


def test_a_year_of_two_digits(tmp_path: Path) -> None:
    fault = only(faults(tmp_path, dated("08/12/26")))
    assert "2026-08-12" in fault.remedy and "2026-12-08" in fault.remedy and "four digits" in fault.allowed


def test_the_same_day_and_month_is_no_riddle(tmp_path: Path) -> None:
    assert only(faults(tmp_path, dated("06/06/2026"))).remedy == "write 2026-06-06"


@pytest.mark.parametrize("written", ["2026-02-30", '"2026-02-30"', '"30/02/2026"', '"soon"'])
def test_what_is_no_day_at_all(tmp_path: Path, written: str) -> None:
    fault = only(faults(tmp_path, dated(written)))
    assert "2026-06-01" in fault.allowed
    assert ("no day" in fault.problem) == ("soon" not in written)
    assert "write" not in fault.remedy and "TOML" not in str(fault)


def test_a_comment_or_another_key_behind_the_date(tmp_path: Path) -> None:
    for written in ("08/12/2026 # as on the form", "08/12/2026   "):
        assert "2026-08-12" in only(faults(tmp_path, dated(written))).remedy
    inline = LAYOUT_PROJECT.replace(
        '[supply.margin]\nrule = "none"', '[supply]\nmargin = { rule = "none" }\nsubmittal_date = 1.2.2026'
    )
    assert "2026-01-02" in faults(tmp_path, inline)[0].remedy


def test_other_faults_of_form_keep_their_words(tmp_path: Path) -> None:
    fault = only(faults(tmp_path, LAYOUT_PROJECT.replace("static = 72", "static = 7 2")))
    assert "is not TOML" in fault.problem


@pytest.mark.parametrize(
    ("written", "hints"),
    [
        ("0.0018", ("0.0018 ft", '"0.0018 in"')),
        ("0.0457", ("0.0457 ft", '"0.0457 mm"')),
        ("0.045", ("0.045 ft", '"0.045 mm"')),
        ("0.01", ("0.01 ft",)),
        ('"5 mm"', ("5 mm", "0.0018 in", "0.045 mm")),
        ('"0.1 in"', ("0.1 in", "at most 0.052 in")),
    ],
)
def test_a_roughness_that_no_pipe_has(tmp_path: Path, written: str, hints: tuple[str, ...]) -> None:
    """Commercial steel: 0.00015 ft is 0.0018 in and 0.046 mm (roughness table, lmnoeng; exact factors)."""
    fault = only(faults(tmp_path, rough(written)))
    assert fault.place.where == "pipe.lines.roughness"
    for hint in hints:
        assert hint in str(fault), fault


@pytest.mark.parametrize(
    "written", ["0.00015", "0.0005", '"0.0018 ft"', '"0.0018 in"', '"0.045 mm"', "0.003", "0"]
)
def test_a_roughness_that_a_pipe_may_have(tmp_path: Path, written: str) -> None:
    """From the catalogue's steel to old and tuberculated pipe; a unit that is written is meant."""
    assert faults(tmp_path, rough(written)) == []


def test_a_metric_roughness_in_inches_or_metres(tmp_path: Path) -> None:
    text = METRIC.replace("k_factor = 5.6", "k_factor = 80").replace("static = 72", "static = 5")
    text = text.replace("residual = 60", "residual = 4").replace("head_spacing = 13", "head_spacing = 4")
    text = text.replace("line_spacing = 10", "line_spacing = 3").replace(
        "first_head = 6.5", "first_head = 2"
    )
    assert faults(tmp_path, rough("0.045", text=text)) == []
    inches = only(faults(tmp_path, rough("0.0018", text=text)))
    assert '"0.0018 in"' in inches.remedy and "0.0018 mm" in inches.found
    metres = only(faults(tmp_path, rough("0.000045", text=text)))
    assert '"4.5e-05 m"' in metres.remedy


def test_a_roughness_of_more_than_a_twentieth_of_the_bore(tmp_path: Path) -> None:
    """A relative roughness above 0.05 lies off the chart of friction factors (Moody 1944, from memory).

    Schedule 40 of 1 in has a bore of 1.049 in, a twentieth of it is 0.0525 in.
    """
    fault = only(faults(tmp_path, rough('"0.06 in"')))
    assert fault.place.where == "pipe.lines.roughness"
    assert "0.052 in" in fault.allowed and "1.049 in" in fault.allowed
    assert faults(tmp_path, rough('"0.05 in"')) == []
