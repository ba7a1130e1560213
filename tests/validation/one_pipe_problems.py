"""More one-pipe problems of the text books, all from memory of the books named."""

from __future__ import annotations

import math
from dataclasses import replace

from supplycheck.hydraulics import DarcyWeisbach, OnePipe
from supplycheck.units import FOOT, GRAVITY, POUND

SQUARE_FOOT_POUND = POUND * GRAVITY / FOOT**2

# White, Fluid Mechanics, example 6.6: asphalted cast iron, 200 ft of 6 in, water at 6 ft/s, ε 0.0004 ft,
# ν 1.1e-5 ft²/s, 62.4 lbf/ft³
WHITE_6_6 = OnePipe(
    law=DarcyWeisbach(0.0004 * FOOT),
    length=200 * FOOT,
    density=62.4 * POUND / FOOT**3,
    unit_weight=62.4 * POUND * GRAVITY / FOOT**3,
    viscosity=1.1e-5 * FOOT**2 * 62.4 * POUND / FOOT**3,
    bore=0.5 * FOOT,
    flow=6 * FOOT * math.pi / 4 * (0.5 * FOOT) ** 2,
)

# White, example 6.7: oil, 900 kg/m³, 1e-5 m²/s, 0.2 m³/s through 500 m of 200 mm cast iron (ε 0.26 mm)
# falling at 10°
WHITE_6_7 = OnePipe(
    law=DarcyWeisbach(0.26e-3),
    length=500.0,
    density=900.0,
    unit_weight=900 * 9.81,
    viscosity=1e-5 * 900,
    bore=0.2,
    flow=0.2,
    rise=-500 * math.sin(math.radians(10)),
)

# White, example 6.9: oil, 950 kg/m³, 2e-5 m²/s, 100 m of 0.3 m, ε/d 0.0002, a head loss of 8 m: the flow
WHITE_6_9 = OnePipe(
    law=DarcyWeisbach(0.0002 * 0.3),
    length=100.0,
    density=950.0,
    unit_weight=950 * 9.81,
    viscosity=2e-5 * 950,
    bore=0.3,
    loss=8 * 950 * 9.81,
)

# White, example 6.11: the same with the flow 0.342 m³/s given: the diameter
WHITE_6_11 = replace(WHITE_6_9, bore=None, flow=0.342)

# Çengel and Cimbala, example 8-2: water at 40 °F (62.42 lbm/ft³, 1.038e-3 lbm/(ft·s)), 30 ft of 0.12 in
# (0.010 ft), 3.0 ft/s
CENGEL_8_2 = OnePipe(
    law=DarcyWeisbach(0.0),
    length=30 * FOOT,
    density=62.42 * POUND / FOOT**3,
    unit_weight=62.42 * POUND * GRAVITY / FOOT**3,
    viscosity=1.038e-3 * POUND / FOOT,
    bore=0.01 * FOOT,
    flow=3 * FOOT * math.pi / 4 * (0.01 * FOOT) ** 2,
)

# Fox and McDonald, example 8.5: water (1000 kg/m³, 1e-3 Pa·s), 0.01 m³/s through 100 m of smooth 75 mm into
# a reservoir 10 m deep: the pressure at the start. The exit loses one velocity pressure.
FOX_8_5 = OnePipe(
    law=DarcyWeisbach(0.0),
    length=100.0,
    density=1000.0,
    unit_weight=9810.0,
    viscosity=1e-3,
    bore=0.075,
    flow=0.01,
    rise=10.0,
    minor_k=1.0,
    end="reservoir",
)
