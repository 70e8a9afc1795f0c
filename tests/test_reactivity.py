"""Reactivity findings: right for the right reason, limits that warn, and the command line."""

from __future__ import annotations

import json
import subprocess
import sys
from contextlib import suppress

import pytest
from rdkit import Chem
from ringstrain import analyze
from ringstrain.consequences.answer import CLASSES, check_class, find, relative_rate
from ringstrain.consequences.finding import ReactionClass
from ringstrain.consequences.overview import best_of, react
from ringstrain.consequences.request import REAGENTS, Request, make_request
from ringstrain.consequences.rulebook import rule
from ringstrain.errors import TableError, UsageError

NEOMENTHYL = "CC(C)[C@@H]1CC[C@@H](C)C[C@@H]1Cl"
MENTHYL = "CC(C)[C@@H]1CC[C@@H](C)C[C@H]1Cl"
#: One substrate for each class; common practice, no source.
SAMPLES: dict[ReactionClass, str] = {
    "e2": NEOMENTHYL,
    "syn-elimination": "CC(C)[C@@H]1CC[C@@H](C)C[C@@H]1[N+](C)(C)[O-]",
    "substitution": "CC(C)(C)[C@H]1CC[C@@H](Br)CC1",
    "solvolysis": "CC[C@@H]1CCCC[C@@H]1OS(=O)(=O)c1ccc(C)cc1",
    "epoxide": "CC(C)(C)[C@@H]1CC[C@@H]2O[C@@H]2C1",
    "addition": "CC(C)(C)[C@H]1CCC=CC1",
    "reduction": "CC(C)(C)C1CCC(=O)CC1",
    "enolate": "CC(C)(C)C1CCC(=O)CC1",
    "acylation": "CC(C)(C)[C@H]1CC[C@H](O)CC1",
    "oxidation": "CC(C)(C)[C@H]1CC[C@@H](O)CC1",
    "glycol": "O[C@@H]1CCCC[C@@H]1O",
    "closure": "O=C(O)[C@H]1CCC[C@@H](O)C1",
    "semipinacol": "CC(C)(C)[C@@H]1CC[C@@H](N)[C@H](O)C1",
    "fragmentation": "O[C@]12CCCC[C@@H]1[C@@H](OS(C)(=O)=O)CCC2",
}


def same(first: str | None, second: str) -> bool:
    return first is not None and Chem.CanonSmiles(first) == Chem.CanonSmiles(second)


def run(*arguments: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-c", "from ringstrain.cli import main; main()", "reactivity", *arguments],
        capture_output=True,
        text=True,
        encoding="utf-8",
        check=False,
        stdin=subprocess.DEVNULL,
    )


def document(*arguments: str) -> dict[str, object]:
    done = run(*arguments, "--json")
    assert done.returncode == 0, done.stderr
    found: dict[str, object] = json.loads(done.stdout)
    return found


@pytest.mark.parametrize("name", CLASSES)
def test_every_class_answers(name: ReactionClass) -> None:
    findings = find(analyze(SAMPLES[name]), name)
    assert any(f.product_smiles for f in findings)
    assert {f.reaction for f in findings} == {name}


def test_menthyl_chloride_reacts_from_the_triaxial_chair_only_towards_the_ch2() -> None:
    # Hughes, Ingold, Rose, J. Chem. Soc. 1953, 3839 (recalled): menthyl chloride gives p-menth-2-ene alone.
    analysis = analyze(MENTHYL)
    findings = find(analysis, "e2")
    assert {Chem.CanonSmiles(f.product_smiles or "") for f in findings} == {
        Chem.CanonSmiles("CC(C)[C@H]1C=C[C@H](C)CC1")
    }
    first = findings[0]
    assert first.verdict == "needs the flip"
    state = analysis.ring_systems[0].state(first.state or "")
    assert set(first.leaving_atoms) | {1, 7} <= set(state.axial)
    assert first.partner_atoms == (8,)
    assert first.cost_kcal == pytest.approx(state.energy_kcal - analysis.ring_systems[0].states[0].energy_kcal)


def test_trans_4_tert_butyl_needs_the_tert_butyl_group_axial_or_a_boat() -> None:
    # Carey, Organic Chemistry, 5th ed., ch. 5: over 500 times slower than cis (read).
    findings = find(analyze("CC(C)(C)[C@H]1CC[C@H](Br)CC1"), "e2")
    assert {f.verdict for f in findings} == {"needs the flip", "needs a boat"}
    assert all((f.cost_kcal or 0.0) > 4.0 for f in findings)
    assert findings[0].relative is not None
    assert findings[0].relative < 1.0 / 100.0


def test_a_bulky_base_turns_the_alkene_ratio_round() -> None:
    # Brown, Moritani, J. Am. Chem. Soc. 1953, 75, 4112 (recalled), as a direction.
    small, bulky = (find(analyze(NEOMENTHYL), "e2", Request(base=size))[0] for size in ("small", "bulky"))
    assert same(small.product_smiles, "CC(C)C1=CC[C@H](C)CC1")
    assert same(bulky.product_smiles, "CC(C)[C@H]1C=C[C@H](C)CC1")
    assert bulky.confidence == "direction only"


def test_cope_elimination_asks_for_the_opposite_of_e2() -> None:
    # Cope, Acton, J. Am. Chem. Soc. 1958, 80, 355 (recalled): 64:36 from menthyl, one alkene from neomenthyl.
    menthyl = find(analyze("CC(C)[C@@H]1CC[C@@H](C)C[C@H]1[N+](C)(C)[O-]"), "syn-elimination")
    assert same(menthyl[0].product_smiles, "CC(C)[C@H]1C=C[C@H](C)CC1")
    assert menthyl[0].share == pytest.approx(0.64, abs=0.05)
    neomenthyl = find(analyze(SAMPLES["syn-elimination"]), "syn-elimination")
    assert len({f.product_smiles for f in neomenthyl}) == 1


def test_zinc_takes_both_bromines_only_from_the_diaxial_dibromide() -> None:
    # Barton, Rosenfelder, J. Chem. Soc. 1951, 1048 (recalled).
    diaxial = find(analyze("CC(C)(C)[C@H]1CC[C@@H](Br)[C@H](Br)C1"), "e2", Request(reagent="metal"))
    diequatorial = find(analyze("CC(C)(C)[C@H]1CC[C@H](Br)[C@@H](Br)C1"), "e2", Request(reagent="metal"))
    assert diaxial[0].verdict == "open"
    assert all(f.verdict != "open" for f in diequatorial)


def test_the_reason_names_atoms_and_state() -> None:
    finding = find(analyze(NEOMENTHYL), "e2")[0]
    assert "state A" in finding.reason
    assert "axial Cl 11" in finding.reason
    assert finding.leaving_atoms == (10,)
    assert finding.partner_atoms == (3,)


@pytest.mark.parametrize(
    ("smiles", "name", "words"),
    [
        ("Cl[C@H]1[C@H](Cl)[C@@H](Cl)[C@@H](Cl)[C@H](Cl)[C@H]1Cl", "e2", "Polyhalide"),
        ("C[C@@H]1CCC[C@H](C)C1=O", "reduction", "Both alpha carbons"),
        ("O=C1CCC(CC1)OCc1ccccc1", "reduction", "chelat"),
        ("C[C@@H]1CCCC[C@@H]1OC(=S)SC", "syn-elimination", "trans hydrogen can leak in"),
        ("O[C@H]1CC=CCC1", "addition", "Polar group"),
    ],
)
def test_limits_warn_and_take_the_number_down_to_a_direction(smiles: str, name: ReactionClass, words: str) -> None:
    # The rows marked as limits in the collected outcomes, e.g. Can. J. Chem. on 2,6-dimethylcyclohexanones (read).
    findings = find(analyze(smiles), name)
    warned = [f for f in findings if any(words in limit for limit in f.limits)]
    assert warned
    assert all(f.confidence == "direction only" for f in warned)


def test_the_rate_of_a_compound_is_the_inverse_seen_from_its_epimer() -> None:
    ours = find(analyze(NEOMENTHYL), "e2")[0]
    theirs = find(analyze(MENTHYL), "e2")[0]
    assert ours.relative is not None
    assert theirs.relative is not None
    assert ours.relative * theirs.relative == pytest.approx(1.0)
    ratio = relative_rate(analyze(NEOMENTHYL), analyze(MENTHYL), "e2")
    assert ratio is not None
    assert ratio[0] == pytest.approx(ours.relative)
    assert ratio[1] < ratio[0] < ratio[2]


def test_two_conformers_of_a_free_ring_average_the_selectivity() -> None:
    # Brown, Krishnamurthy, J. Am. Chem. Soc. 1972, 94, 7159 (recalled): less selective without the anchor.
    def cis_share(smiles: str, product: str) -> float:
        found = find(analyze(smiles), "reduction", Request(reagent="bulky hydride"))
        return sum(f.share or 0.0 for f in found if same(f.product_smiles, product))

    free = cis_share("CC1CCC(=O)CC1", "C[C@H]1CC[C@@H](O)CC1")
    anchored = cis_share("CC(C)(C)C1CCC(=O)CC1", "CC(C)(C)[C@H]1CC[C@@H](O)CC1")
    assert 0.5 < free < anchored


def test_kinetic_and_equilibrium_shares_stand_side_by_side() -> None:
    # Common practice, no source: L-Selectride gives the less stable alcohol.
    findings = find(analyze("CC(C)(C)C1CCC(=O)CC1"), "reduction", Request(reagent="bulky hydride"))
    assert (findings[0].share or 0.0) > 0.9
    assert (findings[0].equilibrium_share or 1.0) < 0.5


def test_a_nucleophile_tells_the_reagent_class_of_a_reduction() -> None:
    def reagents(nucleophile: str) -> set[str]:
        found = find(analyze("CC(C)(C)C1CCC(=O)CC1"), "reduction", Request(nucleophile=nucleophile))
        return {f.reagent for f in found}

    assert reagents("C") == {"organometal"}
    assert reagents("C#N") == {"cyanide"}
    assert reagents("C#C") == {"thin carbon"}
    assert reagents("[H-]") == {"small hydride"}


def test_the_overview_has_one_line_for_each_group_and_class() -> None:
    answer = react(analyze("CC(C)[C@@H]1CC[C@@H](C)C[C@H]1O"))
    lines = best_of(answer.findings)
    assert [(f.reaction, f.leaving_atoms) for f in lines] == [("acylation", (10,)), ("oxidation", (10,))]
    assert {f.verdict for f in lines} == {"open"}


def test_doubts_about_the_molecule_are_noted() -> None:
    # Common practice, no source: rings with heteroatoms, polar neighbours, cold solutions and ties deserve a warning.
    def notes(smiles: str, temperature_K: float = 298.15) -> str:
        return " ".join(react(analyze(smiles, temperature_K=temperature_K)).notes)

    assert "carbocycles" in notes("C[C@@H]1CC[C@@H](O)CO1")
    assert "solvent" in notes("O[C@H]1CCCC[C@@H]1Br")
    assert "flips more slowly" in notes("C[C@H]1CCCC[C@@H]1Br", 150.0)
    assert "about equal" in notes("CC(C)(C)C1CCC(=O)CC1")
    assert "about equal" not in notes("C1=CCCCC1")


def test_nothing_that_reacts_is_an_empty_answer() -> None:
    assert react(analyze("CC1CCCCC1")).findings == ()


@pytest.mark.parametrize("name", ["E2", "sn2", ""])
def test_an_unknown_class_is_refused(name: str) -> None:
    with pytest.raises(UsageError, match="Use one of e2"):
        check_class(name)


@pytest.mark.parametrize(
    "words",
    [
        {"base": "huge"},
        {"reagent": "magic"},
        {"nucleophile": "xx"},
        {"nucleophile": "[Na+].[Br-]"},
        {"electrophile": "("},
    ],
    ids=str,
)
def test_unusable_reagents_are_refused(words: dict[str, str]) -> None:
    with pytest.raises(UsageError):
        make_request(**words)


def test_every_reagent_belongs_to_a_class() -> None:
    # A reagent either answers or is refused as a usage error; none breaks.
    analyses = {name: analyze(SAMPLES[name]) for name in CLASSES}
    for reagent in REAGENTS:
        for name in CLASSES:
            with suppress(UsageError):
                assert isinstance(find(analyses[name], name, Request(reagent=reagent)), tuple)


def test_an_unknown_rule_is_a_fault_of_the_tables() -> None:
    with pytest.raises(TableError):
        rule("no-such-rule")


# The command line, as the contract fixes it.

FIELDS = {
    "class",
    "ring_system",
    "state",
    "state_population",
    "cost_kcal",
    "verdict",
    "leaving_atoms",
    "partner_atoms",
    "product_smiles",
    "share",
    "relative",
    "confidence",
    "limits",
    "sources",
}


def test_json_has_the_fields_of_the_contract() -> None:
    found = document(NEOMENTHYL, "--reaction", "e2")
    assert found["schema"] == "ringstrain/1"
    assert found["kind"] == "reactivity"
    findings = found["findings"]
    assert isinstance(findings, list)
    assert all(set(f) >= FIELDS for f in findings)
    assert sum(f["share"] for f in findings) == pytest.approx(1.0, abs=1e-5)


def test_json_without_findings_is_an_empty_list_and_exit_zero() -> None:
    assert document("CC1CCCCC1", "--reaction", "e2")["findings"] == []


def test_plain_has_a_header_and_one_row_for_each_finding() -> None:
    done = run(NEOMENTHYL, "--reaction", "e2", "--format", "plain")
    lines = done.stdout.splitlines()
    assert len({line.count("\t") for line in lines}) == 1
    assert len(lines) == 3


@pytest.mark.parametrize("extra", [[], ["--ascii"]], ids=["signs", "ascii"])
def test_the_table_shows_products_reasons_cautions_and_sources(extra: list[str]) -> None:
    done = run("CC(C)(C)C1CCC(=O)CC1", "--reaction", "reduction", "--format", "table", *extra)
    assert done.returncode == 0
    assert "bulky hydride" in done.stdout
    assert "Caution:" in done.stdout
    if extra:
        assert done.stdout.isascii()


@pytest.mark.parametrize(
    ("arguments", "code"),
    [
        ([NEOMENTHYL, "--reaction", "sn1"], 2),
        ([NEOMENTHYL, "--base", "huge"], 2),
        ([NEOMENTHYL, MENTHYL], 2),
        ([NEOMENTHYL, "--nucleophile", "xx"], 2),
        (["C1CC"], 3),
        (["c1ccccc1"], 4),
    ],
)
def test_exit_codes(arguments: list[str], code: int) -> None:
    done = run(*arguments)
    assert done.returncode == code
    assert "Traceback" not in done.stderr
