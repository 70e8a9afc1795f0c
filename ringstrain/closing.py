"""Closing a ring system: all chairs where they fit, else as few rings off the chair as possible."""

from __future__ import annotations

from collections.abc import Iterable
from itertools import combinations

from ringstrain.geometry import Geometry
from ringstrain.states import RingShape, Shape, close_block

Blocks = tuple[tuple[dict[int, RingShape], ...], ...]
#: How many rings of a block may leave the chair at once.
MOST_BOATS = 3


def close_chairs(geometry: Geometry) -> Blocks:
    """Chair states of each block."""
    return tuple(tuple(close_block(geometry, block)) for block in geometry.system.blocks)


def close_somehow(geometry: Geometry) -> Blocks:
    """States of each block with as few rings off the chair as possible: twist-boats first, then boats."""
    return tuple(tuple(_close_block_somehow(geometry, block)) for block in geometry.system.blocks)


_FUSED: tuple[tuple[Shape, ...], ...] = ((), ("twist-boat",), ("boat",), ("twist-boat", "boat"))
_BRIDGED: tuple[tuple[Shape, ...], ...] = ((), ("boat",), ("twist-boat",), ("twist-boat", "boat"))


def _is_bridged(geometry: Geometry, block: tuple[int, ...]) -> bool:
    """True when two rings of a block share more than a bond, or a companion ring spans one."""
    sets = [frozenset(geometry.system.rings[number].atoms) for number in block]
    others = [*sets, *(frozenset(ring) for ring in geometry.system.companions)]
    return any(len(first & second) > 2 for i, first in enumerate(others) for second in others[:i])


def _close_block_somehow(geometry: Geometry, block: tuple[int, ...]) -> list[dict[int, RingShape]]:
    orders = _BRIDGED if _is_bridged(geometry, block) else _FUSED
    for shapes in orders:
        if not shapes:
            found = close_block(geometry, block)
            if found:
                return found
            continue
        for number in range(1, min(MOST_BOATS, len(block)) + 1):
            found = []
            for chosen in combinations(block, number):
                found.extend(off_chair(geometry, block, chosen, shapes))
            if found:
                return found
    return []


def off_chair(
    geometry: Geometry, block: tuple[int, ...], chosen: Iterable[int], shapes: tuple[Shape, ...]
) -> list[dict[int, RingShape]]:
    """Closings of a block in which just the chosen rings are off the chair."""
    wanted = set(chosen)
    return [
        state
        for state in close_block(geometry, block, dict.fromkeys(wanted, shapes))
        if all((state[number].shape in shapes) == (number in wanted) for number in block)
    ]
