"""The regular layout: from lines, spacing and sizes to nodes and pipes with tags and coordinates.

The cross main runs along y at x = 0 and the lines along x. Line 1 is the most remote one. Tags:

====================  =======================================================================
``L3.4``              head 4 of line 3, counted along x (``FL3.4`` on the far main of a loop)
``L3.4T``             the point on the line from which the drop or sprig of that head leaves
``M3``, ``N3``        line 3 at the cross main, and at the top of its riser nipple
``FM3``, ``FN3``      the same at the far main
``MC``                where a feed main joins between two lines
``TOR``, ``BOR``      top and base of the riser
``S``                 the supply: always the last point
====================  =======================================================================
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise

from supplycheck.findings import Place
from supplycheck.model import Sprinkler
from supplycheck.project.drafts import DraftSystem, Notes
from supplycheck.project.faults import FaultList
from supplycheck.project.layout_check import MOST_HEADS, check_layout, count_heads, elevations_agree
from supplycheck.project.layout_feed import add_feed
from supplycheck.project.layout_parts import Builder, read_levels, repeated, units_in
from supplycheck.project.schema_system import LayoutTable
from supplycheck.project.sections import Sections
from supplycheck.units import UNIT_SETS, UnitSet


@dataclass(frozen=True, slots=True)
class _Main:
    """The near or the far main: prefixes of its tags, its x, heads to its left and right."""

    main: str
    nipple: str
    line: str
    x: float
    left: int
    right: int


def _heads_along(builder: Builder, main: _Main, number: int, y: float, foot: str) -> None:
    """Add the heads of one line on both sides of ``foot``, the line's point at its main."""
    layout, units = builder.layout, builder.units
    first, spacing = layout.first_head.si(units), layout.head_spacing.si(units)
    sizes = layout.branch.sizes
    tag = f"{main.line}{number}"
    for side, count in ((-1, main.left), (1, main.right)):
        previous = foot
        for step in range(count):
            position = main.left - step if side < 0 else main.left + step + 1
            x = main.x + side * (first + step * spacing)
            point = builder.head(f"{tag}.{position}", x, y, tag)
            size = repeated(sizes, count - 1 - step)
            length = first if step == 0 else spacing
            builder.pipe(previous, point, length, layout.branch.pipe, size, "branch line")
            previous = point


def _line_between(
    builder: Builder, number: int, y: float, near_foot: str, far_foot: str, distance: float
) -> None:
    """Add the heads of one line that joins two mains."""
    layout, units = builder.layout, builder.units
    first, spacing = layout.first_head.si(units), layout.head_spacing.si(units)
    branch, count = layout.branch, sum(layout.heads)
    previous, at = near_foot, 0.0
    for step in range(count):
        x = first + step * spacing
        point = builder.head(f"L{number}.{step + 1}", x, y, f"L{number}")
        builder.pipe(previous, point, x - at, branch.pipe, branch.sizes[0], "branch line")
        previous, at = point, x
    builder.pipe(previous, far_foot, distance - at, branch.pipe, branch.sizes[0], "branch line")


def _foot(builder: Builder, main: _Main, number: int, y: float) -> str:
    """Add the line's point on its main, with its riser nipple; return where the line starts."""
    levels = builder.levels
    low = builder.node(f"{main.main}{number}", main.x, y, levels.main)
    nipple = builder.layout.riser_nipple
    if nipple is None:
        return low
    high = builder.node(f"{main.nipple}{number}", main.x, y, levels.line)
    builder.pipe(low, high, levels.nipple, nipple.pipe, nipple.size, "riser nipple")
    return high


def _run_of_main(builder: Builder, points: Sequence[tuple[str, float]]) -> None:
    """Join points of the cross main, sizes counted from its first (far) end."""
    main = builder.layout.cross_main
    for index, ((a, ya), (b, yb)) in enumerate(pairwise(points)):
        builder.pipe(b, a, abs(ya - yb), main.pipe, repeated(main.sizes, index), "cross main")


def _cross_main(builder: Builder, ys: Sequence[float]) -> str:
    """Join the points of the cross main; return the point at which the feed main joins."""
    layout = builder.layout
    points = [(f"M{number}", y) for number, y in enumerate(ys, start=1)]
    if layout.cross_main.feed == "end" or len(points) == 1:
        _run_of_main(builder, points)
        return points[-1][0]
    middle = (len(points) + 1) // 2
    centre = (points[middle - 1][1] + points[middle][1]) / 2
    tag = builder.node("MC", 0.0, centre, builder.levels.main)
    _run_of_main(builder, [*points[:middle], (tag, centre)])
    _run_of_main(builder, [*reversed(points[middle:]), (tag, centre)])
    return tag


def _far_main(builder: Builder, ys: Sequence[float], distance: float, *, tied: bool) -> None:
    """Join the points of the far main, and tie its ends to the cross main in a loop."""
    far = builder.layout.far_main
    if far is None:
        return
    for number, (ya, yb) in enumerate(pairwise(ys), start=1):
        builder.pipe(
            f"FM{number + 1}", f"FM{number}", abs(ya - yb), far.pipe, far.size, "cross main", "far_main"
        )
    if tied:
        for number in sorted({1, len(ys)}):
            builder.pipe(
                f"M{number}", f"FM{number}", distance, far.pipe, far.size, "cross main", "far_main"
            )


def _tree(builder: Builder, ys: Sequence[float]) -> None:
    heads = builder.layout.heads
    main = _Main("M", "N", "L", 0.0, heads[0], heads[1] if len(heads) > 1 else 0)
    for number, y in enumerate(ys, start=1):
        _heads_along(builder, main, number, y, _foot(builder, main, number, y))


def _loop(builder: Builder, ys: Sequence[float], distance: float) -> None:
    outward, inward = (*builder.layout.heads, 0)[:2]
    for main in (
        _Main("M", "N", "L", 0.0, outward, inward),
        _Main("FM", "FN", "FL", distance, inward, outward),
    ):
        for number, y in enumerate(ys, start=1):
            _heads_along(builder, main, number, y, _foot(builder, main, number, y))


def _grid(builder: Builder, ys: Sequence[float], distance: float) -> None:
    near_main = _Main("M", "N", "L", 0.0, 0, 0)
    far_main = _Main("FM", "FN", "L", distance, 0, 0)
    for number, y in enumerate(ys, start=1):
        near_foot = _foot(builder, near_main, number, y)
        far_foot = _foot(builder, far_main, number, y)
        _line_between(builder, number, y, near_foot, far_foot, distance)


def _distance(layout: LayoutTable, units: UnitSet, place: Place, notes: Notes, faults: FaultList) -> float:
    """Return the distance between the mains of a loop or a grid; noted where it follows from the heads."""
    first, spacing = layout.first_head.si(units), layout.head_spacing.si(units)
    if layout.type == "grid":
        least = first + (sum(layout.heads) - 1) * spacing
        natural = least + first
    else:
        inward = layout.heads[1] if len(layout.heads) > 1 else 0
        least = 2 * (first + (inward - 1) * spacing) if inward else 0.0
        natural = least + spacing if inward else 0.0
    far = layout.far_main
    given = far.distance.si(units_in(far, units)) if far and far.distance else None
    if given is None and natural > 0:
        notes.add(
            "layout.far_main.distance",
            units.text(natural, "length"),
            "inferred",
            "head spacing of the layout",
        )
        return natural
    if given is None:
        faults.add(
            Place(place.file, "layout.far_main.distance"),
            "is missing: no heads between the mains say how far apart they are",
            allowed="a length",
        )
        return 1.0
    if given <= least * (1 + 1e-9):
        faults.add(
            Place(place.file, "layout.far_main.distance"),
            "is too short for the heads between the mains",
            found=units.text(given, "length"),
            allowed=f"more than {units.text(least, 'length')}",
        )
    return given


def _head_area(layout: LayoutTable, units: UnitSet, notes: Notes) -> float:
    area = layout.line_spacing.si(units) * layout.head_spacing.si(units)
    source = "line_spacing × head_spacing"
    notes.add("layout: area of each head", units.text(area, "area"), "inferred", source)
    return area


def generate(
    sections: Sections, sprinklers: Mapping[str, Sprinkler], notes: Notes, faults: FaultList
) -> DraftSystem | None:
    """Return the system of ``[layout]``; ``None`` with faults noted."""
    layout = sections.layout
    if layout is None:
        return None
    units = UNIT_SETS[layout.units or sections.units]
    place = sections.place("layout")
    check_layout(layout, units, sections, faults)
    if not elevations_agree(layout, units, sections, faults):
        return None
    levels = read_levels(layout, units, sections, notes, faults)
    sprinkler = sprinklers.get(layout.sprinkler)
    area = _head_area(layout, units, notes)
    distance = (
        _distance(layout, units, place, notes, faults) if layout.type != "tree" and layout.far_main else 0.0
    )
    if faults.spoiled(place) or count_heads(layout) > MOST_HEADS:
        return None
    builder = Builder(layout, units, levels, place, sprinkler, area)
    spacing = layout.line_spacing.si(units)
    ys = [(layout.lines - number) * spacing for number in range(1, layout.lines + 1)]
    if layout.type == "tree":
        _tree(builder, ys)
    elif layout.type == "loop":
        _loop(builder, ys, distance)
    else:
        _grid(builder, ys, distance)
    joint = _cross_main(builder, ys)
    if layout.type != "tree":
        _far_main(builder, ys, distance, tied=layout.type == "loop")
    add_feed(builder, joint, sections, notes, faults)
    return DraftSystem(tuple(builder.nodes), tuple(builder.pipes), complete=not faults.touched(place))
