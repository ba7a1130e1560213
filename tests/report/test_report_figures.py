"""The figures and the plane geometry behind them."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st
from sample_result import curves, points, sample

from supplycheck.report.drawing import Dot, Label, Line
from supplycheck.report.figures.axes import Taken, round_steps, short
from supplycheck.report.figures.graph import supply_graph
from supplycheck.report.figures.outline import Window, cells_of_heads, clipped, outline_of
from supplycheck.report.figures.placements import placement_map
from supplycheck.report.figures.plan import area_plan, has_plan, whole_plan
from supplycheck.report.pdf import FontRuler
from supplycheck.report.theme import text_width
from supplycheck.units import US


@given(st.floats(1e-6, 1e9), st.integers(2, 30))
def test_round_steps_reach_the_top_in_even_steps(top: float, most: int) -> None:
    steps = round_steps(top, most)
    assert steps[0] == 0
    assert steps[-1] >= top * (1 - 1e-9)
    assert steps[-2] < top
    assert len(steps) - 1 <= most + 1
    lead = steps[1] / 10 ** math.floor(math.log10(steps[1]) + 1e-9)
    assert min(abs(lead - one) for one in (1, 2, 2.5, 5, 10)) < 1e-6


@given(st.text(st.characters(min_codepoint=32, max_codepoint=126), max_size=30))
def test_estimated_width_is_that_of_the_font(text: str) -> None:
    """The figures estimate widths; the font is the independent measure, and bold is never shorter."""
    ruler = FontRuler()
    assert text_width(text, 10) == pytest.approx(ruler.width(text, 10), abs=0.02 * len(text) + 0.01)


def test_a_word_in_bold_fits_its_estimate() -> None:
    ruler = FontRuler()
    for word in ("governing 58.3 psi", "runner-up", "available 66.1 psi", "H1.1", "BOR"):
        assert ruler.width(word, 7, True) <= text_width(word, 7, bold=True) + 0.5


def test_short_fits() -> None:
    assert short("abc", 100, 7) == "abc"
    assert text_width(short("a" * 60, 70, 7), 7) <= 70


def test_taken_places_never_overlap() -> None:
    taken = Taken(0, 0, 200, 200)
    boxes = []
    for number in range(60):
        text = f"label {number}"
        found = taken.place(100, 100, text, 6, reach="far")
        if found is None:
            break
        x, y, anchor = found
        wide = text_width(text, 6)
        left = x - {"start": 0.0, "middle": wide / 2, "end": wide}[anchor]
        boxes.append((left, y - 1, left + wide, y + 4))
    assert len(boxes) > 8
    for place, one in enumerate(boxes):
        for other in boxes[place + 1 :]:
            apart = one[2] <= other[0] or other[2] <= one[0] or one[3] <= other[1] or other[3] <= one[1]
            assert apart


def test_a_measured_supply_is_a_straight_line_on_the_graph() -> None:
    """P = Ps − (Ps − Pr)(Q/Qt)^1.85 (NFPA 291, from memory) is straight on an axis linear in Q^1.85."""
    drawing = supply_graph(curves()[:1], (), US, (522, 330))
    line = next(item for item in drawing.items if isinstance(item, Line) and len(item.points) > 5)
    (x0, y0), (x1, y1) = line.points[0], line.points[-1]
    for x, y in line.points:
        assert y == pytest.approx(y0 + (y1 - y0) * (x - x0) / (x1 - x0), abs=1e-6)


def test_the_curve_is_dashed_beyond_the_tested_flow() -> None:
    drawing = supply_graph(curves()[:1], points()[:2], US, (522, 330))
    lines = [item for item in drawing.items if isinstance(item, Line) and item.width == 1.1]
    solid = next(one for one in lines if not one.dash)
    dashed = next(one for one in lines if one.dash and len(one.points) > 2)
    assert solid.points[-1] == pytest.approx(dashed.points[0])
    tested = next(item for item in drawing.items if isinstance(item, Dot) and item.x > 100)
    assert solid.points[-1] == pytest.approx((tested.x, tested.y), abs=1e-6)


def test_gridlines_carry_round_flows() -> None:
    drawing = supply_graph(curves(), points(), US, (522, 330))
    middle = [item for item in drawing.items if isinstance(item, Label) and item.anchor == "middle"]
    labels = [item.text for item in middle if not item.bold]
    flows = [float(text) for text in labels if text.replace(".", "").isdigit()]
    assert flows[0] == 0
    assert 1000 in flows
    assert all(flow % 50 == 0 for flow in flows)


def test_no_curve_is_said_so() -> None:
    drawing = supply_graph((), (), US, (522, 330))
    assert drawing.shows == "no curve to draw"


def test_negative_and_endless_pressures_do_not_break_the_graph() -> None:
    steep = replace(curves()[0], pressures=tuple(p - 5e5 for p in curves()[0].pressures))
    endless = replace(curves()[0], pressures=(math.nan, *curves()[0].pressures[1:]))
    drawing = supply_graph((steep, endless), points(), US, (522, 330))
    for item in drawing.items:
        if isinstance(item, Line):
            assert all(math.isfinite(x) and -1 <= y <= drawing.height + 1 for x, y in item.points)


def test_clipping() -> None:
    window = Window(0, 0, 10, 10)
    assert clipped((-5, 5), (15, 5), window) == ((0, 5), (10, 5))
    assert clipped((2, 2), (3, 3), window) == ((2, 2), (3, 3))
    assert clipped((-5, -5), (-1, 20), window) is None
    assert clipped((11, 0), (11, 5), window) is None


def test_outline_of_two_squares_side_by_side_is_one_rectangle() -> None:
    edges = outline_of([(0, 0, 1, 1), (1, 0, 2, 1)])
    assert sum(math.dist(start, end) for start, end in edges) == pytest.approx(6.0)
    assert len(edges) == 4


def test_outline_of_squares_apart_keeps_both() -> None:
    edges = outline_of([(0, 0, 1, 1), (5, 5, 6, 6)])
    assert sum(math.dist(start, end) for start, end in edges) == pytest.approx(8.0)


def test_outline_encloses_heads_of_the_area_and_no_other() -> None:
    result = sample(lines=6, heads=6)
    cells = cells_of_heads(result.nodes)
    assert len(cells) == sum(node.in_design_area for node in result.nodes)

    def inside(x: float, y: float) -> bool:
        return any(x0 < x < x1 and y0 < y < y1 for x0, y0, x1, y1 in cells)

    for node in result.nodes:
        if node.kind == "sprinkler":
            assert inside(node.x or 0.0, node.y or 0.0) == node.in_design_area


def test_plan_counts_what_it_could_not_show() -> None:
    view = whole_plan(sample(lines=25, heads=20), US, (522, 400))
    assert view.tags_shown < view.tags_wanted
    assert view.without_place == ("TEST",)
    near = area_plan(sample(lines=25, heads=20), US, (522, 300))
    assert near is not None
    shown = {item.text.split()[0] for item in near.drawing.items if isinstance(item, Label)}
    assert {"H1.1", "H2.2", "H3.4"} <= shown


def test_no_plan_without_coordinates() -> None:
    assert not has_plan(sample(placed=False))
    assert area_plan(sample(placed=False), US, (522, 300)) is None


def test_placement_map_marks_the_governing_and_the_runner_up() -> None:
    result = sample(lines=8)
    drawing = placement_map(result, US, (522, 250))
    assert drawing is not None
    words = [item.text for item in drawing.items if isinstance(item, Label)]
    assert "governing 58.3 psi" in words
    assert "runner-up 57.5 psi" in words
    assert {"governing", "runner-up"} <= set(words)  # in the legend
    rings = [item for item in drawing.items if isinstance(item, Dot) and item.fill is None]
    assert len(rings) == 4
    lines = {item.branch_line for item in result.nodes if item.branch_line}
    assert lines <= set(words)
    dots = [item for item in drawing.items if isinstance(item, Dot) and item.fill]
    assert len(dots) == len(result.design_area.placements) + 5


@pytest.mark.parametrize("apart", [0.0, 0.2, 2.0, 30.0])
def test_what_names_a_ring_of_the_map_stands_clear_of_every_ring(apart: float) -> None:
    result = sample(lines=12, heads=6)
    area = result.design_area
    first = area.placements[0]
    second = replace(area.placements[1], x=(first.x or 0.0) + apart, y=first.y)
    placed = (first, second, *area.placements[2:])
    result = replace(
        result, design_area=replace(area, placements=placed, governing=first, runner_up=second)
    )
    drawing = placement_map(result, US, (522, 250))
    assert drawing is not None
    rings = [item for item in drawing.items if isinstance(item, Dot) and item.fill is None]
    names = [item for item in drawing.items if isinstance(item, Label) and item.bold]
    assert {name.text.split()[0] for name in names} == {"governing", "runner-up"}
    for name in names:
        wide = text_width(name.text, name.size, bold=True)
        left = name.x - {"start": 0.0, "middle": wide / 2, "end": wide}[name.anchor]
        for ring in rings[:-2]:  # the last two are those of the legend
            across = max(left - ring.x, ring.x - left - wide, 0.0)
            along = max(name.y - 0.24 * name.size - ring.y, ring.y - name.y - 0.8 * name.size, 0.0)
            assert math.hypot(across, along) >= ring.radius + ring.line / 2 + 1.0
