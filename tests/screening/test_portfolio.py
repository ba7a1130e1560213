"""Checking many projects: each stands alone, none hides another, the worst code counts."""

from __future__ import annotations

import csv
import json
import shutil
from pathlib import Path

import pytest
from click.testing import CliRunner, Result

from supplycheck.cli import main
from supplycheck.commands.portfolio import CRASHED, Job, check_one, is_portfolio, jobs_of

EXAMPLES = Path(__file__).parents[2] / "examples"


def check(*arguments: str) -> Result:
    return CliRunner().invoke(main, ["check", *arguments], catch_exceptions=False)


@pytest.fixture(scope="module")
def portfolio(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Two sound projects, one that falls short and one with a fault, at different depths."""
    folder = tmp_path_factory.mktemp("portfolio")
    skip = shutil.ignore_patterns("review")
    shutil.copytree(EXAMPLES / "parcel-depot", folder / "north" / "depot", ignore=skip)
    shutil.copytree(EXAMPLES / "office-floor", folder / "office", ignore=skip)
    shutil.copytree(EXAMPLES / "short-workshop", folder / "workshop", ignore=skip)
    (folder / "broken").mkdir()
    (folder / "broken" / "project.toml").write_text('units = "us"\n[projct]\n')
    (folder / ".hidden").mkdir()
    (folder / ".hidden" / "project.toml").write_text("")
    return folder


def test_one_line_each_a_table_and_the_worst_code(portfolio: Path) -> None:
    result = check(str(portfolio), "--jobs", "2")
    assert result.exit_code == 3
    lines = {line.split()[0]: line for line in result.output.splitlines() if line.strip()}
    assert "adequate" in lines["north/depot"]
    assert "not adequate" in lines["workshop"]
    assert "project faults" in lines["broken"]
    last = result.output.splitlines()[-1]
    assert last == "4 projects: 2 adequate, 1 not adequate, 1 with project faults."
    assert f"supplycheck check {portfolio / 'broken' / 'project.toml'}" in result.output
    with (portfolio / "portfolio.csv").open(encoding="utf-8", newline="") as file:
        table = {row["project"]: row for row in csv.DictReader(file)}
    assert list(table) == ["broken", "north/depot", "office", "workshop"]
    for name, row in table.items():
        folder = portfolio / name / "review"
        if name == "broken":
            assert row["package"] == "" and not folder.exists()
            assert "project.toml" in row["problem"]
            continue
        assert Path(row["package"]) == folder
        answer = json.loads((folder / "result.json").read_text(encoding="utf-8"))
        assert (folder / "review.pdf").exists()
        assert row["verdict"] == answer["verdict"]
        assert float(row["margin"]) == answer["margin"]["pressure"]
        assert float(row["demand_flow"]) == answer["demand"]["flow"]
        assert float(row["available_pressure"]) == answer["supply"]["available_pressure"]
        failed = [one for one in answer["findings"] if one["state"] == "fail"]
        assert row["findings_failed"] == str(len(failed))
        assert lines[name].split()[-1] == str(len(failed))
        assert row["pressure_unit"] == answer["units"]["pressure"]


def test_several_projects_into_one_place(portfolio: Path, tmp_path: Path) -> None:
    projects = [str(portfolio / "office"), str(portfolio / "north" / "depot" / "project.toml")]
    result = check(*projects, "--out", str(tmp_path), "--json", "--jobs", "2")
    assert result.exit_code == 0
    answer = json.loads(result.output)
    assert answer["worst"] == 0
    assert [one["verdict"] for one in answer["projects"]] == ["adequate", "adequate"]
    for name in ("office", "depot"):
        assert (tmp_path / name / "result.json").exists()
    assert (tmp_path / "portfolio.csv").exists()


def test_one_project_is_checked_as_ever(portfolio: Path) -> None:
    assert not is_portfolio([portfolio / "office"])
    assert not is_portfolio([portfolio / "office" / "project.toml"])
    assert not is_portfolio([portfolio / "office" / "review"])  # holds no project: told as a fault
    assert is_portfolio([portfolio])
    assert is_portfolio([portfolio / "office", portfolio / "workshop"])


def test_packages_never_share_a_folder(tmp_path: Path) -> None:
    for name in ("a.toml", "b.toml"):
        (tmp_path / name).write_text("")
    (tmp_path / "one" / "p").mkdir(parents=True)
    (tmp_path / "two" / "p").mkdir(parents=True)
    files = [tmp_path / "a.toml", tmp_path / "b.toml", tmp_path / "one" / "p", tmp_path / "two" / "p"]
    for out in (None, tmp_path / "out"):
        folders = [job.folder for job in jobs_of([*files, files[0]], out)]
        assert len(folders) == len(set(folders)) == 4


def test_a_crash_is_no_verdict_and_reaches_no_other(
    portfolio: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    job = Job("office", portfolio / "office" / "project.toml", tmp_path)
    monkeypatch.setenv("PYTHONHOME", str(tmp_path))  # the process cannot even start
    outcome = check_one(job, ["--no-files"])
    assert (outcome.code, outcome.verdict) == (CRASHED, "no result")
    assert outcome.problem


def test_a_package_that_cannot_be_written_is_told_without_our_own_command_line(
    portfolio: Path, tmp_path: Path
) -> None:
    """One project's refusal stops no other, and is told as the sentence that a person needs."""
    home = tmp_path / "looped"
    shutil.copytree(EXAMPLES / "looped-workshop", home, ignore=shutil.ignore_patterns("review"))
    result = check(str(home), str(portfolio / "office"), "--out", str(tmp_path))
    assert result.exit_code == 2
    line = next(line for line in result.output.splitlines() if line.startswith("looped"))
    assert "wrong usage" in line
    assert "Usage:" not in result.output and "nodes.csv" in line
    assert result.output.splitlines()[-1] == "2 projects: 1 adequate, 1 not checked (wrong usage)."
    assert (tmp_path / "office" / "result.json").exists()
