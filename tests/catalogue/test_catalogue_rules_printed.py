"""Every single figure against a second transcription, in the units in which it is printed."""

from __future__ import annotations

from supplycheck.catalogue.tables import table

# rule | standard | editions | printed number and unit. The source of each stands in its row of the table.
PRINTED = """
unit weight of water | NFPA 13 | - | .433 psi/ft
unit weight of water | EN 12845 | - | .098 bar/m
minimum sprinkler pressure | NFPA 13 | - | 7 psi
junction pressure balance | NFPA 13 | - | 0.5 psi
junction pressure balance | EN 12845 | - | 1 mbar
junction flow balance | EN 12845 | - | 0.1 L/min
component pressure | NFPA 13 | - | 175 psi
shape factor | NFPA 13 | - | 1.2
area factor, dry | NFPA 13 | - | 1.3
area factor, double interlock preaction | NFPA 13 | - | 1.3
area factor, slope over 1 in 6 | NFPA 13 | - | 1.3
quick response reduction, slope | NFPA 13 | - | -1.5 %/ft
quick response reduction, intercept | NFPA 13 | - | 55 %
quick response reduction, greatest | NFPA 13 | - | 40 %
quick response reduction, lowest ceiling of the slope | NFPA 13 | - | 10 ft
quick response reduction, highest ceiling | NFPA 13 | - | 20 ft
quick response reduction, fewest sprinklers | NFPA 13 | - | 5
extra hazard coverage, low density limit | NFPA 13 | - | .25 gpm/ft²
extra hazard coverage, low density | NFPA 13 | - | 130 ft²
extra hazard spacing, low density | NFPA 13 | - | 15 ft
small room left out of the area | NFPA 13 | - | 55 ft²
velocity limit, pipe | EN 12845 | - | 10 m/s
velocity limit, valve | EN 12845 | - | 6 m/s
in-rack sprinkler pressure | EN 12845 | - | 2.0 bar
sprinkler pressure, high hazard storage | EN 12845 | - | .50 bar
unsprinklered fire flow, light hazard, favourable | VA | - | 1250 gpm
unsprinklered fire flow, light hazard, unfavourable | VA | - | 1500 gpm
unsprinklered fire flow, ordinary hazard, favourable | VA | - | 1250 gpm
unsprinklered fire flow, ordinary hazard, unfavourable | VA | - | 2000 gpm
unsprinklered fire flow, extra hazard, favourable | VA | - | 1500 gpm
unsprinklered fire flow, extra hazard, unfavourable | VA | - | 3000 gpm
fire flow, vehicle parking | UFC 3-600 | - | 500 gpm
fire flow duration, vehicle parking | UFC 3-600 | - | 2 h
fire flow, aircraft parking | UFC 3-600 | - | 1000 gpm
fire flow duration, aircraft parking | UFC 3-600 | - | 2 h
storage refill | UFC 3-600 | - | 48 h
storage refill, curtailed | UFC 3-600 | - | 24 h
standpipe flow, each of the two outlets of the most remote riser | NFPA 14 | - | 250 gpm
standpipe flow, each further riser | NFPA 14 | - | 250 gpm
standpipe flow cap, sprinklered | NFPA 14 | - | 1000 gpm
standpipe flow cap, not sprinklered | NFPA 14 | - | 1250 gpm
standpipe flow, horizontal | NFPA 14 | - | 750 gpm
standpipe horizontal outlets | NFPA 14 | - | 3
standpipe pressure, 2 1/2 in outlet | NFPA 14 | - | 100 psi
standpipe pressure, 1 1/2 in outlet | NFPA 14 | - | 65 psi
standpipe greatest pressure | NFPA 14 | - | 350 psi
standpipe outlet pressure to be regulated | NFPA 14 | - | 175 psi
flushing velocity | NFPA 24 | - | 10 ft/s
flushing flow, 4 in | NFPA 24 | - | 390 gpm
flushing flow, 6 in | NFPA 24 | - | 880 gpm
flushing flow, 8 in | NFPA 24 | - | 1560 gpm
smallest main of a hydrant | NFPA 24 | - | 6 in
leakage test, loss below | NFPA 24 | 2019- | 5 psi
test drop | NFPA 291 | -2010 | 25 %
test drop | NFPA 291 | 2013- | 10 %
main floor pressure | NFPA 291 | - | 20 psi
pitot, lowest preferred | NFPA 291 | - | 10 psi
pitot, highest preferred | NFPA 291 | - | 30 psi
fire flow, dwelling | IFC | - | 1000 gpm
fire flow duration, dwelling | IFC | - | 1 h
fire flow, dwelling area | IFC | - | 3600 ft²
fire flow reduction, sprinklered dwelling | IFC | - | 50 %
fire flow reduction, sprinklered building | IFC | -2012 | 75 %
fire flow floor, sprinklered building | IFC | -2012 | 1500 gpm
fire flow reduction, sprinklered building | IFC | 2015- | 75 %
fire flow floor, sprinklered building | IFC | 2015- | 1000 gpm
churn pressure, greatest | NFPA 20 | - | 140 %
pressure at 150 % of rated flow, least | NFPA 20 | - | 65 %
overload flow | NFPA 20 | - | 150 %
churn pressure, greatest, older figure | NFPA 20 | - | 120 %
suction pressure, least | NFPA 20 | - | 0 psi
suction pressure, least, tank | NFPA 20 | - | -3 psi
"""


def test_every_rule_is_printed_so() -> None:
    printed = {}
    for line in PRINTED.strip().splitlines():
        name, standard, editions, figure = (cell.strip() for cell in line.split("|"))
        value, _, unit = figure.partition(" ")
        printed[name, standard, editions] = (float(value), unit)
    carried = {
        (row["rule"], row["standard"], f"{row['edition_from']}-{row['edition_to']}"): (
            float(row["value"]),
            row["unit"],
        )
        for row in table("rules")
    }
    assert carried == printed
