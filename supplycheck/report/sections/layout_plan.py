"""The plan of the system and the map of placements."""

from __future__ import annotations

from dataclasses import replace
from types import MappingProxyType
from typing import Final

from supplycheck.report.document import Block, Column, Figure, Paragraph, Row, Section, Table
from supplycheck.report.figures.key_plan import key_plan
from supplycheck.report.figures.legends import size_legend
from supplycheck.report.figures.placements import placement_map
from supplycheck.report.figures.plan import PlanView, area_plan, has_plan, whole_plan
from supplycheck.report.show import Show, column, told_apart, words
from supplycheck.results.display import tags_text
from supplycheck.results.records import Favourable, Placement, Result

ALL_PLACEMENTS: Final = "Placements one by one"
MOST_PLACEMENTS: Final = 48
"""Placements that are printed one by one, the hardest first."""
PLAN_ROOM: Final = MappingProxyType({"letter": 515.0, "a4": 562.0})


def plan(result: Result, width: float) -> Section:
    """Return the plan, the enlarged design area and the placements that were tried."""
    show = Show.of(result)
    blocks: list[Block] = []
    if has_plan(result):
        whole = whole_plan(result, show.units, (width, 400.0))
        title = "System, without the far end of the main" if whole.outside else "Whole system"
        blocks.append(Figure(title, whole.drawing, _caption(whole, outside=True)))
        if whole.outside:
            drawing = key_plan(result, show.units, whole.window, (width, 150.0))
            blocks.append(Figure("Key plan, with the far end of the main", drawing))
        blocks.append(Figure("Pipe sizes (bore)", size_legend(result.pipes, show.units, width)))
        rest = PLAN_ROOM["a4" if result.project.facts.paper == "a4" else "letter"] - whole.drawing.height
        near = area_plan(result, show.units, (width, rest)) if 175 <= rest <= 330 else None
        if near is None or near.factor < 1.4 * whole.factor:
            near = area_plan(result, show.units, (width, 258.0))
        if near is not None:
            unit = show.s("pressure")
            text = f"Behind the tag of a head: its pressure in {unit}. Arrows point the way of the flow. "
            blocks.append(Figure("Design area, enlarged", near.drawing, text + _caption(near)))
    else:
        blocks.append(
            Paragraph(
                "The project gives no coordinates, so there is no plan to draw. The pipe information lists "
                "every pipe with its end nodes; give x and y in the node table to have the plan drawn."
            )
        )
    sprinklers = result.project.criteria.has_sprinklers
    if sprinklers:
        blocks += _placements(result, show, width)
    return Section("Plan and design area" if sprinklers else "Plan", tuple(blocks), fresh=True)


def _caption(view: PlanView, *, outside: bool = False) -> str:
    texts = []
    if outside and view.outside:
        texts.append(f"Farther along the main, outside this view: {tags_text(view.outside, 8)}.")
    if view.tags_shown < view.tags_wanted:
        texts.append(
            f"{view.tags_shown} of {view.tags_wanted} tags have room here; all are in the node analysis."
        )
    if view.upright:
        texts.append(f"Upright pipes, seen as rings: {tags_text(view.upright, 6)}.")
    if view.without_place:
        count = len(view.without_place)
        verb = "node has" if count == 1 else "nodes have"
        texts.append(
            f"{count} {verb} no coordinates and can be followed in the pipe information: "
            f"{tags_text(view.without_place)}."
        )
    return " ".join(texts)


def _placements(result: Result, show: Show, width: float) -> list[Block]:
    area = result.design_area
    blocks: list[Block] = []
    drawn = placement_map(result, show.units, (width, 200.0))
    if drawn is not None:
        blocks.append(
            Figure(
                "Required pressure by placement of the design area",
                drawn,
                f"{area.tried} placements tried; each dot stands at the centre of its heads. "
                "Stretched to the width, not to scale. At the ends of lines: their tags.",
            )
        )
    chosen = [("governing", area.governing), ("runner-up", area.runner_up)]
    decimals = told_apart([one.required_pressure for _, one in chosen if one is not None], show.units)
    rows = tuple(_row(word, one, show, decimals) for word, one in chosen if one is not None)
    if area.most_favourable is not None:
        rows = (*rows, _favourable_row(area.most_favourable, area.placements, show, decimals))
    note = "How they were found: basis of design." if area.mode == "search" else area.statement
    if len(area.placements) > len(chosen):
        note += f" The others stand under “{ALL_PLACEMENTS}”."
    if area.runner_up is not None and len(area.placements) > len(chosen):
        note += (
            " Runner-up: the next that differs; mirror images and others that ask the same are left out."
        )
    blocks.append(Table("Placements compared", _columns("Placement", show), rows, note))
    return blocks


def placements(result: Result) -> Section | None:
    """Return all placements that were tried, the hardest first; ``None`` where there are only two."""
    show, area = Show.of(result), result.design_area
    count = len(area.placements)
    if count <= 2:
        return None
    hardest = sorted(
        area.placements, key=lambda one: (one is not area.governing, one.margin, -one.required_pressure)
    )
    shown = hardest[:MOST_PLACEMENTS]
    rows = tuple(_row(str(place), one, show) for place, one in enumerate(shown, start=1))
    which = f"The {len(shown)} hardest of {count}" if len(shown) < count else f"All {count}"
    note = (
        f"{which} that were tried, by the margin before the rule. Every one stands in result.json "
        "(design_area.placements) and on the sheet placements of tables.xlsx."
    )
    table = Table("By margin before the rule", _columns("No.", show), rows, note, size=6.6)
    return Section(ALL_PLACEMENTS, (table,), fresh=True)


def _columns(first: str, show: Show) -> tuple[Column, ...]:
    return (
        words(first),
        words("Label"),
        column("Required", show.s("pressure")),
        column("Flow", show.s("flow")),
        column("Margin", show.s("pressure")),
        column("Area", show.s("area")),
        column("Heads"),
        words("Tags"),
    )


def _favourable_row(best: Favourable, tried: tuple[Placement, ...], show: Show, decimals: int) -> Row:
    """Return the placement as it was tried, and what flows there with the supply as it is."""
    same = next((one for one in tried if set(one.heads) == set(best.heads)), None)
    flow = show.n(best.flow, "flow")
    note = f"{flow} {show.s('flow')} with the actual supply"
    if same is not None:
        return replace(_row("most favourable", same, show, decimals), note=note)
    return Row(
        (
            "most favourable",
            best.label,
            "–",
            "–",
            "–",
            "–",
            str(len(best.heads)),
            tags_text(best.heads, 40),
        ),
        note=note,
    )


def _row(word: str, one: Placement, show: Show, decimals: int | None = None) -> Row:
    return Row(
        (
            word,
            one.label,
            show.n(one.required_pressure, "pressure", decimals),
            show.n(one.flow, "flow"),
            show.n(one.margin, "pressure", decimals),
            show.n(one.area, "area"),
            str(len(one.heads)),
            tags_text(one.heads, 40),
        )
    )
