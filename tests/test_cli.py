"""The command line as a whole."""

from __future__ import annotations

import shlex
import shutil
import sys
import types
from pathlib import Path

import click
import pytest
from click.testing import CliRunner

from supplycheck.cli import COMMANDS, main
from supplycheck.commands.check import PACKAGE_FILES

EXAMPLES = Path(__file__).parents[1] / "examples"


def test_help_names_every_verb_and_the_exit_codes() -> None:
    printed = CliRunner().invoke(main, ["--help"])
    assert printed.exit_code == 0
    assert all(verb in printed.output for verb in COMMANDS)
    assert "Exit codes" in printed.output


@pytest.mark.parametrize("verb", COMMANDS)
def test_every_verb_explains_itself(verb: str) -> None:
    printed = CliRunner().invoke(main, [verb, "--help"])
    assert printed.exit_code == 0 and printed.output.startswith("Usage:")


def examples_in_help() -> list[str]:
    """Return the commands that the helps show, continued lines joined."""
    found = []
    for verb in COMMANDS:
        printed = CliRunner().invoke(main, [verb, "--help"], terminal_width=100).output
        lines = printed.replace("\\\n", " ").splitlines()
        found += [line.strip() for line in lines if line.strip().startswith(f"supplycheck {verb} ")]
    return found


def test_commands_shown_in_the_helps_run(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    shutil.copytree(EXAMPLES / "hydrant-tests", tmp_path, dirs_exist_ok=True)
    shutil.copytree(EXAMPLES / "office-floor", tmp_path / "projects" / "office")
    monkeypatch.chdir(tmp_path)
    assert CliRunner().invoke(main, ["new", "my-building"]).exit_code == 0
    shown = [line for line in examples_in_help() if not line.startswith("supplycheck new")]
    assert len(shown) >= 9
    for line in shown:
        command, _, _ = line.partition(" > ")
        printed = CliRunner().invoke(main, shlex.split(command)[1:])
        assert printed.exit_code == (1 if " hydrants " in line else 0), f"{line}\n{printed.output}"


@pytest.mark.parametrize("verb", [verb for verb in COMMANDS if verb != "schema"])
def test_every_verb_names_its_exit_codes(verb: str) -> None:
    assert "Exit codes: 0 " in CliRunner().invoke(main, [verb, "--help"]).output


@pytest.mark.parametrize("verb", COMMANDS)
def test_every_option_says_what_it_takes_and_what_it_does(verb: str) -> None:
    """A newcomer learns nothing from `--flow TEXT`."""
    command = main.get_command(click.Context(main), verb)
    assert command is not None
    for option in command.params:
        if isinstance(option, click.Option):
            assert option.help and option.help[0].isupper() and option.help.endswith("."), option.name
            shown = option.make_metavar(click.Context(command))
            assert shown not in ("TEXT", "INTEGER", "INTEGER RANGE", "FLOAT") or option.is_flag, option.name


def test_the_help_of_check_names_every_file_of_the_package() -> None:
    printed = CliRunner().invoke(main, ["check", "--help"]).output
    assert all(name in printed for name in (*PACKAGE_FILES, "portfolio.csv"))


def test_the_first_help_says_what_the_tool_is_not() -> None:
    printed = " ".join(CliRunner().invoke(main, ["--help"]).output.split())
    assert "not a design, an approval, a listing or a certificate" in printed


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
