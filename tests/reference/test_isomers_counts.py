"""Numbers of stereoisomers against a count by Burnside's lemma, written here from the symmetry of the flat skeletons.

Draw the skeleton flat.  A rotation of the drawing keeps up and down; a reflection of the drawing is a proper rotation
of the molecule when up and down change places, and an improper one when they do not.  Stereoisomers are the orbits of
the labelled configurations under the proper operations, enantiomer pairs merged under all of them.  Nothing of the
package enters the count.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Sequence
from itertools import product

import pytest
import ringstrain as rs
from rdkit import Chem
from rdkit.Chem.EnumerateStereoisomers import EnumerateStereoisomers, StereoEnumerationOptions

Pair = tuple[str, str]
#: A symmetry of the drawing: where each atom goes, and whether it is a reflection.
Motion = tuple[tuple[int, ...], bool]


def ring_motions(size: int) -> tuple[Motion, ...]:
    """Rotations and reflections of a regular ring."""
    turns = [(tuple((i + k) % size for i in range(size)), False) for k in range(size)]
    mirrors = [(tuple((k - i) % size for i in range(size)), True) for k in range(size)]
    return tuple(turns + mirrors)


def moved(configuration: Sequence[Pair], motion: Motion, swap: bool) -> tuple[Pair, ...]:
    """A configuration after a motion of the drawing, faces exchanged when asked."""
    result: list[Pair] = [("", "")] * len(configuration)
    for atom, (up, down) in enumerate(configuration):
        result[motion[0][atom]] = (down, up) if swap else (up, down)
    return tuple(result)


def configurations(constitution: Sequence[Pair]) -> Iterator[tuple[Pair, ...]]:
    """Every way to put the two groups of each atom up and down."""
    yield from product(*({pair, pair[::-1]} for pair in constitution))


def orbits(constitution: Sequence[Pair], motions: Sequence[Motion], *, improper: bool) -> tuple[int, list[int]]:
    """Number of orbits by Burnside's lemma, and their sizes."""
    kept = [
        m
        for m in motions
        if all(sorted(constitution[a]) == sorted(constitution[m[0][a]]) for a in range(len(constitution)))
    ]
    operations = [(m, m[1]) for m in kept] + ([(m, not m[1]) for m in kept] if improper else [])
    everything = set(configurations(constitution))
    fixed = sum(moved(c, m, swap) == c for m, swap in operations for c in everything)
    number, rest = divmod(fixed, len(operations))
    assert rest == 0
    sizes = []
    left = set(everything)
    while left:
        start = next(iter(left))
        orbit = {moved(start, m, swap) for m, swap in operations}
        sizes.append(len(orbit))
        left -= orbit
    assert len(sizes) == number
    return number, sorted(sizes)


def hexagon(**groups: str) -> list[Pair]:
    """Cyclohexane with groups at positions ``p1`` to ``p6``."""
    return [(groups.get(f"p{i}", "H"), "H") for i in range(1, 7)]


#: Only the identity.
def no_symmetry(size: int) -> tuple[Motion, ...]:
    """The drawing has no symmetry."""
    return ((tuple(range(size)), False),)


#: Fusion atoms of decalin: the long axis keeps them, the short one exchanges them.
DECALIN: tuple[Motion, ...] = (((0, 1), False), ((1, 0), False), ((0, 1), True), ((1, 0), True))
#: Fusion atoms of anthracene in the order left top, left bottom, right bottom, right top.
ANTHRACENE: tuple[Motion, ...] = (
    ((0, 1, 2, 3), False),
    ((2, 3, 0, 1), False),
    ((3, 2, 1, 0), True),
    ((1, 0, 3, 2), True),
)
#: Fusion atoms of phenanthrene along the chain 4a, 10a and 8a, 4b; one mirror line through the middle bond.
PHENANTHRENE: tuple[Motion, ...] = (((0, 1, 2, 3), False), ((3, 2, 1, 0), True))
#: The three outer fusion atoms of phenalene and the inner one.
PHENALENE: tuple[Motion, ...] = tuple(((*(m[0]), 3), m[1]) for m in ring_motions(3))
XH = ("X", "H")
#: Name, SMILES, groups of each centre, motions of the drawing.
CASES = (
    ("1,2-dimethyl", "CC1CCCCC1C", hexagon(p1="M", p2="M"), ring_motions(6)),
    ("1,3-dimethyl", "CC1CCCC(C)C1", hexagon(p1="M", p3="M"), ring_motions(6)),
    ("1,4-dimethyl", "CC1CCC(C)CC1", hexagon(p1="M", p4="M"), ring_motions(6)),
    ("1,2-chloro methyl", "CC1CCCCC1Cl", hexagon(p1="M", p2="Cl"), ring_motions(6)),
    ("1,3-chloro methyl", "CC1CCCC(Cl)C1", hexagon(p1="M", p3="Cl"), ring_motions(6)),
    ("1,4-chloro methyl", "CC1CCC(Cl)CC1", hexagon(p1="M", p4="Cl"), ring_motions(6)),
    ("1,2,3-trimethyl", "CC1CCCC(C)C1C", hexagon(p1="M", p2="M", p3="M"), ring_motions(6)),
    ("2-chloro-1,3-dimethyl", "CC1CCCC(C)C1Cl", hexagon(p1="M", p2="Cl", p3="M"), ring_motions(6)),
    ("1-chloro-2,3-dimethyl", "CC1CCCC(Cl)C1C", hexagon(p1="M", p2="M", p3="Cl"), ring_motions(6)),
    ("1,2,4-trimethyl", "CC1CCC(C)C(C)C1", hexagon(p1="M", p2="M", p4="M"), ring_motions(6)),
    ("1,3,5-trimethyl", "CC1CC(C)CC(C)C1", hexagon(p1="M", p3="M", p5="M"), ring_motions(6)),
    ("1-chloro-3,5-dimethyl", "CC1CC(C)CC(Cl)C1", hexagon(p1="M", p3="M", p5="Cl"), ring_motions(6)),
    ("1,3,5 all different", "CC1CC(F)CC(Cl)C1", hexagon(p1="M", p3="F", p5="Cl"), ring_motions(6)),
    ("1,2,4,5-tetramethyl", "CC1CC(C)C(C)CC1C", hexagon(p1="M", p2="M", p4="M", p5="M"), ring_motions(6)),
    ("inositols", "OC1C(O)C(O)C(O)C(O)C1O", [("O", "H")] * 6, ring_motions(6)),
    ("hexachlorides", "ClC1C(Cl)C(Cl)C(Cl)C(Cl)C1Cl", [("Cl", "H")] * 6, ring_motions(6)),
    ("pentachloride", "ClC1CC(Cl)C(Cl)C(Cl)C1Cl", [("Cl", "H")] * 5 + [("H", "H")], ring_motions(6)),
    ("decalin", "C1CCC2CCCCC2C1", [XH] * 2, DECALIN),
    ("1-methyldecalin", "CC1CCCC2CCCCC12", [XH] * 3, no_symmetry(3)),
    ("2-methyldecalin", "CC1CCC2CCCCC2C1", [XH] * 3, no_symmetry(3)),
    # The mirror line of the long axis would carry the methyl to the other fusion atom; the short one keeps both atoms.
    ("9-methyldecalin", "CC12CCCCC1CCCC2", [XH] * 2, (((0, 1), False), ((0, 1), True))),
    ("4-methylhydrindane", "CC1CCCC2CCCC12", [XH] * 3, no_symmetry(3)),
    ("hydrindane", "C1CCC2CCCC2C1", [XH] * 2, (((0, 1), False), ((1, 0), True))),
    ("perhydroanthracene", "C1CCC2CC3CCCCC3CC2C1", [XH] * 4, ANTHRACENE),
    ("perhydrophenanthrene", "C1CCC2C(C1)CCC1CCCCC12", [XH] * 4, PHENANTHRENE),
    ("perhydrophenalene", "C1CC2CCCC3CCCC(C1)C23", [XH] * 4, PHENALENE),
    ("aldohexopyranoses", "OCC1OC(O)C(O)C(O)C1O", [XH] * 5, no_symmetry(5)),
    ("2,5-dimethyl-1,4-dioxane", "CC1COC(C)CO1", [XH] * 2, (((0, 1), False), ((1, 0), False))),
    ("2,6-dimethylmorpholine", "CC1CNCC(C)O1", [XH] * 2, (((0, 1), False), ((1, 0), True))),
    ("4,5-dimethylcyclohexene", "CC1CC=CCC1C", [XH] * 2, (((0, 1), False), ((1, 0), True))),
)
IDS = [case[0] for case in CASES]
#: Skeletons whose centres RDKit's enumeration sees one by one, so that it counts a second time.
SEEN_BY_RDKIT = tuple(case for case in CASES if case[0] not in ("perhydrophenalene", "9-methyldecalin"))


@pytest.mark.parametrize(("name", "smiles", "constitution", "motions"), CASES, ids=IDS)
def test_number_of_entries_is_the_burnside_count(
    name: str, smiles: str, constitution: list[Pair], motions: tuple[Motion, ...]
) -> None:
    merged, sizes = orbits(constitution, motions, improper=True)
    ranking = rs.rank_isomers(smiles)
    assert len(ranking.isomers) + len(ranking.impossible) == merged, name
    if not ranking.impossible:
        assert sorted(isomer.configurations for isomer in ranking.isomers) == sizes


@pytest.mark.parametrize(("name", "smiles", "constitution", "motions"), CASES, ids=IDS)
def test_number_of_stereoisomers_is_the_burnside_count(
    name: str, smiles: str, constitution: list[Pair], motions: tuple[Motion, ...]
) -> None:
    apart, sizes = orbits(constitution, motions, improper=False)
    ranking = rs.rank_isomers(smiles, enantiomers=True)
    assert len(ranking.isomers) + len(ranking.impossible) == apart, name
    if not ranking.impossible:
        assert sorted(isomer.configurations for isomer in ranking.isomers) == sizes


@pytest.mark.parametrize(("name", "smiles", "constitution", "motions"), CASES, ids=IDS)
def test_racemic_entries_are_the_orbits_that_only_mirroring_joins(
    name: str, smiles: str, constitution: list[Pair], motions: tuple[Motion, ...]
) -> None:
    merged, _ = orbits(constitution, motions, improper=True)
    apart, _ = orbits(constitution, motions, improper=False)
    ranking = rs.rank_isomers(smiles)
    words = Counter(isomer.symmetry for isomer in ranking.isomers)
    if not ranking.impossible:
        assert words["racemic"] == apart - merged, name
        assert set(words) <= {"racemic", "meso", "achiral"}


@pytest.mark.parametrize(
    ("name", "smiles", "constitution", "motions"), SEEN_BY_RDKIT, ids=[case[0] for case in SEEN_BY_RDKIT]
)
def test_rdkit_enumerates_the_same_number(
    name: str, smiles: str, constitution: list[Pair], motions: tuple[Motion, ...]
) -> None:
    options = StereoEnumerationOptions(unique=True)
    found = {Chem.MolToSmiles(mol) for mol in EnumerateStereoisomers(Chem.MolFromSmiles(smiles), options=options)}
    ranking = rs.rank_isomers(smiles, enantiomers=True)
    assert len(ranking.isomers) + len(ranking.impossible) == len(found), name
    ours = {Chem.CanonSmiles(isomer.smiles) for isomer in ranking.isomers}
    assert ours <= found


@pytest.mark.parametrize("smiles", ["OC1C(O)C(O)C(O)C(O)C1O", "ClC1C(Cl)C(Cl)C(Cl)C(Cl)C1Cl"], ids=["O", "Cl"])
def test_inositols_and_hexachlorides_are_nine_with_one_enantiomer_pair(smiles: str) -> None:
    # Common practice, no source: nine stereoisomers, of which only one pair is chiral.
    assert len(rs.rank_isomers(smiles, enantiomers=True).isomers) == 9
    words = [isomer.symmetry for isomer in rs.rank_isomers(smiles).isomers]
    assert (len(words), words.count("racemic")) == (8, 1)


@pytest.mark.parametrize(
    ("smiles", "apart", "merged"),
    [
        # By hand: two rings in line lie in one plane, so the methyls are cis or trans; no chirality.
        pytest.param("CC1CCC2(CC1)CCC1(CC2)CCC(C)CC1", 2, 2, id="dispiro, dimethyl"),
        # By hand: the two rings of one spiro atom stand crossed, as the ends of an allene: one enantiomer pair.
        pytest.param("CC1CCC2(CC1)CCC(C)CC2", 2, 1, id="spiro, dimethyl"),
        pytest.param("C1CCC2(CC1)CCC1(CC2)CCCCC1", 1, 1, id="dispiro"),
        # By hand: each ring is cis or trans on its own.
        pytest.param("CC1CCC(CC1)C1CCC(C)CC1", 3, 3, id="4,4'-dimethylbicyclohexyl"),
    ],
)
def test_spiro_and_joined_rings_count_as_by_hand(smiles: str, apart: int, merged: int) -> None:
    assert len(rs.rank_isomers(smiles, enantiomers=True).isomers) == apart
    assert len(rs.rank_isomers(smiles).isomers) == merged


@pytest.mark.parametrize(
    ("smiles", "impossible"),
    [
        # Common practice, no source: a three-ring, and the cages, close one way only.
        pytest.param("C1CCC2OC2C1", 1, id="trans cyclohexene oxide"),
        pytest.param("C1CC2CCC1CC2", 1, id="in-out bicyclo[2.2.2]octane"),
    ],
)
def test_an_isomer_that_cannot_close_is_listed_with_the_reason(smiles: str, impossible: int) -> None:
    ranking = rs.rank_isomers(smiles)
    assert len(ranking.isomers) == 1
    assert len(ranking.impossible) == impossible
    assert all(isomer.reason for isomer in ranking.impossible)
