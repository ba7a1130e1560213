"""Breaking text into lines that fit; nothing is ever cut off."""

from __future__ import annotations

from typing import Protocol


class Ruler(Protocol):
    """Measures text in the writer's fonts."""

    def clean(self, text: str) -> str:
        """Return ``text`` with what the fonts cannot show written out."""
        ...

    def width(self, text: str, size: float, bold: bool = False) -> float:
        """Return the width of ``text`` in points."""
        ...


def wrap(text: str, room: float, size: float, ruler: Ruler, *, bold: bool = False) -> list[str]:
    """Return ``text`` as lines no wider than ``room``; a word longer than that is broken inside."""
    text = ruler.clean(text)
    if ruler.width(text, size, bold) <= room:
        return [text]
    lines: list[str] = []
    line = ""
    used = 0.0
    space = ruler.width(" ", size, bold)
    for word in text.split(" "):
        need = ruler.width(word, size, bold)
        if line and used + space + need <= room:
            line, used = f"{line} {word}", used + space + need
            continue
        if line:
            lines.append(line)
        while need > room:
            taken = _fitting(word, room, size, ruler, bold)
            lines.append(word[:taken])
            word = word[taken:]
            need = ruler.width(word, size, bold)
        line, used = word, need
    return [*lines, line] if line or not lines else lines


def _fitting(word: str, room: float, size: float, ruler: Ruler, bold: bool) -> int:
    """Return how many letters of ``word`` fit, at least one; a joint such as ``-`` is preferred."""
    used = 0.0
    taken = 0
    for char in word:
        used += ruler.width(char, size, bold)
        if used > room:
            break
        taken += 1
    taken = max(taken, 1)
    for back in range(taken, max(taken // 2, 1), -1):
        if word[back - 1] in "-_/.,;:)":
            return back
    return taken


def shorten(text: str, room: float, size: float, ruler: Ruler, *, bold: bool = False) -> str:
    """Return ``text`` on one line, ended with three dots where it is longer than ``room``."""
    text = ruler.clean(text)
    if ruler.width(text, size, bold) <= room:
        return text
    room -= ruler.width("…", size, bold)
    used = 0.0
    for place, char in enumerate(text):
        used += ruler.width(char, size, bold)
        if used > room:
            return text[:place].rstrip() + "…"
    return text
