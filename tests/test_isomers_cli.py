"""`ringstrain isomers` from the outside: formats, choice of centres, errors, and what the advice says."""

from __future__ import annotations

import csv
import io
import json
import math
import time
from typing import Any

import pytest
import ringstrain as rs
from rdkit import Chem
from ringstrain.advice import advise
from ringstrain.cli.border import run

MENTHONE = "CC(C)[C@@H]1CC[C@@H](C)CC1=O"
ISOMENTHONE = "CC(C)[C@H]1CC[C@@H](C)CC1=O"
CIS_14 = "C[C@H]1CC[C@@H](C)CC1"
NEOMENTHOL = "C[C@@H]1CC[C@@H](C(C)C)[C@@H](O)C1"
R_KCAL = 1.987204e-3  # gas constant [kcal/mol/K]

Capture = pytest.CaptureFixture[str]


def rows(text: str) -> list[dict[str, str]]:
    """Rows of a TSV."""
    return list(csv.DictReader(io.StringIO(text), delimiter="\t", quoting=csv.QUOTE_NONE))


def document(capsys: Capture, *arguments: str) -> dict[str, Any]:
    """The one JSON document of a call."""
    assert run(["isomers", *arguments, "--json"]) == 0
    (line,) = capsys.readouterr().out.splitlines()
    found: dict[str, Any] = json.loads(line)
    return found


def test_plain_has_one_row_for_each_isomer_most_stable_first(capsys: Capture) -> None:
    assert run(["isomers", CIS_14]) == 0
    found = rows(capsys.readouterr().out)
    assert [row["rank"] for row in found] == ["1", "2"]
    assert [row["is_input"] for row in found] == ["no", "yes"]
    assert float(found[0]["dG_kcal"]) == 0.0
    # A(methyl) of 1.74 less R T ln 2 for the two like chairs of cis (Booth and Everett 1980; symmetry of the trade).
    assert float(found[1]["dG_kcal"]) == pytest.approx(1.74 - R_KCAL * 298.15 * math.log(2), abs=0.06)
    assert sum(float(row["share"]) for row in found) == pytest.approx(1.0, abs=1e-4)


def test_json_says_what_the_contract_promises(capsys: Capture) -> None:
    found = document(capsys, MENTHONE)
    assert (found["schema"], found["kind"], found["input"]) == ("ringstrain/1", "isomers", MENTHONE)
    assert found["input_rank"] == 1
    for isomer in found["isomers"]:
        assert {
            *("smiles", "inverted_atoms", "symmetry", "dG_kcal", "statistics_kcal", "uncertainty_kcal"),
            *("share", "share_low", "share_high", "favoured_axial"),
        } <= set(isomer)
        assert isomer["share_low"] <= isomer["share"] <= isomer["share_high"]
    assert found["isomers"][0]["inverted_atoms"] == []


def test_open_centres_leave_input_rank_and_inverted_atoms_null(capsys: Capture) -> None:
    found = document(capsys, "CC1CCC(C)CC1")
    assert found["input_rank"] is None
    assert all(isomer["inverted_atoms"] is None for isomer in found["isomers"])


def test_at_counts_from_one_and_lets_only_these_centres_turn(capsys: Capture) -> None:
    found = document(capsys, MENTHONE, "--at", "4")
    assert found["free_atoms"] == [3]
    assert [isomer["inverted_atoms"] for isomer in found["isomers"]] == [[], [3]]
    assert Chem.CanonSmiles(found["isomers"][1]["smiles"]) == Chem.CanonSmiles(ISOMENTHONE)
    # The centre that stays keeps the mixture in one enantiomeric series.
    assert {isomer["symmetry"] for isomer in found["isomers"]} == {"single enantiomer"}


@pytest.mark.parametrize(
    ("smiles", "free"),
    [
        # Common practice, no source: what a base (alpha to C=O, C#N, NO2, SO2, ester) or an acid (acetals) inverts.
        pytest.param(MENTHONE, [3], id="next to a ketone"),
        pytest.param("C[C@@H]1CC[C@H](C#N)CC1", [4], id="nitrile"),
        pytest.param("C[C@@H]1CC[C@H](C(=O)OC)CC1", [4], id="ester"),
        pytest.param("C[C@@H]1CC[C@H]([N+](=O)[O-])CC1", [4], id="nitro"),
        pytest.param("C[C@@H]1CC[C@H](S(C)(=O)=O)CC1", [4], id="sulfone"),
        pytest.param("OC[C@H]1O[C@@H](O)[C@H](O)[C@@H](O)[C@@H]1O", [4], id="anomeric centre"),
        pytest.param("C[C@@H]1CCC[C@@]2(O1)CCC[C@@H](C)O2", [5], id="ketal"),
        pytest.param("C[C@@H]1CC[C@H](N)CC1", [], id="amine"),
        pytest.param("C[C@@H]1CC[C@](C)(C=O)CC1", [], id="no hydrogen"),
        pytest.param("O=C1C[C@H]2CC[C@@H]1CC2", [], id="bridgehead"),
    ],
)
def test_epimerizable_picks_what_acid_or_base_inverts(capsys: Capture, smiles: str, free: list[int]) -> None:
    assert document(capsys, smiles, "--epimerizable")["free_atoms"] == free


@pytest.mark.parametrize(
    ("arguments", "code", "words"),
    [
        pytest.param([MENTHONE, "--at", "1"], 2, "no ring stereocentre", id="no centre"),
        pytest.param([MENTHONE, "--at", "x"], 2, "names no atoms", id="no number"),
        pytest.param([MENTHONE, "--at", "0"], 2, "names no atoms", id="zero"),
        pytest.param([MENTHONE, CIS_14], 2, "", id="two structures"),
        pytest.param(["C1CC1"], 4, "", id="no six-membered ring"),
        pytest.param(["CC1CC"], 3, "", id="unreadable"),
        pytest.param(["--epimerizable", "CC1CCCCC1C>>CC"], 3, "", id="reaction"),
    ],
)
def test_errors_name_the_fault_and_set_the_exit_code(
    capsys: Capture, arguments: list[str], code: int, words: str
) -> None:
    assert run(["isomers", *arguments]) == code
    streams = capsys.readouterr()
    assert words in streams.err
    assert streams.err.strip()
    assert "Traceback" not in streams.err + streams.out


def test_more_than_twelve_free_centres_are_refused_with_the_way_out(capsys: Capture) -> None:
    rings = "C1CCC2CC3CC4CC5CC6CC7CC8CCCCC8CC7CC6CC5CC4CC3CC2C1"  # 14 fusion atoms
    assert run(["isomers", rings]) == 2
    assert "--at" in capsys.readouterr().err


def test_a_temperature_range_gives_one_document_for_each_temperature(capsys: Capture) -> None:
    assert run(["isomers", CIS_14, "--json", "-T", "200:500:150"]) == 0
    documents = [json.loads(line) for line in capsys.readouterr().out.splitlines()]
    assert [d["temperature_K"] for d in documents] == [200.0, 350.0, 500.0]
    shares = [d["isomers"][0]["share"] for d in documents]
    assert shares == sorted(shares, reverse=True)


def test_enantiomers_are_entries_of_their_own_when_asked(capsys: Capture) -> None:
    assert len(document(capsys, "CC1CCCCC1C")["isomers"]) == 2
    apart = document(capsys, "CC1CCCCC1C", "--enantiomers")["isomers"]
    assert sorted(isomer["symmetry"] for isomer in apart) == ["meso", "single enantiomer", "single enantiomer"]


@pytest.mark.parametrize("format", ["table", "plain"])
def test_chemistry_passes_through_every_format_unchanged(capsys: Capture, format: str) -> None:
    assert run(["isomers", "C[C@@H]1CC[NH2+][C@H](C)C1", "--format", format, "--no-color"]) == 0
    text = "".join(capsys.readouterr().out.split())
    assert "[C@@H]" in text
    assert "[NH2+]" in text


def test_the_table_names_the_best_isomer_and_what_to_invert(capsys: Capture) -> None:
    assert run(["isomers", NEOMENTHOL, "--format", "table", "--no-color"]) == 0
    text = capsys.readouterr().out
    assert "most stable" in text
    assert all(len(line) <= 80 for line in text.splitlines())


def test_advice_inverts_the_hydroxyl_of_neomenthol() -> None:
    # Common practice, no source: neomenthol epimerises at C3 to menthol, all three groups equatorial.
    advice = advise(rs.rank_isomers(NEOMENTHOL))
    assert advice is not None
    assert (advice.atom, advice.verdict) == (8, "pays")
    assert advice.ratio == pytest.approx(math.exp(advice.gain_kcal / R_KCAL / 298.15), rel=1e-6)
    assert advice.ratio_low < advice.ratio < advice.ratio_high


def test_advice_says_that_nothing_pays_for_the_best_isomer() -> None:
    advice = advise(rs.rank_isomers(MENTHONE))
    assert advice is not None
    assert advice.verdict == "does not pay"
    assert advice.gain_kcal < 0


def test_advice_is_too_close_to_call_when_the_interval_crosses_one() -> None:
    # M. K. Kaloustian et al., J. Am. Chem. Soc. 1976, 98, 956 (recalled): 5-cyano prefers equatorial by 0.21 +- 0.12 in
    # ether, a preliminary value; its 95 % interval reaches across zero.
    ranking = rs.rank_isomers("CC(C)[C@H]1OC[C@@H](C#N)CO1", medium="diethyl ether")
    advice = advise(ranking)
    assert advice is not None
    assert advice.ratio_low < 1.0 < advice.ratio_high
    assert advice.verdict == "too close to call"


@pytest.mark.parametrize(
    ("smiles", "words"),
    [
        # Common practice, no source.
        pytest.param("CC1CCCCC1C", {"meso", "racemic"}, id="1,2-dimethyl"),
        pytest.param("CC1CCC(C)CC1", {"achiral"}, id="1,4-dimethyl"),
        pytest.param("CC1CCCCC1O", {"racemic"}, id="2-methylcyclohexanol"),
        pytest.param("C1CCC2CCCCC2C1", {"achiral"}, id="decalin, whose fusion atoms are no centres of their own"),
    ],
)
def test_symmetry_words(smiles: str, words: set[str]) -> None:
    found = {isomer.symmetry for isomer in rs.rank_isomers(smiles).isomers}
    assert found == words or (smiles == "C1CCC2CCCCC2C1" and found <= {"achiral", "meso"})


@pytest.mark.slow
def test_ten_centres_take_less_than_five_seconds() -> None:
    # 1024 configurations of a steroid with four hydroxyls; processor time, so that other work does not count.
    steroid = "CC12CC(O)C3C(C(O)CC4CC(O)C(O)CC34C)C1CCC2"
    rs.rank_isomers("CC1CCCC(C)C1")
    start = time.process_time()
    ranking = rs.rank_isomers(steroid)
    assert time.process_time() - start < 5.0
    assert len(ranking.free_atoms) == 10
    assert len(ranking.isomers) + len(ranking.impossible) == 512
