"""The `pipe` command: answers, units, JSON, wrong usage and no solution."""

from __future__ import annotations

import json
import re
from typing import Any

import pytest
from click.testing import CliRunner, Result
from hypothesis import given
from hypothesis import strategies as st

from supplycheck.cli import main

BASE = ["--length", "200", "--c-factor", "120"]


def run(*words: str) -> Result:
    result = CliRunner().invoke(main, ["pipe", *words])
    assert result.exception is None or isinstance(result.exception, SystemExit), result.exc_info
    return result


def answer(*words: str) -> dict[str, Any]:
    result = run(*words, "--json")
    assert result.exit_code == 0, result.output
    loaded: dict[str, Any] = json.loads(result.stdout)
    return loaded


def test_loss_in_us_units() -> None:
    # NFPA 13 annex sample calculation (from memory): 260.2 gpm in 3.068 in, 140 ft, 11.3 psi; the elevation
    # of 15 ft 6.5 psi; the sheet has 62.1 and 44.3 psi at the ends (printed to 0.1)
    found = answer(
        *("--flow", "260.2", "--diameter", "3.068", "--length", "119", "--equivalent-length", "21"),
        *("--rise", "15", "--start-pressure", "62.1", "--c-factor", "120"),
    )
    assert found["found"] == "loss"
    assert found["loss"]["total"] == pytest.approx(11.3, abs=0.05)
    assert found["elevation"] == pytest.approx(6.5, abs=0.05)
    assert found["end_pressure"] == pytest.approx(44.3, abs=0.05)
    assert found["units"]["pressure"] == "psi"


def test_any_number_may_carry_its_unit() -> None:
    # Çengel and Cimbala, example 8-3: 96.2 kPa for 6 L/s
    words = (
        *("--flow", "6 L/s", "--diameter", "50 mm", "--length", "60 m", "--roughness", "0.002 mm"),
        *("--density", "999 kg/m³", "--viscosity", "1.138 cP"),
    )
    metric = answer(*words, "--units", "metric")
    us = answer(*words, "--units", "us")
    assert metric["loss"]["total"] == pytest.approx(0.962, abs=0.0005)
    assert us["loss"]["total"] == pytest.approx(metric["loss"]["total"] / 0.0689475729, rel=1e-6)
    assert us["friction_factor"] == pytest.approx(metric["friction_factor"], rel=1e-12)


def test_fractions_and_feet_and_inches() -> None:
    first = answer("--flow", "30", "--diameter", "1 1/4", "--length", "10'-6\"", "--c-factor", "120")
    second = answer("--flow", "30", "--diameter", "1.25 in", "--length", "126 in", "--c-factor", "120")
    assert first["loss"]["total"] == pytest.approx(second["loss"]["total"], rel=1e-12)


def test_loss_as_a_head_of_the_fluid() -> None:
    # Çengel and Cimbala, example 8-4, find the diameter: 0.267 m for 20 m of air
    found = answer(
        *("--units", "metric", "--flow", "0.35 m³/s", "--loss", "20 m", "--length", "150"),
        *("--roughness", "0", "--density", "1.145", "--viscosity", "0.01895"),
    )
    assert found["found"] == "diameter"
    assert found["diameter"] == pytest.approx(267, abs=0.5)
    assert found["loss"]["head"] == pytest.approx(20, rel=1e-9)


def test_flow_into_a_jet() -> None:
    # Fox and McDonald, example 8.7: 350 gpm; f of two digits is worth 3 gpm
    words = (
        *("--from-reservoir", "--jet", "--rise", "-80", "--length", "680", "--diameter", "4"),
        *("--friction-factor", "0.031", "--minor-k", "0.248", "--temperature", "60"),
    )
    assert answer(*words)["flow"] == pytest.approx(350, abs=3.3)
    text = run(*words, "--steps").output
    assert text.startswith("Flow: ")
    assert "+ fall" in text and "− velocity pressure" in text
    assert len(re.findall(r"^  (?:enclose|narrow)\s+\d", text, re.MULTILINE)) == len(
        answer(*words)["steps"]
    )


def test_pump_between_reservoirs() -> None:
    # White's problem: 184.7 ft, 4.2 hp
    found = answer(
        *("--from-reservoir", "--to-reservoir", "--rise", "100", "--length", "400", "--diameter", "2"),
        *("--flow", "0.2 cfs", "--minor-k", "13.2", "--roughness", "0.00016667"),
        *("--density", "998.2 kg/m³", "--viscosity", "1.0", "--efficiency", "70%"),
    )
    assert found["found"] == "pump"
    assert found["pump"]["head"] == pytest.approx(184.7, abs=0.05)
    assert found["pump"]["fluid_power"] == pytest.approx(4.2, abs=0.05)
    assert found["pump"]["shaft_power"] == pytest.approx(found["pump"]["fluid_power"] / 0.7, rel=1e-12)


def test_pump_head_and_power_are_one_pump() -> None:
    ends = ("--from-reservoir", "--to-reservoir", "--minor-k", "1.5", "--diameter", "3", *BASE)
    by_head = answer(*ends, "--pump-head", "50", "--rise", "20")
    power = by_head["pump"]["fluid_power"]
    by_power = answer(*ends, "--pump-power", str(power / 0.8), "--efficiency", "0.8", "--rise", "20")
    assert by_power["flow"] == pytest.approx(by_head["flow"], rel=1e-9)
    assert by_head["pump"]["head"] == pytest.approx(50, rel=1e-9)


def test_next_larger_size() -> None:
    words = ("--flow", "250", "--loss", "10", "--material", "steel schedule 40", *BASE)
    found = answer(*words)
    # Schedule 40: 3 in 3.068, 3½ in 3.548 (published pipe charts)
    assert 3.068 < found["diameter"] < 3.548
    size = found["next_size"]
    assert (size["nominal"], size["diameter"]) == ("3 1/2", pytest.approx(3.548, rel=1e-9))
    assert size["loss"] < 10 and size["source"]
    assert "Next larger size: 3 1/2" in run(*words).output
    largest = run("--flow", "25000", "--loss", "1", "--material", "steel schedule 40", *BASE)
    assert "Next larger size: none" in largest.output


def test_size_and_c_from_the_catalogue() -> None:
    words = ("--flow", "100", "--length", "50", "--material", "steel schedule 40", "--size", "2")
    wet, dry = answer(*words, "--system", "wet"), answer(*words, "--system", "dry")
    # published table value for 100 gpm in 2 in at C 120: 0.094 psi/ft; dry steel has C 100
    assert wet["gradient"] == pytest.approx(0.094, abs=0.0005)
    assert dry["gradient"] == pytest.approx(wet["gradient"] * (120 / 100) ** 1.85, rel=1e-9)
    assert len(wet["sources"]) == 2
    darcy = answer(*words, "--law", "darcy-weisbach", "--temperature", "60")
    assert darcy["relative_roughness"] == pytest.approx(1.5e-4 * 12 / 2.067, rel=1e-6)


def test_fittings_as_written() -> None:
    # NFPA 13 equivalent lengths for 2 in: standard elbow 5 ft, tee 10 ft; at C 100 × (100/120)^1.85
    words = ("--flow", "100", "--length", "50", "--material", "steel schedule 40", "--size", "2")
    wet = answer(*words, "--system", "wet", "--fittings", "2 elbow 90; 1 tee")
    dry = answer(*words, "--system", "dry", "--fittings", "2 elbow 90; 1 tee")
    assert wet["equivalent_length"] == pytest.approx(20, rel=1e-9)
    assert dry["equivalent_length"] == pytest.approx(20 * (100 / 120) ** 1.85, rel=1e-9)
    # the loss of a fitting is the same whatever the C of the pipe
    assert dry["loss"]["equivalent_length"] == pytest.approx(wet["loss"]["equivalent_length"], rel=1e-9)
    own = answer(*words, "--system", "wet", "--fittings", "strainer = 20 ft; 2 entrance: k = 0.5")
    assert own["equivalent_length"] == pytest.approx(20, rel=1e-9)
    assert own["minor_k"] == pytest.approx(1.0, rel=1e-12)
    text = run(*words, "--system", "wet", "--fittings", "2 elbow 90; 1 tee").output
    assert re.search(r"fittings +2 elbow 90.*10\.00 ft", text)
    odd = run(*words, "--system", "wet", "--fittings", "2 elbw 90; 0 tee")
    assert odd.exit_code == 2
    assert "elbw 90" in odd.stderr and "0 tee" in odd.stderr


def test_assumptions_are_said() -> None:
    assert answer("--flow", "100", "--diameter", "2", *BASE)["assumptions"]
    assert "Assumed: water at" in run("--flow", "100", "--diameter", "2", *BASE).output
    assert answer("--flow", "100", "--diameter", "2", *BASE, "--temperature", "50")["assumptions"] == []


def test_the_printed_terms_add_up() -> None:
    found = answer(
        *("--diameter", "2", *BASE, "--rise", "10", "--pump-head", "30", "--jet"),
        *("--from-reservoir", "--minor-k", "2", "--equivalent-length", "7"),
    )
    taken = found["loss"]["total"] + found["elevation"] + found["velocity_pressure_lost"]
    assert found["pressure_drop"] + found["pump"]["pressure"] == pytest.approx(taken, abs=1e-9 * taken)
    parts = found["loss"]["pipe"] + found["loss"]["equivalent_length"] + found["loss"]["minor"]
    assert found["loss"]["total"] == pytest.approx(parts, rel=1e-12)


def test_no_solution() -> None:
    words = ("--start-pressure", "10", "--end-pressure", "5", "--rise", "20", "--diameter", "2", *BASE)
    result = run(*words)
    assert result.exit_code == 4
    assert "No solution: nothing drives the flow" in result.stderr
    assert max(map(len, result.stderr.splitlines())) < 100
    # 20 ft × 0.433 psi/ft
    assert "8.660 psi" in result.stderr
    as_json = run(*words, "--json")
    assert as_json.exit_code == 4
    assert json.loads(as_json.stdout)["found"] is None


@pytest.mark.parametrize(
    ("words", "message"),
    [
        ((), "give at least --length"),
        (("--flow", "100", "--diameter", "2", "--length", "50"), "--c-factor"),
        (("--flow", "100", *BASE), "to find the diameter"),
        (("--diameter", "2", "--start-pressure", "50", *BASE), "nothing is said of the end"),
        (BASE, "give --flow or --diameter"),
        (("--flow", "100 psi", "--diameter", "2", *BASE), "psi is a pressure, not a flow"),
        (("--flow", "a lot", "--diameter", "2", *BASE), "--flow"),
        (("--flow", "-5", "--diameter", "2", *BASE), "is negative"),
        (("--flow", "0", "--diameter", "2", *BASE), "is zero"),
        (("--flow", "nan", "--diameter", "2", *BASE), "--flow"),
        (("--flow", "1e400", "--diameter", "2", *BASE), "--flow"),
        (("--flow", "100", "--diameter", "2", "--loss", "5", *BASE), "nothing is left to find"),
        (("--flow", "100", "--diameter", "2", "--law", "darcy-weisbach", *BASE), "does not go with"),
        (("--flow", "1", "--diameter", "2", "--length", "9", "--roughness", "0"), "depends on the fluid"),
        (
            ("--flow", "1", "--diameter", "2", "--roughness", "1e-4", *BASE),
            "give one of --c-factor and --roughness",
        ),
        (("--flow", "1", "--diameter", "2", "--temperature", "300", *BASE), "0 to 100 °C"),
        (("--flow", "1", "--diameter", "2", "--viscosity", "2", *BASE), "--density as well"),
        (("--flow", "1", "--size", "2", *BASE), "--size needs --material"),
        (("--flow", "1", "--diameter", "2", "--system", "wet", *BASE), "--system looks up C"),
        (("--flow", "1", "--loss", "2", "--fittings", "1 tee", *BASE), "--fittings needs the size"),
        (("--flow", "1", "--material", "cheese", "--size", "2", *BASE), "cheese"),
        (("--flow", "1", "--loss", "5", "--material", "cheese", *BASE), "cheese"),
        (("--flow", "1", "--material", "steel schedule 40", "--size", "7", *BASE), "no size '7'"),
        (("--diameter", "2", "--loss", "5", "--pump-power", "2", *BASE), "--efficiency"),
        (("--diameter", "2", "--loss", "5", "--efficiency", "70", *BASE), "write 0.7 or 70%"),
        (("--diameter", "2", "--jet", "--end-pressure", "5", *BASE), "--end-pressure"),
        (("--diameter", "2", "--jet", "--to-reservoir", *BASE), "--to-reservoir"),
        (("--diameter", "2", "--loss", "5 gpm", *BASE), "--loss"),
        (("--diameter", "2", "--loss", "5", "--form", "us", "--length", "9", "--roughness", "0"), "--form"),
    ],
)
def test_wrong_usage(words: tuple[str, ...], message: str) -> None:
    result = run(*words)
    assert result.exit_code == 2
    assert message in " ".join(result.stderr.split())


TEXTS = st.one_of(
    st.sampled_from(
        ["0", "1", "2.067", "1e-9", "1e9", "-3", "nan", "inf", "1e400", "", " ", "5 psi", "20 m"]
    ),
    st.sampled_from(
        ["10'-6\"", "1 1/4 in", "1/0", "70%", "6 L/s", "½", "١", "5,000", "2 hp", "60 °F", "0x10"]
    ),
    st.text(max_size=8),
)
NUMBERS = [
    *("--flow", "--diameter", "--size", "--material", "--loss", "--start-pressure", "--end-pressure"),
    *("--length", "--c-factor", "--roughness", "--friction-factor", "--minor-k", "--equivalent-length"),
    *("--rise", "--pump-head", "--pump-power", "--efficiency", "--temperature", "--density", "--viscosity"),
    *("--system", "--fittings"),
]
FLAGS = ["--from-reservoir", "--to-reservoir", "--jet", "--steps", "--json"]


@given(
    st.dictionaries(st.sampled_from(NUMBERS), TEXTS, max_size=8),
    st.sets(st.sampled_from(FLAGS)),
    st.sampled_from(["us", "metric"]),
)
def test_nothing_typed_ends_in_a_traceback(numbers: dict[str, str], flags: set[str], units: str) -> None:
    words = [f"{name}={text}" for name, text in numbers.items()] + sorted(flags) + ["--units", units]
    assert run(*words).exit_code in {0, 2, 4}


SENSIBLE = {
    "--flow": "100",
    "--diameter": "2",
    "--length": "50",
    "--c-factor": "120",
    "--loss": "5",
    "--start-pressure": "50",
    "--end-pressure": "20",
}


@given(
    st.sets(st.sampled_from(sorted(SENSIBLE)), min_size=4),
    st.dictionaries(st.sampled_from(NUMBERS), TEXTS, max_size=2),
    st.sets(st.sampled_from(FLAGS)),
)
def test_nor_does_one_odd_option_among_good_ones(
    good: set[str], odd: dict[str, str], flags: set[str]
) -> None:
    numbers = {name: SENSIBLE[name] for name in sorted(good)} | odd
    result = run(*(f"{name}={text}" for name, text in numbers.items()), *sorted(flags))
    assert result.exit_code in {0, 2, 4}
    if result.exit_code == 0 and "--json" in flags:
        assert "NaN" not in result.stdout and "Infinity" not in result.stdout


def test_help_names_every_option_once() -> None:
    text = run("--help").output
    for option in ("--flow", "--loss", "--c-factor", "--minor-k", "--jet", "--steps", "--json"):
        assert len(re.findall(rf"^  {option}\b", text, re.MULTILINE)) == 1
