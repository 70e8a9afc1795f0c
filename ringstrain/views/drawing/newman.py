"""Newman views: down one ring bond, the front atom a disc, dihedrals read clockwise."""

from __future__ import annotations

import math
from dataclasses import dataclass

from ringstrain.analysis import Analysis, State, SystemResult
from ringstrain.contacts import occupant_of
from ringstrain.errors import InputError
from ringstrain.geometry import Geometry, Site, is_gauche, wrap
from ringstrain.views.drawing.labels import pieces_of, runs_of
from ringstrain.views.drawing.scene import Item, Label, Role, Scene, Shape, Stroke, bounds, moved, runs_width
from ringstrain.views.drawing.writing import Board, write_group
from ringstrain.views.forms import form_name

_RADIUS, _FRONT, _BACK, _SIZE = 44.0, 74.0, 86.0, 15.0
#: Eclipsed bonds are drawn this far apart to be seen at all [degree].
_PARTED = 9.0
_MARGIN = 14.0


@dataclass(frozen=True, slots=True)
class Spoke:
    """A bond seen end on.

    Attributes
    ----------
    neighbour
        Atom at its end, negative for a hydrogen or lone pair.
    angle
        Clockwise from the top [degree].
    pieces
        Its label.
    role
        Axial, equatorial, isoclinal, hydrogen, or ink for ring atoms.
    heavy
        False for hydrogens and lone pairs.
    """

    neighbour: int
    angle: float
    pieces: tuple[str, ...]
    role: Role
    heavy: bool


def find_bond(result: SystemResult, first: int, second: int) -> tuple[int, int]:
    """Ring and place of a ring bond.

    Raises
    ------
    InputError
        If the two atoms are not joined by a bond of a six-membered ring.
    """
    for number, ring in enumerate(result.rings):
        for place in range(6):
            if {ring[place], ring[(place + 1) % 6]} == {first, second}:
                return number, place
    raise InputError(
        f"Atoms {first + 1} and {second + 1} (counted from 1) are not joined by a bond of a six-membered ring.",
        "Give two neighbouring ring atoms, such as --newman 1,2 (see --numbers).",
        atoms=(first, second),
    )


def spokes(result: SystemResult, state: State, first: int, second: int) -> tuple[tuple[Spoke, ...], tuple[Spoke, ...]]:
    """Bonds of the front atom and of the back atom.

    Parameters
    ----------
    result, state
        What is looked at.
    first, second
        Front and back atom.

    Raises
    ------
    InputError
        If they are not joined by a ring bond.
    """
    number, place = find_bond(result, first, second)
    geometry = state.detail.shapes.geometry
    ring = result.rings[number]
    torsion = state.detail.shapes.rings[number].torsions[place]
    behind, ahead = ring[place - 1], ring[(place + 2) % 6]
    low, high = place, (place + 1) % 6
    # The ring path of the lower atom points down on the left, that of the upper one as far on as the torsion says.
    start = 180.0 - torsion / 2.0 if ring[low] == first else 180.0 + torsion / 2.0
    end = start + torsion
    near = [_ring_spoke(geometry, behind, start)]
    near += [_site_spoke(result, state, s, end - (torsion + s.offset_ahead)) for s in geometry.sites[number][low]]
    far = [_ring_spoke(geometry, ahead, end)]
    far += [_site_spoke(result, state, s, start + torsion + s.offset_behind) for s in geometry.sites[number][high]]
    if ring[low] == first:
        return tuple(near), tuple(far)
    # Seen from the other end, clockwise stays clockwise for torsions: mirror the angles.
    return tuple(_mirrored(s, start, end) for s in far), tuple(_mirrored(s, start, end) for s in near)


def _mirrored(spoke: Spoke, start: float, end: float) -> Spoke:
    return Spoke(spoke.neighbour, start + end - spoke.angle, spoke.pieces, spoke.role, spoke.heavy)


def _ring_spoke(geometry: Geometry, atom: int, angle: float) -> Spoke:
    record = geometry.structure.atoms[atom]
    return Spoke(atom, angle, (record.element,), "ink", True)


def _site_spoke(result: SystemResult, state: State, site: Site, angle: float) -> Spoke:
    geometry = state.detail.shapes.geometry
    occupant = occupant_of(geometry.structure, site)
    position: Role = next((p.position for p in state.detail.facts.placed if p.site == site), "equatorial")
    if site.neighbour in geometry.system.atom_set:
        return _ring_spoke(geometry, int(site.neighbour), angle)
    if site.neighbour < 0:
        return Spoke(int(site.neighbour), angle, ("H" if occupant == "hydrogen" else "lp",), "hydrogen", False)
    pieces = pieces_of(result, geometry.structure, int(site.ring_atom), int(site.neighbour))
    return Spoke(int(site.neighbour), angle, pieces, position, occupant == "atom")


def draw_newman(
    analysis: Analysis, result: SystemResult, state: State, first: int, second: int, *, numbers: bool = False
) -> Scene:
    """The view down a ring bond.

    Parameters
    ----------
    analysis, result, state
        What is looked at.
    first, second
        Front and back atom, zero-based.
    numbers
        True to add atom numbers to groups.

    Raises
    ------
    InputError
        If they are not joined by a ring bond.
    """
    front, back = spokes(result, state, first, second)
    shift = {s: _parting(s, front) for s in back}
    items: list[Item] = []
    labels: list[Item] = []
    board = Board()
    for spoke in back:
        angle = spoke.angle + shift[spoke]
        rim, tip = _at(_RADIUS, angle), _at(_BACK, angle)
        labels += _end(board, items, rim, tip, spoke, numbers)
    items.append(Shape(((0.0, 0.0),), "ink", _RADIUS, False, 1.8))
    for spoke in front:
        labels += _end(board, items, (0.0, 0.0), _at(_FRONT, spoke.angle), spoke, numbers)
    items.append(Shape(((0.0, 0.0),), "ink", 3.0))
    items += _pairs(board, front, back, shift)
    items += labels
    box = bounds(items)
    lines = [(f"{form_name(state, bare=True)}: atom {first + 1} in front of atom {second + 1}", True)]
    lines += [(text, False) for text in dihedral_lines(front, back)]
    wide = max(box[2] - box[0], *(runs_width(((line, ""),), 12.5) for line, _ in lines))
    left = (box[0] + box[2] - wide) / 2
    for place, (line, bold) in enumerate(lines):
        items.append(
            Label(
                left + wide / 2,
                box[3] + 24.0 + 16.0 * place,
                ((line, ""),),
                "ink" if bold else "muted",
                12.5,
                "middle",
                bold,
            )
        )
    low = bounds(items)[3]
    return Scene(
        width=wide + 2 * _MARGIN,
        height=low - box[1] + 2 * _MARGIN,
        items=tuple(moved(item, _MARGIN - left, _MARGIN - box[1]) for item in items),
        title=f"View along atoms {first + 1} and {second + 1} of {analysis.input}",
    )


def dihedral_lines(front: tuple[Spoke, ...], back: tuple[Spoke, ...]) -> tuple[str, ...]:
    """Each pair of heavy partners with its dihedral, gauche and eclipsed ones named."""
    lines = []
    for a in front:
        for b in back:
            if a.heavy and b.heavy:
                angle = wrap(b.angle - a.angle)
                word = (
                    " gauche"
                    if is_gauche(angle)
                    else " eclipsed"
                    if abs(angle) < 30
                    else " anti"
                    if abs(angle) > 142
                    else ""
                )
                first, second = (_name(s) for s in (a, b))
                sign = "\N{MINUS SIGN}" if angle < -0.5 else ""
                lines.append(f"{first}/{second} {sign}{abs(angle):.0f}\N{DEGREE SIGN}{word}")
    return tuple(lines)


def _name(spoke: Spoke) -> str:
    """A partner in words; ring atoms by number."""
    text = "".join(text for text, _ in runs_of(spoke.pieces))
    return f"{text}{spoke.neighbour + 1}" if spoke.role == "ink" else text


def _at(radius: float, angle: float) -> tuple[float, float]:
    """A point by its angle clockwise from the top [degree]."""
    turn = math.radians(angle)
    return radius * math.sin(turn), -radius * math.cos(turn)


def _parting(spoke: Spoke, front: tuple[Spoke, ...]) -> float:
    """How far a back bond is turned so that a front bond does not hide it [degree]."""
    for other in front:
        gap = wrap(spoke.angle - other.angle)
        if abs(gap) < _PARTED:
            return (_PARTED if gap >= 0 else -_PARTED) - gap
    return 0.0


def _end(
    board: Board, items: list[Item], root: tuple[float, float], tip: tuple[float, float], spoke: Spoke, numbers: bool
) -> list[Item]:
    """Draw a bond and set its label."""
    way = tip[0] - root[0], tip[1] - root[1]
    bold = spoke.role == "axial"
    number = str(spoke.neighbour + 1) if spoke.heavy and (numbers or spoke.role == "ink") else ""
    size = _SIZE if spoke.heavy else 12.5
    written = write_group(board, root, way, spoke.pieces, size=size, role=spoke.role, bold=bold, number=number)
    width = 3.4 if bold else 1.8 if spoke.heavy else 1.1
    items.append(Stroke((root, written.tip), spoke.role, width, (6.0, 3.0) if spoke.role == "isoclinal" else ()))
    return [written.label]


def _pairs(board: Board, front: tuple[Spoke, ...], back: tuple[Spoke, ...], shift: dict[Spoke, float]) -> list[Item]:
    """Arcs between gauche partners, ring pairs left out, with a g."""
    items: list[Item] = []
    level = 0
    for a in front:
        for b in back:
            ring_pair = a.role == "ink" and b.role == "ink"
            gap = wrap(b.angle - a.angle)
            if not (a.heavy and b.heavy) or ring_pair or not is_gauche(gap):
                continue
            radius = _RADIUS * (0.52 + 0.14 * level)
            level = (level + 1) % 3
            turn = wrap(b.angle + shift[b] - a.angle)
            arc = tuple(_at(radius, a.angle + turn * i / 10.0) for i in range(11))
            items.append(Stroke(arc, "accent", 1.4, (5.0, 3.0)))
            x, y = _at(radius, a.angle + turn / 2.0)
            label = Label(x, y + 4.0, (("g", ""),), "accent", 11.0, "middle", False, "mark")
            board.boxes.append(label.box)
            items.append(label)
    return items
