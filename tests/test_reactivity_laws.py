"""Laws of reactivity: mirror image in and out, renumbering, atoms kept, shares that sum to one, valid products."""

from __future__ import annotations

import math
import pickle
import random
from collections import Counter

import pytest
from rdkit import Chem
from ringstrain import analyze
from ringstrain.consequences.answer import CLASSES, find
from ringstrain.consequences.finding import Finding
from ringstrain.consequences.overview import react
from ringstrain.consequences.request import Request
from ringstrain.structure.edit import Draft, mirror, tidy_smiles
from ringstrain.structure.read import read

#: Substrates with every configuration given; each reacts in at least one class.  Invented for the purpose.
ZOO = (
    "CC(C)[C@@H]1CC[C@@H](C)C[C@@H]1Cl",
    "C[C@H]1CCCC[C@@H]1OS(C)(=O)=O",
    "CC(C)[C@@H]1CC[C@@H](C)C[C@H]1[N+](C)(C)[O-]",
    "CC(=O)O[C@H]1CCCC[C@@H]1OS(C)(=O)=O",
    "C=C(C)[C@@H]1CC[C@]2(C)O[C@@H]2C1",
    "C[C@@H]1CCC=C[C@@H]1C",
    "C[C@@H]1C[C@@H](C(C)(C)C)CCC1=O",
    "CC(C)[C@H]1CC[C@@H](C)C[C@H]1O",
    "C[C@@H]1CC[C@@H](O)[C@H](O)C1",
    "O=C(O)[C@H]1CCC[C@@H](O)C1",
    "CC(C)(C)[C@@H]1CC[C@@H](N)[C@H](O)C1",
    "O[C@]12CCCC[C@@H]1[C@@H](OS(C)(=O)=O)CCC2",
    "OC[C@H]1O[C@@H](O)[C@@H](O)[C@H](O)[C@H]1O",
)
Fingerprint = Counter[tuple[object, ...]]


def canonical(smiles: str) -> str:
    text: str = Chem.CanonSmiles(smiles)
    return text


def mirrored(smiles: str) -> str:
    return canonical(smiles.replace("@@", "\0").replace("@", "@@").replace("\0", "@"))


def fingerprint(smiles: str, *, turned: bool = False) -> Fingerprint:
    """What the findings say, without atom numbers and state letters."""
    change = mirrored if turned else canonical
    found: Fingerprint = Counter()
    for f in react(analyze(smiles)).findings:
        share = None if f.share is None else round(f.share, 6)
        relative = None if f.relative is None else f"{f.relative:.4g}"
        cost = None if f.cost_kcal is None else round(f.cost_kcal, 6)
        product = change(f.product_smiles) if f.product_smiles else None
        found[(f.reaction, f.verdict, cost, product, share, relative)] += 1
    return found


@pytest.mark.parametrize("smiles", ZOO)
def test_the_mirror_image_gives_mirror_image_products(smiles: str) -> None:
    assert fingerprint(smiles) == fingerprint(mirrored(smiles), turned=True)


@pytest.mark.parametrize("smiles", ZOO)
def test_renumbering_changes_nothing(smiles: str) -> None:
    mol = Chem.MolFromSmiles(smiles)
    order = list(range(mol.GetNumAtoms()))
    reference = fingerprint(smiles)
    for seed in range(2):
        random.Random(seed).shuffle(order)
        other = Chem.MolToSmiles(Chem.RenumberAtoms(mol, order), canonical=False)
        assert fingerprint(other) == reference


@pytest.mark.parametrize("smiles", ZOO)
def test_shares_of_a_class_sum_to_one_and_products_are_molecules(smiles: str) -> None:
    analysis = analyze(smiles)
    reacted = 0
    for name in CLASSES:
        findings = find(analysis, name)
        shares = [f.share for f in findings if f.share is not None]
        if shares:
            assert math.fsum(shares) == pytest.approx(1.0)
        for f in findings:
            if f.product_smiles:
                reacted += 1
                assert Chem.MolFromSmiles(f.product_smiles) is not None
                assert "." not in f.product_smiles
                assert f.share_low is None or f.share_low <= (f.share or 0.0) <= (f.share_high or 0.0)
            assert f.verdict == "locked out" or f.product_smiles or f.verdict == "needs a boat"
            assert f.reason
            assert f.cautions
    assert reacted


def formula(smiles: str) -> Counter[str]:
    mol = Chem.MolFromSmiles(smiles)
    return Counter(a.GetSymbol() for a in mol.GetAtoms())


def difference(substrate: str, product: str) -> dict[str, int]:
    """Heavy atoms gained (positive) and lost."""
    before, after = formula(substrate), formula(product)
    return {e: after[e] - before[e] for e in sorted(before.keys() | after.keys()) if after[e] != before[e]}


@pytest.mark.parametrize(
    ("smiles", "reaction", "request_", "change"),
    [
        ("CC(C)[C@@H]1CC[C@@H](C)C[C@@H]1Cl", "e2", Request(), {"Cl": -1}),
        ("C[C@H]1CCCC[C@@H]1OS(C)(=O)=O", "e2", Request(), {"C": -1, "O": -3, "S": -1}),
        ("C[C@H]1CCCC[C@@H]1Br", "substitution", Request(nucleophile="Br"), {}),
        ("C[C@H]1CCCC[C@@H]1Br", "substitution", Request(nucleophile="C#N"), {"Br": -1, "C": 1, "N": 1}),
        ("C=C(C)[C@@H]1CC[C@]2(C)O[C@@H]2C1", "epoxide", Request(nucleophile="H"), {}),
        ("C=C(C)[C@@H]1CC[C@]2(C)O[C@@H]2C1", "epoxide", Request(nucleophile="OC"), {"C": 1, "O": 1}),
        ("C[C@@H]1CCC=C[C@@H]1C", "addition", Request(), {"Br": 2}),
        ("C[C@@H]1CCC=C[C@@H]1C", "addition", Request(nucleophile="O"), {"Br": 1, "O": 1}),
        ("C[C@@H]1C[C@@H](C(C)(C)C)CCC1=O", "reduction", Request(), {}),
        ("C[C@@H]1C[C@@H](C(C)(C)C)CCC1=O", "enolate", Request(), {"C": 1}),
        ("CC(C)[C@H]1CC[C@@H](C)C[C@H]1O", "acylation", Request(), {"C": 2, "O": 1}),
        ("CC(C)[C@H]1CC[C@@H](C)C[C@H]1O", "oxidation", Request(), {}),
        ("C[C@@H]1CC[C@@H](O)[C@H](O)C1", "glycol", Request(), {}),
        ("O=C(O)[C@H]1CCC[C@@H](O)C1", "closure", Request(), {"O": -1}),
        ("CC(C)(C)[C@@H]1CC[C@@H](N)[C@H](O)C1", "semipinacol", Request(), {"N": -1}),
        ("O[C@]12CCCC[C@@H]1[C@@H](OS(C)(=O)=O)CCC2", "fragmentation", Request(), {"C": -1, "O": -3, "S": -1}),
    ],
)
def test_the_product_keeps_all_heavy_atoms_but_what_leaves(
    smiles: str, reaction: str, request_: Request, change: dict[str, int]
) -> None:
    products = [f.product_smiles for f in find(analyze(smiles), reaction, request_) if f.product_smiles]  # type: ignore[arg-type]
    assert products
    for product in products:
        assert difference(smiles, product) == change


def test_a_finding_survives_pickling() -> None:
    finding: Finding = find(analyze(ZOO[0]), "e2")[0]
    assert pickle.loads(pickle.dumps(finding)) == finding


@pytest.mark.parametrize("smiles", ZOO)
def test_an_untouched_draft_gives_the_structure_back(smiles: str) -> None:
    structure = read(smiles)
    assert canonical(Draft(structure).smiles()) == canonical(smiles)
    assert canonical(tidy_smiles(mirror(structure))) == mirrored(smiles)


def test_a_structure_is_not_changed_by_editing_it() -> None:
    structure = read(ZOO[0])
    before = (structure.atoms, structure.bonds, structure.configurations)
    draft = Draft(structure)
    draft.drop([10])
    draft.add_hydrogens(9, 1)
    draft.smiles()
    assert (structure.atoms, structure.bonds, structure.configurations) == before
