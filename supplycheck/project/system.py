"""From drafts to the finished system: bores, C-factors, fittings; what hangs together and what not."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Mapping, Sequence
from types import MappingProxyType

from supplycheck import catalogue
from supplycheck.errors import NotInCatalogueError
from supplycheck.findings import Place
from supplycheck.model import Fitting, Node, Pipe, Sprinkler, System
from supplycheck.project.drafts import DraftPipe, DraftSystem, Notes
from supplycheck.project.faults import FaultList, listed, quoted
from supplycheck.project.fittings import Lengths, PipeSize, WrittenFitting, parse
from supplycheck.project.geometry import infer
from supplycheck.project.graph import islands, tree_from
from supplycheck.project.layout_parts import units_in
from supplycheck.project.parts import DeviceOrLength, KindOfPipe
from supplycheck.project.plausible import check_bore, check_relative_roughness
from supplycheck.project.sections import Sections
from supplycheck.units import UNIT_SETS, UnitSet


def _note_islands(
    groups: Sequence[Sequence[int]], nodes: Sequence[Node], place: Place, faults: FaultList
) -> None:
    """Note the nodes that nothing joins, all in one fault, and each part that hangs together by itself."""
    alone = [group[0] for group in groups if len(group) == 1]
    parts = [list(group) for group in groups if len(group) > 1]
    for group in ([alone] if alone else []) + parts:
        tags = [nodes[number].tag for number in group]
        if group is not alone:
            problem = "a part of the system is not joined to the supply"
        elif len(alone) == 1:
            problem = f"the node {tags[0]} is not joined to anything"
        else:
            problem = f"{len(alone)} nodes are not joined to anything"
        faults.add(
            nodes[group[0]].place or place,
            problem,
            found=f"{len(group)} nodes: {listed(tags)}" if len(group) > 1 else "",
            allowed="a way through pipes from every node to a supply node",
            remedy="add the missing pipe, or take the nodes out",
        )


def _reached(
    nodes: Sequence[Node], pipes: Sequence[DraftPipe], one_way: Mapping[str, str]
) -> tuple[set[str], list[DraftPipe]]:
    """Return the nodes that water can reach, and the one-way pipes that end there but begin elsewhere."""
    onward: dict[str, list[str]] = {node.tag: [] for node in nodes}
    valved = []
    for pipe in pipes:
        if pipe.valve == "closed":
            continue
        onward[pipe.start].append(pipe.end)
        if pipe.valve == "check" or any(tag in one_way for tag in pipe.devices):
            valved.append(pipe)
        else:
            onward[pipe.end].append(pipe.start)
    ring = [node.tag for node in nodes if node.kind == "supply"]
    reached = set(ring)
    while ring:
        ring = [tag for tag in dict.fromkeys(t for one in ring for t in onward[one]) if tag not in reached]
        reached.update(ring)
    return reached, [pipe for pipe in valved if pipe.end in reached and pipe.start not in reached]


def _check_one_way(
    nodes: Sequence[Node], pipes: Sequence[DraftPipe], one_way: Mapping[str, str], faults: FaultList
) -> None:
    """Note one-way devices against which water would have to flow to reach an outlet."""
    reached, against = _reached(nodes, pipes, one_way)
    outlets = ("sprinkler", "hydrant", "outlet")
    dry = [node.tag for node in nodes if node.kind in outlets and node.tag not in reached]
    if dry and against:
        pipe = against[0]
        held = [f"{one_way[tag]} {tag}" for tag in pipe.devices if tag in one_way]
        name = held[0] if held and pipe.valve != "check" else "check valve"
        faults.add(
            pipe.place,
            f"the {name} in {pipe.tag} points the wrong way: no water passes beyond it",
            found=f"{len(dry)} sprinklers or outlets: {listed(dry)}",
            allowed="flow from the first node of the pipe to the second only",
            remedy="exchange the two nodes of this pipe",
        )


def check_connections(
    nodes: Sequence[Node],
    pipes: Sequence[DraftPipe],
    place: Place,
    faults: FaultList,
    one_way: Mapping[str, str] = MappingProxyType({}),
) -> None:
    """Note a missing supply, nodes that no pipe joins to it, and valves that cut nodes off.

    ``one_way`` are the devices that let no water back, by tag the kind of each.
    """
    roots = [number for number, node in enumerate(nodes) if node.kind == "supply"]
    if not roots:
        faults.add(
            place,
            "there is no supply node",
            allowed="at least one node of kind supply",
            remedy="set the kind of the node at which the supply is known to supply",
        )
        return
    index = {node.tag: number for number, node in enumerate(nodes)}
    ends = [(index[pipe.start], index[pipe.end]) for pipe in pipes]
    groups = islands(len(nodes), ends, tree_from(len(nodes), ends, roots).order)
    if groups:
        _note_islands(groups, nodes, place, faults)
        return
    opened = [end for end, pipe in zip(ends, pipes, strict=True) if pipe.valve != "closed"]
    cut = [
        node
        for node, rank in zip(nodes, tree_from(len(nodes), opened, roots).order, strict=True)
        if rank < 0
    ]
    heads = [node.tag for node in cut if node.kind == "sprinkler"]
    if not heads:
        _check_one_way(nodes, pipes, one_way, faults)
    else:
        shut = [pipe for pipe in pipes if pipe.valve == "closed"]
        faults.add(
            shut[0].place,
            "closed valves cut sprinklers off from the supply",
            found=f"{len(heads)} sprinklers: {listed(heads)}",
            allowed="an open way to every sprinkler",
            remedy="open the valve here, and close it in a scenario (closed_pipes)",
        )


def _coordinates(node: Node) -> tuple[float, ...]:
    """Return what is given of the place of a node; NaN where it could not be read."""
    return tuple(number for number in (node.x, node.y, node.elevation) if number is not None)


def _cell(draft: DraftPipe, key: str) -> Place:
    """Return the place of one value of a pipe: a cell of its row, or a key of its table in the layout."""
    place = draft.place
    if place.where.startswith("row "):
        return Place(place.file, f"{place.where}, column {key}")
    if key == "size" and place.where.endswith((".branch", ".cross_main")):
        key = "sizes"
    return Place(place.file, f"{place.where}.{key}")


class Finisher:
    """Turns draft pipes into pipes."""

    def __init__(
        self,
        sections: Sections,
        kinds: Mapping[str, KindOfPipe],
        devices: Mapping[str, DeviceOrLength],
        lengths: Lengths,
        faults: FaultList,
    ) -> None:
        self.sections, self.kinds, self.devices = sections, kinds, devices
        self.lengths, self.faults = lengths, faults
        self._bores: dict[tuple[str, str], tuple[float, str]] = {}
        self.sources: dict[str, dict[str, None]] = {}
        self._unknown: dict[tuple[str, str], tuple[NotInCatalogueError, list[DraftPipe]]] = {}
        self._written: dict[str, list[WrittenFitting]] = {}
        table = sections.network or sections.layout
        self.units = UNIT_SETS[(table.units if table else None) or sections.units]

    def size(self, draft: DraftPipe) -> tuple[float, str]:
        """Return bore [m] and nominal size; NaN where it is not known (noted later, once a size)."""
        key = (draft.kind, draft.size)
        if draft.bore is not None or not draft.size:
            return math.nan if draft.bore is None else draft.bore, catalogue.normalise_nominal(draft.size)
        if key in self._unknown:
            self._unknown[key][1].append(draft)
            return math.nan, draft.size
        if key not in self._bores:
            kind = self.kinds.get(draft.kind)
            if kind is None or kind.unknown:
                return math.nan, draft.size
            try:
                row = catalogue.find_bore(kind.record.material, draft.size, kind.extra)
            except NotInCatalogueError as caught:
                self._unknown[key] = (caught, [draft])
                return math.nan, draft.size
            self.sources.setdefault(draft.kind, {})[row.source] = None
            self._bores[key] = (row.bore, catalogue.normalise_nominal(row.nominal))
        return self._bores[key]

    def note_unknown_sizes(self) -> None:
        """Note the sizes that the catalogue does not have."""
        for (kind, size), (caught, drafts) in self._unknown.items():
            material = self.kinds[kind].record.material
            others = list(dict.fromkeys(draft.place.where for draft in drafts[1:]))
            also = [where for where in others if where != drafts[0].place.where]
            self.faults.add(
                _cell(drafts[0], "size"),
                f"is not a size of {material}" if caught.near else str(caught),
                found=quoted(size),
                allowed=listed(caught.near, 20),
                remedy=f"or give its bore under pipe.{kind}.bores"
                + (f"; also in {listed(also)}" if also else ""),
            )

    def _entries(self, draft: DraftPipe) -> list[WrittenFitting]:
        text = draft.fittings
        if not text:
            return []
        if text not in self._written:
            before = len(self.faults)
            entries = parse(text, self.units, _cell(draft, "fittings"), self.faults)
            if len(self.faults) > before:
                return entries
            self._written[text] = entries
        return self._written[text]

    def _fittings(
        self, draft: DraftPipe, size: PipeSize, charged: Sequence[tuple[str, str]]
    ) -> list[Fitting]:
        place = _cell(draft, "fittings")
        found = [self.lengths.charge(entry, size, "given", place) for entry in self._entries(draft)]
        for (name, node), count in Counter(charged).items():
            found.append(
                self.lengths.charge(WrittenFitting(count, name), size, "inferred", draft.place, node)
            )
        for tag in draft.devices:
            device = self.devices.get(tag)
            if device is not None and device.equivalent_length is not None:
                given, of_c = device.equivalent_length, self.lengths.c_only(size)
                found.append(
                    Fitting(device.title, 1, given, given * of_c, 0.0, "given", device.source, None, of_c)
                )
        return [fitting for fitting in found if fitting is not None]

    def pipe(self, draft: DraftPipe, bore: float, nominal: str, charged: Sequence[tuple[str, str]]) -> Pipe:
        """Return the finished pipe; ``charged`` are the (fitting, node) inferred for it."""
        kind = self.kinds.get(draft.kind)
        c_factor = draft.c_factor if draft.c_factor is not None else kind.record.c_factor if kind else None
        known = math.isfinite(bore) and (c_factor is None or math.isfinite(c_factor))
        size = PipeSize(nominal, bore, c_factor)
        return Pipe(
            tag=draft.tag,
            start=draft.start,
            end=draft.end,
            length=draft.length,
            bore=bore,
            nominal=nominal,
            kind=draft.kind,
            c_factor=c_factor,
            roughness=kind.record.roughness if kind else None,
            fittings=tuple(self._fittings(draft, size, charged)) if known and kind else (),
            devices=tuple(
                tag for tag in draft.devices if tag in self.devices and self.devices[tag].device is not None
            ),
            valve=draft.valve,
            role=draft.role,
            place=draft.place,
        )


def _note_inferred(pipes: Sequence[Pipe], notes: Notes) -> None:
    counts: Counter[str] = Counter()
    for pipe in pipes:
        for fitting in pipe.fittings:
            if fitting.origin == "inferred":
                counts[fitting.name] += fitting.count
    if counts:
        text = ", ".join(f"{count} {name}" for name, count in sorted(counts.items()))
        notes.add(
            "fittings from geometry",
            text,
            "inferred",
            "turns and tees at the nodes; each one is listed with its pipe and node",
        )


def _note_bores(
    drafts: Sequence[DraftPipe],
    pipes: Sequence[Pipe],
    sources: Mapping[str, Mapping[str, None]],
    units: UnitSet,
    notes: Notes,
) -> None:
    used: dict[str, dict[str, float]] = {}
    for draft, pipe in zip(drafts, pipes, strict=True):
        if draft.bore is None:
            used.setdefault(draft.kind, {})[pipe.nominal] = pipe.bore
    for name, sizes in used.items():
        text = ", ".join(
            f"{size}: {units.text(bore, 'size')}"
            for size, bore in sorted(sizes.items(), key=lambda s: s[1])
        )
        notes.add(f"pipe.{name}: bores", text, "catalogue", "; ".join(sources.get(name, ())))


def _check_roughness(pipes: Sequence[Pipe], finisher: Finisher, faults: FaultList) -> None:
    """Note a roughness written for a kind of pipe that is too large for the smallest bore in use."""
    smallest: dict[str, Pipe] = {}
    for pipe in pipes:
        if math.isfinite(pipe.bore):
            smallest[pipe.kind] = min(smallest.get(pipe.kind, pipe), pipe, key=lambda one: one.bore)
    for name, pipe in smallest.items():
        table, place = finisher.sections.pipes.get(name), finisher.sections.place(f"pipe.{name}.roughness")
        if table is not None and table.roughness is not None and not faults.touched(place):
            units = units_in(table, UNIT_SETS[finisher.sections.units])
            check_relative_roughness(table.roughness, pipe.bore, units, place, faults)


def _check_bores(
    drafts: Sequence[DraftPipe], sizes: Sequence[tuple[float, str]], finisher: Finisher, faults: FaultList
) -> None:
    """Note bores far from their nominal sizes, each pair once: in the table, or of the kind of pipe."""
    told: set[tuple[str, float, str]] = set()
    for draft, (bore, nominal) in zip(drafts, sizes, strict=True):
        if (draft.kind, bore, nominal) not in told:
            told.add((draft.kind, bore, nominal))
            units = UNIT_SETS[finisher.sections.units]
            place = _cell(draft, "bore" if draft.bore is not None else "size")
            check_bore(bore, nominal, units, place, faults)


def _note_idle_devices(drafts: Sequence[DraftPipe], finisher: Finisher, faults: FaultList) -> None:
    """Note devices that stand in no pipe: their loss would be forgotten."""
    used = {tag for draft in drafts for tag in draft.devices}
    used |= {table.device for _, table in finisher.sections.hydrants if table.device is not None}
    for tag in finisher.devices:
        if tag not in used:
            faults.add(
                finisher.sections.place(f"device.{tag}"),
                "the device is in no pipe, so that its loss does not count",
                allowed="its name in devices of a pipe",
                remedy="name it where it stands, or take it out",
            )


def finish(
    draft: DraftSystem,
    finisher: Finisher,
    sprinklers: Mapping[str, Sprinkler],
    notes: Notes,
    faults: FaultList,
) -> System:
    """Return the finished system. With faults noted it is not fit for use."""
    place = finisher.sections.place("layout" if finisher.sections.layout else "network.nodes")
    if draft.complete:
        one_way = {
            tag: one.device.kind
            for tag, one in finisher.devices.items()
            if one.device and (one.device.one_way or one.device.kind != "loss")
        }
        check_connections(draft.nodes, draft.pipes, place, faults, one_way)
    sizes = [finisher.size(pipe) for pipe in draft.pipes]
    finisher.note_unknown_sizes()
    charges: dict[int, list[tuple[str, str]]] = {}
    known = all(math.isfinite(number) for node in draft.nodes for number in _coordinates(node))
    if draft.complete and known and any(pipe.infer for pipe in draft.pipes):
        safe = [bore if math.isfinite(bore) else 0.0 for bore, _ in sizes]
        for charge in infer(draft.nodes, draft.pipes, safe, faults):
            charges.setdefault(charge.pipe, []).append((charge.fitting, charge.node))
    pipes = [
        finisher.pipe(pipe, bore, nominal, charges.get(number, ()))
        for number, (pipe, (bore, nominal)) in enumerate(zip(draft.pipes, sizes, strict=True))
    ]
    _check_roughness(pipes, finisher, faults)
    _check_bores(draft.pipes, sizes, finisher, faults)
    if draft.complete:
        _note_idle_devices(draft.pipes, finisher, faults)
    if not faults:
        _note_inferred(pipes, notes)
        for name in finisher.lengths.read_as_swing:
            source = "CEA 4001 table G2: a valve of the mushroom type counts about five times as long"
            notes.add(f"fittings: {name}", "swing type", "assumed", source)
        _note_bores(draft.pipes, pipes, finisher.sources, UNIT_SETS[finisher.sections.units], notes)
    return System(
        nodes=draft.nodes,
        pipes=tuple(pipes),
        sprinklers=tuple(sprinklers.values()),
        pipe_kinds=tuple(kind.record for kind in finisher.kinds.values()),
        devices=tuple(entry.device for entry in finisher.devices.values() if entry.device is not None),
    )
