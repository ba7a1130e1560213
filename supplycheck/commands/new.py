"""``supplycheck new``: write a commented starter project."""

from __future__ import annotations

from pathlib import Path

import click


@click.command(name="new")
@click.argument("directory", type=click.Path(file_okay=False))
def command(directory: str) -> None:
    """Write a commented starter project into DIRECTORY.

    The file DIRECTORY/project.toml is complete and can be checked at once. Its layout and flow test are
    invented: put your own in their place line by line. The check lists what is still the starter's.

    An existing project is never overwritten.

    \b
    supplycheck new my-building
    supplycheck check my-building

    Exit codes: 0 written, 2 wrong usage, or a project is there already.
    """
    from supplycheck.project.starter import starter_text

    if not directory.strip():
        raise click.UsageError("DIRECTORY is empty; name the folder of the new project ('.' for this one).")
    target = Path(directory) / "project.toml"
    text = starter_text()
    try:
        target.parent.mkdir(parents=True, exist_ok=True)
        with target.open("x", encoding="utf-8", newline="\n") as file:
            file.write(text)
    except FileExistsError:
        raise click.UsageError(
            f"{target} exists already and is left as it is; choose another directory"
        ) from None
    except OSError as caught:
        raise click.UsageError(f"{target} cannot be written ({caught.strerror})") from None
    click.echo(
        f"wrote {target}\n"
        "Its layout and flow test are invented. Put your own in their place, first where a text begins\n"
        "with REPLACE; the check lists by key and line what is still the starter's.\n"
        f"next: supplycheck check {directory}"
    )
