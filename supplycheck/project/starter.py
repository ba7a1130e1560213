"""What a project still holds of the starter that ``new`` writes: its marked texts and invented figures."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Iterator
from importlib.resources import files
from typing import Any, Final

from supplycheck.model import Unedited

MARK: Final = "REPLACE"
"""How a text of the starter begins that stands for one of the user's own."""
ENOUGH: Final = 2
"""Readings of one test that agree with the starter's before they are taken for it: one may by chance."""

_READINGS: Final = ("static", "residual", "date", "gauge_elevation")
_TABLE: Final = re.compile(r"\s*(\[\[?)\s*([^\[\]]+?)\s*\]\]?\s*(?:#.*)?$")
_KEY: Final = re.compile(r"\s*([A-Za-z0-9_\-.\"]+)\s*=")


def starter_text() -> str:
    """Return the starter project as ``new`` writes it."""
    return files("supplycheck.project").joinpath("starter.toml").read_text(encoding="utf-8")


def unedited(text: str, raw: dict[str, Any]) -> tuple[Unedited, ...]:
    """Return what the project file ``text``, read as ``raw``, still holds of the starter, in its order.

    A text counts that begins with :data:`MARK`; of the figures those of a flow test, the curve of a device
    and the layout, and beside any of these the dates of the project.
    """
    starter = tomllib.loads(starter_text())
    found = {
        key: "text" for key, value in _leaves(raw) if isinstance(value, str) and value.startswith(MARK)
    }
    found |= dict.fromkeys(_figures(raw, starter), "figure")
    if found:
        found |= dict.fromkeys(_dates(raw, starter), "figure")
    lines = key_lines(text)
    rows = [Unedited(key, _line(key, lines), kind == "figure") for key, kind in found.items()]
    return tuple(sorted(rows, key=lambda one: (one.line, one.key)))


def _leaves(value: Any, key: str = "") -> Iterator[tuple[str, Any]]:
    """Yield the key path of every value that is neither a table nor a list; lists count from 1."""
    if isinstance(value, dict):
        for name, below in value.items():
            yield from _leaves(below, f"{key}.{name}" if key else name)
    elif isinstance(value, list):
        for place, below in enumerate(value, start=1):
            yield from _leaves(below, f"{key}[{place}]")
    else:
        yield key, value


def _figures(raw: dict[str, Any], starter: dict[str, Any]) -> Iterator[str]:
    own = starter["supply"]["flow_test"]
    for key, test in _tests(raw):
        same = [f"{key}.{name}" for name in _READINGS[:3] if name in test and test[name] == own[name]]
        outlets = test.get("outlets")
        if isinstance(outlets, list):
            same += [
                f"{key}.outlets[{place}].pitot"
                for place, outlet in enumerate(outlets, start=1)
                if isinstance(outlet, dict) and outlet.get("pitot") == own["outlets"][0]["pitot"]
            ]
        if len(same) >= ENOUGH:
            yield from same
    curve = starter["device"]["backflow"]["curve"]
    devices = raw.get("device")
    for name, device in devices.items() if isinstance(devices, dict) else ():
        if isinstance(device, dict) and device.get("curve") == curve:
            yield f"device.{name}.curve"
    if raw.get("layout") == starter["layout"]:
        yield "layout"


def _tests(raw: dict[str, Any]) -> Iterator[tuple[str, dict[str, Any]]]:
    supply = raw.get("supply")
    tests = supply.get("flow_test") if isinstance(supply, dict) else None
    if isinstance(tests, dict):
        yield "supply.flow_test", tests
    for place, test in enumerate(tests if isinstance(tests, list) else (), start=1):
        if isinstance(test, dict):
            yield f"supply.flow_test[{place}]", test


def _dates(raw: dict[str, Any], starter: dict[str, Any]) -> Iterator[str]:
    for table, key in (("project", "date"), ("supply", "submittal_date")):
        given = raw.get(table)
        if isinstance(given, dict) and given.get(key) == starter[table][key]:
            yield f"{table}.{key}"


def key_lines(text: str) -> dict[str, int]:
    """Return the line of each table and key of a TOML ``text``; what is inside a value is not looked at.

    >>> key_lines('a = 1\\n[b]\\nc = 2\\n[[d]]\\ne = 3\\n')
    {'a': 1, 'b': 2, 'b.c': 3, 'd[1]': 4, 'd[1].e': 5}
    """
    found: dict[str, int] = {}
    counts: dict[str, int] = {}
    table, inside = "", ""
    for number, line in enumerate(text.splitlines(), start=1):
        if inside:
            inside = "" if line.count(inside) % 2 else inside
            continue
        if heading := _TABLE.match(line):
            table = heading[2].replace('"', "")
            if heading[1] == "[[":
                counts[table] = counts.get(table, 0) + 1
                table = f"{table}[{counts[table]}]"
            else:
                table = _inside_list(table, counts)
            found.setdefault(table, number)
        elif key := _KEY.match(line):
            name = key[1].replace('"', "")
            found.setdefault(f"{table}.{name}" if table else name, number)
        inside = next((mark for mark in ('"""', "'''") if line.count(mark) % 2), "")
    return found


def _inside_list(table: str, counts: dict[str, int]) -> str:
    """Return ``table`` with the number of the list entry that it belongs to."""
    for name, count in counts.items():
        if table.startswith(f"{name}."):
            return f"{name}[{count}]{table[len(name) :]}"
    return table


def _line(key: str, lines: dict[str, int]) -> int:
    """Return the line of ``key``, or of the nearest table or value that holds it."""
    while key and key not in lines:
        key = key[: max(key.rfind("."), key.rfind("["), 0)]
    return lines.get(key, 1)
