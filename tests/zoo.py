"""Structures to embed: random cyclohexanes, and skeletons whose open centres are filled in at random."""

from __future__ import annotations

from collections.abc import Iterator
from random import Random
from typing import Any

from rdkit import Chem
from rdkit.Chem.EnumerateStereoisomers import EnumerateStereoisomers, StereoEnumerationOptions

GROUPS = (
    *("C", "CC", "C(C)C", "C(C)(C)C", "O", "OC", "F", "Cl", "Br"),
    *("C#N", "C(F)(F)F", "SC", "C=C", "[N+](=O)[O-]", "c1ccccc1"),
)
#: Name, SMILES without marks, how many random stereoisomers to take.
SKELETONS = (
    ("1-methyldecalin", "CC1CCCC2CCCCC12", 3),
    ("2-methyldecalin", "CC1CCC2CCCCC2C1", 3),
    ("9-methyldecalin", "CC12CCCCC1CCCC2", 2),
    ("9,10-dimethyldecalin", "CC12CCCCC1(C)CCCC2", 2),
    ("1,8-dimethyldecalin", "CC1CCCC2CCCC(C)C12", 4),
    ("1,3-dimethyldecalin", "CC1CC(C)C2CCCCC2C1", 2),
    ("2-chloro-9-methyldecalin", "CC12CCCCC1CCC(Cl)C2", 2),
    ("1,1,9-trimethyldecalin", "CC1(C)CCCC2CCCCC12C", 2),
    ("1-decalol with methyls", "OC1CCC(C)C2CCC(C)CC12", 2),
    ("perhydroanthracene", "C1CCC2CC3CCCCC3CC2C1", 4),
    ("perhydrophenanthrene", "C1CCC2C(C1)CCC1CCCCC12", 5),
    ("methylperhydrophenanthrene", "CC1CCCC2C1CCC1CCCCC12", 4),
    ("perhydrophenalene", "C1CC2CCCC3CCCC(C1)C23", 3),
    ("perhydropyrene", "C1CC2CCC3CCCC4CCC(C1)C2C34", 2),
    ("perhydrotriphenylene", "C1CCC2C(C1)C1CCCCC1C1CCCCC21", 2),
    ("spiro[5.5]undecane, methyl", "CC1CCCC2(C1)CCCCC2", 3),
    ("spiro[5.5]undecane, two groups", "CC1CCCCC12CCC(Cl)CC2", 3),
    ("dispiro", "C1CCC2(CC1)CCC1(CC2)CCCCC1", 1),
    ("dispiro, methyls", "CC1CCCC2(C1)CCC1(CC2)CCCC(C)C1", 2),
    ("spirodecalin", "C1CCC2(CC1)CCC1CCCCC1C2", 2),
    ("spiro five-ring", "CC1CCC2(CCCC2)CC1", 2),
    ("hydrindane", "C1CCC2CCCC2C1", 2),
    ("7a-methylhydrindane", "CC12CCCCC1CCC2", 2),
    ("4-methylhydrindane", "CC1CCCC2CCCC12", 3),
    ("bicyclo[5.4.0]undecane", "CC1CCC2CCCCCC2C1", 2),
    ("bicyclohexyl", "CC1CCCC(C1)C1CCCCC1", 2),
)
#: Rings with heteroatoms, planar atoms and flat bonds, without marks.
OTHER_RINGS = (
    *("CC1CCCCO1", "COC1CCCCO1", "CC1OCCC(C)O1", "OC1CCCOC1C", "CC1CCC2OCCCC2C1", "C1CCC2OCCCC2O1", "CC1CSCCS1"),
    *("CC1CCCCC1=O", "CC1CCC2C(=O)CCCC2C1", "CC1CC(=O)CC(C)C1Cl", "C1CCC2(CC1)OCCCO2", "CC1CCC2(CCCCO2)OC1"),
    *("CC1COC(C)(C)OC1", "OCC1OC(O)C(O)C(O)C1O", "CC12CCC(=O)CC1CCC1C2CCC2(C)C1CCC2", "CC1CCCCS1(=O)=O"),
    *("CC1CCC(=C)CC1O", "O=C1CCCCC1Br", "C[N+]1(C)CCCCC1C", "CC1CC2COC(C)OC2OC1", "C1CC2(CCCCO2)OCC1C"),
    *("C1CCC2=CCCCC2C1", "CC1CCC2CC=CCC2C1", "CC1CCC=CC1C", "C1CCC2c3ccccc3CCC2C1", "CC1CCc2ccccc2C1O"),
    *("O=C1CCCC(C)O1", "CC12CCC(O)CC1=CCC1C2CCC2(C)C1CCC2", "CC1CC=CCC1(C)O", "CC1(C)CC=CC2CCCCC12"),
)
#: Name and SMILES with every centre given (recalled structures of well-known compounds).
FIXED = (
    ("cholestanol", "C[C@H](CCCC(C)C)[C@H]1CC[C@@H]2[C@@]1(CC[C@H]3[C@H]2CC[C@@H]4[C@@]3(CC[C@@H](C4)O)C)C"),
    ("coprostanol", "C[C@H](CCCC(C)C)[C@H]1CC[C@@H]2[C@@]1(CC[C@H]3[C@H]2CC[C@H]4[C@@]3(CC[C@@H](C4)O)C)C"),
    ("menthol", "CC(C)[C@@H]1CC[C@@H](C)C[C@H]1O"),
    ("scyllo-inositol", "O[C@H]1[C@H](O)[C@@H](O)[C@H](O)[C@@H](O)[C@@H]1O"),
    ("cis-inositol", "O[C@H]1[C@@H](O)[C@@H](O)[C@@H](O)[C@@H](O)[C@H]1O"),
    ("deuterated methylcyclohexane", "C[C@H]1CC[C@@H]([2H])CC1"),
)


def with_random_marks(smiles: str, rng: Random) -> Any:
    """RDKit molecule with a configuration at every ring atom that bears something."""
    mol = Chem.MolFromSmiles(smiles)
    options = StereoEnumerationOptions(onlyUnassigned=True, unique=False, maxIsomers=1, rand=rng.randrange(2**30))
    mol = next(iter(EnumerateStereoisomers(mol, options=options)))
    mol = Chem.Mol(mol)
    for atom in mol.GetAtoms():
        # RDKit leaves centres open that only the ring makes into centres; any mark there is as good as another.
        if (
            atom.IsInRing()
            and atom.GetDegree() > 2
            and atom.GetHybridization() == Chem.HybridizationType.SP3
            and atom.GetTotalNumHs() < 2
            and atom.GetChiralTag() == Chem.ChiralType.CHI_UNSPECIFIED
        ):
            atom.SetChiralTag(rng.choice((Chem.ChiralType.CHI_TETRAHEDRAL_CW, Chem.ChiralType.CHI_TETRAHEDRAL_CCW)))
    return marked(Chem.MolToSmiles(mol, canonical=False))


def marked(smiles: str) -> Any:
    """RDKit molecule with every tetrahedral mark of a SMILES as it stands, dependent ones too.

    Ring stereo is never perceived: RDKit's writer turns marks round once it has been.
    """
    mol = Chem.MolFromSmiles(smiles, sanitize=False)
    Chem.SanitizeMol(mol)
    mol.SetIntProp("_StereochemDone", 1)
    return mol


def rewritten(mol: Any, rng: Random) -> tuple[str, tuple[int, ...]]:
    """SMILES of a marked molecule in a random order, and the atom of the molecule each atom of the text is."""
    order = list(range(mol.GetNumAtoms()))
    rng.shuffle(order)
    shuffled = Chem.RenumberAtoms(mol, order)
    shuffled.SetIntProp("_StereochemDone", 1)
    text: str = Chem.MolToSmiles(shuffled, canonical=False)
    written = shuffled.GetPropsAsDict(includePrivate=True, includeComputed=True)["_smilesAtomOutputOrder"]
    return text, tuple(order[index] for index in written)


def mirrored(smiles: str) -> str:
    """SMILES of the mirror image, written in the same order."""
    return smiles.replace("@@", "\0").replace("@", "@@").replace("\0", "@")


def random_cyclohexane(rng: Random, groups: int) -> Any:
    """Cyclohexane with so many groups at random places, some of them geminal, configuration at random."""
    places = [p for p in range(6) for _ in range(2)]
    chosen: dict[int, list[str]] = {}
    big = 0
    for place in rng.sample(places, groups):
        group = rng.choice(GROUPS)
        big += group in ("C(C)(C)C", "c1ccccc1", "C(C)C", "C(F)(F)F")
        chosen.setdefault(place, []).append("C" if big > 1 and group != "C" else group)
    text = ""
    for place in range(6):
        branches = "".join(f"({group.replace('1', '7')})" for group in chosen.get(place, ()))
        text += "C" + ("1" if place in (0, 5) else "") + branches
    return with_random_marks(text, rng)


def zoo(seed: int = 20) -> Iterator[tuple[str, str]]:
    """Name and SMILES of every structure to embed."""
    rng = Random(seed)
    for number in range(30):
        groups = 1 + number % 6
        yield f"cyclohexane with {groups} groups, no. {number}", rewritten(random_cyclohexane(rng, groups), rng)[0]
    for name, smiles, count in SKELETONS:
        for number in range(count):
            yield f"{name}, no. {number}", rewritten(with_random_marks(smiles, rng), rng)[0]
    for name, smiles in FIXED:
        yield name, rewritten(marked(smiles), rng)[0]
