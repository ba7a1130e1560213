"""What a reviewer must be able to read off the figures: where, not only how much."""

from __future__ import annotations

import math
from dataclasses import replace
from pathlib import Path

import pytest
from sample_result import sample

from supplycheck.check import check_project
from supplycheck.report.drawing import Dot, Label, Line
from supplycheck.report.figures.bars import pressure_bars
from supplycheck.report.figures.key_plan import key_plan
from supplycheck.report.figures.placements import placement_map
from supplycheck.report.figures.plan import whole_plan
from supplycheck.report.theme import CLAY, INK, PETROL
from supplycheck.results.records import Result
from supplycheck.units import US

FOLDER = Path(__file__).parents[2] / "examples"
ROW = 15.0


@pytest.fixture(scope="module")
def store() -> Result:
    return check_project(FOLDER / "spreadsheet-store" / "project.toml")


def available_line(result: Result) -> Line:
    drawing = pressure_bars(result.path, 0, result, US, 522.0)
    lines = [item for item in drawing.items if isinstance(item, Line) and item.dash == (5.0, 2.0)]
    return next(line for line in lines if line.points[0][0] == line.points[1][0])


def test_what_is_available_is_drawn_down_to_the_point_of_comparison(store: Result) -> None:
    """Twelve segments, BASE at the end of the tenth: two rows lie below the line."""
    ends = [step.end for step in store.path]
    beyond = len(ends) - 1 - ends.index("BASE")
    assert beyond == 2
    low = min(y for _, y in available_line(store).points)
    assert low == pytest.approx(34.0 + beyond * ROW, abs=4.0)
    drawing = pressure_bars(store.path, 0, store, US, 522.0)
    words = [item.text for item in drawing.items if isinstance(item, Label)]
    assert any(text.endswith("at BASE") for text in words)
    assert any("BASE, where both are compared" in text for text in words)


def test_at_the_end_of_the_path_the_line_goes_all_the_way() -> None:
    result = check_project(FOLDER / "parcel-depot" / "project.toml")
    assert result.path[-1].end == result.demand.node
    assert min(y for _, y in available_line(result).points) == pytest.approx(30.0)


def test_the_key_plan_shows_the_supply_and_the_part_of_the_plan(store: Result) -> None:
    whole = whole_plan(store, US, (522.0, 400.0))
    assert "S" in whole.outside
    drawing = key_plan(store, US, whole.window, (522.0, 150.0))
    triangles = [item for item in drawing.items if isinstance(item, Line) and item.fill == PETROL]
    assert len(triangles) == 2  # on the plan and in its legend
    assert {"S", "HYD", "BASE"} <= {item.text for item in drawing.items if isinstance(item, Label)}


def test_nothing_hides_the_ring_of_the_governing_placement() -> None:
    drawing = placement_map(sample(lines=12, heads=6), US, (522.0, 250.0))
    assert drawing is not None
    rings = [
        place for place, item in enumerate(drawing.items) if isinstance(item, Dot) and item.fill is None
    ]
    ring = next(item for item in drawing.items if isinstance(item, Dot) and item.stroke == CLAY)
    labels = [
        (place, item) for place, item in enumerate(drawing.items) if isinstance(item, Label) and item.y > 26
    ]
    assert max(place for place, _ in labels) < rings[0]
    for _, label in labels:
        assert math.hypot(label.x - ring.x, label.y + 2 - ring.y) > ring.radius


def test_a_tag_stands_by_its_dot_or_has_a_line_to_it(store: Result) -> None:
    """Within 9 points, from the edge of a dot of 2 points: nearer than to any other head."""
    view = whole_plan(store, US, (522.0, 400.0))
    dots = [item for item in view.drawing.items if isinstance(item, Dot)]
    leaders = [item for item in view.drawing.items if isinstance(item, Line) and item.width == 0.3]
    tags = {node.tag for node in store.nodes}
    for label in view.drawing.items:
        if isinstance(label, Label) and label.text in tags:
            near = min(math.hypot(dot.x - label.x, dot.y - label.y) for dot in dots)
            led = any(line.points[1][0] == label.x for line in leaders)
            assert near < 9.0 or led, label.text


def test_a_path_without_the_point_of_comparison_is_still_drawn(store: Result) -> None:
    moved = replace(store, demand=replace(store.demand, node="elsewhere"))
    assert min(y for _, y in available_line(moved).points) == pytest.approx(30.0)
    assert available_line(moved).stroke == INK
