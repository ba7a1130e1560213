"""Every piece of a project file that the documents show can be put into a project as it stands."""

from __future__ import annotations

import datetime as dt
import json
import re
import tomllib
from pathlib import Path
from typing import Any

import pytest
from project_texts import LAYOUT_PROJECT, NODES, PIPES, TABLE_PROJECT

from supplycheck.model import MarginRule, Project
from supplycheck.project import read_project
from supplycheck.project.schema_supply import MarginTable
from supplycheck.supply import MarginCase, curve_through, required_margin
from supplycheck.units import GPM, PSI

ROOT = Path(__file__).parents[2]
PAGES = [ROOT / "README.md", *sorted((ROOT / "docs").glob("*.md"))]
BLOCK = re.compile(r"^```(toml)\n(.*?)^```", re.MULTILINE | re.DOTALL)
SNIPPETS = [
    pytest.param(match[2], id=f"{page.name}-{number}")
    for page in PAGES
    for number, match in enumerate(BLOCK.finditer(page.read_text(encoding="utf-8")), start=1)
]
OUTFLOW_NODES = """\
tag,x,y,elevation,kind,flow
001,0,10,10,outlet,50
002,0,0,10,junction,
T,10,0,10,junction,
S,10,0,0,supply,
"""
INSTEAD = {
    "points": ("residual", "flow", "outlets"),
    "hgl_high": ("static", "residual", "gauge_elevation"),
    "tank": ("flow_test",),
    "network": ("layout",),
}
"""What a key of a snippet is written in place of; the host project gives it up."""


def merged(host: dict[str, Any], piece: dict[str, Any]) -> dict[str, Any]:
    """Return ``host`` with the tables of ``piece`` put into it; a margin rule replaces another."""
    found = {
        key: value for key, value in host.items() if not any(key in INSTEAD.get(new, ()) for new in piece)
    }
    for key, value in piece.items():
        old = found.get(key)
        both = isinstance(old, dict) and isinstance(value, dict) and key != "margin"
        found[key] = merged(old, value) if both else value  # type: ignore[arg-type]
    return found


def written(value: Any) -> str:
    """Return ``value`` as TOML on one line."""
    if isinstance(value, dict):
        return "{ " + ", ".join(f"{json.dumps(key)} = {written(one)}" for key, one in value.items()) + " }"
    if isinstance(value, list):
        return "[" + ", ".join(map(written, value)) + "]"
    return value.isoformat() if isinstance(value, dt.date) else json.dumps(value)


def placed(snippet: str, folder: Path) -> Project:
    """Return the project that a snippet makes: itself where it is whole, else inside a sound one."""
    piece = tomllib.loads(snippet)
    text = snippet
    if "project" not in piece:
        outflows = piece.get("criteria", {}).get("hazard") == "none"
        host = tomllib.loads(TABLE_PROJECT if outflows or "network" in piece else LAYOUT_PROJECT)
        whole = merged(host, piece)
        if outflows:
            del whole["criteria"]["system"], whole["sprinkler"]
        elif "device" in piece:
            whole["layout"]["riser"]["devices"] = list(whole["device"])
        text = "".join(f"{key} = {written(value)}\n" for key, value in whole.items())
    nodes = NODES
    if tomllib.loads(text)["criteria"].get("hazard") == "none":
        nodes = OUTFLOW_NODES
    (folder / "project.toml").write_text(text, encoding="utf-8")
    (folder / "nodes.csv").write_text(nodes, encoding="utf-8")
    (folder / "pipes.csv").write_text(PIPES, encoding="utf-8")
    return read_project(folder)


def test_there_are_snippets() -> None:
    assert len(SNIPPETS) >= 13


@pytest.mark.parametrize("snippet", SNIPPETS)
def test_a_snippet_can_be_put_into_a_project(snippet: str, tmp_path: Path) -> None:
    assert placed(snippet, tmp_path).system.pipes


def test_a_snippet_with_a_slip_is_found_out(tmp_path: Path) -> None:
    with pytest.raises(Exception, match="presure"):
        placed('[supply.margin]\nrule = "fixed"\npresure = 5\n', tmp_path)


SUPPLY = (ROOT / "docs" / "supply.md").read_text(encoding="utf-8")
ASKED = re.compile(r"\(asks (\d+(?:\.\d+)?) psi[^)]*\):?\n\n```toml\n(.*?)^```", re.DOTALL | re.MULTILINE)
BY_HAND = {
    "none": 0.0,
    "fixed": 5.0,
    "percent": 0.10 * 82,  # the curve lowered by a tenth of its static
    "of demand": max(0.10 * 60.3, 5.0),
    "larger of": max(0.10 * 60.3, 10.0),
    "by static": 0.10 * 82,  # 82 psi is not below 50 psi
    "by test age": 5 + 1 * ((2026 - 2018) - 5),
}
"""Arithmetic on shapes published by Maine, Prince George's County and Bellevue; supply of the page."""


def test_every_rule_has_a_snippet() -> None:
    kinds = MarginTable.model_json_schema()["$defs"]["MarginTable"]["properties"]["rule"]["enum"]
    shown = [tomllib.loads(text)["supply"]["margin"]["rule"] for _, text in ASKED.findall(SUPPLY)]
    assert sorted(shown) == sorted(kinds) == sorted(BY_HAND)


@pytest.mark.parametrize("said, snippet", ASKED.findall(SUPPLY))
def test_a_rule_asks_what_the_page_says(said: str, snippet: str, tmp_path: Path) -> None:
    rule = placed(snippet, tmp_path).supply.margin
    assert isinstance(rule, MarginRule)
    curve = curve_through("M", "S", 82 * PSI, [(956 * GPM, 54 * PSI)])
    days = dt.date(2018, 6, 1), dt.date(2026, 6, 15)
    case = MarginCase(curve, 700 * GPM, 60.3 * PSI, 82 * PSI, *days)
    asked = required_margin(rule, case).required / PSI
    written_rule = tomllib.loads(snippet)["supply"]["margin"]["rule"]
    assert asked == pytest.approx(BY_HAND[written_rule], abs=1e-9)
    assert float(said) == pytest.approx(BY_HAND[written_rule], abs=0.005)
