"""From the raw TOML tables to checked ones, with every fault of form noted.

Each table is checked by itself, so that a fault in one does not hide the faults of the others. What
is at fault is left out and the rest goes on; the project is refused in the end all the same.
"""

from __future__ import annotations

import copy
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Final, TypeVar, get_args, get_origin

from pydantic import ValidationError

from supplycheck.findings import Place
from supplycheck.project import describe
from supplycheck.project.faults import FaultList, listed, near, quoted
from supplycheck.project.placeholders import filled
from supplycheck.project.schema import (
    CriteriaTable,
    FactsTable,
    FluidTable,
    ProjectFile,
)
from supplycheck.project.schema_duty import FireFlowTable, HydrantTable, StandpipeTable
from supplycheck.project.schema_parts import LONGEST_TAG, Table
from supplycheck.project.schema_supply import HoseTable, ScenarioTable, SupplyTable
from supplycheck.project.schema_system import (
    CatalogueTable,
    DeviceTable,
    LayoutTable,
    NetworkTable,
    PipeTable,
    SprinklerTable,
)

AnyTable = TypeVar("AnyTable", bound=Table)
Loc = Sequence[str | int]

_REQUIRED: Final = ("project", "criteria", "supply")
_DUTIES: Final = ("standpipe", "fire_flow", "hydrant")


class AnyName(frozenset[str]):
    """Names of which some could not be read: every name is taken to be among them."""

    def __contains__(self, name: object) -> bool:
        return True


@dataclass(frozen=True, slots=True)
class Sections:
    """The tables of a project file; ``None`` where a table is absent or beyond use.

    ``declared`` holds the names of all sprinkler types, pipe kinds and devices, ``present`` the keys at
    the top of the file, sound or not. ``tests_listed`` says that flow tests are written as a list.
    """

    file: str
    units: str
    project: FactsTable | None
    criteria: CriteriaTable | None
    fluid: FluidTable | None
    catalogue: CatalogueTable | None
    layout: LayoutTable | None
    network: NetworkTable | None
    supply: SupplyTable | None
    hose: HoseTable | None
    sprinklers: Mapping[str, SprinklerTable]
    pipes: Mapping[str, PipeTable]
    devices: Mapping[str, DeviceTable]
    scenarios: tuple[tuple[int, ScenarioTable], ...]
    standpipe: StandpipeTable | None
    fire_flow: FireFlowTable | None
    hydrants: tuple[tuple[int, HydrantTable], ...]
    declared: Mapping[str, frozenset[str]]
    present: frozenset[str]
    tests_listed: bool

    def place(self, where: str) -> Place:
        """Return the place of a key path in the project file."""
        return Place(self.file, where)


def key_path(base: str, raw: object, loc: Loc, *, missing: bool = False) -> tuple[str, list[str | int]]:
    """Return the key path of pydantic's ``loc`` and its steps through ``raw``.

    Steps that name a branch of a choice and not a key are left out. Lists count from 1. Where the last
    key is ``missing`` it is not in ``raw``.
    """
    text, steps = base, []
    current: Any = raw
    for position, step in enumerate(loc):
        last = position == len(loc) - 1
        if isinstance(step, int):
            if not isinstance(current, list):
                continue
            text += f"[{step + 1}]"
            current = current[step] if step < len(current) else None
        else:
            known = isinstance(current, Mapping) and step in current
            if not known and not (missing and last and isinstance(current, Mapping)):
                continue
            text = f"{text}.{step}" if text else step
            current = current[step] if known else None
        steps.append(step)
    return text, steps


def _value_at(raw: object, steps: Sequence[str | int]) -> Any:
    current: Any = raw
    for step in steps:
        current = current[step] if isinstance(step, int) or step in current else None
    return current


def _table_at(table: type[Table], steps: Sequence[str | int]) -> type[Table]:
    for step in steps:
        if isinstance(step, str):
            table = describe.inner(table, step) or table
    return table


_TYPES: Final = {
    "string_type": ("is not a text", 'a text in quotes, "…"'),
    "bool_type": ("is not true or false", "true or false, without quotes"),
    "int_type": ("is not a whole number", "a whole number, without quotes"),
    "float_type": ("is not a number", "a number"),
    "list_type": ("is not a list", "a list in square brackets"),
    "dict_type": ("is not a table", "a table of names and values"),
    "model_type": ("is not a table", "a table of keys"),
    "model_attributes_type": ("is not a table", "a table of keys"),
}


_BOUNDS: Final = {
    "greater_than_equal": ("or more", "ge"),
    "less_than_equal": ("or less", "le"),
}


def _unknown_key(place: Place, table: type[Table], steps: Sequence[str | int], faults: FaultList) -> None:
    key = str(steps[-1])
    here = list(_table_at(table, steps[:-1]).model_fields)
    close = near(key, here)
    if close:
        faults.meant(Place(place.file, place.where.removesuffix(key) + close))
    homes = [] if close else describe.homes_of(key)
    if close:
        remedy = f"did you mean {close}?"
    elif homes:
        remedy = f"this key belongs in {listed(homes, 4)}"
    else:
        remedy = "take the key out"
    faults.add(place, "unknown key", found=key, allowed=listed(here, 30), remedy=remedy)


def _note(
    error: Mapping[str, Any], table: type[Table], base: str, raw: object, file: str, faults: FaultList
) -> None:
    kind = error["type"]
    where, steps = key_path(base, raw, error["loc"], missing=kind == "missing")
    place = Place(file, where)
    context = error.get("ctx", {})
    value = error["input"]
    if kind == "extra_forbidden":
        _unknown_key(place, table, steps, faults)
    elif kind == "missing":
        text = describe.descriptions(_table_at(table, steps[:-1])).get(str(steps[-1]), "")
        faults.add(place, "is missing", allowed=text.rstrip("."), remedy="add the key")
    elif kind == "number":
        faults.add(
            place,
            context["problem"],
            found=context["found"],
            allowed=context["allowed"],
            remedy=context["remedy"],
        )
    elif kind in ("literal_error", "enum"):
        expected = str(context["expected"]).replace("'", '"') + _or_else(table, steps)
        close = near(value, str(context["expected"]).split("'")[1::2]) if isinstance(value, str) else ""
        faults.add(
            place,
            "is not one of the choices",
            found=quoted(value),
            allowed=expected,
            remedy=f'did you mean "{close}"?' if close else "",
        )
    elif kind in _TYPES:
        problem, allowed = _TYPES[kind]
        faults.add(place, problem, found=quoted(value), allowed=allowed)
    elif kind in _BOUNDS:
        words, key = _BOUNDS[kind]
        faults.add(place, "is out of range", found=quoted(value), allowed=f"{context[key]} {words}")
    elif kind in ("too_short", "too_long"):
        low, high = context.get("min_length"), context.get("max_length")
        allowed = f"{low} or more" if low is not None else f"{high} or fewer"
        faults.add(
            place,
            "has a wrong number of entries",
            found=f"{context['actual_length']} entries",
            allowed=allowed,
        )
    else:
        message = str(error["msg"])
        faults.add(place, message[:1].lower() + message[1:], found=quoted(value))


def _or_else(table: type[Table], steps: Sequence[str | int]) -> str:
    """Return what a key may hold beside its words: a list or a table."""
    field = _table_at(table, steps[:-1]).model_fields.get(str(steps[-1])) if steps else None
    if field is None:
        return ""
    if any(get_origin(part) is list for part in get_args(field.annotation)):
        return ", or a list of tags in square brackets"
    return ", or a table of keys" if describe.table_in(field.annotation) else ""


def _is_noise(error: Mapping[str, Any], raw: object) -> bool:
    """Return whether ``error`` is about a branch of a choice that was not meant."""
    steps = key_path("", raw, error["loc"])[1]
    if len(steps) == len(error["loc"]) or isinstance(error["loc"][-1], int):
        return False
    value = error["input"]
    if error["type"] == "literal_error":
        return isinstance(value, dict | list)
    return error["type"] in ("list_type", "model_type", "model_attributes_type")


def _without(raw: Any, paths: Sequence[Sequence[str | int]]) -> Any:
    """Return a copy of ``raw`` without what stands at ``paths``; a list with a faulty item goes whole."""
    pruned = copy.deepcopy(raw)
    for path in sorted(paths, key=len, reverse=True):
        steps = list(path)
        while steps and isinstance(steps[-1], int):
            steps.pop()
        if not steps:
            continue
        holder = _value_at(pruned, steps[:-1])
        if isinstance(holder, dict):
            holder.pop(steps[-1], None)
    return pruned


def check_table(
    table: type[AnyTable], raw: object, base: str, file: str, faults: FaultList
) -> AnyTable | None:
    """Return ``raw`` as a ``table``, noting all faults; without the faulty keys where that is possible."""
    try:
        return table.model_validate(raw)
    except ValidationError as caught:
        errors = [error for error in caught.errors(include_url=False) if not _is_noise(error, raw)]
    if not isinstance(raw, dict):
        faults.add(Place(file, base), "is not a table", found=quoted(raw), allowed=f"a table [{base}]")
        return None
    for error in errors:
        _note(error, table, base, raw, file, faults)
    try:
        rest = _without(raw, [key_path("", raw, error["loc"])[1] for error in errors])
        return table.model_validate(filled(table, rest))
    except ValidationError:
        return None


def _named(
    table: type[AnyTable], raw: object, base: str, file: str, faults: FaultList
) -> tuple[dict[str, AnyTable], frozenset[str]]:
    if raw is None:
        return {}, frozenset()
    if not isinstance(raw, dict):
        faults.add(Place(file, base), "is not a table", found=quoted(raw), allowed=f"tables [{base}.NAME]")
        return {}, AnyName()
    found: dict[str, AnyTable] = {}
    for name, value in raw.items():
        place = Place(file, f"{base}.{name}")
        if not name.strip() or len(name) > LONGEST_TAG or not name.isprintable():
            faults.add(
                place,
                "is not a usable name",
                found=quoted(name),
                allowed=f"at most {LONGEST_TAG} characters",
            )
        elif not isinstance(value, dict):
            faults.add(
                place,
                "is not a table",
                found=quoted(value),
                allowed=f"a table with a name of its own, [{base}.NAME]",
                remedy=f"write [{base}.NAME] above the keys, with a name of your choice",
            )
        else:
            checked = check_table(table, value, f"{base}.{name}", file, faults)
            if checked is not None:
                found[name] = checked
    flat = not all(isinstance(value, dict) for value in raw.values())
    return found, AnyName(raw) if flat else frozenset(raw)


def _listed(
    table: type[AnyTable], raw: object, base: str, file: str, faults: FaultList
) -> tuple[tuple[int, AnyTable], ...]:
    """Return the checked tables of a list ``[[base]]`` with their numbers, from 1."""
    if raw is None:
        return ()
    if not isinstance(raw, list):
        faults.add(
            Place(file, base),
            "is not a list of tables",
            found=quoted(raw),
            allowed=f"[[{base}]] tables",
        )
        return ()
    checked = [
        (number, check_table(table, value, f"{base}[{number}]", file, faults))
        for number, value in enumerate(raw, start=1)
    ]
    return tuple((number, one) for number, one in checked if one is not None)


def _without_criteria(raw: Mapping[str, Any]) -> bool:
    """Say whether the project may do without criteria, as far as the file tells: the nodes decide."""
    return any(duty in raw for duty in _DUTIES) or ("network" in raw and "sprinkler" not in raw)


def read_sections(raw: Mapping[str, Any], file: str, faults: FaultList) -> Sections:
    """Return the checked tables of ``raw``, the parsed project file."""
    units = raw.get("units")
    for key in raw:
        if key not in ProjectFile.model_fields:
            _unknown_key(Place(file, key), ProjectFile, [key], faults)
    if units is None:
        faults.add(
            Place(file, "units"),
            "is missing",
            allowed='units = "us" or units = "metric"',
            remedy="add it as the first line of the file, above all tables",
        )
    elif units not in ("us", "metric"):
        faults.add(
            Place(file, "units"),
            "is not one of the choices",
            found=quoted(units),
            allowed='"us" or "metric"',
        )
    for key in _REQUIRED:
        if key not in raw and not (key == "criteria" and _without_criteria(raw)):
            faults.add(Place(file, key), "the table is missing", remedy=f"add a table [{key}]")

    def one(table: type[AnyTable], key: str) -> AnyTable | None:
        return check_table(table, raw[key], key, file, faults) if key in raw else None

    supply = raw.get("supply")
    sprinklers, sprinkler_names = _named(SprinklerTable, raw.get("sprinkler"), "sprinkler", file, faults)
    pipes, pipe_names = _named(PipeTable, raw.get("pipe"), "pipe", file, faults)
    devices, device_names = _named(DeviceTable, raw.get("device"), "device", file, faults)
    return Sections(
        file=file,
        units=units if units in ("us", "metric") else "us",
        project=one(FactsTable, "project"),
        criteria=one(CriteriaTable, "criteria"),
        fluid=one(FluidTable, "fluid"),
        catalogue=one(CatalogueTable, "catalogue"),
        layout=one(LayoutTable, "layout"),
        network=one(NetworkTable, "network"),
        supply=one(SupplyTable, "supply"),
        hose=one(HoseTable, "hose"),
        sprinklers=sprinklers,
        pipes=pipes,
        devices=devices,
        scenarios=_listed(ScenarioTable, raw.get("scenario"), "scenario", file, faults),
        standpipe=one(StandpipeTable, "standpipe"),
        fire_flow=one(FireFlowTable, "fire_flow"),
        hydrants=_listed(HydrantTable, raw.get("hydrant"), "hydrant", file, faults),
        declared={"sprinkler": sprinkler_names, "pipe": pipe_names, "device": device_names},
        present=frozenset(raw),
        tests_listed=isinstance(supply, dict) and isinstance(supply.get("flow_test"), list),
    )
