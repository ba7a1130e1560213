"""``supplycheck schema``: print the JSON Schema of the project file."""

from __future__ import annotations

import click


@click.command(name="schema")
def command() -> None:
    """Print the JSON Schema of the project file, from which editors complete its keys."""
    import json

    from supplycheck.project.describe import json_schema

    click.echo(json.dumps(json_schema(), indent=2, ensure_ascii=False))
