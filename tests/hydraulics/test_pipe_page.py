"""Every command on the page about one-pipe problems runs and prints what the page shows."""

from __future__ import annotations

import re
import shlex
from pathlib import Path

import pytest
from click.testing import CliRunner

from supplycheck.cli import main

PAGE = Path(__file__).parents[2] / "docs" / "pipe.md"
BLOCKS = re.findall(
    r"```sh\n(.*?)```\n(?:\n```text\n(.*?)```)?", PAGE.read_text(encoding="utf-8"), re.DOTALL
)


@pytest.mark.parametrize(("command", "shown"), BLOCKS, ids=[str(n) for n in range(len(BLOCKS))])
def test_command_prints_what_the_page_shows(command: str, shown: str) -> None:
    words = shlex.split(command.replace("\\\n", " "), comments=True)
    assert words[0] == "supplycheck"
    result = CliRunner().invoke(main, words[1:])
    expected = 4 if shown.startswith("No solution") else 0
    assert result.exit_code == expected, result.output
    if shown:
        assert result.output.strip() == shown.strip()


def test_the_page_has_commands() -> None:
    assert len(BLOCKS) >= 6
    assert sum(bool(shown) for _, shown in BLOCKS) >= 5
