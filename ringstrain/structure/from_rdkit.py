"""An RDKit molecule turned into a Structure; the only place where RDKit objects are taken apart."""

from __future__ import annotations

from typing import Any

from rdkit import Chem

from ringstrain.structure.records import IMPLICIT, Atom, AtomIndex, Bond, Configuration, Structure

_CLOCKWISE = Chem.ChiralType.CHI_TETRAHEDRAL_CW
_COUNTER = Chem.ChiralType.CHI_TETRAHEDRAL_CCW
_CIS = (Chem.BondStereo.STEREOCIS, Chem.BondStereo.STEREOZ)
_TRANS = (Chem.BondStereo.STEREOTRANS, Chem.BondStereo.STEREOE)
_ORDERS = {Chem.BondType.SINGLE: 1, Chem.BondType.DOUBLE: 2, Chem.BondType.TRIPLE: 3}
_GROUP_WORDS = {
    Chem.StereoGroupType.STEREO_OR: "one enantiomer or the other",
    Chem.StereoGroupType.STEREO_AND: "a mixture of both (racemic)",
}


def structure_from_rdkit(
    mol: Any, *, text: str, name: str = "", spans: tuple[tuple[int, int], ...] = (), notes: tuple[str, ...] = ()
) -> Structure:
    """The frozen record of a sanitised molecule whose chirality tags nobody has cleaned.

    Parameters
    ----------
    mol
        RDKit molecule: sanitised, rings perceived, stereochemistry neither assigned nor cleaned.
    text, name
        What it was read from.
    spans
        Characters of each RDKit atom in ``text``.
    notes
        Remarks so far.

    Returns
    -------
    Structure
        Atoms in input order, plain hydrogens folded in.
    """
    index: list[int] = []
    count = 0
    rdkit_atoms = list(mol.GetAtoms())
    folded = [
        a.GetAtomicNum() == 1 and a.GetIsotope() == 0 and a.GetDegree() == 1 and a.GetFormalCharge() == 0
        for a in rdkit_atoms
    ]
    for i, is_folded in enumerate(folded):
        if is_folded and rdkit_atoms[i].GetNeighbors()[0].GetAtomicNum() == 1:
            folded[i] = is_folded = False
        index.append(-1 if is_folded else count)
        count += not is_folded
    atoms: list[Atom] = []
    configurations: list[Configuration | None] = []
    for i, a in enumerate(rdkit_atoms):
        if folded[i]:
            continue
        atoms.append(
            Atom(
                a.GetAtomicNum(),
                a.GetSymbol(),
                a.GetFormalCharge(),
                a.GetIsotope(),
                a.GetTotalNumHs() + sum(1 for n in a.GetNeighbors() if folded[n.GetIdx()]),
                a.GetIsAromatic(),
                a.GetNumRadicalElectrons(),
            )
        )
        configurations.append(_configuration(a, index))
    bonds, table, adjacency = _bonds(mol, index, len(atoms))
    return Structure(
        text=text,
        name=name,
        atoms=tuple(atoms),
        bonds=bonds,
        neighbours=tuple(tuple(sorted(n)) for n in adjacency),
        configurations=tuple(configurations),
        rings=tuple(tuple(AtomIndex(index[i]) for i in ring) for ring in mol.GetRingInfo().AtomRings()),
        fragment=tuple(AtomIndex(i) for i in range(len(atoms))),
        spans=tuple(span for span, gone in zip(spans, folded, strict=True) if not gone) if spans else (),
        notes=notes + _enhanced(mol, index),
        _orders=table,
    )


def _bonds(
    mol: Any, index: list[int], size: int
) -> tuple[tuple[Bond, ...], dict[tuple[int, int], Bond], list[list[AtomIndex]]]:
    """Bonds in input order, the same by atom pair, and the neighbour lists."""
    bonds: list[Bond] = []
    table: dict[tuple[int, int], Bond] = {}
    adjacency: list[list[AtomIndex]] = [[] for _ in range(size)]
    kekulized = None
    for b in mol.GetBonds():
        i, j = index[b.GetBeginAtomIdx()], index[b.GetEndAtomIdx()]
        if i < 0 or j < 0:
            continue
        aromatic = b.GetIsAromatic()
        kind = b.GetBondType()
        if aromatic:
            if kekulized is None:
                kekulized = Chem.Mol(mol)
                Chem.Kekulize(kekulized)
            kind = kekulized.GetBondWithIdx(b.GetIdx()).GetBondType()
        stereo = b.GetStereo() if kind == Chem.BondType.DOUBLE else None
        word, ends = "", None
        if stereo is not None and (stereo in _CIS or stereo in _TRANS):
            pair = [index[k] for k in b.GetStereoAtoms()]
            if len(pair) == 2 and min(pair) >= 0:
                word, ends = ("cis" if stereo in _CIS else "trans"), (AtomIndex(pair[0]), AtomIndex(pair[1]))
        bond = Bond(AtomIndex(i), AtomIndex(j), _ORDERS.get(kind, 0), aromatic, word, ends)  # type: ignore[arg-type]
        bonds.append(bond)
        table[(i, j) if i < j else (j, i)] = bond
        adjacency[i].append(AtomIndex(j))
        adjacency[j].append(AtomIndex(i))
    return tuple(bonds), table, adjacency


def _configuration(atom: Any, index: list[int]) -> Configuration | None:
    """Configuration from the chirality tag: neighbours in bond order, the implicit one last."""
    tag = atom.GetChiralTag()
    if tag != _CLOCKWISE and tag != _COUNTER:
        return None
    here = atom.GetIdx()
    order = [index[b.GetOtherAtomIdx(here)] for b in atom.GetBonds()]
    if len(order) == 3:
        order.append(-1)
    if len(order) != 4 or order.count(-1) > 1:
        return None
    return Configuration(tuple(IMPLICIT if n < 0 else AtomIndex(n) for n in order), tag == _CLOCKWISE)


def _enhanced(mol: Any, index: list[int]) -> tuple[str, ...]:
    """One note for each relative or racemic mark."""
    notes = []
    for group in mol.GetStereoGroups():
        words = _GROUP_WORDS.get(group.GetGroupType())
        members = [str(index[a.GetIdx()] + 1) for a in group.GetAtoms() if index[a.GetIdx()] >= 0]
        if words and members:
            plural = "s" if len(members) > 1 else ""
            notes.append(f"Atom{plural} {', '.join(members)} marked as {words}; analysed as drawn.")
    return tuple(notes)
