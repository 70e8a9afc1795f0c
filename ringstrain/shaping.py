"""Which states of a settled configuration are offered: chairs, and the boats that compete with them.

Twist-boats are offered for a ring whose own axial groups cost over 4 kcal/mol in some chair, and for rings that no
chair closes; boats only where neither closes (bridged rings).
"""

from __future__ import annotations

from ringstrain.billing import GroupMap, Parties, make_ledger, parties_of, ring_strain
from ringstrain.closing import Blocks, close_chairs, close_somehow, off_chair
from ringstrain.contacts import Survey, survey
from ringstrain.errors import OutOfScope
from ringstrain.geometry import Geometry, with_choices
from ringstrain.ledger import Ledger
from ringstrain.pyranose import Sugar, find_sugar, sugar_ledger
from ringstrain.states import MAX_STATES, Shapes, combine_blocks
from ringstrain.stereo import Resolved
from ringstrain.tables.prices import PriceBook

Priced = tuple[Shapes, Survey, Ledger]
#: A ring whose axial groups cost more than this in a chair may twist instead [kcal/mol].
STRAINED = 4.0


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
    parties = parties_of(geometry, groups, book)
    swinging = tuple(a for a in system.atoms if system.kinds[a] == "inverting")
    options: list[tuple[Geometry, tuple[int, ...], Blocks]] = []
    for option, inverted in with_choices(geometry, swinging):
        blocks = resolved.blocks if not inverted else close_chairs(option)
        if not all(blocks):
            continue
        options.append((option, inverted, blocks))
    if not options:
        options = [
            (option, inverted, blocks)
            for option, inverted in with_choices(geometry, swinging)
            if all(blocks := close_somehow(option))
        ]
    if not options:
        raise OutOfScope(
            "No combination of chairs, twist-boats and boats closes this ring system.",
            "Check its configurations, or ask about a part of the molecule.",
            atoms=system.atoms,
        )
    _refuse_too_many(options)
    sugar = find_sugar(geometry, parties) if book.conditions.medium == "protic" else None
    if sugar is not None:
        return _price_sugar(options, parties, sugar)
    chairs = [_price(state, parties) for option, i, blocks in options for state in combine_blocks(option, blocks, i)]
    chairs = [item for item in chairs if not _is_blocked(item[1], geometry)] or chairs
    strained = frozenset(
        number
        for _, facts, ledger in chairs
        for number, total in ring_strain(facts, ledger, geometry).items()
        if total > STRAINED and system.rings[number].kind == "chair"
    )
    if _is_diketone(geometry):
        strained |= frozenset(range(len(system.rings)))
    return _with_twists(chairs, options, strained, parties)


def _price_sugar(
    options: list[tuple[Geometry, tuple[int, ...], Blocks]], parties: Parties, sugar: Sugar
) -> list[Priced]:
    """Chairs of a pyranose or cyclitol in water, by the closed set."""
    priced = []
    for option, inverted, blocks in options:
        for state in combine_blocks(option, blocks, inverted):
            facts = survey(state)
            priced.append((state, facts, sugar_ledger(state, facts, parties, sugar)))
    return priced


def _refuse_too_many(options: list[tuple[Geometry, tuple[int, ...], Blocks]]) -> None:
    """Refuse more sides of nitrogens times chairs than anybody would read."""
    count = len(options) * _count(options[0][2])
    if count > MAX_STATES:
        raise OutOfScope(
            f"The ring system has {count} states; {MAX_STATES} is the limit.",
            "Ask about a part of the molecule.",
            atoms=options[0][0].system.atoms,
        )


def _count(blocks: Blocks) -> int:
    total = 1
    for block in blocks:
        total *= len(block)
    return total


def _with_twists(
    chairs: list[Priced],
    options: list[tuple[Geometry, tuple[int, ...], Blocks]],
    strained: frozenset[int],
    parties: Parties,
) -> list[Priced]:
    """The chairs with the twist-boats of strained rings beside them, as long as that stays within 64 states."""
    if not strained:
        return chairs
    twists: list[Shapes] = []
    for option, inverted, blocks in options:
        for index, block in enumerate(option.system.blocks):
            for number in block:
                if number not in strained:
                    continue
                twisted = off_chair(option, block, (number,), ("twist-boat",))
                if not twisted:
                    continue
                mixed = [list(twisted if i == index else other) for i, other in enumerate(blocks)]
                if len(chairs) + len(twists) + _count(tuple(map(tuple, mixed))) > MAX_STATES:
                    return chairs
                twists.extend(combine_blocks(option, mixed, inverted))
    if not twists:
        return chairs
    twisting = frozenset(
        number for state in twists for number, ring in enumerate(state.rings) if ring.shape == "twist-boat"
    )
    if any(line.row.startswith("avalues/tert-butyl") for _, _, ledger in chairs for line in ledger.lines):
        chairs = [(state, facts, make_ledger(state, facts, parties, twisting)) for state, facts, _ in chairs]
    return chairs + [_price(state, parties) for state in twists]


def _price(state: Shapes, parties: Parties) -> Priced:
    facts = survey(state)
    return state, facts, make_ledger(state, facts, parties)


def _is_blocked(facts: Survey, geometry: Geometry) -> bool:
    """True when a group points into the cage of a bicyclo[3.3.1] skeleton."""
    ends = {atom for contact in facts.contacts if contact.kind == "transannular" for atom in contact.atoms}
    return any(p.site.ring_atom in ends and p.position == "axial" and p.occupant == "atom" for p in facts.placed)


def _is_diketone(geometry: Geometry) -> bool:
    """True for a lone 1,4-dione ring, whose twist-boats are states too."""
    system = geometry.system
    if len(system.rings) != 1 or system.rings[0].kind != "chair":
        return False
    flat = [i for i, a in enumerate(system.rings[0].atoms) if system.kinds[a] == "sp2"]
    return len(flat) == 2 and flat[1] - flat[0] == 3
