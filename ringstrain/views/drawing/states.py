"""One state as a picture: rings in the conventional projection, groups at their sites, contacts marked."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

from ringstrain.analysis import State, SystemResult
from ringstrain.contacts import ContactKind
from ringstrain.views.drawing.camera import View, choose_view, settle
from ringstrain.views.drawing.labels import pieces_of
from ringstrain.views.drawing.marks import ISOCLINAL_DASH, bow, clash, inside, shifted, shortened
from ringstrain.views.drawing.placing import Arm, Model, place
from ringstrain.views.drawing.scene import Item, Label, Role, Run, Scene, Stroke, bounds, moved
from ringstrain.views.drawing.writing import Board, Point, Written, write_group, write_number

#: Length of a bond and size of a label [px].
BOND, SIZE = 54.0, 15.0
_HYDROGEN_SIZE, _NUMBER_SIZE, _MARGIN = 12.5, 10.5, 10.0
#: Bonds to groups against ring bonds, axial and other ones, and to hydrogens [-].
_AXIAL_REACH, _REACH, _HYDROGEN_REACH = 0.86, 0.95, 0.62
_WIDTHS: dict[str, float] = {"axial": 3.4, "equatorial": 1.7, "isoclinal": 2.2, "hydrogen": 1.1}
_CLASHES: tuple[ContactKind, ...] = ("syn-axial X//H", "syn-axial X//Y", "peri")


@dataclass(frozen=True, slots=True, kw_only=True)
class Wishes:
    """What a drawing shows.

    Attributes
    ----------
    numbers
        Atom numbers, counted from 1.
    gauche
        Gauche pairs of groups.
    clashes
        Syn-axial and peri pairs.
    hydrogens
        Every hydrogen on the rings; else those at ring fusions and in marked pairs.
    """

    numbers: bool = False
    gauche: bool = False
    clashes: bool = True
    hydrogens: bool = False


def draw_state(result: SystemResult, state: State, wishes: Wishes | None = None) -> Scene:
    """A state as a picture.

    Parameters
    ----------
    result
        The ring system it belongs to.
    state
        Which state.
    wishes
        What to show.

    Returns
    -------
    Scene
        Cropped to what is drawn.
    """
    return _Drawing(result, state, wishes or Wishes()).scene()


def state_view(result: SystemResult, state: State) -> tuple[Model, View]:
    """Positions of a state and the view of it; all states of a system are seen from the same side."""
    first = result.states[0]
    model = place(first.detail.shapes)
    steps, over = choose_view(first.detail.shapes, model)
    if state is not first:
        model = place(state.detail.shapes, model.reference)
    return model, settle(state.detail.shapes, model, steps, over)


class _Drawing:
    """The picture while it grows."""

    def __init__(self, result: SystemResult, state: State, wishes: Wishes) -> None:
        self.result, self.state, self.wishes = result, state, wishes
        self.shapes = state.detail.shapes
        self.structure = self.shapes.geometry.structure
        self.model, self.view = state_view(result, state)
        self.flat: dict[int, tuple[float, float, float]] = {}
        for atom, point in self.model.positions.items():
            x, y, depth = self.view.project(point)
            self.flat[atom] = (BOND * x, -BOND * y, depth)
        self.board = Board()
        self.ends: dict[tuple[int, int], Written] = {}
        self.bonds: list[tuple[float, Stroke]] = []
        self.top: list[Item] = []
        self.positions = self._positions()
        self.symbols = {a: self._symbol(a) for a in self.flat}

    def _positions(self) -> dict[tuple[int, int], str]:
        """Axial, equatorial or isoclinal for each (ring atom, neighbour, hydrogens as negative numbers)."""
        table: dict[tuple[int, int], str] = {}
        for item in self.state.detail.facts.placed:
            key = int(item.site.ring_atom), int(item.site.neighbour)
            # A site axial to any ring is shown as axial.
            if table.get(key) != "axial":
                table[key] = item.position
        return table

    def _symbol(self, atom: int) -> tuple[str, ...]:
        """What is written at a ring atom; nothing at a plain carbon."""
        record = self.structure.atoms[atom]
        if record.number == 6 and not record.charge and not record.isotope:
            return ()
        charge = "+" if record.charge > 0 else "\N{MINUS SIGN}" if record.charge < 0 else ""
        return (record.element, charge) if charge else (record.element,)

    def point(self, atom: int) -> Point:
        """Where an atom stands on paper [px]."""
        return self.flat[atom][:2]

    def scene(self) -> Scene:
        """Everything in order, cropped."""
        self._ring_bonds()
        self._ring_symbols()
        self._groups()
        if self.wishes.numbers:
            self._numbers()
        marks = self._marks()
        items: list[Item] = [stroke for _, stroke in sorted(self.bonds, key=lambda pair: pair[0])]
        items += marks
        items += self.top
        left, top, right, bottom = bounds(items)
        shifted = tuple(moved(item, _MARGIN - left, _MARGIN - top) for item in items)
        return Scene(
            width=right - left + 2 * _MARGIN, height=bottom - top + 2 * _MARGIN, items=shifted, title=self._title()
        )

    def _title(self) -> str:
        shape = self.state.shapes[0] if len(set(self.state.shapes)) == 1 else "mixed rings"
        return f"State {self.state.id} ({shape}) of {self.structure.text}"

    # ---- rings ----

    def _ring_bonds(self) -> None:
        rings = [ring.atoms for ring in self.result.system.rings]
        rings += self.model.side_rings
        drawn: set[tuple[int, int]] = set()
        for ring in rings:
            middle = self._middle(ring)
            for i, b in enumerate(ring):
                a = ring[i - 1]
                if (min(a, b), max(a, b)) in drawn:
                    continue
                drawn.add((min(a, b), max(a, b)))
                self._bond(a, b, middle)

    def _middle(self, ring: tuple[int, ...]) -> Point:
        points = [self.point(a) for a in ring]
        return sum(p[0] for p in points) / len(points), sum(p[1] for p in points) / len(points)

    def _bond(self, a: int, b: int, middle: Point) -> None:
        """One ring bond, heavier where it is near; a double bond gets its second line inside."""
        start, end = self.point(a), self.point(b)
        depth = (self.flat[a][2] + self.flat[b][2]) / 2
        self.board.segments.append((start, end))
        width = 2.9 if min(self.flat[a][2], self.flat[b][2]) > 0.25 else 1.8
        start_cut, end_cut = self._cut(a, start, end), self._cut(b, end, start)
        self.bonds.append((depth, Stroke((start_cut, end_cut), "ink", width, (), True)))
        bond = self.structure.bond(a, b)
        if bond.order == 2:
            self.bonds.append((depth, Stroke(inside(start_cut, end_cut, middle), "ink", 1.8)))

    def _cut(self, atom: int, here: Point, there: Point) -> Point:
        """Start of a bond, short of a written atom."""
        if not self.symbols[atom]:
            return here
        dx, dy = there[0] - here[0], there[1] - here[1]
        length = math.hypot(dx, dy) or 1.0
        back = min(0.62 * SIZE, 0.4 * length)
        return here[0] + back * dx / length, here[1] + back * dy / length

    def _ring_symbols(self) -> None:
        for atom, pieces in self.symbols.items():
            if not pieces:
                continue
            x, y = self.point(atom)
            runs: tuple[Run, ...] = tuple((p, "sup" if p in ("+", "\N{MINUS SIGN}") else "") for p in pieces)
            label = Label(x, y + 0.36 * SIZE, runs, "ink", SIZE, "middle", False, "atom")
            if len(runs) > 1:
                label = replace(label, x=x - 0.36 * SIZE, anchor="start")
            self.board.boxes.append(label.box)
            self.top.append(label)

    # ---- groups ----

    def _groups(self) -> None:
        shown = self._shown_hydrogens()
        heavy = [arm for arm in self.model.arms if arm.neighbour >= 0]
        light = [arm for arm in self.model.arms if (arm.root, arm.neighbour) in shown]
        # Axial groups first: their bonds point at the crowded middle.
        heavy.sort(key=lambda arm: (self._position(arm) != "axial", arm.root, arm.neighbour))
        for arm in heavy:
            self._group(arm)
        for arm in light:
            self._hydrogen(arm)

    def _position(self, arm: Arm) -> str:
        return self.positions.get((arm.root, arm.neighbour), "equatorial")

    def _shown_hydrogens(self) -> set[tuple[int, int]]:
        """Sites whose hydrogen is drawn: at fusions and on nitrogen, and those that a marked contact names."""
        shown: set[tuple[int, int]] = set()
        system = self.result.system
        axial: dict[tuple[int, int], int] = {}
        for item in self.state.detail.facts.placed:
            if item.occupant != "hydrogen":
                continue
            root, neighbour = int(item.site.ring_atom), int(item.site.neighbour)
            if neighbour < 0 and item.position == "axial":
                axial[root, item.site.ring] = neighbour
            if neighbour < 0 and (
                self.wishes.hydrogens or self._ring_degree(root) > 2 or system.kinds[root] == "inverting"
            ):
                shown.add((root, neighbour))
        if self.wishes.clashes:
            for contact in self.state.detail.facts.of_kind("syn-axial X//H"):
                if max(contact.atoms[0], contact.atoms[-1]) in self.flat:
                    continue
                root = contact.atoms[3] if contact.atoms[-1] < 0 else contact.atoms[1]
                for (atom, _), neighbour in axial.items():
                    if atom == root:
                        shown.add((root, neighbour))
        for arm in self.model.arms:
            if arm.neighbour < 0 and self.structure.atoms[arm.root].number == 7 and system.kinds.get(arm.root) == "sp2":
                shown.add((arm.root, arm.neighbour))
        return shown

    def _ring_degree(self, atom: int) -> int:
        return sum(n in self.flat for n in self.structure.neighbours[atom])

    def _way(self, arm: Arm, reach: float) -> Point:
        x, y, _ = self.view.project(arm.direction)
        return reach * BOND * x, -reach * BOND * y

    def _group(self, arm: Arm) -> None:
        position = self._position(arm)
        bond = self.structure.bond(arm.root, arm.neighbour)
        role: Role = "ink"
        if (arm.root, arm.neighbour) in self.positions:
            role = "axial" if position == "axial" else "isoclinal" if position == "isoclinal" else "equatorial"
        reach = _AXIAL_REACH if position == "axial" else _REACH
        way = self._way(arm, reach)
        # A bond that points at the reader is still drawn long enough to be seen.
        length = math.hypot(*way) or 1.0
        if length < 0.45 * BOND:
            way = way[0] * 0.45 * BOND / length, way[1] * 0.45 * BOND / length
        written = write_group(
            self.board,
            self.point(arm.root),
            way,
            pieces_of(self.result, self.structure, arm.root, arm.neighbour),
            size=SIZE,
            role=role,
            bold=role == "axial",
            number=str(arm.neighbour + 1) if self.wishes.numbers else "",
        )
        self.ends[arm.root, arm.neighbour] = written
        self._arm_stroke(arm, written, role, double=bond.order == 2)
        self.top.append(written.label)

    def _arm_stroke(self, arm: Arm, written: Written, role: Role, *, double: bool = False) -> None:
        tip = self.view.project(arm.direction)[2]
        depth = self.flat[arm.root][2] + 0.3 * tip
        start = self._cut(arm.root, self.point(arm.root), written.tip)
        width = _WIDTHS.get(role, 1.7)
        dash = ISOCLINAL_DASH if role == "isoclinal" else ()
        if double:
            for side in (-1.0, 1.0):
                self.bonds.append((depth, Stroke(shifted(start, written.tip, 2.2 * side), role, 1.7)))
        else:
            self.bonds.append((depth, Stroke((start, written.tip), role, width, dash, True)))

    def _hydrogen(self, arm: Arm) -> None:
        written = write_group(
            self.board,
            self.point(arm.root),
            self._way(arm, _HYDROGEN_REACH),
            ("H",),
            size=_HYDROGEN_SIZE,
            role="hydrogen",
            bold=False,
            kind="hydrogen",
        )
        self.ends[arm.root, arm.neighbour] = written
        self._arm_stroke(arm, written, "hydrogen")
        self.top.append(written.label)

    # ---- numbers and marks ----

    def _numbers(self) -> None:
        done: set[int] = set()
        for ring in [*(r.atoms for r in self.result.system.rings), *self.model.side_rings]:
            middle = self._middle(ring)
            for atom in ring:
                if atom in done:
                    continue
                done.add(atom)
                x, y = self.point(atom)
                base = math.atan2(middle[1] - y, middle[0] - x)
                reach = 11.0 + (5.0 if self.symbols[atom] else 0.0)
                ways = tuple(
                    (reach * math.cos(base + turn), reach * math.sin(base + turn))
                    for turn in (0.0, 0.5, -0.5, 1.0, -1.0, 1.6, -1.6, 2.2, -2.2, 3.14)
                )
                self.top.append(write_number(self.board, (x, y), ways, str(atom + 1), _NUMBER_SIZE))

    def _marks(self) -> list[Item]:
        marks: list[Item] = []
        facts = self.state.detail.facts
        if self.wishes.clashes:
            for kind in _CLASHES:
                for contact in facts.of_kind(kind):
                    if kind == "syn-axial X//H" and max(contact.atoms[0], contact.atoms[-1]) in self.flat:
                        continue
                    ends = self._contact_ends(contact.atoms)
                    if ends:
                        marks += clash(*ends, strong=kind != "syn-axial X//H")
        if self.wishes.gauche:
            for contact in facts.of_kind("gauche"):
                first, last = (
                    self._spot(contact.atoms[1], contact.atoms[0]),
                    self._spot(contact.atoms[2], contact.atoms[3]),
                )
                if first and last and contact.atoms[0] not in self.flat and contact.atoms[3] not in self.flat:
                    marks += self._gauche(first, last)
        return marks

    def _contact_ends(self, atoms: tuple[int, ...]) -> tuple[Written | Point, Written | Point] | None:
        """Where the two partners of a syn-axial or peri contact stand."""
        first = self._end(atoms[1], atoms[0])
        last = self._end(atoms[-2], atoms[-1])
        return (first, last) if first is not None and last is not None else None

    def _end(self, root: int, partner: int) -> Written | Point | None:
        if partner >= 0:
            return self.ends.get((root, partner)) or (self.point(partner) if partner in self.flat else None)
        for n in (-1, -2):
            if (root, n) in self.ends and self.positions.get((root, n)) == "axial":
                return self.ends[root, n]
        return None

    def _spot(self, root: int, partner: int) -> Point | None:
        written = self.ends.get((root, partner))
        if written is not None:
            return written.middle
        return self.point(partner) if partner in self.flat else None

    def _gauche(self, first: Point, last: Point) -> list[Item]:
        """A dashed bow between two groups with a small g beside it."""
        a, b = shortened(first, last, 11.0)
        arc = bow(a, b, 0.14)
        middle = arc[len(arc) // 2]
        items: list[Item] = [Stroke(arc, "accent", 1.3, (5.0, 3.0))]
        for shift in (0.0, -9.0, 9.0, -18.0, 18.0, -27.0, 27.0):
            tried = Label(middle[0], middle[1] - 3.0 + shift, (("g", ""),), "accent", 11.0, "middle", False, "mark")
            if self.board.cost(tried.box) < 1000.0:
                self.board.boxes.append(tried.box)
                return [*items, tried]
        return items
