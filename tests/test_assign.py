"""`ringstrain assign`: reading observations, matching, ambiguity, candidates, the document."""

from __future__ import annotations

import csv
import io
import json
from typing import Any

import pytest
from ringstrain.analysis import analyze
from ringstrain.cli.border import run
from ringstrain.consequences.assign import assign
from ringstrain.consequences.nmr import predict_nmr
from ringstrain.consequences.observations import fit_signal, parse_observed
from ringstrain.errors import UsageError
from ringstrain.structure.read import read
from ringstrain.tables.spectra import load_spectra

Capture = pytest.CaptureFixture[str]
TBU = "CC(C)(C)C1CCC(O)CC1"
TRANS, CIS = "CC(C)(C)[C@H]1CC[C@H](O)CC1", "CC(C)(C)[C@H]1CC[C@@H](O)CC1"


@pytest.mark.parametrize(
    ("text", "couplings"),
    [
        ("H1=10.8,4.2", (10.8, 4.2)),
        ("H1=td 10.8, 4.2", (10.8, 10.8, 4.2)),
        ("H1=td, J = 10.8, 4.2 Hz", (10.8, 10.8, 4.2)),
        ("H1=tt 11.0,4.3", (11.0, 11.0, 4.3, 4.3)),
        ("H1=quint 2.8", (2.8,) * 4),
        ("H1=dq 12.0,4.0", (12.0, 4.0, 4.0, 4.0)),
        ("H1=br d 3.0", (3.0,)),
        ("H1=br s", ()),
    ],
)
def test_observations_are_read_as_reports_write_them(text: str, couplings: tuple[float, ...]) -> None:
    (found,) = parse_observed(text)
    assert found.atom == 0
    assert found.couplings_Hz == couplings


@pytest.mark.parametrize(
    "text",
    ["", "nonsense", "H1", "H0=3", "H1=", "H1=td 10", "H1=xx 3", "H1=-3", "H1=99", "C1=3", "H1=3;H1=4", "H1=3,,x"],
)
def test_observations_that_make_no_sense_are_refused(text: str) -> None:
    with pytest.raises(UsageError) as caught:
        parse_observed(text)
    assert caught.value.next_step


@pytest.mark.parametrize(("width", "right"), [("W 30", TRANS), ("W=11", CIS)])
def test_a_width_alone_tells_axial_from_equatorial(width: str, right: str) -> None:
    """About 30 Hz for an axial carbinol hydrogen, about 12 Hz for an equatorial one (common practice, no source)."""
    answer = assign(read(TBU), parse_observed(f"H8={width}"))
    assert answer.candidates[0].smiles == read(right).smiles
    assert answer.verdict == "decided"


def test_the_best_matching_of_couplings_is_found() -> None:
    """The order in which couplings are given does not matter, and each observed one is used."""
    signal = predict_nmr(analyze(TRANS)).signal("H8ax")
    rows = load_spectra()
    first = fit_signal(parse_observed("H8=10.9,10.9,4.3,4.3")[0], signal, rows)
    second = fit_signal(parse_observed("H8=4.3,10.9,4.3,10.9")[0], signal, rows)
    assert first is not None
    assert second is not None
    assert first.squares == pytest.approx(second.squares)
    pairs = [(round(p.predicted_Hz or 0.0), p.observed_Hz) for p in first.pairings]
    assert pairs == [(11, 10.9), (11, 10.9), (5, 4.3), (5, 4.3)]


def test_a_splitting_without_partner_is_a_misfit() -> None:
    signal = predict_nmr(analyze(TRANS)).signal("H8ax")
    rows = load_spectra()
    right = fit_signal(parse_observed("H8=11.4,11.4,4.7,4.7")[0], signal, rows)
    extra = fit_signal(parse_observed("H8=11.4,11.4,4.7,4.7,8.0")[0], signal, rows)
    assert right is not None
    assert extra is not None
    assert extra.squares > right.squares + 30


def test_ambiguity_is_said() -> None:
    """An observation that suits two isomers equally decides nothing."""
    answer = assign(read("CC(C)C1CCC(C)CC1O"), parse_observed("H10=td 10.4,4.3"), medium="chloroform")
    assert answer.verdict == "not decided"
    assert answer.next_proton is not None
    assert sum(c.likelihood for c in answer.candidates) == pytest.approx(1.0)


def test_the_further_proton_is_one_not_yet_observed_and_decides() -> None:
    """Fed with what its own prediction says of that proton, the answer is decided."""
    structure = read("CC(C)C1CCC(C)CC1O")
    known = "H10=td 10.4,4.3"
    answer = assign(structure, parse_observed(known))
    ahead = answer.next_proton
    assert ahead is not None
    assert ahead.atom != 9
    name = f"H{ahead.atom + 1}"
    texts = [
        f"{name}{chr(39) * i}={words.split(', ', 1)[1].removesuffix(' Hz')}" for i, words in enumerate(ahead.first)
    ]
    again = assign(structure, parse_observed("; ".join([known, *texts])))
    assert again.candidates[0].smiles == answer.candidates[0].smiles
    assert again.verdict == "decided"


def test_spectra_that_no_candidate_has_are_called_so() -> None:
    answer = assign(read(TBU), parse_observed("H8=7.5,7.5,7.5,7.5"))
    assert answer.verdict == "none fits"


def test_numbering_of_equal_places_does_not_matter() -> None:
    """In 1,3-dimethylcyclohexane C1 and C3 are equal places: calling one H2 or H8 gives one answer."""
    smiles = "CC1CCCC(C)C1"
    first = assign(read(smiles), parse_observed("H8=11.8,11.8; H8'=3.8,3.8"))
    assert first.candidates[0].smiles == read("C[C@H]1CCC[C@@H](C)C1").smiles


def test_isomers_that_give_one_pattern_are_called_equal(capsys: Capture) -> None:
    """An equatorial hydrogen between two axial ones stands in several inositols (common practice, no source)."""
    arguments = ["OC1C(O)C(O)C(O)C(O)C1O", "--observed", "H2=2.9,2.9", "--medium", "water"]
    assert run(["assign", *arguments, "--format", "table"]) == 0
    out = " ".join(capsys.readouterr().out.split())
    assert "fit equally well" in out
    assert "interchangeable numbers" in out


def test_numbers_stay_as_drawn_where_that_fits_as_well_as_any() -> None:
    answer = assign(read(TRANS), parse_observed("H8=10.9,4.3; H10=12,4"))
    assert answer.candidates[0].atoms == (7, 9)


def test_both_hydrogens_of_a_ch2_may_be_named_and_given_in_either_order() -> None:
    structure = read(TBU)
    one = assign(structure, parse_observed("H7=4.7,3.8,2.6; H7'=14.4,11.4,3.8"))
    other = assign(structure, parse_observed("H7=14.4,11.4,3.8; H7'=4.7,3.8,2.6"))
    assert [c.smiles for c in one.candidates] == [c.smiles for c in other.candidates]
    assert one.odds == pytest.approx(other.odds)
    assert one.candidates[0].smiles == read(TRANS).smiles


def test_candidates_of_another_constitution_are_refused() -> None:
    with pytest.raises(UsageError, match="another constitution"):
        assign(read(TRANS), parse_observed("H8=10.9,4.3"), candidates=(read("CC1CCCCC1O"),))


@pytest.mark.parametrize("name", ["H9=3", "H99=3", "H1'=3; H1''=3; H1=3; H1'''=3"])
def test_protons_that_are_none_of_the_ring_are_refused(name: str) -> None:
    with pytest.raises(UsageError):
        assign(read(TRANS), parse_observed(name))


def document(capsys: Capture, *arguments: str) -> dict[str, Any]:
    assert run(["assign", *arguments, "--json"]) == 0
    loaded: dict[str, Any] = json.loads(capsys.readouterr().out)
    return loaded


def test_document_ranks_candidates(capsys: Capture) -> None:
    found = document(capsys, TRANS, "--observed", "H8=10.9,4.3")
    assert (found["schema"], found["kind"], found["verdict"]) == ("ringstrain/1", "assign", "decided")
    assert found["candidates"][0]["inverted_atoms"] == []
    assert found["candidates"][0]["likelihood"] > found["candidates"][1]["likelihood"]
    assert found["candidates"][0]["protons"][0]["atom"] == 7


def test_given_candidates_only_are_compared(capsys: Capture) -> None:
    found = document(capsys, TBU, "--observed", "H8=2.8,2.8", "--candidate", TRANS, "--candidate", CIS)
    assert [read(c["smiles"]).smiles for c in found["candidates"]] == [read(CIS).smiles, read(TRANS).smiles]


def test_plain_has_one_row_for_each_candidate(capsys: Capture) -> None:
    assert run(["assign", TBU, "--observed", "H8=10.9,4.3", "--format", "plain"]) == 0
    rows = list(csv.DictReader(io.StringIO(capsys.readouterr().out), delimiter="\t", quoting=csv.QUOTE_NONE))
    assert [r["rank"] for r in rows] == ["1", "2"]


def test_table_names_the_answer_and_the_next_proton(capsys: Capture) -> None:
    assert run(["assign", "CC(C)C1CCC(C)CC1O", "--observed", "H10=td 10.4,4.3", "--format", "table"]) == 0
    out = capsys.readouterr().out
    assert "Not decided" in out
    assert "look at H" in out


def test_table_keeps_the_brackets_of_a_structure(capsys: Capture) -> None:
    assert run(["assign", "c1cc[nH]c1C1CCC(O)CC1", "--observed", "H9=tt 10.9,4.3", "--format", "table"]) == 0
    out = capsys.readouterr().out
    assert "c1cc[nH]c1C1CCC(O)CC1" in out
    assert "[nH]" in out.partition("fits best")[0]


def test_observations_are_needed(capsys: Capture) -> None:
    assert run(["assign", TBU]) == 2
    assert "--observed" in capsys.readouterr().err
