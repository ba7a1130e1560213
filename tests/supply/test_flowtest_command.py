"""The flowtest command: numbers, remarks, and clear messages for bad values."""

from __future__ import annotations

import json

import pytest
from click.testing import CliRunner, Result

from supplycheck.cli import main

PRESSURES = ("--static", "80", "--residual", "47")
B1 = (*PRESSURES, "--outlet", "2.5 in, 0.90, 14 psi")


def run(*arguments: str) -> Result:
    return CliRunner().invoke(main, ["flowtest", *arguments])


def test_the_training_slide_on_one_screen() -> None:
    result = run(*B1, "--date", "2026-06-01", "--at-flow", "500")
    assert result.exit_code == 0
    lines = [" ".join(line.split()) for line in result.output.splitlines()]
    assert lines[0] == "Hydrant flow test of 2026-06-01"
    assert "Outlet 1 628.0 gpm 2.500 in, coefficient 0.90, pitot 14.0 psi" in lines
    assert "Residual 47.0 psi at 628.0 gpm" in lines
    # 628.0 (60/33)^(1/1.85) = 867.6 gpm; 80 − 33 (500/628)^1.85 = 58.4 psi, worked by hand.
    assert "Flow at 20.0 psi 867.6 gpm 1.38 × tested flow" in lines
    assert "Pressure at 500.0 gpm 58.4 psi inside the tested range" in lines
    assert "NFPA 291 class B orange, by the flow at 20 psi" in lines
    assert max(len(line) for line in result.output.splitlines()) <= 100


def test_json_holds_plain_numbers_in_the_chosen_units() -> None:
    us = json.loads(run(*B1, "--json").output)
    assert us["units"]["flow"] == "gpm"
    assert us["flow"] == pytest.approx(628.0, abs=0.05)
    assert us["drop_share"] == pytest.approx(33 / 80)
    metric = ("--static", "80 psi", "--residual", "47 psi", "--outlet", "2.5 in, 0.90, 14 psi")
    si = json.loads(run(*metric, "--units", "metric", "--json").output)
    assert si["flow"] == pytest.approx(us["flow"] * 3.785411784)
    assert si["flow_at_20_psi"] == pytest.approx(us["flow_at_20_psi"] * 3.785411784)
    assert si["class"] == us["class"]


def test_several_outlets_and_the_published_pumper_factor() -> None:
    outlets = ("--outlet", "4 in, 0.9, 10 psi", "--outlet", "2.5, smooth, 40")
    answer = json.loads(run(*PRESSURES, *outlets, "--pumper-factor", "table", "--json").output)
    flows = [outlet["flow"] for outlet in answer["outlets"]]
    # Practitioners' forum: 1127 and 1061 gpm, printed with 29.83.
    assert flows == pytest.approx([1127, 1061], abs=0.9)
    assert answer["flow"] == pytest.approx(sum(flows))


def test_a_small_drop_and_pitot_readings_are_remarked() -> None:
    result = run(
        "--static", "82", "--residual", "78", "--outlet", "2.5, 0.9, 40", "--outlet", "2.5, 0.9, 5"
    )
    assert "dropped by 4.9 % only; 10 % at least" in result.output
    assert "40.0 psi of outlet 1 is above the preferred 30.0 psi" in result.output
    assert "5.0 psi of outlet 2 is below the preferred 10.0 psi" in result.output


@pytest.mark.parametrize(
    ("arguments", "code", "message"),
    [
        (
            ("--static", "80", "--residual", "80", "--flow", "500"),
            3,
            "residual 80.0 psi is not below the static",
        ),
        (("--static", "80", "--residual", "90", "--flow", "500"), 3, "Check that the two are not swapped"),
        (
            (*PRESSURES, "--outlet", "2.5, 9, 14"),
            3,
            "coefficient of an outlet is 9",
        ),
        ((*PRESSURES, "--outlet", "4, 0.9, 10"), 2, "without a pumper factor"),
        ((*PRESSURES, "--outlet", "25, 0.9, 14"), 3, "25.000 in is larger than any outlet"),
        ((*PRESSURES, "--outlet", "2.5, 0.9, 81"), 3, "81.0 psi of outlet 1 is above the static 80.0 psi"),
        (("--static", "4010", "--residual", "400", "--flow", "900"), 3, "too high for a water main"),
        ((*PRESSURES, "--outlet", "2.5, 0.9"), 2, "has 2 parts"),
        ((*PRESSURES, "--outlet", "2,5, 0,9, 14"), 2, "decimals with a point"),
        ((*PRESSURES, "--outlet", "2.5, 0.9, 0"), 2, "is zero"),
        (
            (*PRESSURES, "--outlet", "2.5, round hole, 9"),
            2,
            "no outlet shape 'round hole'",
        ),
        (
            (*PRESSURES, "--outlet", "2.5 psi, 0.9, 9"),
            2,
            "is a pressure, not a size",
        ),
        (
            ("--static", "x", "--residual", "47", "--flow", "500"),
            2,
            "'x': cannot be read as a pressure",
        ),
        ((*PRESSURES, "--flow", "500 psi"), 2, "is a pressure, not a flow"),
        ((*PRESSURES, "--flow", "-5"), 2, "is negative"),
        (("--static", "1e400", "--residual", "47", "--flow", "5"), 2, "not a finite number"),
        (("--static", "80", "--residual", "47"), 2, "Missing --flow or --outlet"),
        (("--static", "80", "--flow", "500"), 2, "Missing --residual"),
        (("--residual", "47", "--flow", "500"), 2, "--static"),
        ((*B1, "--flow", "500"), 2, "either --flow or --outlet"),
        ((*B1, "--date", "1 June"), 2, "--date '1 June': is not a day"),
        ((*B1, "--point", "60"), 2, "has 1 parts"),
    ],
)
def test_bad_values_have_clear_messages(arguments: tuple[str, ...], code: int, message: str) -> None:
    result = run(*arguments)
    assert result.exit_code == code
    assert message in result.output
    assert "Traceback" not in result.output
    assert result.exception is None or isinstance(result.exception, SystemExit)


def test_a_diffuser_by_its_k_factor_and_the_error_of_the_gauge() -> None:
    """Q = K√p: 160√16 = 640 gpm; 1 % of 200 psi is 2 psi, 6 % of 33 psi."""
    result = run(*PRESSURES, "--outlet", "2.5 in, k 160, 16 psi", "--gauge", "200 psi, 1", "--json")
    answer = json.loads(result.output)
    assert answer["flow"] == pytest.approx(640.0, rel=1e-9)
    shown = run(*PRESSURES, "--outlet", "2.5 in, k 160, 40 psi", "--gauge", "200 psi, 1").output
    assert "Diffuser 1" in shown and "preferred" not in shown
    assert "may be off by 2.0 psi, 6 % of the drop." in shown
    coarse = run("--static", "50", "--residual", "44", "--flow", "900", "--gauge", "300, 2").output
    assert "6.0 psi, 100 % of the drop: the test proves no curve" in coarse


@pytest.mark.parametrize(
    ("arguments", "says"),
    [
        (("--outlet", "2.5, k 160, 16, 0.9"), "is a diffuser with a pumper factor"),
        (("--outlet", "2.5, k 0, 16"), "is zero"),
        (("--flow", "600", "--gauge", "200 psi"), "has 1 parts"),
        (("--flow", "600", "--gauge", "200 psi, one"), "cannot be read"),
    ],
)
def test_diffusers_and_gauges_that_cannot_be_read(arguments: tuple[str, ...], says: str) -> None:
    result = run(*PRESSURES, *arguments)
    assert result.exit_code == 2 and says in " ".join(result.output.split())
