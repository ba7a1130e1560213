"""``supplycheck schema``: print the JSON Schema of the project file."""

from __future__ import annotations

import click


@click.command(name="schema")
def command() -> None:
    """Print the JSON Schema of the project file.

    An editor that knows it completes and checks the keys of a project.toml as they are typed; each key says
    what it means and in which unit its bare numbers are.

    \b
    supplycheck schema > project.schema.json
    """
    import json

    from supplycheck.project.describe import json_schema

    click.echo(json.dumps(json_schema(), indent=2, ensure_ascii=False))
