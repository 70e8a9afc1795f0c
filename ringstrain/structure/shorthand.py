"""The ring shorthand: ``"1b-tBu 4a-Me"`` is cis or trans at sight and needs no SMILES.

Each entry is a position, a face (a or alpha = down, b or beta = up) and a group by table key or alias.  A ring
nitrogen inverts, so that its group needs no face (``1-Me`` in piperidine).  The ring is seen from above with its
numbers running clockwise.  Ring atoms come first, so that atom numbers are positions.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from difflib import get_close_matches
from typing import Any

from rdkit import Chem

from ringstrain.errors import ParseError, UnknownGroup, UsageError
from ringstrain.structure.from_rdkit import structure_from_rdkit
from ringstrain.structure.records import Structure, permutation_sign

#: Parent rings by name: element of positions 1 to 6.
PARENT_RINGS: dict[str, tuple[str, ...]] = {
    "cyclohexane": ("C", "C", "C", "C", "C", "C"),
    "oxane": ("O", "C", "C", "C", "C", "C"),
    "thiane": ("S", "C", "C", "C", "C", "C"),
    "piperidine": ("N", "C", "C", "C", "C", "C"),
    "silacyclohexane": ("Si", "C", "C", "C", "C", "C"),
    "1,3-dioxane": ("O", "C", "O", "C", "C", "C"),
    "1,4-dioxane": ("O", "C", "C", "O", "C", "C"),
    "1,3-dithiane": ("S", "C", "S", "C", "C", "C"),
    "1,3-oxathiane": ("O", "C", "S", "C", "C", "C"),
    "morpholine": ("O", "C", "C", "N", "C", "C"),
    "piperazine": ("N", "C", "C", "N", "C", "C"),
}
_ENTRY = re.compile(r"(?P<position>\d+)(?P<face>alpha|beta|a|b|α|β)?(?P<dash>[-‐−])?(?P<group>\S*)")
_SITES = {"C": 2, "Si": 2, "N": 1, "O": 0, "S": 0}


@dataclass(frozen=True, slots=True)
class _Entry:
    """One group; ``up`` says nothing on an inverting nitrogen."""

    position: int
    up: bool
    smiles: str
    span: tuple[int, int]


def is_shorthand(text: str) -> bool:
    """True when the text starts like a shorthand; no SMILES starts with a digit."""
    return text[:1].isdigit()


def is_remark(text: str) -> bool:
    """True for a line of a list that is a comment; neither a SMILES nor a shorthand starts with a hash."""
    return text.lstrip().startswith("#")


def read_shorthand(text: str, *, ring: str = "cyclohexane") -> Structure:
    """Structure from a ring shorthand.

    Parameters
    ----------
    text
        Entries separated by blanks, commas or semicolons.
    ring
        Parent ring, a key of :data:`PARENT_RINGS`.

    Returns
    -------
    Structure
        Ring atoms 0 to 5 are positions 1 to 6.

    Raises
    ------
    UsageError
        If the ring is unknown.
    ParseError
        If an entry is broken, out of range or on an occupied site.
    UnknownGroup
        If no table knows the group.
    """
    try:
        elements = PARENT_RINGS[ring]
    except KeyError:
        raise UsageError(f"No ring is called {ring!r}.", f"Choose one of {', '.join(PARENT_RINGS)}.") from None
    entries = [_entry(found, text, elements) for found in re.finditer(r"[^\s,;]+", text)]
    faces: dict[tuple[int, bool], _Entry] = {}
    for entry in entries:
        single = _SITES[elements[entry.position - 1]] == 1
        if (entry.position, entry.up) in faces or (single and (entry.position, not entry.up) in faces):
            raise ParseError(
                f"Position {entry.position} carries two groups on one site.",
                f"Put the second on {'' if single else 'the other face (a or b) or '}another position.",
                span=entry.span,
                text=text,
            )
        faces[(entry.position, entry.up)] = entry
    return _build(text, elements, entries)


def _entry(found: re.Match[str], text: str, elements: tuple[str, ...]) -> _Entry:
    """One entry, checked."""
    span = found.span()
    parsed = _ENTRY.fullmatch(found.group())
    position = int(parsed["position"]) if parsed else 0
    inverts = 1 <= position <= 6 and _SITES[elements[position - 1]] == 1
    if not parsed or not (parsed["face"] or inverts) or not parsed["dash"] or not parsed["group"]:
        raise ParseError(
            f"{found.group()!r} is no entry of a ring shorthand.",
            f"Write position, face a or b{' (a nitrogen needs none)' if 'N' in elements else ''}, a dash and a group: "
            "1b-tBu 4a-Me.",
            span=span,
            text=text,
        )
    if not 1 <= position <= 6:
        raise ParseError(f"Position {position} is not on a six-membered ring.", "Use 1 to 6.", span=span, text=text)
    if _SITES[elements[position - 1]] == 0:
        raise ParseError(
            f"Position {position} is {elements[position - 1]} and carries no group.",
            "Choose a carbon position.",
            span=span,
            text=text,
        )
    start = span[0] + parsed.start("group")
    return _Entry(position, parsed["face"] in ("b", "beta", "β"), _group_smiles(parsed["group"], start, text), span)


def _group_smiles(name: str, start: int, text: str) -> str:
    """SMILES of a group by key or alias."""
    from ringstrain.tables import load_tables

    tables = load_tables()
    entry = tables.find_group(name)
    if entry is None:
        close = tuple(get_close_matches(name, tables.group_names(), n=2, cutoff=0.6))
        raise UnknownGroup(name, close, span=(start, start + len(name)), text=text)
    return entry.smiles


def _build(text: str, elements: tuple[str, ...], entries: list[_Entry]) -> Structure:
    """The molecule, with a chirality tag on every ring carbon that needs one."""
    mol = Chem.RWMol()
    for element in elements:
        mol.AddAtom(Chem.Atom(element))
    for i in range(6):
        mol.AddBond(i, (i + 1) % 6, Chem.BondType.SINGLE)
    heads: dict[tuple[int, bool], int] = {}
    for entry in entries:
        heads[(entry.position - 1, entry.up)] = _attach(mol, entry.position - 1, entry.smiles)
    Chem.SanitizeMol(mol)
    for i in range(6):
        up, down = heads.get((i, True)), heads.get((i, False))
        if elements[i] in ("C", "Si") and (up is not None or down is not None):
            _set_tag(mol, i, up, down)
    return structure_from_rdkit(mol.GetMol(), text=text)


def _attach(mol: Any, ring_atom: int, smiles: str) -> int:
    """Graft a group onto a ring atom; its first atom."""
    group = Chem.MolFromSmiles(smiles)
    offset = {}
    dummy = next(a for a in group.GetAtoms() if a.GetAtomicNum() == 0)
    first = dummy.GetNeighbors()[0].GetIdx()
    order = [first] + [a.GetIdx() for a in group.GetAtoms() if a.GetIdx() not in (first, dummy.GetIdx())]
    for index in order:
        atom = Chem.Atom(group.GetAtomWithIdx(index))
        if index == first and not atom.GetNoImplicit():
            atom.SetNumExplicitHs(0)
        offset[index] = mol.AddAtom(atom)
    for bond in group.GetBonds():
        begin, end = bond.GetBeginAtomIdx(), bond.GetEndAtomIdx()
        if dummy.GetIdx() not in (begin, end):
            mol.AddBond(offset[begin], offset[end], bond.GetBondType())
    kind = mol.GetAtomWithIdx(ring_atom)
    kind.SetNoImplicit(False)
    mol.AddBond(ring_atom, offset[first], Chem.BondType.SINGLE)
    return int(offset[first])


def _set_tag(mol: Any, i: int, up: int | None, down: int | None) -> None:
    """Tag a ring atom: seen from the upper group, previous, next and lower group run counterclockwise."""
    previous, following = (i - 1) % 6, (i + 1) % 6
    above, below = (-1 if up is None else up), (-1 if down is None else down)
    order = [b.GetOtherAtomIdx(i) for b in mol.GetAtomWithIdx(i).GetBonds()]
    if len(order) == 3:
        order.append(-1)
    sign = -permutation_sign((above, previous, following, below), tuple(order))
    kind = Chem.ChiralType.CHI_TETRAHEDRAL_CW if sign > 0 else Chem.ChiralType.CHI_TETRAHEDRAL_CCW
    mol.GetAtomWithIdx(i).SetChiralTag(kind)
