"""Assumed values in the words of the trade instead of the keys of the project file."""

from __future__ import annotations

import re
from collections.abc import Iterable, Sequence
from typing import Final

from supplycheck.model import Assumption

_WORDS: Final = (
    (r"criteria\.velocity_limit", "velocity limited as {value} asks"),
    (r"criteria\.maximum_pressure", "components rated {value}"),
    (r"criteria\.area", "design area {value}"),
    (r"criteria: (.+)", "{0} {value}"),
    (r"fluid\.temperature", "fluid at {value}"),
    (r"network\.fittings", "no fittings beyond those written in the tables"),
    (r"fittings: (.+)", "{0} read as {value}"),
    (r"hose\.outside", "outside hose {value}"),
    (r"hose\.outside_node", "outside hose drawn at {value}"),
    (r"supply\.compare_at", "demand and supply compared at {value}"),
    (r"supply\..*gauge_elevation", "test gauge at elevation {value}"),
    (r"(?:.*\.)?(?:tank|reservoir)\.(.+)\.low_level", "lowest level of {0}: {value}"),
    (r"sprinkler\.(.+)\.minimum_pressure", "minimum pressure of sprinkler {0}: {value}"),
    (r"device\.(.+)\.(?:loss|curve)", "{0}: {value}"),
    (r"layout\.(.+)\.elevation", "{0} at elevation {value}"),
    (r"nodes\.(.+)\.elevation", "node {0} at elevation {value}"),
    (r"network\.nodes\.minimum_pressure", "least pressure at outflows: {value}"),
    (r"scenario\[\d+\]\.flows\.(.+)", "at {0} {value}"),
    (r"fire_flow\.greatest_each", "one hydrant may give {value}"),
    (r"fire_flow\.counts", "{value}"),
    (r"fire_flow\.highest_point", "highest point of the main: {value}"),
    (r"fire_flow\.reduction", "fire flow reduced to {value}"),
)
"""Pattern of a key, and its value in words; ``{0}`` is what the pattern picks out of the key."""

_OFF: Final = "no velocity limit"
_OUTLET_SIZE: Final = re.compile(r"standpipe\.riser\[(\d+)\]\.size")


def told(notes: Iterable[Assumption], standpipes: Sequence[str]) -> list[str]:
    """Return what is assumed, in words, each once; ``standpipes`` are their tags in the project's order.

    Standpipes whose hose outlets are assumed alike stand together.

    >>> size = "2.500 in"
    >>> notes = [Assumption(f"standpipe.riser[{n}].size", size, "assumed", "") for n in (1, 2, 3)]
    >>> told(notes, ["east", "west", "yard"])
    ['hose outlets of 2.500 in at standpipes east, west and yard']
    """
    outlets: dict[str, list[str]] = {}
    words: dict[str, None] = {}
    for note in notes:
        found = _OUTLET_SIZE.fullmatch(note.key)
        if found is None or not 0 < int(found[1]) <= len(standpipes):
            words[in_words(note.key, note.value)] = None
        else:
            outlets.setdefault(note.value, []).append(standpipes[int(found[1]) - 1])
    return [*words, *(_outlets_in_words(size, tags, len(standpipes)) for size, tags in outlets.items())]


def _outlets_in_words(size: str, tags: list[str], count: int) -> str:
    if len(tags) == count > 3:
        return f"hose outlets of {size} at all {count} standpipes"
    if len(tags) == 1:
        return f"hose outlets of {size} at standpipe {tags[0]}"
    return f"hose outlets of {size} at standpipes {', '.join(tags[:-1])} and {tags[-1]}"


def in_words(key: str, value: str) -> str:
    """Return what is assumed under ``key`` in words; a key that is not known is read as it stands.

    >>> in_words("criteria.velocity_limit", "off"), in_words("hose.outside_node", "S")
    ('no velocity limit', 'outside hose drawn at S')
    >>> in_words("standpipe.outlet.size", "2.500 in")
    'standpipe outlet size: 2.500 in'
    """
    if key == "criteria.velocity_limit" and value == "off":
        return _OFF
    for pattern, words in _WORDS:
        found = re.fullmatch(pattern, key)
        if found:
            return _filled(words, value, (found.groups() or ("",))[0].replace("_", " "))
    return f"{key.replace('.', ' ').replace('_', ' ')}: {value}"


def _filled(words: str, value: str, picked: str) -> str:
    """Return ``words`` with both fields filled; what is filled in is not read again."""
    fields = {"{value}": value, "{0}": picked}
    return re.sub(r"\{(?:value|0)\}", lambda field: fields[field[0]], words)
