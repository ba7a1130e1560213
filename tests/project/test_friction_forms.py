"""The published forms of Hazen-Williams by name, and the unit weight that goes with the head form."""

from __future__ import annotations

from pathlib import Path

import pytest
from duty_projects import HEAD, written

from supplycheck.model import FrictionLaw, Project
from supplycheck.project import read_project
from supplycheck.project.faults import ProjectFaultsError
from supplycheck.units import BAR, FOOT, GPM, INCH, PSI

NODES = ["S,0,supply", "B,0,outlet,,400"]
PIPES = ["p,S,B,100,4"]
US, METRIC, HEAD_FORM = (f"hazen-williams {form}" for form in ("4.52 us", "6.05e5 metric", "10.67 head"))


def project(folder: Path, law: str, standard: str = "NFPA 13 (2022)", more: str = "") -> Project:
    text = f'c_factor = 120\n[criteria]\nhazard = "none"\nfriction_law = "{law}"\n{more}'
    top, rest = HEAD.replace("NFPA 13 (2022)", standard).split("[network]")
    return read_project(written(folder, "[network]" + rest, NODES, PIPES, top=top + text))


def gradient(law: FrictionLaw, flow: float, bore: float) -> float:
    """Return the loss [Pa/m] at C 120."""
    power = law.flow_exponent
    return float(law.coefficient * flow**power / (120**power * bore**law.bore_exponent))


@pytest.mark.parametrize("standard", ["NFPA 13 (2022)", "EN 12845 (2015)"])
@pytest.mark.parametrize("law", [US, METRIC, HEAD_FORM])
def test_the_form_is_the_one_named_under_either_standard(tmp_path: Path, law: str, standard: str) -> None:
    """Each published formula in its own units: gpm, in, psi/ft; L/min, mm, bar/m; m³/s, m, m/m."""
    found = gradient(project(tmp_path, law, standard).law, 500 * GPM, 4.026 * INCH)
    litres, millimetres = 500 * GPM * 60000, 4.026 * 25.4
    printed = {
        US: 4.52 * 500**1.85 / (120**1.85 * 4.026**4.87) * PSI / FOOT,
        METRIC: 6.05e5 * litres**1.85 / (120**1.85 * millimetres**4.87) * BAR,
        HEAD_FORM: 10.67 * (500 * GPM) ** 1.852 / (120**1.852 * (4.026 * INCH) ** 4.871) * 9810,
    }
    assert found == pytest.approx(printed[law], rel=1e-12)


@pytest.mark.parametrize(("standard", "law"), [("NFPA 13 (2022)", US), ("EN 12845 (2015)", METRIC)])
def test_the_short_name_is_the_form_of_the_standard(tmp_path: Path, standard: str, law: str) -> None:
    for name in ("short", "long"):
        (tmp_path / name).mkdir()
    short = project(tmp_path / "short", "hazen-williams", standard)
    assert short.law == project(tmp_path / "long", law, standard).law


def test_the_head_form_brings_its_unit_weight_and_says_so(tmp_path: Path) -> None:
    found = project(tmp_path, HEAD_FORM)
    assert found.fluid.unit_weight == 9810.0
    told = {one.key: one for one in found.assumptions}["fluid: unit weight"]
    assert "9.81 kPa/m" in told.value and "heights" in told.value
    assert told.origin == "assumed"


def test_a_density_that_is_given_stays(tmp_path: Path) -> None:
    """1000 kg/m³ at standard gravity, 9.80665 m/s²."""
    found = project(tmp_path, HEAD_FORM, more='[fluid]\ndensity = "1000 kg/m³"\n')
    assert found.fluid.unit_weight == pytest.approx(9806.65, rel=1e-12)


def test_the_same_law_twice_is_a_fault_by_either_name(tmp_path: Path) -> None:
    with pytest.raises(ProjectFaultsError) as caught:
        project(tmp_path, "hazen-williams", more=f'second_law = "{US}"\n')
    assert "criteria.second_law: is the same as friction_law" in str(caught.value)
