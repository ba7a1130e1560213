"""From the cross main to the supply: feed main, riser, underground main."""

from __future__ import annotations

import dataclasses
import math

from supplycheck.model import Node
from supplycheck.model.system import PipeRole
from supplycheck.project.drafts import DraftPipe, Notes
from supplycheck.project.faults import FaultList
from supplycheck.project.layout_parts import SAME, Builder, units_in
from supplycheck.project.schema_system import MainPiece, RiserPiece
from supplycheck.project.sections import Sections
from supplycheck.units import UnitSet


@dataclasses.dataclass(frozen=True, slots=True)
class _Piece:
    key: str
    role: PipeRole
    end: str
    table: MainPiece | RiserPiece


def _pieces(builder: Builder) -> list[_Piece]:
    layout = builder.layout
    choices: tuple[tuple[str, PipeRole, str, MainPiece | RiserPiece | None], ...] = (
        ("feed_main", "feed main", "TOR", layout.feed_main),
        ("riser", "riser", "BOR", layout.riser),
        ("underground", "underground", "S", layout.underground),
    )
    return [_Piece(key, role, end, table) for key, role, end, table in choices if table is not None]


def _end_elevation(piece: _Piece, start: float, units: UnitSet, notes: Notes) -> float:
    """Return the elevation of the supply-side end of a piece [m]."""
    if isinstance(piece.table, RiserPiece):
        return piece.table.bottom_elevation.si(units)
    if piece.table.elevation is not None:
        return piece.table.elevation.si(units)
    notes.add(
        f"layout.{piece.key}.elevation",
        units.text(start, "length"),
        "assumed",
        "that of its other end: level pipe",
    )
    return start


def _length(piece: _Piece, rise: float, units: UnitSet, sections: Sections, faults: FaultList) -> float:
    given = piece.table.length.si(units) if piece.table.length is not None else None
    where = f"layout.{piece.key}.length"
    if given is None and rise <= SAME:
        faults.add(
            sections.place(f"layout.{piece.key}.bottom_elevation"),
            "is that of the top of the riser, so that the riser has no length",
            allowed="the elevation of the base of the riser",
            remedy="correct it, or give the length of the riser, or take the riser out",
        )
        return 1.0
    if given is not None and given < rise - SAME:
        faults.add(
            sections.place(where),
            "is shorter than the difference of elevation between its ends",
            found=units.text(given, "length"),
            allowed=f"at least {units.text(rise, 'length')}",
            remedy="correct the length or the elevations",
        )
    return rise if given is None else given


def add_feed(builder: Builder, joint: str, sections: Sections, notes: Notes, faults: FaultList) -> None:
    """Add the pieces from ``joint`` on the cross main to the supply node ``S``.

    Feed main and underground main run away from the array: along −y where the main is fed at its end,
    along −x where it is fed in the middle. The riser stands upright.
    """
    pieces = _pieces(builder)
    if not pieces:
        faults.add(
            sections.place("layout"),
            "nothing leads from the cross main to the supply",
            allowed="at least one of feed_main, riser, underground",
        )
        return
    centre = joint == "MC"
    start = next(node for node in reversed(builder.nodes) if node.tag == joint)
    x, y, elevation, tag = start.x or 0.0, start.y or 0.0, start.elevation, joint
    for number, piece in enumerate(pieces):
        units = units_in(piece.table, builder.units)
        end_elevation = _end_elevation(piece, elevation, units, notes)
        rise = abs(end_elevation - elevation)
        length = _length(piece, rise, units, sections, faults)
        run = 0.0 if piece.key == "riser" else math.sqrt(max(length**2 - rise**2, 0.0))
        x, y = (x - run, y) if centre else (x, y - run)
        last = number == len(pieces) - 1
        end = "S" if last else piece.end
        place = sections.place(f"layout.{piece.key}")
        builder.nodes.append(Node(end, end_elevation, x, y, "supply" if last else "junction", place=place))
        builder.pipes.append(
            DraftPipe(
                tag=f"{end}-{tag}",
                start=end,
                end=tag,
                length=length,
                kind=piece.table.pipe,
                size=piece.table.size,
                place=place,
                fittings=piece.table.fittings,
                devices=tuple(piece.table.devices),
                role=piece.role,
                infer=piece.table.fittings is None,
            )
        )
        elevation, tag = end_elevation, end
