"""The command line as a whole."""

from __future__ import annotations

import sys
import types

import pytest
from click.testing import CliRunner

from supplycheck.cli import COMMANDS, main


def test_help_names_every_verb_and_the_exit_codes() -> None:
    printed = CliRunner().invoke(main, ["--help"])
    assert printed.exit_code == 0
    assert all(verb in printed.output for verb in COMMANDS)
    assert "Exit codes" in printed.output


@pytest.mark.parametrize("verb", COMMANDS)
def test_every_verb_explains_itself(verb: str) -> None:
    printed = CliRunner().invoke(main, [verb, "--help"])
    assert printed.exit_code == 0 and printed.output.startswith("Usage:")


@pytest.mark.parametrize("arguments", [["chekc"], ["check"], ["check", "--no-such-option", "x"]])
def test_wrong_usage_is_code_two(arguments: list[str]) -> None:
    assert CliRunner().invoke(main, arguments).exit_code == 2


def test_a_fault_of_our_own_is_told_and_never_reads_as_a_verdict(monkeypatch: pytest.MonkeyPatch) -> None:
    broken = types.ModuleType("supplycheck.check")

    def check_project(*_: object) -> None:
        raise RuntimeError("planted")

    broken.check_project = check_project  # type: ignore[attr-defined]
    monkeypatch.setitem(sys.modules, "supplycheck.check", broken)
    printed = CliRunner().invoke(main, ["check", "anything.toml"])
    assert printed.exit_code == 4
    assert "planted" in printed.stderr and "Traceback" not in printed.stderr
