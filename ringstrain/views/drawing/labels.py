"""Groups written as on paper: OH, CH3, tBu, and the same the other way round for the left side (HO, H3C)."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

from ringstrain.views.drawing.scene import Run

if TYPE_CHECKING:
    from ringstrain.analysis import SystemResult
    from ringstrain.structure.records import Structure

#: Usual abbreviations of groups too long to write out, as pieces that keep together when the label is turned.
_SHORT: dict[str, tuple[str, ...]] = {
    "deuterio": ("D",),
    "tritio": ("T",),
    "ethyl": ("Et",),
    "propyl": ("nPr",),
    "butyl": ("nBu",),
    "isopropyl": ("iPr",),
    "2-methylpropyl": ("iBu",),
    "butan-2-yl": ("sBu",),
    "tert-butyl": ("tBu",),
    "neopentyl": ("C", "H2", "tBu"),
    "cyclohexyl": ("Cy",),
    "cyclopentyl": ("C5", "H9"),
    "cyclopropyl": ("C3", "H5"),
    "phenyl": ("Ph",),
    "benzyl": ("Bn",),
    "4-methylphenyl": ("pTol",),
    "4-methoxyphenyl": ("PMP",),
    "cyano": ("C", "N"),
    "isocyano": ("N", "C"),
    "acetyl": ("Ac",),
    "formyl": ("C", "H", "O"),
    "carboxy": ("C", "O2", "H"),
    "carboxylato": ("C", "O2", "\N{MINUS SIGN}"),
    "methoxycarbonyl": ("C", "O2", "Me"),
    "ethoxycarbonyl": ("C", "O2", "Et"),
    "isopropoxycarbonyl": ("C", "O2", "iPr"),
    "tert-butoxycarbonyl": ("C", "O2", "tBu"),
    "chlorocarbonyl": ("C", "O", "Cl"),
    "carbamoyl": ("C", "O", "N", "H2"),
    "methoxy": ("O", "Me"),
    "ethoxy": ("O", "Et"),
    "tert-butoxy": ("O", "tBu"),
    "phenoxy": ("O", "Ph"),
    "acetoxy": ("O", "Ac"),
    "trifluoroacetoxy": ("O", "C", "O", "C", "F3"),
    "tosyloxy": ("O", "Ts"),
    "mesyloxy": ("O", "Ms"),
    "trimethylsilyloxy": ("O", "TMS"),
    "triisopropylsilyloxy": ("O", "TIPS"),
    "tert-butyldimethylsilyloxy": ("O", "TBS"),
    "tert-butyldiphenylsilyloxy": ("O", "TBDPS"),
    "nitro": ("N", "O2"),
    "azido": ("N3",),
    "amino": ("N", "H2"),
    "ammonio": ("N", "H3", "+"),
    "dimethylamino": ("N", "Me2"),
    "methylamino": ("N", "H", "Me"),
    "trimethylammonio": ("N", "Me3", "+"),
    "benzamido": ("N", "H", "Bz"),
    "acetamido": ("N", "H", "Ac"),
    "methylsulfanyl": ("S", "Me"),
    "phenylsulfanyl": ("S", "Ph"),
    "methanesulfonyl": ("S", "O2", "Me"),
    "benzenesulfonyl": ("S", "O2", "Ph"),
    "methanesulfinyl": ("S", "O", "Me"),
    "benzenesulfinyl": ("S", "O", "Ph"),
    "phenylselanyl": ("Se", "Ph"),
    "trimethylsilyl": ("TMS",),
    "trimethylgermyl": ("Ge", "Me3"),
    "trimethylstannyl": ("Sn", "Me3"),
    "hydroxymethyl": ("C", "H2", "O", "H"),
    "methoxymethyl": ("C", "H2", "O", "Me"),
    "pinacolboryl": ("Bpin",),
    "ethenyl": ("C", "H", "C", "H2"),
}
_SPLIT = re.compile(r"([A-Z][a-z]?\d*|[+\N{MINUS SIGN}])")
_DIGITS = re.compile(r"(\d+)")


def pieces_of(result: SystemResult, structure: Structure, root: int, first: int) -> tuple[str, ...]:
    """The pieces of the label of the group that hangs at ``root`` through ``first``."""
    group = result.groups.get((root, first))
    if group is not None and group.key in _SHORT:
        return _SHORT[group.key]
    return written_out(structure, root, first)


def written_out(structure: Structure, root: int, first: int) -> tuple[str, ...]:
    """A group as a formula: its first atom with hydrogens, then what it carries; long ones as a sum formula."""
    branch, ring = _branch(structure, root, first)
    head = _atom_pieces(structure, first)
    if len(branch) == 1:
        return head
    if _is_phenyl(structure, branch):
        return ("Ph",)
    rest = [n for n in branch if n != first]
    outer = [int(n) for n in structure.neighbours[first] if n != root]
    names = ["".join(_atom_pieces(structure, n)) for n in rest]
    if not ring and len(rest) == len(outer) > 1 and len(set(names)) == 1 and len(_atom_pieces(structure, rest[0])) == 1:
        return (*head, f"{names[0]}{len(rest)}")
    if not ring and len(rest) <= 3 and _is_chain(structure, first, rest):
        return (*head, *(piece for n in rest for piece in _atom_pieces(structure, n)))
    oxo = [n for n in outer if structure.atoms[n].number == 8 and structure.bond(first, n).order == 2]
    heads = [n for n in outer if n not in oxo]
    if structure.atoms[first].number in (6, 7, 8, 16) and len(heads) == 1 and len(oxo) <= 2:
        tail = written_out(structure, first, heads[0])
        if len(tail) < 4 and sum(map(len, tail)) <= 4:
            oxygens = ("O",) if len(oxo) == 1 else (f"O{len(oxo)}",) if oxo else ()
            return (*head, *oxygens, *tail)
    return _sum_formula(structure, branch)


def _is_phenyl(structure: Structure, branch: list[int]) -> bool:
    """True for six aromatic carbons and nothing else."""
    return len(branch) == 6 and all(structure.atoms[n].aromatic and structure.atoms[n].number == 6 for n in branch)


def _is_chain(structure: Structure, first: int, rest: list[int]) -> bool:
    """True when the atoms follow each other in a row."""
    last = first
    for n in rest:
        if n not in structure.neighbours[last]:
            return False
        last = n
    return True


def _branch(structure: Structure, root: int, first: int) -> tuple[list[int], bool]:
    """Atoms of a branch in the order they are met, and whether it holds a ring."""
    seen, queue, ring = [first], [first], False
    known = {root, first}
    for atom in queue:
        for n in structure.neighbours[atom]:
            if n not in known:
                known.add(int(n))
                seen.append(int(n))
                queue.append(int(n))
    for cycle in structure.rings:
        ring = ring or bool(known.intersection(cycle) - {root})
    return seen, ring


def _atom_pieces(structure: Structure, index: int) -> tuple[str, ...]:
    """Symbol, hydrogens and charge of one atom."""
    atom = structure.atoms[index]
    if atom.number == 1:
        return ({0: "H", 2: "D", 3: "T"}.get(atom.isotope, "H"),)
    pieces = [atom.element]
    if atom.hydrogens:
        pieces.append("H" if atom.hydrogens == 1 else f"H{atom.hydrogens}")
    if atom.charge:
        pieces.append("+" if atom.charge > 0 else "\N{MINUS SIGN}")
    return tuple(pieces)


def _sum_formula(structure: Structure, branch: list[int]) -> tuple[str, ...]:
    """Carbon, hydrogen, then the rest by symbol."""
    counts: dict[str, int] = {}
    for n in branch:
        atom = structure.atoms[n]
        counts[atom.element] = counts.get(atom.element, 0) + 1
        if atom.hydrogens:
            counts["H"] = counts.get("H", 0) + atom.hydrogens
    order = [e for e in ("C", "H") if e in counts] + sorted(e for e in counts if e not in ("C", "H"))
    return ("".join(e + (str(counts[e]) if counts[e] > 1 else "") for e in order),)


def runs_of(pieces: tuple[str, ...], *, turned: bool = False) -> tuple[Run, ...]:
    """Pieces as text with its subscripts.

    Parameters
    ----------
    pieces
        From :func:`pieces_of`.
    turned
        True for the order that reads from the bond to the left.
    """
    charged = pieces and pieces[-1] in ("+", "\N{MINUS SIGN}")
    order = pieces
    if turned:
        order = (*pieces[-2::-1], pieces[-1]) if charged else pieces[::-1]
    runs: list[Run] = []
    for piece in order:
        if piece in ("+", "\N{MINUS SIGN}"):
            runs.append((piece, "sup"))
            continue
        for part in _DIGITS.split(piece):
            if part:
                runs.append((part, "sub" if part.isdigit() and runs else ""))
    return tuple(_merged(runs))


def _merged(runs: list[Run]) -> list[Run]:
    """Neighbouring runs of one script joined, so that the text can be selected and searched as a whole."""
    merged: list[Run] = []
    for text, script in runs:
        if merged and merged[-1][1] == script:
            merged[-1] = (merged[-1][0] + text, script)
        else:
            merged.append((text, script))
    return merged
