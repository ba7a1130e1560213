"""Placements counted by hand on small arrays, and what the search says about them."""

from __future__ import annotations

from dataclasses import replace

import pytest
from demand_systems import FT2, criteria, grid, head, pipe, point, project, system, tree

from supplycheck.demand import demand_cases
from supplycheck.demand.heads import all_heads
from supplycheck.demand.lines import find_lines
from supplycheck.errors import DomainError
from supplycheck.model import AreaModifier
from supplycheck.units import FOOT, US


def cases(built, **changes):
    return demand_cases(project(built, criteria(**changes))).cases


def sets(found):
    return {frozenset(case.heads) for case in found}


@pytest.mark.parametrize("tagged", [True, False])
@pytest.mark.parametrize("roles", [True, False])
@pytest.mark.parametrize("nipple", [True, False])
@pytest.mark.parametrize("turn", [0.0, 0.7, 1.5707963267948966, 2.5])
def test_twelve_heads_on_an_end_fed_tree(tagged: bool, roles: bool, nipple: bool, turn: float) -> None:
    # 1500 ft², 130 ft² a head: 3 lines × 4. Six heads a line give 3 positions, five lines 3 groups.
    built = tree([0] * 5, [6] * 5, tagged=tagged, roles=roles, nipple=nipple, turn=turn)
    found = cases(built)
    assert len(found) == 3 * 3
    assert {(case.lines, case.along_line, len(case.heads)) for case in found} == {(3, 4, 12)}
    assert frozenset(f"E{i}.{j}" for i in (2, 3, 4) for j in (2, 3, 4, 5)) in sets(found)


def test_left_over_heads_take_every_position_on_either_outer_line() -> None:
    # 1430 ft² = 11 heads: 4 + 4 + 3. Two positions of the three, on the first or the last line.
    found = cases(tree([0] * 4, [5] * 4), base_area=1430 * FT2)
    assert len(found) == 2 * 2 * (2 + 2)
    assert {len(case.heads) for case in found} == {11}
    remote = {f"E{i}.{j}" for i in (3, 2) for j in (1, 2, 3, 4)}
    assert remote | {"E1.1", "E1.2", "E1.3"} in sets(found)
    assert remote | {"E1.2", "E1.3", "E1.4"} in sets(found)
    assert remote | {"E1.1", "E1.2", "E1.4"} not in sets(found)


def test_an_area_stays_on_one_side_of_the_main_where_the_side_is_long_enough() -> None:
    for case in cases(tree([4] * 4, [5] * 4)):
        assert len({tag[0] for tag in case.heads}) == 1


def test_an_area_crosses_the_main_where_a_side_is_too_short() -> None:
    # The west side has two heads, the area asks four along the line.
    found = sets(cases(tree([2] * 6, [6] * 6)))
    over = frozenset(f"{side}{i}.{j}" for i in (3, 4, 5) for side in "WE" for j in (0, 1))
    west = frozenset(f"W{i}.{j}" for i in range(6) for j in (0, 1))
    east = frozenset(f"E{i}.{j}" for i in (3, 4, 5) for j in (2, 3, 4, 5))
    assert {over, west, east} <= found
    # sides alone: 1 west + 4 × 3 east; across: 4 × 2 windows that hold a head of the west side
    assert len(found) == 1 + 4 * 3 + 4 * 2


def test_the_same_tag_on_both_sides_or_one_for_each_is_the_same_system() -> None:
    both = tree([2] * 6, [6] * 6)
    apart = replace(
        both,
        nodes=tuple(
            replace(node, branch_line=f"{node.branch_line}{node.tag[0]}") if node.branch_line else node
            for node in both.nodes
        ),
    )
    assert sets(cases(both)) == sets(cases(apart))


@pytest.mark.parametrize("tagged", [True, False])
@pytest.mark.parametrize("roles", [True, False])
def test_a_grid_is_shifted_both_ways(tagged: bool, roles: bool) -> None:
    # 12 heads of 9 m²: 1.2√108 = 12.47 m = 5 heads; 5 + 5 + 2: the two in 4 positions, two outer lines.
    found = cases(grid(6, 8, tagged=tagged, roles=roles), base_area=108.0)
    assert len(found) == (8 - 5 + 1) * (6 - 3 + 1) * 4 * 2
    assert {len(case.heads) for case in found} == {12}


def test_a_short_line_is_taken_whole_and_the_rest_made_up() -> None:
    # Three heads a line where four are asked: four lines of three make twelve.
    found = cases(tree([0] * 5, [3] * 5))
    assert sets(found) == {
        frozenset(f"E{i}.{j}" for i in range(k, k + 4) for j in range(3)) for k in (0, 1)
    }


def test_too_few_lines_make_the_runs_longer() -> None:
    # Two lines of ten: twelve heads need six on each.
    found = cases(tree([0] * 2, [10] * 2))
    assert sets(found) == {
        frozenset(f"E{i}.{j}" for i in (0, 1) for j in range(k, k + 6)) for k in range(5)
    }


def test_too_few_lines_and_short_sides_reach_across_the_main() -> None:
    found = sets(cases(tree([4] * 2, [4] * 2)))
    assert all(len(heads) == 12 for heads in found)
    assert (
        frozenset(f"{s}{i}.{j}" for i in (0, 1) for s, n in (("W", 4), ("E", 2)) for j in range(n)) in found
    )


def test_an_area_smaller_than_the_design_area_opens_all_its_heads() -> None:
    found = cases(tree([0] * 2, [4] * 2))
    assert sets(found) == {frozenset(f"E{i}.{j}" for i in (0, 1) for j in range(4))}
    assert "smaller than the design area: all heads" in found[0].note
    assert found[0].label == "all heads"


def test_a_label_of_whole_lines_runs_from_the_first_head_to_the_last() -> None:
    # Lines of four, twelve heads: three whole lines at a time.
    found = cases(tree([0] * 4, [4] * 4))
    whole = {case.label for case in found if "all heads" in case.label}
    assert "lines L0–L2, all heads (E0.0 to E2.3)" in whole
    for case in found:
        if case.label in whole:
            assert case.label.endswith(f"({min(case.heads)} to {max(case.heads)})")


def test_a_minimum_number_of_heads() -> None:
    # 450 ft² is four heads of 130 ft²; five asked: two on each of two lines (1.2√450 = 25.5 ft), one more.
    found = cases(tree([0] * 4, [4] * 4), base_area=450 * FT2, minimum_heads=5)
    assert {len(case.heads) for case in found} == {5}
    four = cases(tree([0] * 4, [4] * 4), base_area=450 * FT2)
    assert {len(case.heads) for case in four} == {4}


def test_storeys_never_mix() -> None:
    upper = tree([0] * 5, [6] * 5, elevation=9.5, prefix="u")
    lower = tree([0] * 5, [6] * 5, elevation=6.0)
    both = system([*lower.nodes, *upper.nodes], [*lower.pipes, *upper.pipes])
    found = cases(both)
    assert len(found) == 18
    assert all(len({tag[0] for tag in case.heads}) == 1 for case in found)


def test_a_mezzanine_beside_a_hall_is_a_level_of_its_own() -> None:
    hall = tree([0] * 3, [6] * 3)
    shifted = [
        replace(
            n,
            tag="m" + n.tag,
            y=n.y + 30 * FOOT,
            elevation=9.0,
            branch_line=n.branch_line and "m" + n.branch_line,
        )
        for n in hall.nodes
    ]
    pipes = [replace(p, tag="m" + p.tag, start="m" + p.start, end="m" + p.end) for p in hall.pipes]
    found = cases(system([*hall.nodes, *shifted], [*hall.pipes, *pipes]))
    assert len(found) == 3 + 3
    assert all(len({tag[0] for tag in case.heads}) == 1 for case in found)


def test_lines_under_a_sloping_roof_stay_on_one_level() -> None:
    flat = tree([0] * 5, [6] * 5)
    nodes = [replace(n, elevation=6.0 + (n.y or 0.0) / 4) for n in flat.nodes]
    assert sets(cases(replace(flat, nodes=tuple(nodes)))) == sets(cases(flat))


def test_a_gap_between_two_halls_is_not_bridged() -> None:
    near = tree([0] * 3, [6] * 3)
    far = [
        replace(
            n,
            tag="f" + n.tag,
            y=(n.y or 0.0) + 60 * FOOT,
            branch_line=n.branch_line and "f" + n.branch_line,
        )
        for n in near.nodes
    ]
    pipes = [replace(p, tag="f" + p.tag, start="f" + p.start, end="f" + p.end) for p in near.pipes]
    found = cases(system([*near.nodes, *far], [*near.pipes, *pipes]))
    assert all(len({tag[0] for tag in case.heads}) == 1 for case in found)
    assert len(found) == 6


def test_heads_on_drops_belong_to_the_line_they_hang_from() -> None:
    plain = tree([0] * 5, [6] * 5, tagged=False, roles=False)
    nodes, pipes = [], []
    for node in plain.nodes:
        if node.kind == "sprinkler":
            nodes += [point(f"T{node.tag}", node.x, node.y, 6.3), node]
            pipes.append(pipe(f"T{node.tag}", node.tag, "pipe", 0.3))
        else:
            nodes.append(node)
    heads = {node.tag for node in plain.nodes if node.kind == "sprinkler"}
    for p in plain.pipes:
        start, end = (f"T{t}" if t in heads else t for t in (p.start, p.end))
        pipes.append(pipe(start, end))
    assert sets(cases(system(nodes, pipes))) == sets(cases(plain))


def test_heads_on_short_arms_belong_to_the_line_they_hang_from() -> None:
    nodes, pipes = [point("S", 0.0, -3.0)], []
    before = "S"
    for i in range(3):
        nodes.append(point(f"M{i}", 0.0, 3.0 * i))
        pipes.append(pipe(before, f"M{i}"))
        before = inner = f"M{i}"
        for j in range(4):
            nodes += [
                point(f"T{i}.{j}", 3.0 * (j + 1), 3.0 * i),
                head(f"H{i}.{j}", 3.0 * (j + 1), 3.0 * i + 0.4, 9.0),
            ]
            pipes += [pipe(inner, f"T{i}.{j}"), pipe(f"T{i}.{j}", f"H{i}.{j}", "pipe", 0.4)]
            inner = f"T{i}.{j}"
        nodes.append(point(f"X{i}", 13.0, 3.0 * i))
        pipes.append(pipe(inner, f"X{i}"))  # a capped end, so that the last head hangs from a run as well
    built = system(nodes, pipes)
    lines = find_lines(all_heads(project(built, criteria())), built)
    assert sorted(len(line) for line in lines.sides) == [4, 4, 4]


def test_staggered_lines_lean_either_way() -> None:
    # Every other line is set half a spacing over; four heads asked on each of two lines of five.
    nodes, pipes = [point("S", -3.0, 0.0)], []
    for i in range(2):
        inner = "S"
        for j in range(5):
            nodes.append(head(f"H{i}.{j}", 3.0 * j + 1.5 * (i % 2), 3.0 * i, 9.0, f"L{i}"))
            pipes.append(pipe(inner, f"H{i}.{j}", "branch line"))
            inner = f"H{i}.{j}"
    found = sets(
        cases(system(nodes, pipes), base_area=72.0)
    )  # 1.2√72 = 10.2 m: four heads of 3 m, eight in all

    def run(i: int, j: int) -> set[str]:
        return {f"H{i}.{k}" for k in range(j, j + 4)}

    assert found == {frozenset(run(0, a) | run(1, b)) for a, b in ((0, 0), (1, 1), (1, 0))}


def test_european_areas_also_take_whole_lines_and_pairs() -> None:
    # 72 m² of 9 m²: eight heads. A pair of four-head sides is an area by itself.
    built = tree([4] * 3, [4] * 3, along=3.0, between=3.0)
    found = sets(cases(built, standard="EN 12845", base_area=72.0))
    pair = frozenset(f"{side}1.{j}" for side in "WE" for j in range(4))
    block = frozenset(f"E{i}.{j}" for i in (1, 2) for j in range(4))
    assert {pair, block} <= found
    assert pair not in sets(cases(built, base_area=72.0))
    square = frozenset(f"E{i}.{j}" for i in range(3) for j in range(3)) - {"E0.2"}
    assert square in found  # √72 = 8.5 m: three heads of 3 m, 3 + 3 + 2


def test_a_deluge_system_opens_every_head() -> None:
    found = demand_cases(project(tree([2] * 2, [3] * 2), criteria(system="deluge")))
    assert len(found.cases) == 1
    assert len(found.cases[0].heads) == 10
    assert found.mode == "search"


def test_the_cap_is_said() -> None:
    found = demand_cases(project(grid(6, 8), criteria(base_area=108.0)), cap=50)
    assert (len(found.cases), found.complete) == (50, False)
    assert "stopped at 50 placements" in found.statement
    full = demand_cases(project(grid(6, 8), criteria(base_area=108.0)))
    assert full.complete
    assert "128 placements" in full.statement


def test_labels_name_lines_and_heads_and_differ() -> None:
    found = cases(tree([2] * 6, [6] * 6))
    labels = [case.label for case in found]
    assert len(set(labels)) == len(labels)
    remote = next(
        c for c in found if set(c.heads) == {f"E{i}.{j}" for i in (3, 4, 5) for j in (2, 3, 4, 5)}
    )
    assert remote.label == "lines L3–L5, heads 1–4 of 6 from the end at E3.5"


def test_labels_list_lines_upwards_and_repeat_no_word() -> None:
    built = tree([0] * 12, [6] * 12)
    spoken = replace(
        built,
        nodes=tuple(
            replace(n, branch_line=n.branch_line.replace("L", "line ")) if n.branch_line else n
            for n in built.nodes
        ),
    )
    labels = {frozenset(case.heads): case.label for case in cases(spoken, base_area=1430 * FT2)}
    heads = frozenset(f"E{i}.{j}" for i, n in ((11, 4), (10, 4), (9, 3)) for j in range(2, 2 + n))
    assert labels[heads] == (
        "line 10–line 11, heads 1–4 of 6 from the end at E10.5; line 9, heads 2–4 of 6 from the end at E9.5"
    )


def test_each_case_carries_what_its_heads_need() -> None:
    built = tree([0] * 5, [6] * 5)
    nodes = tuple(replace(n, area=n.area * 1.1) if n.tag == "E4.5" else n for n in built.nodes)
    mixed = replace(built, nodes=nodes)
    for case in cases(mixed):
        own = {n.tag: n.area / FT2 for n in nodes if n.area}
        for tag, flow, by in zip(case.heads, case.required_flow, case.required_by, strict=True):
            assert US.from_si(flow, "flow") == pytest.approx(0.20 * own[tag], rel=1e-9)
            assert by == "density"
        assert case.area / FT2 == pytest.approx(sum(own[tag] for tag in case.heads), rel=1e-12)


def test_steps_tell_the_derivation() -> None:
    modifiers = (AreaModifier("dry pipe", 1.3, "a"), AreaModifier("slope", 1.3, "b"))
    found = demand_cases(project(tree([0] * 9, [9] * 9), criteria(modifiers=modifiers)))
    steps = {step.step: step for step in found.steps}
    assert steps["Area after dry pipe"].value / FT2 == pytest.approx(1950, rel=1e-12)
    assert steps["Required area"].value / FT2 == pytest.approx(2535, rel=1e-12)
    assert steps["Heads in the area"].value == 20  # 2535/130 = 19.5
    assert steps["Heads along a line"].value == 5  # 1.2√2535 = 60.4 ft, 4.65 spacings of 13 ft
    assert steps["Lines"].value == 4
    text = steps["Heads in the area"].formula.fill(US.text)
    assert text == "2535.0 ft² ÷ 130.0 ft² = 19.500, rounded up"


@pytest.mark.parametrize(
    ("built", "changes", "words"),
    [
        (system([point("S", 0, 0)], []), {}, "no sprinkler"),
        (system([head("H", 0, 0, None)], []), {}, "floor area"),
        (system([head("H", None, 0, 9.0)], []), {}, "no coordinates .H."),
        (tree([0], [2]), {"density": 0.0}, "density must be"),
        (tree([0], [2]), {"required_area": 1.0}, "required area is not the base area"),
    ],
)
def test_what_keeps_candidates_from_being_formed(built, changes, words: str) -> None:
    with pytest.raises(DomainError, match=words):
        cases(built, **changes)


def test_heads_above_and_below_a_ceiling_are_two_levels() -> None:
    # Each point of the line carries a head 1.2 m above it and one at its own height on a drop.
    flat = tree([0] * 5, [6] * 5)
    nodes, pipes = list(flat.nodes), list(flat.pipes)
    for node in flat.nodes:
        if node.kind == "sprinkler":
            nodes.append(replace(node, tag="u" + node.tag, elevation=node.elevation + 1.2))
            pipes.append(pipe(node.tag, "u" + node.tag, "drop", 1.2))
    found = cases(system(nodes, pipes))
    assert len(found) == 18
    assert all(len({tag[0] for tag in case.heads}) == 1 for case in found)


def test_a_stub_with_lines_of_another_direction_is_made_up_with_its_neighbours() -> None:
    # Beyond the last line two heads stand on a line of their own that runs across the others.
    hall = tree([0] * 5, [6] * 5)
    top = 4 * 10 * FOOT
    stub = [head(f"Z.{k}", 20 * FOOT, top + (k + 1) * 10 * FOOT, 130 * FT2, "Z") for k in range(2)]
    pipes = [pipe("E4.1", "Z.0", "branch line"), pipe("Z.0", "Z.1", "branch line")]
    found = cases(system([*hall.nodes, *stub], [*hall.pipes, *pipes]))
    regular = [case for case in found if not any(tag.startswith("Z") for tag in case.heads)]
    (made_up,) = [case for case in found if any(tag.startswith("Z") for tag in case.heads)]
    assert len(regular) == 9
    assert {"Z.0", "Z.1", "E4.1"} <= set(made_up.heads)
    assert len(made_up.heads) == 12
    assert made_up.label == "line Z, all heads (Z.0 to Z.1); 10 nearest heads beside it"
    assert made_up.note == ""


def test_a_line_alone_grows_along_itself() -> None:
    found = cases(tree([0], [20]))
    assert sets(found) == {frozenset(f"E0.{j}" for j in range(k, k + 12)) for k in range(9)}


@pytest.mark.slow
def test_ten_thousand_heads_are_tried_whole() -> None:
    # 5 + 5 + 2 heads: 96 runs × 98 groups of lines × 4 places for the two left over × 2 outer lines.
    found = demand_cases(project(grid(100, 100), criteria(base_area=108.0)))
    assert found.complete
    assert len(found.cases) == 96 * 98 * 4 * 2
