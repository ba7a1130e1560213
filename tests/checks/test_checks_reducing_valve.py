"""A reducing valve behind a pump in one pipe is judged by what the pump puts before it."""

from __future__ import annotations

import pytest
from check_factory import built

from supplycheck.checks.devices import reducing
from supplycheck.model import Device
from supplycheck.units import GPM, PSI

PUMP = Device("pump", "pump", (0.0, 500 * GPM), (120 * PSI, 90 * PSI), "maker")


@pytest.mark.parametrize(
    ("devices", "state"), [(("pump", "valve"), "ok"), (("valve", "pump"), "fail"), (("valve",), "fail")]
)
def test_the_gain_of_a_pump_before_the_valve_counts(devices: tuple[str, ...], state: str) -> None:
    """80 psi stand at the source without flow: 110 psi is out of reach without the 120 psi of the pump."""
    valve = Device("valve", "pressure-reducing valve", (), (), "maker", setting=110 * PSI)
    context = built(
        {
            "project.system.devices": lambda old: (*old, PUMP, valve),
            "project.system.pipes.R.devices": devices,
        }
    )
    found = reducing(context)
    assert found.state == state
    assert found.limit is not None and found.limit.value == pytest.approx(110 * PSI)
