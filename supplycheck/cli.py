"""The command line: one lazily loaded module for each verb."""

from __future__ import annotations

import gc
import importlib
import io
import os
import sys
from pathlib import Path

import click

COMMANDS = {
    "check": "Check a system against its water supply and write the review package.",
    "new": "Write a commented starter project, to be changed into your own.",
    "pipe": "Solve one pipe: pressure loss, flow, diameter or pump.",
    "flowtest": "Turn the readings of one hydrant flow test into a supply curve.",
    "hydrants": "Screen a table of many hydrant tests: flow, class, quality, requirement.",
    "schema": "Print the JSON Schema of the project file, for editors.",
}


_OWN_FAULT = """\
No result: the program itself failed, which is a fault of supplycheck and not of your project.
  {what}
  Please report it with the project file; until then, do not rely on older output for this project."""


def _where(error: Exception) -> str:
    """Return what failed and in which module and line."""
    import traceback

    last = traceback.extract_tb(error.__traceback__)[-1]
    return f"{type(error).__name__}: {error} (in {last.name}, {last.filename}:{last.lineno})"


STOPPED = 130
"""Exit code of a run that was stopped from the keyboard, as shells count it (128 + SIGINT)."""


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

    def invoke(self, ctx: click.Context) -> object:
        """Run the verb; a fault of our own ends in a plain message and code 4, never in code 1."""
        try:
            return super().invoke(ctx)
        except (click.exceptions.Exit, click.Abort, click.ClickException, BrokenPipeError):
            raise
        except KeyboardInterrupt:
            click.echo("Stopped before the end: there is no answer.", err=True)
            ctx.exit(STOPPED)
        except Exception as error:  # noqa: BLE001 - code 1 of a crash would read as "not adequate"
            click.echo(_OWN_FAULT.format(what=_where(error)), err=True)
            ctx.exit(4)

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        """Write the list of verbs without importing any of them."""
        with formatter.section("Commands"):
            formatter.write_dl(list(COMMANDS.items()))


@click.group(cls=_Verbs, context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100})
@click.version_option(package_name="supplycheck", help="Print the version and leave.")
def main() -> None:
    """Check a fire sprinkler, standpipe or hydrant system against its water supply.

    A preliminary engineering aid: not a design, an approval, a listing or a certificate. A licensed or
    certified person checks the inputs and signs; the authority having jurisdiction decides.

    \b
    To begin:   supplycheck new my-building
                supplycheck check my-building
    Each verb:  supplycheck check --help

    \b
    Exit codes: 0  done; `check`: the supply is adequate
                1  `check`: not adequate, or undetermined; `hydrants`: a requirement is not met
                2  wrong usage, or files that cannot be written
                3  the project or the readings have faults; all of them are listed
                4  no result: the calculation did not converge
              130  stopped from the keyboard
    """


def _open_streams() -> None:
    """Let each output stream take every text: what its encoding lacks is escaped, a closed one swallows."""
    for name in ("stdout", "stderr"):
        stream = getattr(sys, name)
        if stream is None:
            setattr(sys, name, Path(os.devnull).open("w", encoding="utf-8"))  # noqa: SIM115
        elif isinstance(stream, io.TextIOWrapper):
            stream.reconfigure(errors="backslashreplace")


def run() -> None:
    """Start the command line in a process of its own, as the installed program does.

    A run is short, so cycles are looked for rarely, and not at all once it is over: both would cost a
    fifth of the time of a check.
    """
    gc.set_threshold(1_000_000, 50, 50)
    _open_streams()
    try:
        main()
    finally:
        gc.freeze()
