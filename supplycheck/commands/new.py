"""``supplycheck new``: write a commented starter project."""

from __future__ import annotations

from pathlib import Path

import click


@click.command(name="new")
@click.argument("directory", type=click.Path(file_okay=False))
def command(directory: str) -> None:
    """Write a commented starter project into DIRECTORY; it passes as it stands.

    An existing project is never overwritten.
    """
    from importlib.resources import files

    if not directory.strip():
        raise click.UsageError("DIRECTORY is empty; name the folder of the new project ('.' for this one).")
    target = Path(directory) / "project.toml"
    text = files("supplycheck.project").joinpath("starter.toml").read_text(encoding="utf-8")
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
    click.echo(f"wrote {target}\nnext: supplycheck check {directory}")
