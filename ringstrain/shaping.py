"""Which states of a settled configuration are offered: the chairs, and later what competes with them."""

from __future__ import annotations

from ringstrain.contacts import Survey, survey
from ringstrain.errors import OutOfScope
from ringstrain.geometry import Geometry, with_choices
from ringstrain.ledger import GroupMap, Ledger, make_ledger
from ringstrain.states import Shapes, close_block, combine_blocks
from ringstrain.stereo import Resolved
from ringstrain.tables.prices import PriceBook

Priced = tuple[Shapes, Survey, Ledger]


def find_states(resolved: Resolved, groups: GroupMap, book: PriceBook) -> list[Priced]:
    """Every state of a ring system, surveyed and priced.

    Parameters
    ----------
    resolved
        Configuration and chair states of each block.
    groups
        Group on each exocyclic site.
    book
        Prices.

    Returns
    -------
    list
        Shapes, survey and ledger of each state.

    Raises
    ------
    OutOfScope
        If no state closes or there are over 64.
    """
    geometry = resolved.geometry
    system = geometry.system
    swinging = tuple(a for a in system.atoms if system.kinds[a] == "inverting")
    priced: list[Priced] = []
    for option, inverted in with_choices(geometry, swinging):
        blocks = resolved.blocks if not inverted else tuple(tuple(close_block(option, b)) for b in system.blocks)
        if not all(blocks):
            continue
        for shapes in combine_blocks(option, [list(block) for block in blocks]):
            state = Shapes(option, shapes.rings, inverted)
            priced.append(_price(option, state, groups, book))
    if not priced:
        raise OutOfScope(
            "No combination of chairs closes this ring system; its rings would have to be boats.",
            "Ask about a part of the molecule.",
            atoms=system.atoms,
        )
    return priced


def _price(geometry: Geometry, state: Shapes, groups: GroupMap, book: PriceBook) -> Priced:
    facts = survey(state)
    return state, facts, make_ledger(geometry, facts, groups, book)
