"""`check --out` onto the folder of the project once wrote its results over the project's own tables."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest
from click.testing import CliRunner, Result

from supplycheck.check import check_project
from supplycheck.cli import main
from supplycheck.commands.check import PACKAGE_FILES, PAGE
from supplycheck.report.package import package_files

EXAMPLE = Path(__file__).parents[2] / "examples" / "looped-workshop"


@pytest.fixture
def workshop(tmp_path: Path) -> Path:
    folder = tmp_path / "workshop"
    shutil.copytree(EXAMPLE, folder, ignore=shutil.ignore_patterns("review"))
    return folder


def contents(folder: Path) -> dict[str, bytes]:
    return {
        str(file.relative_to(folder)): file.read_bytes() for file in folder.rglob("*") if file.is_file()
    }


def check(*arguments: object) -> Result:
    return CliRunner().invoke(main, ["check", *map(str, arguments)])


@pytest.mark.parametrize("way", ["folder", "file", "around", "link"])
def test_a_package_never_overwrites_what_the_project_reads(workshop: Path, way: str) -> None:
    before = contents(workshop)
    out = workshop / "sub" / ".." if way == "around" else workshop
    if way == "around":
        (workshop / "sub").mkdir()
    if way == "link":
        out = workshop.parent / "link"
        out.symlink_to(workshop, target_is_directory=True)
    printed = check(workshop / "project.toml" if way == "file" else workshop, "--out", out)
    assert printed.exit_code == 2
    assert "--out: nodes.csv there is a file of the project" in printed.stderr
    assert "choose another folder" in " ".join(printed.stderr.split())
    assert contents(workshop) == before


def test_tables_in_the_default_folder_are_kept(workshop: Path) -> None:
    (workshop / "review").mkdir()
    (workshop / "pipes.csv").rename(workshop / "review" / "pipes.csv")
    text = (workshop / "project.toml").read_text(encoding="utf-8")
    text = text.replace('"pipes.csv"', '"review/pipes.csv"')
    (workshop / "project.toml").write_text(text, encoding="utf-8")
    before = contents(workshop)
    assert check(workshop).exit_code == 2
    assert contents(workshop) == before
    assert check(workshop, "--no-files").exit_code == 0


def test_another_folder_is_written(workshop: Path) -> None:
    before = contents(workshop)
    assert check(workshop, "--out", workshop / "out").exit_code == 0
    after = contents(workshop)
    assert {name: after[name] for name in before} == before


def test_the_names_that_are_guarded_are_those_that_are_written(workshop: Path) -> None:
    result = check_project(workshop / "project.toml")
    assert set(PACKAGE_FILES) == set(package_files(result, html=True))
    assert set(package_files(result)) == set(PACKAGE_FILES) - {PAGE}
