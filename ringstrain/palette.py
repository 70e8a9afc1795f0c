"""Groups by name, and how they are set on a scaffold."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from difflib import get_close_matches

from ringstrain.errors import UnknownGroup, UsageError
from ringstrain.geometry import Geometry, neighbour_orders
from ringstrain.placing import Scaffold, Slot
from ringstrain.ringgraph import RingSystem
from ringstrain.structure.graft import Branch, configure, graft
from ringstrain.structure.read import read, read_group
from ringstrain.structure.records import Structure
from ringstrain.substituents import describe_group
from ringstrain.tables.groups import Group
from ringstrain.tables.records import Tables


@dataclass(frozen=True, slots=True, kw_only=True)
class PaletteGroup:
    """A group that may be placed.

    Attributes
    ----------
    name
        As the user calls it.
    branch
        Its structure.
    group
        What the price tables know of it.
    """

    name: str
    branch: Branch
    group: Group


def find_group(name: str, tables: Tables) -> PaletteGroup:
    """The group behind a table key, an alias or a SMILES with a star (``*CC=O``).

    Raises
    ------
    UnknownGroup
        If no table knows the name.
    UsageError
        If the group is bound through a double bond.
    ParseError
        If the SMILES is no group.
    """
    text = name.strip()
    entry = None if "*" in text else tables.find_group(text)
    if entry is None and "*" not in text:
        close = tuple(get_close_matches(text, tables.group_names(), n=2, cutoff=0.6))
        raise UnknownGroup(text, close, span=(0, len(text)), text=text)
    structure, dummy = read_group(entry.smiles if entry else text)
    branch = Branch(structure, dummy)
    if not branch.is_single:
        raise UsageError(
            f"{text} is bound through a double or triple bond and takes both places of its ring atom.",
            "Give it as part of a scaffold: --ring '[CH2:1]1[CH2:2]CCCC1=O'.",
        )
    probe, heads = graft(read("C1CCCCC1"), [(0, branch)])
    group = describe_group(probe, heads[0], 0, frozenset(range(6)), tables)
    return PaletteGroup(name=text, branch=branch, group=group)


def geometry_of(structure: Structure, system: RingSystem) -> Geometry:
    """Geometry of a system whose configurations are all given."""
    return Geometry(structure=structure, system=system, orders=neighbour_orders(structure, system)[0])


def set_groups(scaffold: Scaffold, branches: Sequence[Branch | None]) -> tuple[Structure, dict[int, int]]:
    """The scaffold with a group on each slot that has one, configured, and the first atom of each group by slot."""
    wanted = [(number, branch) for number, branch in enumerate(branches) if branch is not None]
    structure, heads = graft(scaffold.structure, [(scaffold.slots[number].atom, branch) for number, branch in wanted])
    by_slot = {number: head for (number, _), head in zip(wanted, heads, strict=True)}
    touched = {scaffold.slots[number].atom for number in by_slot}
    return configure(structure, {atom: scaffold.configuration(atom, by_slot) for atom in touched}), by_slot


def locate(slot: Slot) -> str:
    """Locant and face of a slot: ``3b``; no face on a nitrogen or in a plane."""
    return f"{slot.locant}{'b' if slot.face > 0 else 'a' if slot.face < 0 else ''}"
