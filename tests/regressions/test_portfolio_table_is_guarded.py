"""`portfolio.csv` was once written over whatever file of that name lay beside the projects."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest
from click.testing import CliRunner, Result

from supplycheck.cli import main

EXAMPLES = Path(__file__).parents[2] / "examples"
OWN = "building,budget\nnorth hall,12000\n"


@pytest.fixture
def estate(tmp_path: Path) -> Path:
    folder = tmp_path / "estate"
    shutil.copytree(EXAMPLES / "looped-workshop", folder / "a", ignore=shutil.ignore_patterns("review"))
    (folder / "b").mkdir()
    (folder / "b" / "project.toml").write_text("units = 3\n", encoding="utf-8")
    return folder


def check(*arguments: object) -> Result:
    return CliRunner().invoke(main, ["check", *map(str, arguments)])


def said(result: Result) -> str:
    return " ".join(result.stderr.split())


def test_a_table_of_the_user_is_kept_and_nothing_is_checked(estate: Path) -> None:
    (estate / "portfolio.csv").write_text(OWN, encoding="utf-8")
    printed = check(estate)
    assert printed.exit_code == 2
    assert "portfolio.csv was not written by supplycheck" in said(printed)
    assert "choose another folder with --out" in said(printed)
    assert (estate / "portfolio.csv").read_text(encoding="utf-8") == OWN
    assert not (estate / "a" / "review").exists()


def test_a_table_that_a_project_reads_is_kept(estate: Path) -> None:
    """The project's own node table under the name of ours, in the folder that --out names."""
    home = estate / "a"
    (home / "nodes.csv").rename(home / "portfolio.csv")
    text = (home / "project.toml").read_text(encoding="utf-8").replace('"nodes.csv"', '"portfolio.csv"')
    (home / "project.toml").write_text(text, encoding="utf-8")
    before = (home / "portfolio.csv").read_bytes()
    printed = check(home, estate / "b", "--out", home)
    assert printed.exit_code == 2
    assert "is a file of the project" in said(printed)
    assert (home / "portfolio.csv").read_bytes() == before


def test_a_folder_of_that_name_is_told_before_any_work(estate: Path) -> None:
    (estate / "portfolio.csv").mkdir()
    printed = check(estate)
    assert printed.exit_code == 2
    assert "portfolio.csv is a folder" in said(printed)
    assert not (estate / "a" / "review").exists()


def test_our_own_table_is_renewed(estate: Path) -> None:
    assert check(estate).exit_code == 3
    first = (estate / "portfolio.csv").read_bytes()
    (estate / "portfolio.csv").write_bytes(first + b"old,row\n")
    assert check(estate).exit_code == 3
    assert (estate / "portfolio.csv").read_bytes() == first


def test_nothing_is_guarded_where_nothing_is_written(estate: Path) -> None:
    (estate / "portfolio.csv").write_text(OWN, encoding="utf-8")
    assert check(estate, "--no-files").exit_code == 3
    assert (estate / "portfolio.csv").read_text(encoding="utf-8") == OWN
