"""Every command in the README and the documents runs as written."""

from __future__ import annotations

import re
import shlex
import shutil
from pathlib import Path

import pytest
from click.testing import CliRunner

from supplycheck.cli import main

ROOT = Path(__file__).parents[1]
BLOCK = re.compile(r"^```sh\n(.*?)^```", re.MULTILINE | re.DOTALL)
PAGES = [ROOT / "README.md", *sorted((ROOT / "docs").glob("*.md"))]


def commands(page: Path) -> list[str]:
    """Return the lines to run, continued lines joined."""
    text = "".join(BLOCK.findall(page.read_text(encoding="utf-8"))).replace("\\\n", " ")
    return [line.strip() for line in text.splitlines() if line.strip().startswith("supplycheck ")]


@pytest.mark.parametrize("page", PAGES, ids=lambda page: page.name)
def test_commands_run(page: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A line ends with the expected exit code in a comment (`# exit 1`), 0 where nothing is said."""
    shutil.copytree(ROOT / "examples", tmp_path / "examples", ignore=shutil.ignore_patterns("review"))
    monkeypatch.chdir(tmp_path)
    for line in commands(page):
        line, _, comment = line.partition("#")
        expected = re.search(r"exit (\d)", comment)
        line, _, target = line.partition(" > ")
        printed = CliRunner().invoke(main, shlex.split(line)[1:], catch_exceptions=False)
        if target:
            Path(target.strip()).write_text(printed.output, encoding="utf-8")
        assert printed.exit_code == int(expected.group(1) if expected else 0), f"{line}\n{printed.output}"


def test_links_between_documents_lead_somewhere() -> None:
    for page in PAGES:
        for target in re.findall(r"\]\(([^)#\s]+)\)", page.read_text(encoding="utf-8")):
            if "://" not in target:
                assert (page.parent / target).exists(), f"{page.name}: {target}"


@pytest.mark.parametrize("page", PAGES[1:], ids=[page.name for page in PAGES[1:]])
def test_every_page_has_a_line_in_the_index(page: Path) -> None:
    index = (ROOT / "docs" / "index.md").read_text(encoding="utf-8")
    lines = [line for line in index.splitlines() if f"]({page.name})" in line]
    assert len(lines) == (page.name != "index.md"), "one line a page in docs/index.md"


def test_every_fixed_section_of_the_report_is_described() -> None:
    page = (ROOT / "docs" / "report.md").read_text(encoding="utf-8")
    folder = ROOT / "supplycheck" / "report" / "sections"
    code = "".join(path.read_text(encoding="utf-8") for path in sorted(folder.glob("*.py")))
    titles = re.findall(r'\bSection\(\s*"(\w[^"]+)"', code)
    assert len(titles) > 10
    for title in titles:
        assert f"**{title}" in page, title
