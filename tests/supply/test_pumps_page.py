"""The page on pumps and tanks: its project snippets are read, its figures are those of the tests."""

from __future__ import annotations

import re
import tomllib
from pathlib import Path

import pytest

from supplycheck.project.schema_supply import FlowTestTable, TankTable, TestPointTable
from supplycheck.project.schema_system import DeviceTable

PAGE = (Path(__file__).parents[2] / "docs" / "pumps_and_tanks.md").read_text(encoding="utf-8")
SNIPPETS = re.findall(r"```toml\n(.*?)```", PAGE, re.DOTALL)


@pytest.mark.parametrize("text", SNIPPETS)
def test_each_snippet_is_read(text: str) -> None:
    found = tomllib.loads(text)
    supply = found.get("supply", {})
    for table in found.get("device", {}).values():
        DeviceTable.model_validate(table)
    for table in supply.get("tank", []):
        TankTable.model_validate(table)
    test = supply.get("flow_test", {})
    for point in test.pop("points", []):
        TestPointTable.model_validate(point)
    if test:
        FlowTestTable.model_validate(test)


def test_there_are_snippets_of_every_kind() -> None:
    assert len(SNIPPETS) == 4


@pytest.mark.parametrize("key", sorted(DeviceTable.model_fields.keys() - {"units", "title", "setting"}))
def test_every_key_of_a_pump_is_on_the_page(key: str) -> None:
    shared = {"kind", "loss", "equivalent_length", "source"}
    assert key in shared or key in PAGE
