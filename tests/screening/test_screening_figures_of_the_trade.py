"""Many tests at once against published figures and hand-worked lines.

Sources
-------
"NFPA 13 hydraulic calculations" training slides: static 80, residual 47, pitot 14, c 0.90, 2½ in, 628 gpm.
A practitioners' forum, thread on flow-test modifiers: 2½ in, c .9, 40 psi is 1061 gpm; 4 in pumper outlet,
c .9, 10 psi, factor .83 is 1127 gpm; the same without its factor 1358; 1178 with the coefficient left out.
NFPA 291 (from memory): Q at 20 psi = Q ((S − 20)/(S − R))^0.54; classes 1500, 1000, 500 gpm.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from screening_files import HEAD, SLIDE, screened

from supplycheck.screening.records import RATING_PRESSURE
from supplycheck.screening.reduce import flow_at
from supplycheck.supply import curve_through
from supplycheck.units import GPM, PSI


def test_the_training_slide(tmp_path: Path) -> None:
    result, (row,) = screened(tmp_path, f"{HEAD}\n{SLIDE}\n")
    assert result.exit_code == 0
    # 628.0 with 29.84, printed to 0.1.
    assert float(row["flow [gpm]"]) == pytest.approx(628.0, abs=0.05)
    # 0.54 against 1/1.85 is 0.03 % over (60/33); 628.0 × (60/33)^0.54 = 867.1.
    assert float(row["flow_at_20_psi [gpm]"]) == pytest.approx(628.0 * (60 / 33) ** 0.54, rel=5e-4)
    assert float(row["drop [%]"]) == pytest.approx(100 * 33 / 80)
    assert (row["class"], row["colour"]) == ("B", "orange")
    assert row["required_met"] == "not asked"


@pytest.mark.parametrize(
    ("outlet", "printed"),
    [
        ("2.5,0.9,40,", 1061.0),
        ("4,0.9,10,0.83", 1127.0),
        ("4,0.9,10,table", 1127.0),
        ("4,0.9,10,1", 1358.0),
    ],
)
def test_forum_outlets(tmp_path: Path, outlet: str, printed: float) -> None:
    _, (row,) = screened(tmp_path, f"{HEAD},pumper_factor\nH-1,2026-06-01,80,47,{outlet}\n")
    # Printed to 1 gpm with 29.83, which is 0.034 % below 29.84.
    assert float(row["flow [gpm]"]) == pytest.approx(printed, abs=0.5 + 0.00034 * printed)


def test_a_flow_with_its_coefficient_left_out_is_noticed(tmp_path: Path) -> None:
    head = f"{HEAD},flow"
    _, (wrong, right) = screened(
        tmp_path, f"{head}\nA,2026-06-01,80,47,2.5,0.9,40,1178\nB,2026-06-01,80,47,2.5,0.9,40,1061\n"
    )
    assert "flow differs from readings" in wrong["findings"]
    assert "flow differs" not in right["findings"]
    assert wrong["flow [gpm]"] == right["flow [gpm]"]


@pytest.mark.parametrize(
    ("flow", "grade"),
    [("1500", "AA"), ("1499.9", "A"), ("1000", "A"), ("999.9", "B"), ("500", "B"), ("499.9", "C")],
)
def test_classes_change_at_the_published_flows(tmp_path: Path, flow: str, grade: str) -> None:
    # With a residual of 20 psi the flow of the test is the flow at 20 psi.
    _, (row,) = screened(tmp_path, f"hydrant,static,residual,flow\nH-1,60,20,{flow}\n")
    assert row["class"] == grade


def test_two_outlets_are_added(tmp_path: Path) -> None:
    head = f"{HEAD},diameter_2,coefficient_2,pitot_2"
    _, (row,) = screened(tmp_path, f"{head}\nH-1,2026-06-01,80,47,2.5,0.9,40,2.5,0.90,14\n")
    assert float(row["flow [gpm]"]) == pytest.approx(1061.4 + 628.0, abs=0.7)


def test_shapes_have_the_published_coefficients(tmp_path: Path) -> None:
    words = ("smooth", "square and sharp")
    lines = [f"H-{at},2026-06-01,80,47,2.5,{word},14" for at, word in enumerate(words)]
    _, (smooth, square) = screened(tmp_path, "\n".join([HEAD, *lines, ""]))
    # NFPA 291: 0.90 and 0.80.
    ratio = float(square["flow [gpm]"]) / float(smooth["flow [gpm]"])
    assert ratio == pytest.approx(0.80 / 0.90)


def test_metric_rows_among_us_ones_tell_the_same(tmp_path: Path) -> None:
    """One test in psi and inches, in bar and millimetres, and with a unit in each cell."""
    text = (
        "hydrant,units,static,residual,diameter,coefficient,pitot,required_flow\n"
        "A,us,80,47,2.5,0.9,14,500\n"
        "B,metric,5.515805834534,3.240535927789,63.5,0.9,0.965266021043,1892.7058920\n"
        "C,metric,80 psi,47 psi,2 1/2 in,0.9,14 psi,500 gpm\n"
    )
    _, (us, metric, cells) = screened(tmp_path, text)
    for other in (metric, cells):
        for name, value in us.items():
            if name not in ("hydrant", "row"):
                same = pytest.approx(float(value), rel=1e-9) if "[" in name else value
                assert (float(other[name]) if "[" in name else other[name]) == same, name
    _, answer = screened(tmp_path, text, "--units", "metric")
    assert float(answer[0]["flow [L/min]"]) == pytest.approx(float(us["flow [gpm]"]) * 3.785411784)
    assert float(answer[0]["static [bar]"]) == pytest.approx(80 * 0.0689475729317831)


def test_a_unit_in_the_heading_holds_for_its_column(tmp_path: Path) -> None:
    text = "hydrant,static [bar],residual [kPa],flow [L/s]\nH-1,5.515805834534,324.0535927789,39.621\n"
    _, (row,) = screened(tmp_path, text)
    assert float(row["static [psi]"]) == pytest.approx(80, rel=1e-9)
    assert float(row["residual [psi]"]) == pytest.approx(47, rel=1e-9)
    assert float(row["flow [gpm]"]) == pytest.approx(628.0, abs=0.05)  # 39.621 L/s × 15.8503


@given(
    static=st.floats(25, 150),
    share=st.floats(0.05, 0.95),
    flow=st.floats(50, 5000),
    pressure=st.floats(0, 160),
)
def test_many_at_once_agree_with_the_curve_of_one(
    static: float, share: float, flow: float, pressure: float
) -> None:
    """The vectors against the supply curve that the other commands use: same law, other code."""
    curve = curve_through("H", "gauge", static * PSI, [(flow * GPM, share * static * PSI)])
    one = np.array([static * PSI]), np.array([share * static * PSI]), np.array([flow * GPM])
    (many,) = flow_at(*one, pressure * PSI)
    # Both invert a difference of pressures; near static its rounding (1e-16 of 150 psi) grows by the root.
    assert many == pytest.approx(curve.flow_at(pressure * PSI), rel=1e-9, abs=1e-8 * flow * GPM)


def test_no_flow_where_static_is_not_above_the_pressure() -> None:
    static = np.array([15.0, 20.0, 25.0]) * PSI
    flows = flow_at(static, static - 5 * PSI, np.full(3, GPM), RATING_PRESSURE)
    assert flows[0] == flows[1] == 0.0
    assert flows[2] == pytest.approx(GPM)


@pytest.mark.parametrize(
    ("row", "finding"),
    [
        ("82,78,2.5,0.9,21", "drop under 10 %"),  # 4.9 %
        ("80,66,2.5,0.9,20", "drop under 25 %"),  # 17.5 %
        ("60,40,2.5,0.9,9.9", "pitot under 10 psi"),
        ("90,60,2.5,0.9,30.1", "pitot over 30 psi"),
        ("34,20,2.5,0.9,36", "pitot above static"),
        ("52,19,2.5,0.9,14", "residual below 20 psi"),
        ("19,12,2.5,0.9,11", "static below 20 psi"),
        ("310,200,2.5,0.9,25", "unlikely reading"),
        ("80,47,63.5,0.9,14", "unlikely reading"),
    ],
)
def test_findings_on_one_test(tmp_path: Path, row: str, finding: str) -> None:
    large = ",1" if "63.5" in row else ","
    _, (answer,) = screened(tmp_path, f"{HEAD},pumper_factor\nH-1,2026-06-01,{row}{large}\n")
    assert finding in answer["findings"].split("; ")


def test_a_sound_test_has_no_finding(tmp_path: Path) -> None:
    _, rows = screened(tmp_path, f"{HEAD}\nA,2026-06-01,80,60,2.5,0.9,10\nB,2026-06-01,80,60,2.5,0.9,30\n")
    # 25 % of drop and readings of 10 and 30 psi lie within what NFPA 291 asks.
    assert [row["findings"] for row in rows] == ["", ""]


def test_dates(tmp_path: Path) -> None:
    days = ("2021-11-20", "2021-11-19", "2026-11-21", "")
    text = "\n".join([HEAD, *(f"H-{at},{day},80,47,2.5,0.9,14" for at, day in enumerate(days)), ""])
    result, rows = screened(tmp_path, text, "--maximum-age", "60")
    # Sixty months before 2026-11-20 is 2021-11-20, which is not older than that.
    assert [row["findings"] for row in rows] == ["", "stale test", "test in the future", "no date"]
    assert "Not checked" not in result.output
    result, rows = screened(tmp_path, text)
    assert "stale test" not in rows[1]["findings"]
    assert "Not checked: the age of the tests" in result.output


def test_required_flow_by_row_and_for_all(tmp_path: Path) -> None:
    head = f"{HEAD},required_flow"
    # 867.6 gpm at 20 psi and 744.2 at 35: 628 (45/33)^(1/1.85), worked by hand.
    text = f"{head}\n{SLIDE},860\n{SLIDE.replace('H-1', 'H-2')},870\n{SLIDE.replace('H-1', 'H-3')},\n"
    result, rows = screened(tmp_path, text)
    assert [row["required_met"] for row in rows] == ["yes", "no", "not asked"]
    assert result.exit_code == 1
    assert "1 of 2 hydrants do not give their required flow at 20.0 psi" in result.output
    result, rows = screened(tmp_path, text, "--required-flow", "500")
    assert [row["required_met"] for row in rows] == ["yes", "no", "yes"]
    at_35, slide = ("--at-pressure", "35 psi", "--required-flow"), f"{HEAD}\n{SLIDE}\n"
    result, rows = screened(tmp_path, slide, *at_35, "740")
    assert (result.exit_code, rows[0]["required_met"]) == (0, "yes")
    available = 628.04 * (45 / 33) ** (1 / 1.85)
    assert float(rows[0]["available_flow [gpm]"]) == pytest.approx(available, rel=1e-4)
    result, rows = screened(tmp_path, slide, *at_35, "750")
    assert (result.exit_code, rows[0]["required_met"]) == (1, "no")
    assert "required beyond tested" in rows[0]["findings"]
