"""The schema, its page, the starter, the examples, and how fast a project is read."""

from __future__ import annotations

import json
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from click.testing import CliRunner
from project_texts import HEAD, LAYOUT

from supplycheck.cli import main
from supplycheck.project import read_project
from supplycheck.project.describe import descriptions, json_schema, tables
from supplycheck.project.page import input_page
from supplycheck.project.quantity import Rule, Written

ROOT = Path(__file__).parents[2]
EXAMPLES = sorted(path.parent for path in (ROOT / "examples").glob("*/project.toml"))


def test_the_input_page_is_up_to_date() -> None:
    assert (ROOT / "docs" / "input.md").read_text(encoding="utf-8") == input_page()


def test_every_key_has_a_description() -> None:
    for name, table in tables():
        assert table.__doc__, name
        assert set(descriptions(table)) == set(table.model_fields), name
        assert all(len(text) > 3 for text in descriptions(table).values()), name


def blocks(schema: dict[str, Any]) -> Iterator[dict[str, Any]]:
    yield schema
    yield from schema["$defs"].values()


def test_the_schema_forbids_unknown_keys_and_names_units() -> None:
    schema = json_schema()
    for block in blocks(schema):
        assert block["additionalProperties"] is False
        assert all(entry["description"] for entry in block["properties"].values())
    static = schema["$defs"]["FlowTestTable"]["properties"]["static"]
    assert static["quantity"] == "pressure"
    assert static["unit"] == {"us": "psi", "metric": "bar"}


def test_every_number_has_a_kind_of_quantity() -> None:
    for name, table in tables():
        for key, field in table.model_fields.items():
            if field.annotation is Written:
                assert any(isinstance(entry, Rule) for entry in field.metadata), f"{name}.{key}"


def test_schema_command_prints_json() -> None:
    answer = CliRunner().invoke(main, ["schema"])
    assert answer.exit_code == 0
    assert json.loads(answer.output) == json_schema()


def test_new_writes_a_project_and_never_overwrites(tmp_path: Path) -> None:
    folder = tmp_path / "deep" / "project"
    answer = CliRunner().invoke(main, ["new", str(folder)])
    assert answer.exit_code == 0, answer.output
    project = read_project(folder)
    assert len([node for node in project.system.nodes if node.kind == "sprinkler"]) == 48
    (folder / "project.toml").write_text("mine", encoding="utf-8")
    again = CliRunner().invoke(main, ["new", str(folder)])
    assert again.exit_code == 2
    assert "exists already" in again.output
    assert (folder / "project.toml").read_text(encoding="utf-8") == "mine"


@pytest.mark.parametrize("folder", EXAMPLES, ids=lambda folder: folder.name)
def test_examples_are_read(folder: Path) -> None:
    project = read_project(folder)
    assert project.system.pipes
    assert project.supply.margin is not None


def test_heavy_libraries_are_left_out() -> None:
    code = (
        "import sys, supplycheck.project; print(sorted({'pandas', 'openpyxl', 'scipy'} & set(sys.modules)))"
    )
    answer = subprocess.run(
        [sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, check=True
    )
    assert answer.stdout.strip() == "[]"


def test_a_large_layout_is_read_whole(tmp_path: Path) -> None:
    text = HEAD + LAYOUT.replace("lines = 3", "lines = 100").replace("heads = [2, 2]", "heads = [25, 25]")
    (tmp_path / "project.toml").write_text(text, encoding="utf-8")
    project = read_project(tmp_path)
    assert len(project.system.nodes) == 100 * 50 + 100 + 3
    assert len(project.system.pipes) == len(project.system.nodes) - 1
