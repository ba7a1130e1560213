"""What is possible but seldom meant, made by hand from the sound project: (rule, state, changes, …)."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

from supplycheck.model import Device, Fitting
from supplycheck.units import FOOT, GPM, INCH, PSI

PIPES = "project.system.pipes"
NO_PLACE = {"project.system.nodes.*.x": None}
NO_CURVE = Device("backflow", "loss", (0.0,), (5 * PSI,), "maker's sheet")


def again(number: int, **changes: Any) -> dict[str, Any]:
    """Return the change that enters pipe ``number`` a second time."""
    return {PIPES: lambda old: (*old, replace(old[number], tag="again", **changes))}


def curve(*losses: float) -> dict[str, Any]:
    """Return the change that gives the backflow preventer these losses [psi] at 0, 500 and 1000 gpm."""
    return {"project.system.devices.backflow.values": tuple(loss * PSI for loss in losses)}


PUMP_BYPASS = again(1, devices=("pump",)) | {
    "project.system.devices": lambda old: (
        *old,
        Device("pump", "pump", (0.0, 500 * GPM), (120 * PSI, 90 * PSI), "maker's sheet"),
    )
}
TEE = Fitting("tee", 1, 10 * FOOT, 10 * FOOT, 0.0, "given", "NFPA 13 equivalent lengths")
GATE = replace(TEE, name="gate valve", length=FOOT)
WRITTEN_TEE = {f"{PIPES}.C1.fittings": lambda old: (*old, TEE)}
BARE_MAINS = {f"{PIPES}.*.fittings": (), "project.criteria.density": 0.0}
SMALL_RISER = {f"{PIPES}.R.nominal": "1 1/2", f"{PIPES}.R.bore": 1.61 * INCH}
PLAUSIBILITY_CASES: tuple[tuple[Any, ...], ...] = (
    ("length against distance", "ok"),
    ("length against distance", "not applicable", NO_PLACE),
    ("length against distance", "ok", {f"{PIPES}.U.length": 90 * FOOT}),
    ("length against distance", "fail", {f"{PIPES}.U.length": 89 * FOOT}, 89 * FOOT, 100 * FOOT, ("U",)),
    ("length against distance", "fail", {f"{PIPES}.U.length": 10 * FOOT}, 10 * FOOT, 100 * FOOT, ("U",)),
    ("length against distance", "ok", {f"{PIPES}.U.length": 500 * FOOT}),
    ("length against distance", "ask authority", {f"{PIPES}.U.length": 501 * FOOT}, 501 * FOOT, 100 * FOOT),
    ("length against distance", "ok", {f"{PIPES}.C1.length": 8.5 * FOOT}),
    ("length against distance", "ask authority", {f"{PIPES}.C1.length": 8.6 * FOOT}, 8.6 * FOOT, 5 * FOOT),
    ("fitting charged twice", "not applicable"),
    ("fitting charged twice", "ok", {f"{PIPES}.C1.fittings": lambda old: (*old, GATE)}),
    ("fitting charged twice", "ask authority", WRITTEN_TEE, 10 * FOOT, None, ("C1",)),
    ("tee where flow turns", "ask authority", BARE_MAINS, None, None, ("T",)),
    ("size toward the supply", "ok"),
    ("size toward the supply", "not applicable", {f"{PIPES}.*.valve": "closed"}),
    ("size toward the supply", "ask authority", SMALL_RISER, None, None, ("R",)),
    ("size toward the supply", "ok", SMALL_RISER | {f"{PIPES}.R.role": "riser nipple"}),
    ("pipes side by side", "ok"),
    ("pipes side by side", "ok", PUMP_BYPASS),
    ("pipes side by side", "ask authority", again(1), None, None, ("R", "again")),
    ("pipes side by side", "ask authority", again(1, start="T", end="B"), None, None, ("R", "again")),
    ("device entered twice", "ok"),
    ("device entered twice", "not applicable", {f"{PIPES}.U.devices": ()}),
    (
        "device entered twice",
        "ask authority",
        {f"{PIPES}.U.devices": ("backflow", "backflow")},
        None,
        None,
        ("U",),
    ),
    ("dip in a loss curve", "ok"),
    ("dip in a loss curve", "ok", curve(4, 4, 6)),
    ("dip in a loss curve", "not applicable", {"project.system.devices.backflow": NO_CURVE}),
    ("dip in a loss curve", "ask authority", curve(4, 3.5, 10), 3.5 * PSI, 4 * PSI, ("backflow",)),
)
