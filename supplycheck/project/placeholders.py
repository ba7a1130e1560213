"""Stand-ins for values that could not be read, so that the rest of a table can still be checked.

A project with a stand-in is refused in the end; a stand-in number is NaN, which no comparison finds wrong.
"""

from __future__ import annotations

import datetime as dt
import math
from typing import Any, Literal, get_args, get_origin

from pydantic.fields import FieldInfo

from supplycheck.project.describe import table_in
from supplycheck.project.quantity import Rule, Written
from supplycheck.project.schema_parts import Table

UNKNOWN = "?"


def _of(annotation: Any, metadata: list[Any]) -> Any:
    for entry in metadata:
        if isinstance(entry, Rule):
            return Written(math.nan, entry.kind)
    if hasattr(annotation, "__metadata__"):
        return _of(get_args(annotation)[0], list(annotation.__metadata__))
    if isinstance(annotation, type) and issubclass(annotation, Table):
        return stand_in(annotation)
    if get_origin(annotation) is Literal:
        return get_args(annotation)[0]
    if get_origin(annotation) is list:
        return [_of(get_args(annotation)[0], [])]
    if annotation is dt.date:
        return dt.date(1, 1, 1)
    if annotation is int:
        return 1
    return UNKNOWN


def stand_in(table: type[Table]) -> dict[str, Any]:
    """Return a table with a stand-in for each key that it needs."""
    return {key: _of(field.annotation, field.metadata) for key, field in needed(table).items()}


def needed(table: type[Table]) -> dict[str, FieldInfo]:
    """Return the keys that ``table`` needs."""
    return {key: field for key, field in table.model_fields.items() if field.is_required()}


def filled(table: type[Table], raw: dict[str, Any]) -> dict[str, Any]:
    """Return ``raw`` with a stand-in for each needed key that is absent, in the tables below as well."""
    found = dict(raw)
    for key, value in raw.items():
        field = table.model_fields.get(key)
        below = table_in(field.annotation) if field is not None else None
        if below is None:
            continue
        if isinstance(value, list):
            found[key] = [filled(below, item) if isinstance(item, dict) else item for item in value]
        elif isinstance(value, dict):
            found[key] = filled(below, value)
    return {**stand_in_missing(table, found), **found}


def stand_in_missing(table: type[Table], raw: dict[str, Any]) -> dict[str, Any]:
    """Return stand-ins for the needed keys that ``raw`` does not have."""
    return {
        key: _of(field.annotation, field.metadata) for key, field in needed(table).items() if key not in raw
    }
