"""On the supply graph no text covers another text, a mark or the frame, however the points fall."""

from __future__ import annotations

from itertools import combinations
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sample_result import curves, points

from supplycheck.check import check_project
from supplycheck.report.build import build_document
from supplycheck.report.document import Figure
from supplycheck.report.drawing import Box, Dot, Drawing, Item, Label, Line
from supplycheck.report.figures.graph import supply_graph
from supplycheck.report.pdf import FontRuler
from supplycheck.results.records import GraphPoint
from supplycheck.units import GPM, METRIC, PSI, US

Area = tuple[float, float, float, float]
RULER = FontRuler()
EXAMPLES = sorted(path.parent for path in Path(__file__).parents[2].glob("examples/*/project.toml"))
SLOW = {"yard-main"}
STYLES = ("test", "demand", "demand with hose", "available")


def _ink(label: Label) -> Area:
    """Return what ``label`` covers by the font of the page: capitals 0.73 em high, no descender counted."""
    wide = RULER.width(label.text, label.size, label.bold)
    left = label.x - {"start": 0.0, "middle": wide / 2, "end": wide}[label.anchor]
    return left, label.y, left + wide, label.y + 0.73 * label.size


def _covers(one: Area, other: Area) -> bool:
    return one[0] < other[2] and one[2] > other[0] and one[1] < other[3] and one[3] > other[1]


def _symbol(item: Item) -> Area | None:
    """Return what a mark covers; a closed line of four points is a diamond."""
    if isinstance(item, Dot):
        return item.x - item.radius, item.y - item.radius, item.x + item.radius, item.y + item.radius
    if isinstance(item, Line) and item.fill and len(item.points) == 4:
        xs, ys = [x for x, _ in item.points], [y for _, y in item.points]
        return min(xs), min(ys), max(xs), max(ys)
    return None


def faults(drawing: Drawing) -> list[str]:
    """Return every collision of texts on the graph in words."""
    frame = next(item for item in drawing.items if isinstance(item, Box) and item.fill is None)
    edges = (frame.x, frame.y, frame.x + frame.width, frame.y + frame.height)
    labels = [item for item in drawing.items if isinstance(item, Label) and item.angle == 0]
    symbols = [found for item in drawing.items if (found := _symbol(item)) is not None]
    found = [
        f"{one.text!r} covers {other.text!r}"
        for one, other in combinations(labels, 2)
        if _covers(_ink(one), _ink(other))
    ]
    for label in labels:
        x0, y0, x1, y1 = _ink(label)
        if x0 < 0 or x1 > drawing.width or y0 < 0 or y1 > drawing.height:
            found.append(f"{label.text!r} leaves the drawing")
        if any(_covers((x0, y0, x1, y1), one) for one in symbols):
            found.append(f"{label.text!r} covers a mark")
        inside = _covers((x0, y0, x1, y1), edges)
        if inside and not (edges[0] <= x0 and x1 <= edges[2] and edges[1] <= y0 and y1 <= edges[3]):
            found.append(f"{label.text!r} crosses the frame")
    return found


def _told(drawing: Drawing, point: GraphPoint) -> bool:
    return any(isinstance(item, Label) and item.text.startswith(point.name) for item in drawing.items)


@pytest.mark.parametrize("height", [158.0, 250.0, 330.0])
def test_labels_of_the_sample_keep_apart(height: float) -> None:
    drawing = supply_graph(curves(), points(), US, (522.0, height))
    assert faults(drawing) == []
    assert all(_told(drawing, point) for point in points())


_POINTS = st.lists(
    st.builds(
        GraphPoint,
        st.sampled_from(("static", "North Main residual", "demand at WEST", "available at EAST")),
        st.sampled_from(STYLES),
        st.one_of(st.just(0.0), st.floats(0.0, 2500.0)).map(lambda flow: flow * GPM),
        st.one_of(st.just(60.0), st.floats(-20.0, 150.0)).map(lambda pressure: pressure * PSI),
    ),
    min_size=1,
    max_size=12,
)


@settings(max_examples=60, deadline=None)
@given(_POINTS, st.sampled_from((158.0, 250.0, 330.0)), st.sampled_from((505.0, 522.0)), st.booleans())
def test_labels_of_any_points_keep_apart(
    several: list[GraphPoint], height: float, width: float, metric: bool
) -> None:
    drawing = supply_graph(curves(), tuple(several), METRIC if metric else US, (width, height))
    assert faults(drawing) == []
    assert all(_told(drawing, point) for point in several)


def test_crowded_points_are_numbered_with_a_key() -> None:
    """Nine points on one spot cannot all be named beside it: each has its number and a line of the key."""
    crowd = tuple(GraphPoint(f"point {place}", "test", 500 * GPM, 50 * PSI) for place in range(9))
    drawing = supply_graph(curves(), crowd, US, (522.0, 158.0))
    texts = [item.text for item in drawing.items if isinstance(item, Label)]
    assert "1, 2, 3, 4, 5, 6, 7, 8, 9" in texts
    assert [text for text in texts if text.startswith("point ")] == [
        f"point {place}: 500.0 gpm, 50.0 psi" for place in range(9)
    ]


def test_curves_of_one_kind_differ_without_colour() -> None:
    measured = curves()[0]
    drawing = supply_graph((measured, measured, measured, measured), (), US, (522.0, 330.0))
    samples = [
        (item.width, item.dash)
        for item in drawing.items
        if isinstance(item, Line)
        and len(item.points) == 2
        and item.points[1] == (item.points[0][0] + 26.0, item.points[0][1])
    ]
    assert len(samples) == 5
    assert len(set(samples)) == 5


@pytest.mark.parametrize(
    "folder",
    [pytest.param(one, marks=[pytest.mark.slow] * (one.name in SLOW), id=one.name) for one in EXAMPLES],
)
def test_labels_of_the_examples_keep_apart(folder: Path) -> None:
    document = build_document(check_project(folder / "project.toml"))
    figures = [block for part in document.sections for block in part.blocks if isinstance(block, Figure)]
    drawings = [one for figure in figures for one in (figure.drawing, figure.smaller) if one is not None]
    graphs = [one for one in drawings if one.shows == "supply and demand against flow"]
    assert len(graphs) >= 3
    assert [fault for graph in graphs for fault in faults(graph)] == []
