"""The tags of a system, and what of those named elsewhere does not exist."""

from __future__ import annotations

from collections.abc import Collection, Sequence
from typing import Final

from supplycheck.model import System
from supplycheck.project.faults import FaultList, listed, near, quoted
from supplycheck.project.sections import Sections

_REMEDY: Final = "correct the tag: nodes.csv and pipes.csv of the review package list those of a layout"


class TagCheck:
    """Knows the tags of a system and notes those that do not exist."""

    def __init__(self, system: System | None, sections: Sections, faults: FaultList) -> None:
        self.nodes = {node.tag: node for node in system.nodes} if system else {}
        self.pipes = {pipe.tag for pipe in system.pipes} if system else set()
        self.known, self.sections, self.faults = system is not None, sections, faults

    def _missing(self, tag: str, where: str, what: str, known: Collection[str]) -> None:
        turned = "-".join(reversed(tag.split("-")))  # pipes are named from the supply outward
        close = turned if turned in known else near(tag, known) if len(known) < 5000 else ""
        self.faults.add(
            self.sections.place(where),
            f"there is no such {what}",
            found=quoted(tag),
            allowed=f"a tag of a {what} of the system",
            remedy=f"did you mean {close}?" if close else _REMEDY,
        )

    def node(self, tag: str, where: str) -> None:
        """Note a node that does not exist."""
        if self.known and tag not in self.nodes:
            self._missing(tag, where, "node", self.nodes)

    def heads(self, tags: Sequence[str], where: str) -> None:
        """Note the nodes that do not exist and those that are no sprinklers, all of them at once."""
        self._twice(tags, where, "sprinkler")
        if not self.known:
            return
        self._all_missing([tag for tag in tags if tag not in self.nodes], where, "node", self.nodes)
        others = [
            f"{tag}, a {self.nodes[tag].kind}"
            for tag in tags
            if tag in self.nodes and self.nodes[tag].kind != "sprinkler"
        ]
        if others:
            self.faults.add(
                self.sections.place(where),
                "is not a sprinkler" if len(others) == 1 else f"{len(others)} nodes are not sprinklers",
                found=listed(others) if len(others) == 1 else "; ".join(others[:12]),
                allowed="tags of sprinklers",
                remedy="name sprinklers only; what else flows goes into flows",
            )

    def pipes_named(self, tags: Sequence[str], where: str) -> None:
        """Note the pipes that do not exist, all of them at once."""
        self._twice(tags, where, "pipe")
        if self.known:
            self._all_missing([tag for tag in tags if tag not in self.pipes], where, "pipe", self.pipes)

    def _twice(self, tags: Sequence[str], where: str, what: str) -> None:
        for tag in sorted({tag for tag in tags if tags.count(tag) > 1}):
            self.faults.add(
                self.sections.place(where),
                f"a {what} stands twice",
                found=quoted(tag),
                allowed="every tag once",
                remedy="take the second one out",
            )

    def _all_missing(self, tags: list[str], where: str, what: str, known: Collection[str]) -> None:
        if len(tags) == 1:
            self._missing(tags[0], where, what, known)
        elif tags:
            self.faults.add(
                self.sections.place(where),
                f"there are no such {what}s",
                found=listed([quoted(tag) for tag in tags]),
                allowed=f"tags of {what}s of the system",
                remedy=_REMEDY,
            )
