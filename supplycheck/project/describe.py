"""The schema looked at from outside: descriptions, keys of a table, JSON Schema.

The descriptions stand in the schema modules as texts below each field. They are read from there only
when something needs them, because parsing source on each start would cost every run.
"""

from __future__ import annotations

import ast
import functools
import inspect
import textwrap
from collections.abc import Iterator
from typing import Any, get_args

from supplycheck.project.schema import ProjectFile
from supplycheck.project.schema_parts import Table


@functools.cache
def descriptions(table: type[Table]) -> dict[str, str]:
    """Return the description of each key of ``table``, its base tables included."""
    found: dict[str, str] = {}
    for each in reversed(table.__mro__):
        if not (isinstance(each, type) and issubclass(each, Table)):
            continue
        body = ast.parse(textwrap.dedent(inspect.getsource(each))).body[0]
        if not isinstance(body, ast.ClassDef):
            continue
        for field, text in zip(body.body, body.body[1:], strict=False):
            if (
                isinstance(field, ast.AnnAssign)
                and isinstance(field.target, ast.Name)
                and isinstance(text, ast.Expr)
                and isinstance(text.value, ast.Constant)
            ):
                found[field.target.id] = " ".join(str(text.value.value).split())
    return found


def table_in(annotation: Any) -> type[Table] | None:
    """Return the table type inside ``annotation``: optional, listed, or by name."""
    if isinstance(annotation, type) and issubclass(annotation, Table):
        return annotation
    for part in get_args(annotation):
        found = table_in(part)
        if found is not None:
            return found
    return None


def inner(table: type[Table], key: str) -> type[Table] | None:
    """Return the table type that stands under ``key``."""
    field = table.model_fields.get(key)
    return None if field is None else table_in(field.annotation)


def tables() -> Iterator[tuple[str, type[Table]]]:
    """Yield the name (``supply.flow_test``) and the type of every table, depth first."""

    def walk(
        name: str, table: type[Table], seen: tuple[type[Table], ...]
    ) -> Iterator[tuple[str, type[Table]]]:
        yield name, table
        for key in table.model_fields:
            below = inner(table, key)
            if below is not None and below not in (*seen, table):
                path = f"{name}.{key}" if name else key
                if name == "" and key in NAMED:
                    path += ".NAME"
                yield from walk(path, below, (*seen, table))

    yield from walk("", ProjectFile, ())


NAMED = ("sprinkler", "pipe", "device")


def homes_of(key: str) -> list[str]:
    """Return the tables in which ``key`` is allowed, for a message."""
    return [
        f"[{name}]" if name else "the top of the file"
        for name, table in tables()
        if key in table.model_fields
    ]


def json_schema() -> dict[str, Any]:
    """Return the JSON Schema (draft 2020-12) of the project file, with every description."""
    schema = ProjectFile.model_json_schema()
    types = {table.__name__: table for _, table in tables()}
    blocks = {ProjectFile.__name__: schema, **schema.get("$defs", {})}
    for name, block in blocks.items():
        for key, text in descriptions(types[name]).items():
            entry = block["properties"][key]
            entry["description"] = text
            entry.pop("title", None)
            if entry.get("default", ...) is None:
                entry.pop("default")
                options = [option for option in entry.get("anyOf", []) if option != {"type": "null"}]
                if len(options) == 1:
                    entry.pop("anyOf")
                    entry.update({k: v for k, v in options[0].items() if k != "description"})
                elif options:
                    entry["anyOf"] = options
        block["title"] = name
    return {"$schema": "https://json-schema.org/draft/2020-12/schema", **schema}
