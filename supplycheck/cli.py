"""The command line: one lazily loaded module for each verb."""

from __future__ import annotations

import importlib

import click

COMMANDS = {
    "check": "Check a system against its water supply and write the review package.",
    "new": "Write a commented starter project that passes as it stands.",
    "pipe": "Solve one pipe: loss, flow or diameter.",
    "flowtest": "Reduce a hydrant flow test.",
    "schema": "Print the JSON Schema of the project file.",
}


class _Verbs(click.Group):
    """A group that imports a verb's module only when the verb is used."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        """Return the verbs in the order of a typical job."""
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        """Return the command for ``cmd_name``, importing its module now."""
        if cmd_name not in COMMANDS:
            return None
        module = importlib.import_module(f"supplycheck.commands.{cmd_name}")
        command: click.Command = module.command
        return command

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        """Write the list of verbs without importing any of them."""
        with formatter.section("Commands"):
            formatter.write_dl(list(COMMANDS.items()))


@click.group(cls=_Verbs, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(package_name="supplycheck")
def main() -> None:
    """Check a fire sprinkler, standpipe or hydrant system against its water supply.

    Exit codes: 0 supply adequate, 1 supply not adequate (or undetermined), 2 wrong usage,
    3 the project has errors, 4 the calculation did not converge.
    """
