"""Building blocks of the schema: the base of every table, names, sizes, texts."""

from __future__ import annotations

from typing import Annotated, Any, Literal

from pydantic import BaseModel, BeforeValidator, ConfigDict, Field, WithJsonSchema
from pydantic_core import PydanticCustomError

from supplycheck.project.faults import quoted

UnitsName = Literal["us", "metric"]
LawName = Literal[
    "hazen-williams",
    "darcy-weisbach",
    "hazen-williams 4.52 us",
    "hazen-williams 6.05e5 metric",
    "hazen-williams 10.67 head",
]
LONGEST_TEXT = 10_000
LONGEST_TAG = 80


class Table(BaseModel):
    """A table of the project file: unknown keys are faults, every value keeps its type."""

    model_config = ConfigDict(extra="forbid", strict=True, frozen=True, defer_build=True)


class UnitTable(Table):
    """A table that may declare its own units."""

    units: UnitsName | None = None
    """Unit set of the numbers in this table. Default: that of the table around it."""


def custom_fault(problem: str, value: object, allowed: str, remedy: str = "") -> PydanticCustomError:
    """Return the pydantic error that carries the four parts of a fault."""
    return PydanticCustomError(
        "number",
        "{problem}",
        {"problem": problem, "found": quoted(value), "allowed": allowed, "remedy": remedy},
    )


def _text(value: Any) -> Any:
    if isinstance(value, str) and len(value) > LONGEST_TEXT:
        raise custom_fault("is too long", value, f"a text of at most {LONGEST_TEXT} characters")
    return value


def _name(value: Any) -> Any:
    if isinstance(value, str):
        if not value.strip():
            raise custom_fault("is empty", value, "a name")
        if len(value) > LONGEST_TAG or not value.isprintable():
            raise custom_fault(
                "is not a usable name",
                value,
                f"at most {LONGEST_TAG} characters, none of them a control character",
            )
        return value.strip()
    return value


def _size(value: Any) -> Any:
    if isinstance(value, int | float) and not isinstance(value, bool):
        if not 0 < value < 1e4:
            raise custom_fault("is not a pipe size", value, "a nominal size above zero")
        return f"{value:g}"
    if isinstance(value, str):
        if value.strip().startswith(("-", "−")) or value.strip() in ("", "0"):
            raise custom_fault("is not a pipe size", value, 'a nominal size such as "1 1/4", 2 or "DN 50"')
        return _name(value)
    raise custom_fault("is not a pipe size", value, 'a nominal size such as "1 1/4", 2 or "DN 50"')


Text = Annotated[str, BeforeValidator(_text)]
Name = Annotated[str, BeforeValidator(_name)]
NominalSize = Annotated[
    str,
    BeforeValidator(_size),
    WithJsonSchema(
        {
            "anyOf": [{"type": "string"}, {"type": "number", "exclusiveMinimum": 0}],
            "quantity": "nominal size",
            "unit": {"us": "in", "metric": "DN"},
        }
    ),
]
Count = Annotated[int, Field(ge=1, le=100_000)]
CountOrZero = Annotated[int, Field(ge=0, le=100_000)]
