"""Which sites of a single ring meet in which shape, read off a survey of the fully substituted ring.

The kernel shares its geometry with the ledger in this way.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from ringstrain.contacts import survey
from ringstrain.palette import find_group, geometry_of, set_groups
from ringstrain.placing import make_scaffold
from ringstrain.ringgraph import find_ring_systems
from ringstrain.states import Shapes, shapes_of

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from ringstrain.tables import Tables

    Floats = NDArray[np.float64]

#: Chairs first, then twist-boats, in the order in which the ledger breaks ties.
SHAPES = 8
CHAIRS = 2


@dataclass(frozen=True, slots=True)
class Meeting:
    """Two sites that meet in a shape; a site is twice the place of its atom, plus one on the lower face.

    Attributes
    ----------
    shape
        Number of the shape.
    kind
        Kind of contact.
    first, second
        The sites; of a geminal pair the axial one first.
    """

    shape: int
    kind: str
    first: int
    second: int


@dataclass(frozen=True, slots=True)
class Relations:
    """What geometry says about a ring with groups on all twelve sites.

    Attributes
    ----------
    factors
        Share of the axial price each site pays in each shape, ``(shapes, 12)``: 1 axial, 1/3 isoclinal, 0.
    axial
        Whether each site is axial in each shape, ``(shapes, 12)``.
    meetings
        Pairs that are priced.
    torsions
        Endocyclic torsions of each shape [degree], ``(shapes, 6)``.
    """

    factors: Floats
    axial: NDArray[np.bool_]
    meetings: tuple[Meeting, ...]
    torsions: Floats


def find_relations(tables: Tables) -> Relations:
    """Relations of a saturated six-membered ring."""
    bare = make_scaffold("cyclohexane", tables)
    fluoro = find_group("fluoro", tables)
    structure, heads = set_groups(bare, tuple(fluoro.branch for _ in bare.slots))
    column_of = {heads[number]: slot.column for number, slot in enumerate(bare.slots)}
    system = find_ring_systems(structure)[0][0]
    geometry = geometry_of(structure, system)
    found = sorted(shapes_of(system.rings[0], ("twist-boat",)), key=lambda s: (s.shape, tuple(-t for t in s.torsions)))
    factors = np.zeros((SHAPES, 12))
    axial = np.zeros((SHAPES, 12), dtype=bool)
    meetings: list[Meeting] = []
    for number, shape in enumerate(found):
        facts = survey(Shapes(geometry, (shape,)))
        for placed in facts.placed:
            column = column_of[placed.site.neighbour]
            factors[number, column] = {"axial": 1.0, "isoclinal": 1 / 3, "equatorial": 0.0}[placed.position]
            axial[number, column] = placed.position == "axial"
        for contact in facts.contacts:
            first, second = column_of.get(contact.atoms[0]), column_of.get(contact.atoms[-1])
            if first is None or second is None:
                continue
            if contact.kind == "gauche":
                both = not axial[number, first] and not axial[number, second]
                meetings.append(Meeting(number, "gauche, both equatorial" if both else "gauche", first, second))
            elif contact.kind in ("eclipsed", "syn-axial X//Y"):
                meetings.append(Meeting(number, contact.kind, first, second))
            elif contact.kind == "geminal":
                first, second = (second, first) if axial[number, second] else (first, second)
                kind = "geminal" if axial[number, first] else "geminal, isoclinal"
                meetings.append(Meeting(number, kind, first, second))
        if shape.shape == "chair":
            opposite = [(a, b) for a in range(12) for b in range(a + 1, 12) if b // 2 - a // 2 == 3 and (a + b) % 2]
            meetings.extend(
                Meeting(number, "across", a, b) for a, b in opposite if axial[number, a] and axial[number, b]
            )
    return Relations(factors, axial, tuple(meetings), np.array([shape.torsions for shape in found]))
