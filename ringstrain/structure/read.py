"""Text turned into a Structure: SMILES, a molfile block or the ring shorthand."""

from __future__ import annotations

import re
from dataclasses import replace
from functools import lru_cache
from typing import Any

from rdkit import Chem, rdBase

from ringstrain.errors import InputError, OutOfScope, ParseError
from ringstrain.structure.from_rdkit import structure_from_rdkit
from ringstrain.structure.records import AtomIndex, Structure
from ringstrain.structure.shorthand import is_shorthand, read_shorthand

#: Longest input [characters] and largest molecule [heavy atoms] that are worked on.
MAX_CHARACTERS = 100_000
MAX_ATOMS = 500
_ATOM_TOKEN = re.compile(r"\[[^\]]*\]|Br|Cl|[BCNOPSFI*]|[bcnops]")
#: What a SMILES needs to have any bond but single ones: a bond of its own kind or an aromatic atom.
_NOT_SINGLE = re.compile(r"[=#$:~<>bcnopst*]")
_IN_BRACKETS = re.compile(r"\[[^\]]*\]")
_BAD_CHARACTER = re.compile(r"[^A-Za-z0-9@+\-\[\]()=#$:.%/\\*~>{}|,^&;!<'\"_?]")


def read(text: str, *, ring: str = "cyclohexane") -> Structure:
    """Structure from text; files are never opened here.

    Parameters
    ----------
    text
        A SMILES (CXSMILES marks are noted), a molfile block, or a ring shorthand such as
        ``"1b-tBu 4a-Me"``.
    ring
        Parent ring of a shorthand.

    Returns
    -------
    Structure
        The molecule with every configuration as written.

    Raises
    ------
    InputError
        If the text is empty, over 100 kB, a reaction, has dummy atoms or two ring-bearing fragments.
    ParseError
        If it is no structure.
    UnknownGroup
        If a shorthand names a group that no table knows.
    OutOfScope
        If the molecule has over 500 heavy atoms.

    Examples
    --------
    >>> read("CC1CCCCC1").smiles
    'CC1CCCCC1'
    """
    if not isinstance(text, str):
        raise InputError("The structure must be text.", "Pass a SMILES string.")
    if len(text) > MAX_CHARACTERS:
        raise InputError(
            f"The input has {len(text)} characters; {MAX_CHARACTERS} is the limit.", "Give one molecule at a time."
        )
    if "\n" in text.strip() and ("V2000" in text or "V3000" in text):
        return read_molblock(text)
    stripped = text.strip()
    if not stripped:
        raise ParseError("The structure is empty.", "Give a SMILES, a file or a ring shorthand.", text=text)
    if is_shorthand(stripped):
        return _finish(read_shorthand(stripped, ring=ring))
    return _finish(_read_smiles(stripped))


def read_molblock(text: str, *, name: str = "") -> Structure:
    """Structure from a molfile block (V2000 or V3000); wedges or coordinates give the configurations.

    Raises
    ------
    ParseError
        If the block cannot be read.
    InputError, OutOfScope
        As for :func:`read`.
    """
    with rdBase.BlockLogs():
        try:
            mol = Chem.MolFromMolBlock(text, sanitize=False, removeHs=False, strictParsing=False)
        except Exception:  # RDKit raises a bare RuntimeError for a torn block
            mol = None
        if mol is None or mol.GetNumAtoms() == 0:
            raise ParseError("The molfile cannot be read.", "Check its counts line and atom block.")
        _sanitize(mol, text="")
        if mol.GetNumConformers() and mol.GetConformer().Is3D():
            Chem.AssignAtomChiralTagsFromStructure(mol)
        else:
            Chem.AssignChiralTypesFromBondDirs(mol)
        Chem.DetectBondStereochemistry(mol)
        Chem.SetBondStereoFromDirections(mol)
    title = name or text.split("\n", 1)[0].strip()
    return _finish(structure_from_rdkit(mol, text=title or "molfile", name=title))


def _read_smiles(text: str) -> Structure:
    """Structure from one SMILES, CXSMILES extension allowed."""
    core, *rest = text.split(maxsplit=1)
    extension = rest[0] if rest else ""
    name = "" if extension.startswith("|") else extension
    _refuse_odd(core, text)
    extended = extension.startswith("|")
    with rdBase.BlockLogs():
        mol = Chem.MolFromSmiles(text if extended else core, _parser(extended))
        if mol is None:
            raise _syntax_error(core, text)
        if mol.GetNumHeavyAtoms() > MAX_ATOMS:
            raise OutOfScope(
                f"The molecule has {mol.GetNumHeavyAtoms()} heavy atoms; {MAX_ATOMS} is the limit.",
                "Cut it down to the ring system and its neighbourhood.",
            )
        _sanitize(mol, text=text)
        if "/" in core or "\\" in core:
            Chem.SetBondStereoFromDirections(mol)
    tokens = list(_ATOM_TOKEN.finditer(core))
    told_apart = len(tokens) == mol.GetNumAtoms()
    return structure_from_rdkit(
        mol,
        text=text,
        name=name,
        spans=tuple([token.span() for token in tokens]) if told_apart else (),
        marked=["@" in token.group() for token in tokens] if told_apart and not extended else None,
        only_single=_NOT_SINGLE.search(core) is None,
        keep=not extended and ":" not in core,  # neither atom maps nor CXSMILES marks, which would be written again
    )


@lru_cache(maxsize=2)
def _parser(extended: bool) -> Any:
    """RDKit's parser settings: nothing sanitised, no hydrogen removed, CXSMILES when there is one."""
    parameters: Any = Chem.SmilesParserParams()
    parameters.sanitize = False
    parameters.removeHs = False
    parameters.allowCXSMILES = extended
    parameters.strictCXSMILES = False
    return parameters


def _refuse_odd(core: str, text: str) -> None:
    """Refuse reactions and characters no SMILES has."""
    if ">" in core and ">" in _IN_BRACKETS.sub("", core).replace("->", "").replace("<-", ""):
        raise InputError(
            "This is a reaction SMILES.", "Give one molecule: the starting material or the product.", text=text
        )
    wild = _blanked(core).find("~") if "~" in core else -1
    if wild >= 0:
        raise InputError(
            "The bond '~' stands for any bond.", "Write the bond that is there.", span=(wild, wild + 1), text=text
        )
    bad = _BAD_CHARACTER.search(core)
    if bad:
        raise ParseError(
            f"The character {bad.group()!r} cannot stand in a SMILES.",
            "Quote the SMILES and check it; a ring shorthand looks like '1b-tBu 4a-Me'.",
            span=bad.span(),
            text=text,
        )


def _blanked(core: str) -> str:
    """A SMILES with its bracket atoms blanked out, each character where it was."""
    return _IN_BRACKETS.sub(lambda found: "_" * len(found.group()), core)


def _syntax_error(core: str, text: str) -> ParseError:
    """The most helpful account of why RDKit gave up."""
    depth = 0
    opened: list[int] = []
    for place, character in enumerate(core):
        if character == "(":
            opened.append(place)
            depth += 1
        elif character == ")":
            depth -= 1
            if depth < 0:
                return ParseError(
                    "A closing parenthesis has no partner.",
                    "Add the opening one or drop it.",
                    span=(place, place + 1),
                    text=text,
                )
            opened.pop()
    if opened:
        place = opened[-1]
        return ParseError("A parenthesis is never closed.", "Close the branch.", span=(place, place + 1), text=text)
    if core.count("[") != core.count("]"):
        place = core.rfind("[")
        return ParseError("A square bracket is never closed.", "Close the atom.", span=(place, place + 1), text=text)
    odd = _open_ring_bond(core)
    if odd is not None:
        return ParseError(
            f"The ring bond {core[odd[0] : odd[1]]} is opened but never closed.",
            "Give each ring number twice.",
            span=odd,
            text=text,
        )
    token = re.compile(_ATOM_TOKEN.pattern + r"|[0-9%=#$:.\-/\\()~]")
    place = 0
    while place < len(core):
        found = token.match(core, place)
        if not found:
            return ParseError(
                f"{core[place]!r} is no atom or bond of a SMILES.",
                "Check the spelling; elements outside B C N O P S F Cl Br I need square brackets.",
                span=(place, place + 1),
                text=text,
            )
        place = found.end()
    return ParseError("This is not a valid SMILES.", "Check brackets, ring numbers and bonds.", text=text)


def _open_ring_bond(core: str) -> tuple[int, int] | None:
    """Where the first unpaired ring-closure number stands."""
    bare = _blanked(core)
    seen: dict[str, tuple[int, int]] = {}
    for found in re.finditer(r"%\d\d|%\(\d+\)|\d", bare):
        number = found.group().lstrip("%").strip("()").lstrip("0") or "0"
        if number in seen:
            del seen[number]
        else:
            seen[number] = found.span()
    return min(seen.values()) if seen else None


def _sanitize(mol: Any, *, text: str) -> None:
    """Sanitise in place; turn RDKit's complaint into ours."""
    try:
        Chem.SanitizeMol(mol)
    except Exception:  # RDKit's sanitisation errors share no public base class
        problems = Chem.DetectChemistryProblems(mol)
        first = problems[0] if problems else None
        kind = first.GetType() if first is not None else ""
        atoms: tuple[int, ...] = ()
        if kind == "AtomValenceException" and first is not None:
            atoms = (first.GetAtomIdx(),)
            symbol = mol.GetAtomWithIdx(atoms[0]).GetSymbol()
            problem = f"Atom {atoms[0] + 1} ({symbol}) has more bonds than {symbol} can carry."
        elif "Kekulize" in kind:
            problem = "An aromatic ring cannot be written with alternating double bonds."
        else:
            problem = "The structure is chemically impossible."
        spans = [m.span() for m in _ATOM_TOKEN.finditer(text.partition(" ")[0])]
        span = spans[atoms[0]] if atoms and len(spans) == mol.GetNumAtoms() else None
        next_step = "Check charges, hydrogens and bond orders."
        raise ParseError(problem, next_step, atoms=atoms, span=span, text=text or None) from None


def _finish(structure: Structure) -> Structure:
    """Refuse dummies and second ring fragments; set counter-ions aside."""
    dummies = tuple(i for i, atom in enumerate(structure.atoms) if atom.number == 0)
    if dummies:
        raise InputError(
            f"Atom {dummies[0] + 1} is a dummy or query atom.",
            "Replace it by a real atom or group.",
            atoms=dummies,
            span=structure.spans[dummies[0]] if structure.spans else None,
            text=structure.text,
        )
    if sum(atom.number > 1 for atom in structure.atoms) > MAX_ATOMS:
        raise OutOfScope(
            f"The molecule has over {MAX_ATOMS} heavy atoms.", "Cut it down to the ring system and its neighbourhood."
        )
    if structure.spans and "." not in structure.text:  # a SMILES in one piece
        return structure
    parts = _fragments(structure)
    if len(parts) == 1:
        return structure
    ringed = {atom for ring in structure.rings for atom in ring}
    bearing = [part for part in parts if ringed & part]
    keep = bearing if len(bearing) <= 1 else [part for part in bearing if not _is_counter_ion(structure, part)]
    if len(keep) > 1:
        raise InputError(
            f"The input holds {len(keep)} molecules with rings.",
            "Give one molecule at a time.",
            atoms=tuple(min(part) for part in keep),
        )
    chosen = keep[0] if keep else max(parts, key=len)
    left = len(parts) - 1
    note = f"{left} further fragment{'s' if left > 1 else ''} (counter-ion or solvent) set aside."
    return replace(structure, fragment=tuple(AtomIndex(i) for i in sorted(chosen)), notes=(*structure.notes, note))


def _fragments(structure: Structure) -> list[set[int]]:
    """Connected parts."""
    left = set(range(len(structure.atoms)))
    parts = []
    while left:
        stack = [left.pop()]
        part = set(stack)
        while stack:
            for n in structure.neighbours[stack.pop()]:
                if n not in part:
                    part.add(n)
                    stack.append(n)
        left -= part
        parts.append(part)
    return parts


def _is_counter_ion(structure: Structure, part: set[int]) -> bool:
    """True for a charged fragment whose rings are all aromatic, e.g. tosylate."""
    charge = sum(structure.atoms[i].charge for i in part)
    rings = [ring for ring in structure.rings if ring[0] in part]
    return charge != 0 and all(structure.atoms[a].aromatic for ring in rings for a in ring)


def read_group(smiles: str) -> tuple[Structure, int]:
    """Structure of a substituent SMILES that starts with a dummy, and the dummy's index.

    Raises
    ------
    ParseError
        If it is no substituent with exactly one dummy.
    """
    structure = _read_smiles(smiles.strip())
    dummies = [i for i, atom in enumerate(structure.atoms) if atom.number == 0]
    if len(dummies) != 1 or len(structure.neighbours[dummies[0]]) != 1:
        raise ParseError("A group needs one attachment point.", "Write it with a star: *C(C)C.", text=smiles)
    return structure, dummies[0]
