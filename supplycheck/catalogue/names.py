"""Names as people write them: folded for comparison, nominal sizes in one canonical text, near matches."""

from __future__ import annotations

import math
import re
from collections.abc import Iterable
from types import MappingProxyType
from typing import Final

from supplycheck.errors import NotInCatalogueError

_VULGAR: Final = MappingProxyType(
    {"¼": "1/4", "½": "1/2", "¾": "3/4", "⅛": "1/8", "⅜": "3/8", "⅝": "5/8", "⅞": "7/8"}
)
_SPELLED: Final = MappingProxyType(
    {
        "sch": "schedule",
        "sched": "schedule",
        "cl": "class",
        "galvanised": "galvanized",
        "galv": "galvanized",
        "elbows": "elbow",
        "tees": "tee",
        "crosses": "cross",
        "valves": "valve",
        "bends": "bend",
        "i": "1",
        "ii": "2",
        "iii": "3",
        "iv": "4",
    }
)
_SILENT: Final = frozenset({"degree", "degrees", "deg", "pipe", "the"})


def fold(text: str) -> str:
    """Return ``text`` for comparison: case, order of words, punctuation and plurals do not count.

    >>> fold("Sch. 40 Steel") == fold("steel schedule 40")
    True
    >>> fold("90° elbows") == fold("elbow 90")
    True
    """
    lowered = text.casefold().replace("pre-action", "preaction")
    lowered = re.sub(r"([a-z])(\d)", r"\1 \2", lowered)
    words = (_SPELLED.get(word, word) for word in re.findall(r"\d+(?:\.\d+)?[a-z]*|[^\W\d_]+", lowered))
    return " ".join(sorted(word for word in words if word not in _SILENT))


def _mixed(over: int, under: int) -> str:
    whole, rest = divmod(over, under)
    if not rest:
        return str(whole)
    shared = math.gcd(rest, under)
    part = f"{rest // shared}/{under // shared}"
    return f"{whole} {part}" if whole else part


def normalise_nominal(text: str | float) -> str:
    """Return a nominal pipe size in its one canonical text.

    Inch sizes become mixed fractions, metric ones ``DN`` and a number; a bare number is left to
    the material to decide. What cannot be read as a size comes back with its blanks tidied.

    >>> [normalise_nominal(size) for size in ("1¼", "1-1/4", '1 1/4"', "1.25 in", 1.25, "NPS 2")]
    ['1 1/4', '1 1/4', '1 1/4', '1 1/4', '1 1/4', '2']
    >>> normalise_nominal("dn32"), normalise_nominal("32 mm"), normalise_nominal("32")
    ('DN 32', 'DN 32', '32')
    """
    tidy = " ".join(str(text).split())
    for sign, plain in _VULGAR.items():
        tidy = tidy.replace(sign, f" {plain}")
    tidy = " ".join(tidy.split()).replace("⁄", "/")
    metric = re.fullmatch(r"(?:dn ?(\d{1,4})|(\d{1,4}) ?mm)", tidy, re.IGNORECASE)
    if metric:
        return f"DN {int(metric[1] or metric[2])}"
    body = re.sub(r"^nps ?", "", tidy, flags=re.IGNORECASE)
    body = re.sub(r" ?(?:in\.?|inch|inches|\"|″|”|'')$", "", body, flags=re.IGNORECASE)
    inches = re.fullmatch(r"(?:(\d{1,3})(?:[ -]|$))?(?:(\d{1,2})/(\d{1,2}))?", body)
    if inches and body and (inches[3] is None or int(inches[3])):
        under = int(inches[3] or 1)
        return _mixed(int(inches[1] or 0) * under + int(inches[2] or 0), under)
    if re.fullmatch(r"\d{0,3}\.\d{1,6}", body):
        sixteenths = float(body) * 16
        return _mixed(int(sixteenths), 16) if sixteenths.is_integer() else f"{float(body):g}"
    return tidy


def not_found(what: str, asked: object, known: Iterable[str], remedy: str = "") -> NotInCatalogueError:
    """Return the error for a name that a table does not have, with the near ones of ``known``.

    Near are first the names that hold every word asked, then those spelt alike; six at most."""
    import difflib

    names = list(dict.fromkeys(known))
    text = str(asked)[:80]
    words = set(fold(text).split())
    near = [name for name in names if words and words <= set(fold(name).split())][:6]
    folded = {name.casefold(): name for name in reversed(names)}
    close = difflib.get_close_matches(text.casefold(), list(folded), n=4, cutoff=0.5)
    near += [folded[name] for name in close if folded[name] not in near][: 6 - len(near)]
    message = f"the catalogue has no {what} {text!r}"
    if near:
        message += "; near: " + ", ".join(near)
    elif 0 < len(names) <= 24:
        message += "; it has: " + ", ".join(names)
    return NotInCatalogueError(message + (f"; {remedy}" if remedy else ""), tuple(near))
