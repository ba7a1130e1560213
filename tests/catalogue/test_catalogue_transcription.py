"""The larger tables against a second transcription of their printed form, cell by cell."""

from __future__ import annotations

import re

import pytest

from supplycheck.catalogue.tables import table

# NFPA 13 table 23.4.3.1.1 (scribd 603305688): ft at C 120, sizes 1/2 to 12 in
NFPA_SIZES = "1/2|3/4|1|1 1/4|1 1/2|2|2 1/2|3|3 1/2|4|5|6|8|10|12"
NFPA = """
    elbow 45 | – | 1 | 1 | 1 | 2 | 2 | 3 | 3 | 3 | 4 | 5 | 7 | 9 | 11 | 13
    elbow 90 | 1 | 2 | 2 | 3 | 4 | 5 | 6 | 7 | 8 | 10 | 12 | 14 | 18 | 22 | 27
    long elbow 90 | .5 | 1 | 2 | 2 | 2 | 3 | 4 | 5 | 5 | 6 | 8 | 9 | 13 | 16 | 18
    tee | 3 | 4 | 5 | 6 | 8 | 10 | 12 | 15 | 17 | 20 | 25 | 30 | 35 | 50 | 60
    butterfly valve | – | – | – | – | – | 6 | 7 | 10 | – | 12 | 9 | 10 | 12 | 19 | 21
    gate valve | – | – | – | – | – | 1 | 1 | 1 | 1 | 2 | 2 | 3 | 4 | 5 | 6
    swing check valve | – | – | 5 | 7 | 9 | 11 | 14 | 16 | 19 | 22 | 27 | 32 | 45 | 55 | 65
"""
# CEA 4001 table G2 / EN 12845 table 23 (easymanua.ls p. 134; first column charter.daham.lk/35 or, marked R,
# from memory): m at C 120 by DN; ? stands where the copy is not legible
EN_FITTINGS = (
    "elbow 90",
    "long elbow 90",
    "elbow 45",
    "tee",
    "gate valve",
    "swing check valve",
    "mushroom check valve",
    "butterfly valve",
    "globe valve",
)
EN = """
    20 | .63 R | .30 | .34 | 1.25 | – | – | – | – | –
    25 | .77 S | .36 | .40 | 1.54 | – | – | – | – | –
    32 | 1.04 R | .49 | .55 | 2.13 | – | – | – | – | –
    40 | 1.22 R | .56 | .66 | 2.44 | – | – | – | – | –
    50 | 1.46 R | .69 | .76 | 2.91 | .38 | 2.42 | 12.0 | 2.19 | 16.4
    65 | 1.89 S | .88 | 1.02 | 3.81 | .51 | 3.18 | 18.9 | 2.86 | 21.6
    80 | 2.37 S | 1.10 | 1.27 | 4.75 | .63 | 3.94 | 19.7 | 3.55 | 26.8
    100 | 3.04 S | 1.43 | 1.61 | 6.10 | .81 | 5.07 | 25 | 4.56 | 34
    125 | ? | 1.72 | 1.96 | 7.36 | .97 | 6.12 | 30.6 | 5.47 | 41.6
    150 | 4.30 S | 2.00 | 2.30 | 8.61 | 1.13 | 7.17 | 35 | 6.38 | 48
    200 | 5.67 R | 2.64 | 3.05 | 11.3 | 1.50 | 9.40 | 47.2 | 8.62 | 64.2
    250 | 7.42 R | 3.35 | 3.89 | 14.85 | 1.97 | 12.30 | 61.85 | 9.90 | 84.11
"""
# copper.org table 14.2f (K, L), field-pm chart (M): bores in inches, sizes 1/2 to 4 in
COPPER_SIZES = "1/2|3/4|1|1 1/4|1 1/2|2|2 1/2|3|4"
COPPER = """
    K | .527 | .745 | .995 | 1.245 | 1.481 | 1.959 | 2.435 | 2.907 | 3.857
    L | .545 | .785 | 1.025 | 1.265 | 1.505 | 1.985 | 2.465 | 2.945 | 3.905
    M | .569 | .811 | 1.055 | 1.291 | 1.527 | 2.009 | 2.495 | 2.981 | 3.935
"""
# IFC (2012) table B105.1 (opendoc.cstx.gov 1603555): upper limits of area in 1000 ft² by gpm
CONSTRUCTION = "IA-IB|IIA-IIIA|IV-VA|IIB-IIIB|VB"
IFC = """
    1500 | 22.7 | 12.7 | 8.2 | 5.9 | 3.6
    1750 | 30.2 | 17.0 | 10.9 | 7.9 | 4.8
    2000 | 38.7 | 21.8 | 12.9 | 9.8 | 6.2
    2250 | 48.3 | 24.2 | 17.4 | 12.6 | 7.7
    2500 | 59.0 | 33.2 | 21.3 | 15.4 | 9.4
    2750 | 70.9 | 39.7 | 25.5 | 18.4 | 11.3
    3000 | 83.7 | 47.1 | 30.1 | 21.8 | 13.4
    3250 | 97.7 | 54.9 | 35.2 | 25.9 | 15.6
    3500 | 112.7 | 63.4 | 40.6 | 29.3 | 18.0
    3750 | 128.7 | 72.4 | 46.4 | 33.5 | 20.6
    4000 | 145.9 | 82.1 | 52.5 | 37.9 | 23.3
    4250 | 164.2 | 92.4 | 59.1 | 42.7 | 26.3
    4500 | 183.4 | 103.1 | 66.0 | 47.7 | 29.3
    4750 | 203.7 | 114.6 | 73.3 | 53.0 | 32.6
    5000 | 225.2 | 126.7 | 81.1 | 58.6 | 36.0
"""
# anvil list of ratings, gpm
PUMPS = "25,50,100,150,200,250,300,400,450,500,750,1000,1250,1500,2000,2500,3000,3500,4000,4500,5000"
# Lange's Handbook table 5.13 and the older NFPA 13 table (from memory): percent, specific gravity, °F
ANTIFREEZE = {
    ("propylene glycol", "Lange"): "10 1.006 28; 20 1.017 20; 30 1.024 9; 40 1.032 -5; 50 1.040 -28",
    ("glycerine", "Lange"): "10 1.024 29.1; 30 1.075 14.9; 50 1.128 -7.4; 60 1.156 -28.5; 70 1.184 -36",
    ("propylene glycol", "NFPA 13"): "30 1.027 9; 40 1.034 -6; 50 1.041 -26; 60 1.045 -60",
    ("glycerine", "NFPA 13"): "50 1.133 -15; 60 1.151 -22; 70 1.165 -40",
}
# IFC appendix C, from memory: gpm up to, hydrants, spacing and distance in ft
SPACING = (
    "1750 1 500 250; 2250 2 450 225; 2750 3 450 225; 3250 3 400 225; 4000 4 350 210; 5000 5 300 180; "
    "5500 6 300 180; 6000 6 250 150; 7000 7 250 150"
)
# public listings and NFPA 13, from memory: building ft, K, psi low, psi high
ESFR = "30 14.0 50 50; 30 16.8 35 35; 30 25.2 15 20; 40 14.0 75 75; 40 16.8 52 52"


def lines(block: str) -> list[list[str]]:
    return [[cell.strip() for cell in line.split("|")] for line in block.strip().splitlines()]


def number(cell: str) -> float | None:
    """The number of a printed cell; none where the print has a dash or cannot be read."""
    plain = re.sub(r" [RS]$", "", cell)
    return None if plain in {"–", "?"} else float(plain)


def numbers(text: str) -> list[list[float]]:
    return [[float(part) for part in line.split()] for line in text.split(";")]


def test_fittings_nfpa() -> None:
    printed = {
        (fitting, size): number(cell)
        for fitting, *cells in lines(NFPA)
        for size, cell in zip(NFPA_SIZES.split("|"), cells, strict=True)
    }
    printed |= {("angle valve", "2 1/2"): 31.0, ("globe valve", "1 1/2"): 46.0}  # NFPA 14, from memory
    carried = {(row["fitting"], row["nominal"]): float(row["length_ft"]) for row in table("fittings_nfpa")}
    assert carried == {key: value for key, value in printed.items() if value is not None}


def test_fittings_en() -> None:
    printed = {
        (fitting, f"DN {dn}"): number(cell)
        for dn, *cells in lines(EN)
        for fitting, cell in zip(EN_FITTINGS, cells, strict=True)
    }
    carried = {(row["fitting"], row["nominal"]): float(row["length_m"]) for row in table("fittings_en")}
    assert carried == {key: value for key, value in printed.items() if value is not None}
    read = {f"DN {dn}" for dn, cell, *_ in lines(EN) if cell.endswith("S")}
    for row in table("fittings_en"):
        if row["fitting"] == "elbow 90":
            assert ("from memory" in row["source"]) == (row["nominal"] not in read)


def test_copper() -> None:
    for kind, *cells in lines(COPPER):
        carried = {
            row["nominal"]: float(row["bore_in"])
            for row in table("bores_in")
            if row["material"] == f"copper type {kind}"
        }
        for size, cell in zip(COPPER_SIZES.split("|"), cells, strict=True):
            assert carried[size] == number(cell)


def test_fire_flow() -> None:
    printed = {
        (column, flow): float(cell) * 1000
        for flow, *cells in lines(IFC)
        for column, cell in zip(CONSTRUCTION.split("|"), cells, strict=True)
    }
    carried = {
        (row["construction"], row["flow_gpm"]): float(row["area_up_to_ft2"]) for row in table("fire_flow")
    }
    assert carried == pytest.approx(printed)
    for row in table("fire_flow"):
        flow = float(row["flow_gpm"])
        assert float(row["duration_h"]) == (2 if flow < 3000 else 3 if flow < 4000 else 4)


def test_lists() -> None:
    assert [row["flow_gpm"] for row in table("pump_ratings")] == PUMPS.split(",")
    for key, text in ANTIFREEZE.items():
        carried = [
            [float(row[column]) for column in ("percent", "specific_gravity", "freezing_f")]
            for row in table("fluids")
            if (row["fluid"], row["table"]) == key
        ]
        assert carried == numbers(text)
    columns = ("flow_up_to_gpm", "hydrants", "spacing_ft", "distance_ft")
    *spacing, last = table("hydrant_spacing")
    assert [[float(row[column]) for column in columns] for row in spacing] == numbers(SPACING)
    assert [last[column] for column in columns] == ["", "8", "200", "120"]
    columns = ("building_up_to_ft", "k_gpm_psi", "pressure_low_psi", "pressure_high_psi")
    given = [row for row in table("esfr") if row["pressure_low_psi"]]
    assert [[float(row[column]) for column in columns] for row in given] == numbers(ESFR)
