"""Every import inside the package follows the table of layers in DEVELOPERS.md."""

from __future__ import annotations

import ast
from pathlib import Path

import pytest

PACKAGE = Path(__file__).parents[1] / "supplycheck"

BASE = {"errors", "units", "findings"}
ALLOWED: dict[str, set[str]] = {
    "errors": set(),
    "units": set(),
    "findings": set(),
    "hydraulics": {"errors"},
    "model": {"errors", "findings"},
    "catalogue": {"model"} | BASE,
    "project": {"catalogue", "model", "hydraulics"} | BASE,
    "network": {"model", "hydraulics", "errors"},
    "demand": {"model", "hydraulics", "errors"},
    "supply": {"network", "model", "hydraulics", "errors"},
    "checks": {"model", "hydraulics", "network", "supply", "findings"},
    "results": {"checks", "supply", "demand", "network", "model", "hydraulics"} | BASE,
    "report": {"results", "model"} | BASE,
    "cases": {"results", "supply", "demand", "network", "model", "hydraulics", "errors"},
    "context": {"catalogue", "cases", "checks", "results", "demand", "supply", "model", "errors"},
    "screening": {"project", "catalogue", "model", "hydraulics", "supply", "results", "report"} | BASE,
    "check": {"project", "cases", "context", "catalogue", "model", "network", "demand", "supply"}
    | {"checks", "results"}
    | BASE,
}
EVERYTHING = set(ALLOWED) | {"commands"}
ALLOWED["commands"] = EVERYTHING
ALLOWED["cli"] = {"commands", "errors"}


def room_of(path: Path) -> str:
    return path.relative_to(PACKAGE).parts[0].removesuffix(".py")


def imports_of(path: Path) -> list[str]:
    names: list[str] = []
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            names += [alias.name for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}: relative import"
            names += [f"{node.module}.{alias.name}" for alias in node.names]
    return names


MODULES = sorted(path for path in PACKAGE.rglob("*.py") if path.parent != PACKAGE or "__" not in path.name)


@pytest.mark.parametrize("path", MODULES, ids=lambda path: str(path.relative_to(PACKAGE)))
def test_imports_follow_the_layers(path: Path) -> None:
    room = room_of(path)
    for name in imports_of(path):
        parts = name.split(".")
        if parts[0] == "supplycheck" and parts[1] != "__version__":
            assert parts[1] == room or parts[1] in ALLOWED[room], f"{path.name} imports {name}"
        if parts[0] == "reportlab":
            assert room == "report", f"{path.name} imports reportlab"
        if parts[0] == "pandas":
            assert room in {"results", "report", "screening", "commands"}, f"{path.name} imports pandas"
