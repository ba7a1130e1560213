"""Properties of any layout, and of any spoilt project: it is read, or its faults are listed."""

from __future__ import annotations

import math
import random
from collections import Counter
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from project_texts import HEAD, LAYOUT_PROJECT, NODES, PIPES, TABLE_PROJECT, write

from supplycheck.project import ProjectFaultsError, read_project
from supplycheck.project.graph import islands, tree_from
from supplycheck.units import FOOT

ROOT = Path(__file__).parents[2]
VALUES = (
    "0",
    "-1",
    "1e308",
    "1e400",
    "nan",
    "true",
    '""',
    '"x"',
    "[]",
    "{}",
    "[[1]]",
    "1",
    '"1 1/4"',
    '"-"',
    '"5 psi"',
    '"5 ft"',
    "2026-01-01",
    "[1,2,3]",
    "{a=1}",
    "[{}]",
    "-0.0",
    '"S"',
    '"A"',
    '"lines"',
    "1e-300",
    "999999",
    '"percent"',
    '"loop"',
    '"grid"',
    '"dry"',
    '"EN 12845 (2015)"',
    '"NFPA 13 (2016)"',
    '"darcy-weisbach"',
)

layouts = st.fixed_dictionaries(
    {
        "type": st.sampled_from(["tree", "loop", "grid"]),
        "lines": st.integers(2, 6),
        "left": st.integers(0, 5),
        "right": st.integers(1, 5),
        "spacing": st.floats(6, 15),
        "first": st.floats(1, 8),
        "feed": st.sampled_from(["end", "centre"]),
        "nipple": st.booleans(),
        "drop": st.booleans(),
    }
)


def text_of(choice: dict[str, object]) -> str:
    heads = [choice["right"]] if choice["type"] == "grid" else [choice["left"], choice["right"]]
    lines = [
        "[layout]",
        f'type = "{choice["type"]}"',
        f"lines = {choice['lines']}",
        "line_spacing = 11",
        f"heads = {heads}",
        f"head_spacing = {choice['spacing']}",
        f"first_head = {choice['first']}",
        'sprinkler = "A"',
        "head_elevation = 20",
        'branch = { pipe = "lines", sizes = ["1 1/4"], elevation = 21 }'
        if choice["drop"]
        else 'branch = { pipe = "lines", sizes = ["1 1/4"] }',
        f'cross_main = {{ pipe = "lines", sizes = ["3"], feed = "{choice["feed"]}" }}',
        'riser = { pipe = "lines", size = "4", bottom_elevation = 0 }',
    ]
    lines += ['drop = { pipe = "lines", size = "1" }'] if choice["drop"] else []
    lines += ['riser_nipple = { pipe = "lines", size = "2", length = 1 }'] if choice["nipple"] else []
    lines += ['far_main = { pipe = "lines", size = "3" }'] if choice["type"] != "tree" else []
    return HEAD + "\n".join(lines) + "\n"


@settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(choice=layouts)
def test_every_layout_hangs_together(tmp_path: Path, choice: dict[str, object]) -> None:
    system = read_project(write(tmp_path, text_of(choice))).system
    tags = [node.tag for node in system.nodes]
    assert len(set(tags)) == len(tags)
    assert max(Counter(pipe.tag for pipe in system.pipes).values()) == 1
    index = {tag: number for number, tag in enumerate(tags)}
    ends = [(index[pipe.start], index[pipe.end]) for pipe in system.pipes]
    supply = [number for number, node in enumerate(system.nodes) if node.kind == "supply"]
    assert islands(len(tags), ends, tree_from(len(tags), ends, supply).order) == []
    heads = [node for node in system.nodes if node.kind == "sprinkler"]
    sides = int(str(choice["right"])) + (0 if choice["type"] == "grid" else int(str(choice["left"])))
    assert len(heads) == int(str(choice["lines"])) * sides * (2 if choice["type"] == "loop" else 1)
    loops = {"tree": 0, "loop": 1, "grid": int(str(choice["lines"])) - 1}[str(choice["type"])]
    assert len(system.pipes) - len(system.nodes) + 1 == loops
    for pipe in system.pipes:
        a, b = system.nodes[index[pipe.start]], system.nodes[index[pipe.end]]
        apart = math.dist((a.x or 0, a.y or 0, a.elevation), (b.x or 0, b.y or 0, b.elevation))
        assert pipe.length == pytest.approx(apart, abs=1e-6 * FOOT)


def spoil(text: str, source: random.Random) -> str:
    lines = text.split("\n")
    for _ in range(source.randint(1, 4)):
        row = source.randrange(len(lines))
        luck = source.random()
        if "=" in lines[row] and luck < 0.7:
            value = source.choice(VALUES)
            lines[row] = lines[row].split("=", 1)[0] + "= " + value
        elif luck < 0.85:
            del lines[row]
        else:
            lines.insert(row, source.choice(lines))
        if not lines:
            break
    return "\n".join(lines)


def spoil_table(text: str, source: random.Random) -> str:
    letters = list(text)
    for _ in range(source.randint(0, 3)):
        letters[source.randrange(len(letters))] = source.choice(
            [",", "0", "-", '"', "\n", "x", "\x00", "é", " "]
        )
    return "".join(letters)


@pytest.mark.parametrize("seed", range(4))
def test_a_spoilt_project_never_ends_in_a_traceback(tmp_path: Path, seed: int) -> None:
    texts = [
        LAYOUT_PROJECT,
        TABLE_PROJECT,
        (ROOT / "examples/office-floor/project.toml").read_text("utf-8"),
    ]
    source = random.Random(seed)
    refused = 0
    for _ in range(60):
        path = write(
            tmp_path,
            spoil(source.choice(texts), source),
            spoil_table(NODES, source),
            spoil_table(PIPES, source),
        )
        try:
            read_project(path)
        except ProjectFaultsError as caught:
            refused += 1
            assert all(fault.problem and fault.place.file for fault in caught.faults)
            assert str(caught).isprintable() or "\n" in str(caught)
    assert refused > 20
