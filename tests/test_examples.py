"""Every example, through the command line, as a newcomer runs it."""

from __future__ import annotations

import json
import shutil
from pathlib import Path
from typing import Any

import pytest
from click.testing import CliRunner, Result

from supplycheck.cli import main

EXAMPLES = Path(__file__).parents[1] / "examples"
EXIT_CODE = {"adequate": 0, "not adequate": 1, "undetermined": 1}
EXPECTED = {
    "parcel-depot": "adequate",
    "office-floor": "adequate",
    "short-workshop": "not adequate",
    "spreadsheet-store": "adequate",
    "gridded-cold-store": "adequate",
    "looped-workshop": "adequate",
    "two-supply-campus": "adequate",
    "boosted-warehouse": "adequate",
    "tank-and-pump": "adequate",
    "tower-standpipe": "adequate",
    "yard-main": "adequate",
}
KEYS = {
    "demand": {"flow", "pressure", "node", "sprinkler_flow", "hose_flow"},
    "supply": {"static", "residual", "test_flow", "available_pressure", "available_flow"},
    "margin": {"pressure", "required", "rule"},
    "balance": {"largest_flow_imbalance", "largest_pressure_imbalance"},
}
ROW_KEYS = {
    "nodes": {"tag", "x", "y", "elevation", "pressure", "discharge", "k_factor", "required_discharge"},
    "pipes": {"from", "to", "flow", "velocity", "bore", "length", "equivalent_length"}
    | {"friction_loss", "elevation_loss", "device_loss"},
    "findings": {"check", "state", "measured", "limit", "source", "text"},
}
STATES = {"ok", "fail", "missing", "not applicable", "ask authority"}


def run(*arguments: str) -> Result:
    return CliRunner().invoke(main, list(arguments), catch_exceptions=False)


@pytest.fixture(scope="module")
def reviewed(tmp_path_factory: pytest.TempPathFactory) -> dict[str, tuple[Path, Result]]:
    """Copy each example, check it, and keep its folder and what was printed."""
    done = {}
    for name in EXPECTED:
        folder = tmp_path_factory.mktemp("examples") / name
        shutil.copytree(EXAMPLES / name, folder, ignore=shutil.ignore_patterns("review"))
        done[name] = (folder, run("check", str(folder)))
    return done


def record(folder: Path) -> dict[str, Any]:
    text = (folder / "review" / "result.json").read_text(encoding="utf-8")
    found: dict[str, Any] = json.loads(text)
    return found


def test_every_example_with_a_project_is_named_here() -> None:
    assert {path.parent.name for path in EXAMPLES.glob("*/project.toml")} == set(EXPECTED)


@pytest.mark.parametrize("name", EXPECTED)
def test_verdict_exit_code_and_files(reviewed: dict[str, tuple[Path, Result]], name: str) -> None:
    folder, printed = reviewed[name]
    assert record(folder)["verdict"] == EXPECTED[name]
    assert printed.exit_code == EXIT_CODE[EXPECTED[name]]
    names = {path.name for path in (folder / "review").iterdir()}
    assert names == {"result.json", "review.pdf", "nodes.csv", "pipes.csv", "tables.xlsx"}
    assert EXPECTED[name].upper() in printed.output
    assert len(printed.output.splitlines()) <= 25
    assert max(map(len, printed.output.splitlines())) <= 100


@pytest.mark.parametrize("name", EXPECTED)
def test_contract_of_the_record(reviewed: dict[str, tuple[Path, Result]], name: str) -> None:
    found = record(reviewed[name][0])
    assert found["schema"] and found["units"]["flow"] in {"gpm", "L/min"}
    for table, keys in KEYS.items():
        assert keys <= set(found[table]), table
    for table, keys in ROW_KEYS.items():
        assert all(keys <= set(row) for row in found[table]), table
    assert {finding["state"] for finding in found["findings"]} <= STATES
    assert isinstance(found["assumptions"], list)


@pytest.mark.parametrize("name", EXPECTED)
def test_balance_recomputed_from_the_record_alone(
    reviewed: dict[str, tuple[Path, Result]], name: str
) -> None:
    """Mass balance within 1e-9 of the flow, pressures within 1e-6 psi, from the printed rows."""
    found = record(reviewed[name][0])
    nodes = {node["tag"]: node for node in found["nodes"]}
    net = {tag: -node["discharge"] for tag, node in nodes.items()}
    for pipe in found["pipes"]:
        net[pipe["from"]] -= pipe["flow"]
        net[pipe["to"]] += pipe["flow"]
    total = found["demand"]["flow"]
    supplied = [-net.pop(tag) for tag, node in nodes.items() if node["kind"] == "supply"]
    assert min(supplied) > 0
    assert sum(supplied) == pytest.approx(total, rel=1e-9)
    assert max(map(abs, net.values())) <= 1e-9 * total
    psi = 1.0 if found["units"]["pressure"] == "psi" else 6894.757 / 1e5
    for pipe in found["pipes"]:
        gap = nodes[pipe["from"]]["pressure"] - nodes[pipe["to"]]["pressure"]
        gap -= pipe["friction_loss"] + pipe["elevation_loss"] + pipe["device_loss"]
        assert abs(gap) <= 1e-6 * psi
    assert found["balance"]["largest_flow_imbalance"] <= 1e-9 * total
    assert found["balance"]["largest_pressure_imbalance"] <= 1e-6 * psi


@pytest.mark.parametrize("name", EXPECTED)
def test_every_head_and_outlet_gets_what_it_needs(
    reviewed: dict[str, tuple[Path, Result]], name: str
) -> None:
    found = record(reviewed[name][0])
    asked = [node for node in found["nodes"] if node["required_discharge"]]
    assert asked
    for node in asked:
        assert node["discharge"] >= node["required_discharge"] * (1 - 1e-9)
        assert node["pressure"] >= node["required_pressure"] * (1 - 1e-9)
    heads = [node for node in asked if node["k_factor"]]
    for head in heads:
        assert head["discharge"] == pytest.approx(head["k_factor"] * head["pressure"] ** 0.5, rel=1e-9)
    assert sum(head["discharge"] for head in heads) == pytest.approx(
        found["demand"]["sprinkler_flow"], rel=1e-9
    )


def test_files_are_the_same_byte_for_byte_each_time(
    reviewed: dict[str, tuple[Path, Result]], tmp_path: Path
) -> None:
    folder, _ = reviewed["parcel-depot"]
    run("check", str(folder), "--out", str(tmp_path / "again"))
    for path in (folder / "review").iterdir():
        assert path.read_bytes() == (tmp_path / "again" / path.name).read_bytes(), path.name


def test_json_on_the_screen_is_the_file(reviewed: dict[str, tuple[Path, Result]]) -> None:
    folder, _ = reviewed["parcel-depot"]
    printed = run("check", str(folder), "--json", "--no-files")
    assert printed.output == (folder / "review" / "result.json").read_text(encoding="utf-8")


def test_faults_leave_nothing_behind(tmp_path: Path) -> None:
    folder = tmp_path / "faulty"
    shutil.copytree(EXAMPLES / "parcel-depot", folder, ignore=shutil.ignore_patterns("review"))
    text = (folder / "project.toml").read_text(encoding="utf-8")
    (folder / "project.toml").write_text(text.replace("static", "statik", 1), encoding="utf-8")
    printed = run("check", str(folder))
    assert printed.exit_code == 3
    assert "statik" in printed.stderr and "static" in printed.stderr
    assert not (folder / "review").exists()
