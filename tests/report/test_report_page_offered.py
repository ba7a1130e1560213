"""`check --html`: the page for a browser as part of the package, and never one that is out of date."""

from __future__ import annotations

import json
import re
import shutil
from html import unescape
from pathlib import Path

import pytest
from click.testing import CliRunner, Result

from supplycheck.cli import main

EXAMPLES = Path(__file__).parents[2] / "examples"


@pytest.fixture
def shop(tmp_path: Path) -> Path:
    folder = tmp_path / "shop"
    shutil.copytree(EXAMPLES / "short-workshop", folder, ignore=shutil.ignore_patterns("review"))
    return folder


def check(*arguments: object) -> Result:
    return CliRunner().invoke(main, ["check", *map(str, arguments)])


def words(page: Path) -> str:
    text = re.sub(r"<style>.*?</style>|<[^>]+>", " ", page.read_text(encoding="utf-8"), flags=re.DOTALL)
    return " ".join(unescape(text).split())


def test_the_page_is_written_where_it_is_asked_for(shop: Path) -> None:
    assert check(shop).exit_code == 1
    assert not (shop / "review" / "review.html").exists()
    assert check(shop, "--html").exit_code == 1
    answer = json.loads((shop / "review" / "result.json").read_text(encoding="utf-8"))
    told = words(shop / "review" / "review.html")
    assert answer["verdict_text"] in told
    assert f"{answer['demand']['pressure']:.1f} psi" in told
    assert f"{answer['supply']['available_pressure']:.1f} psi" in told
    for finding in answer["findings"]:
        assert finding["check"] in told
    assert "Preliminary engineering aid – not an approval" in told


def test_a_page_of_an_earlier_check_is_renewed_without_being_asked_for(shop: Path) -> None:
    """A page left from yesterday beside a PDF of today would contradict it."""
    assert check(shop, "--html").exit_code == 1
    before = words(shop / "review" / "review.html")
    text = (shop / "project.toml").read_text(encoding="utf-8")
    title = re.search(r'^title = "([^"]+)"', text, re.MULTILINE)
    assert title is not None and title[1] in before
    (shop / "project.toml").write_text(text.replace(title[1], "Another name"), encoding="utf-8")
    assert check(shop).exit_code == 1
    after = words(shop / "review" / "review.html")
    assert "Another name" in after and title[1] not in after


def test_a_page_of_somebody_else_is_left_alone(shop: Path) -> None:
    (shop / "review").mkdir()
    (shop / "review" / "review.html").write_text("<p>my notes</p>", encoding="utf-8")
    assert check(shop).exit_code == 1
    printed = check(shop, "--html")
    assert printed.exit_code == 2
    assert "was not written by supplycheck" in " ".join(printed.stderr.split())
    assert (shop / "review" / "review.html").read_text(encoding="utf-8") == "<p>my notes</p>"


def test_no_files_and_a_page_contradict_each_other(shop: Path) -> None:
    printed = check(shop, "--html", "--no-files")
    assert printed.exit_code == 2
    assert "leave out one of them" in printed.stderr


def test_many_projects_have_their_pages(shop: Path, tmp_path: Path) -> None:
    out = tmp_path / "out"
    assert check(shop, EXAMPLES / "office-floor", "--html", "--out", out, "--jobs", "2").exit_code == 1
    assert "272" in words(out / "office-floor" / "review.html")
    assert (out / "shop" / "review.html").exists()
