"""Configurations of a ring system: which are given, which are open, and whether an open one matters."""

from __future__ import annotations

from dataclasses import dataclass

from ringstrain.closing import Blocks, close_chairs, close_somehow
from ringstrain.errors import OutOfScope, StereoError
from ringstrain.geometry import Geometry, Site, neighbour_orders, with_choices
from ringstrain.ringgraph import RingSystem
from ringstrain.structure.records import Structure
from ringstrain.symmetry import Groups, automorphisms, same_configuration

#: More open centres than this are refused without looking whether they matter.
MAX_OPEN = 10


@dataclass(frozen=True, slots=True)
class Resolved:
    """A configuration that is settled, the chair states of each block, and remarks."""

    geometry: Geometry
    blocks: Blocks
    notes: tuple[str, ...]


def open_centres(
    structure: Structure, geometry: Geometry, candidates: tuple[int, ...], groups: Groups
) -> tuple[int, ...]:
    """Candidates whose two exocyclic sites differ, so that their configuration can matter."""
    system = geometry.system
    found = []
    for atom in candidates:
        number = system.rings_of[atom][0]
        place = system.rings[number].place(atom)
        first, second = geometry.sites[number][place]
        a, b = groups.get((atom, first.neighbour)), groups.get((atom, second.neighbour))
        if _both_hydrogen(structure, first, second):
            continue
        inside = first.neighbour in system.atom_set or second.neighbour in system.atom_set
        if inside or a is None or b is None or a.code != b.code:
            found.append(atom)
    return tuple(found)


def _both_hydrogen(structure: Structure, *sites: Site) -> bool:
    """True when nothing but hydrogen of any isotope, or lone pairs, stands on the sites."""
    return all(site.neighbour < 0 or structure.atoms[site.neighbour].is_hydrogen for site in sites)


def resolve(structure: Structure, system: RingSystem, groups: Groups) -> Resolved:
    """The configuration of a ring system, with open centres settled where that is possible.

    Parameters
    ----------
    structure
        The molecule.
    system
        The ring system.
    groups
        Group on each exocyclic site.

    Returns
    -------
    Resolved
        Geometry and chair states of each block; a block that closes in no chair has none.

    Raises
    ------
    StereoError
        If open centres give different compounds.
    OutOfScope
        If no choice of the open centres lets the rings close.
    """
    orders, candidates = neighbour_orders(structure, system)
    geometry = Geometry(structure=structure, system=system, orders=orders)
    free = open_centres(structure, geometry, candidates, groups)
    if not free:
        return Resolved(geometry, close_chairs(geometry), ())
    if len(free) > MAX_OPEN:
        raise stereo_error(structure, free)
    if len(free) == 1 and _is_lone_centre(geometry, free[0], groups):
        return Resolved(geometry, close_chairs(geometry), ())
    options = [option for option, _ in with_choices(geometry, free)]
    caged = _is_caged(geometry, free)
    chosen = [(option, blocks) for option in options if all(blocks := close_chairs(option))]
    if not chosen and caged:
        chosen = [(option, blocks) for option in options if all(blocks := close_somehow(option))]
    if not chosen:
        if caged:
            raise OutOfScope(
                "No combination of chairs closes this ring system.",
                "Give its configurations, or ask about a part of it.",
                atoms=system.atoms,
            )
        raise stereo_error(structure, free)
    maps = automorphisms(geometry, groups)
    first, blocks = chosen[0]
    if any(not same_configuration(first, other, groups, maps) for other, _ in chosen[1:]):
        raise stereo_error(structure, free)
    return Resolved(first, blocks, ())


def _is_lone_centre(geometry: Geometry, atom: int, groups: Groups) -> bool:
    """True when the only open centre of a single ring has no other centre to relate to."""
    system = geometry.system
    if len(system.rings) > 1 or system.companions:
        return False
    for other in system.atoms:
        if other == atom or other not in geometry.orders or system.kinds[other] == "inverting":
            continue
        first, second = geometry.sites[0][system.rings[0].place(other)]
        if _both_hydrogen(geometry.structure, first, second):
            continue
        a, b = groups.get((other, first.neighbour)), groups.get((other, second.neighbour))
        if (a is None) != (b is None) or (a is not None and b is not None and a.code != b.code):
            return False
    return True


def _is_caged(geometry: Geometry, free: tuple[int, ...]) -> bool:
    """True when every open centre is a bridgehead whose configuration the cage dictates."""
    system = geometry.system
    others = (*system.companions, *system.pinned)
    return all(len(system.rings_of[a]) + sum(a in ring for ring in others) > 1 for a in free)


def stereo_error(structure: Structure, atoms: tuple[int, ...]) -> StereoError:
    """The refusal of open centres that matter, with their place in the input."""
    numbers = ", ".join(str(a + 1) for a in atoms)
    many = len(atoms) > 1
    spans = [structure.spans[a] for a in atoms] if structure.spans else []
    error = StereoError(
        f"Atom{'s' if many else ''} {numbers} (counted from 1): configuration not given, and the answer depends on it.",
        f"Give {'these centres' if many else 'the centre'} (use @ or @@), "
        "or rank all isomers with `ringstrain isomers`.",
        atoms=atoms,
        span=spans[0] if spans else None,
        text=structure.text,
    )
    error.spans = tuple(spans)
    return error
