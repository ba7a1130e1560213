"""The page of names: each exists in the code, none of the laws' is missing, units agree."""

from __future__ import annotations

import dataclasses
import inspect
import re
from collections.abc import Iterator
from pathlib import Path
from types import ModuleType
from typing import Any, get_args, get_type_hints

import pytest

import supplycheck.hydraulics as laws
import supplycheck.model.criteria
import supplycheck.model.fluid
import supplycheck.model.supply
import supplycheck.model.system
import supplycheck.network.records
import supplycheck.results.records
from supplycheck.units import METRIC, US

PAGE = (Path(__file__).parents[1] / "docs" / "nomenclature.md").read_text(encoding="utf-8")
MODEL = (
    supplycheck.model.system,
    supplycheck.model.fluid,
    supplycheck.model.criteria,
    supplycheck.model.supply,
)
RECORDS = (*MODEL, supplycheck.network.records, supplycheck.results.records)
KINDS = {
    "flow": "m³/s",
    "pressure": "Pa",
    "gradient": "Pa/m",
    "length": "m",
    "size": "m",
    "roughness": "m",
    "area": "m²",
    "volume": "m³",
    "velocity": "m/s",
    "density": "m/s",
    "k_factor": "m³/s/√Pa",
    "mass_density": "kg/m³",
    "viscosity": "Pa·s",
    "temperature": "K",
    "power": "W",
    "time": "s",
}
NO_QUANTITY = {"curve", "points", "problem"}  # records, not numbers


@dataclasses.dataclass(frozen=True)
class Entry:
    """A row of the page."""

    term: str
    names: tuple[str, ...]
    unit: str
    shown: str


def entries() -> list[Entry]:
    rows = []
    for line in PAGE.splitlines():
        cells = [cell.strip() for cell in line.strip("|").split("|")]
        if len(cells) == 5 and "`" in cells[2]:
            rows.append(Entry(cells[0], tuple(re.findall(r"`(\w+)`", cells[2])), cells[3], cells[4]))
    return rows


ENTRIES = entries()
NAMED = {name for entry in ENTRIES for name in entry.names}


def functions() -> Iterator[tuple[str, Any]]:
    for name in laws.__all__:
        law = getattr(laws, name)
        if inspect.isfunction(law):
            yield name, law


def records(modules: tuple[ModuleType, ...]) -> Iterator[type]:
    for module in modules:
        for value in vars(module).values():
            if inspect.isclass(value) and dataclasses.is_dataclass(value):
                yield value


def holds_floats(hint: Any) -> bool:
    """Return whether a field is a number, or a sequence that holds numbers."""
    return hint is float or any(holds_floats(part) for part in get_args(hint))


def parameters() -> set[str]:
    return {name for _, law in functions() for name in inspect.signature(law).parameters} - NO_QUANTITY


def units_described() -> Iterator[tuple[str, str, str]]:
    """Yield law, parameter and unit as the description of the law prints it in brackets."""
    for name, law in functions():
        for names, text in re.findall(r"^(\w[\w, ]*) : (.*)$", inspect.getdoc(law) or "", re.MULTILINE):
            units = re.findall(r"\[([^\]]+)\]", text)
            parts = names.split(", ")
            for row, part in enumerate(parts):
                if units:
                    yield name, part, units[row if len(units) == len(parts) else -1]


def test_page_is_read() -> None:
    assert len(ENTRIES) > 60


@pytest.mark.parametrize("entry", ENTRIES, ids=[entry.term for entry in ENTRIES])
def test_names_exist(entry: Entry) -> None:
    fields = {field.name for record in records(RECORDS) for field in dataclasses.fields(record)}
    methods = {name for record in records(RECORDS) for name in vars(record)}
    assert set(entry.names) <= parameters() | fields | methods


def test_no_quantity_of_the_laws_is_missing() -> None:
    assert parameters() <= NAMED


@pytest.mark.parametrize("record", list(records(MODEL)), ids=lambda record: record.__name__)
def test_no_number_of_the_model_is_missing(record: type) -> None:
    hints = get_type_hints(record)
    assert {name for name, hint in hints.items() if holds_floats(hint)} <= NAMED


def test_units_inside_are_those_that_the_laws_describe() -> None:
    allowed: dict[str, set[str]] = {}
    for entry in ENTRIES:
        for name in entry.names:
            allowed.setdefault(name, set()).add(entry.unit)
    found = list(units_described())
    assert len(found) > 50
    for law, name, unit in found:
        if name in parameters() and unit != "SI":
            assert unit.replace("-", "–") in allowed[name], f"{law}: {name} [{unit}]"


@pytest.mark.parametrize("entry", ENTRIES, ids=[entry.term for entry in ENTRIES])
def test_units_shown_are_of_one_kind(entry: Entry) -> None:
    """The pair shown is what the two unit sets use for one kind of quantity, and SI inside fits it."""
    if entry.shown == "–":
        assert entry.unit == "–"
        return
    us, metric = entry.shown.split(", ")
    kinds = [kind for kind in US.units if US.symbol(kind) == us and METRIC.symbol(kind) == metric]
    assert [KINDS.get(kind, "–") for kind in kinds] == [entry.unit]
