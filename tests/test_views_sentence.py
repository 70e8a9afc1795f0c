"""The headline says the right thing in plain English for every kind of answer."""

from __future__ import annotations

import re

import pytest
from ringstrain import analyze
from ringstrain.views.look import Look, constant, percent, percent_range
from ringstrain.views.sentence import headlines

LOOK = Look()


def _say(text: str, **conditions: object) -> str:
    sentences = headlines(analyze(text, **conditions), LOOK)  # type: ignore[arg-type]
    assert len(sentences) == 1
    return sentences[0]


def test_one_group() -> None:
    # 95:5 and 1.74 kcal/mol at 298 K: Booth & Everett, J. Chem. Soc., Perkin Trans. 2 1980, 255
    sentence = _say("CC1CCCCC1")
    assert sentence.startswith("Chair A, methyl equatorial: 95 % (94 to 96) at 298 K; the flip costs 1.7 kcal/mol (")
    assert "media" not in sentence, "an alkyl A-value does not hang on the medium"


def test_menthol_is_said_as_a_chemist_would() -> None:
    # all three groups equatorial: common practice, no source
    sentence = _say("C[C@@H]1CC[C@@H](C(C)C)[C@H](O)C1")
    assert sentence.startswith("Chair A, methyl, isopropyl and hydroxyl all equatorial: over 99.9 % at 298 K")
    assert re.search(r"the flip costs \d\.\d kcal/mol \(\d\.\d to \d\.\d", sentence)
    assert "the hydroxyl/isopropyl term is estimated" in sentence


def test_neomenthol_keeps_its_hydroxyl_axial() -> None:
    # neomenthol: isopropyl and methyl equatorial, hydroxyl axial: common practice, no source
    assert "isopropyl equatorial and hydroxyl axial" in _say("C[C@@H]1CC[C@@H](C(C)C)[C@@H](O)C1")


@pytest.mark.parametrize(
    "text", ["1b-Me 4b-Me", "1b-Me 2b-Me", "C1CCCCC1", "C1CC[C@H]2CCCC[C@H]2C1"], ids=["1,4", "1,2", "none", "decalin"]
)
def test_equivalent_forms_are_fifty_fifty(text: str) -> None:
    # both forms are related by symmetry, so K = 1 whatever the prices: common practice, no source
    sentence = _say(text)
    assert sentence.startswith("Two equivalent ")
    assert "50:50 at any temperature" in sentence


def test_equivalent_chairs_do_not_name_atoms() -> None:
    assert "one methyl equatorial and one methyl axial in each" in _say("1b-Me 4b-Me")


def test_equal_groups_in_different_places_are_told_apart_by_atom() -> None:
    assert "two methyls (atoms 7, 8) equatorial and methyl (atom 9) axial" in _say("1b-Me 3b-Me 5a-Me")


def test_three_equal_groups_are_counted() -> None:
    assert "all three methyls equatorial" in _say("1b-Me 3b-Me 5b-Me")


def test_a_locked_system_says_what_is_axial() -> None:
    # 5alpha-cholestan-3beta-ol: both angular methyls axial, hydroxyl equatorial: common practice, no source
    cholestanol = "C[C@H](CCCC(C)C)[C@H]1CC[C@@H]2[C@@]1(CC[C@H]3[C@H]2CC[C@@H]4[C@@]3(CC[C@@H](C4)O)C)C"
    sentence = _say(cholestanol)
    assert sentence.startswith("Locked in one form (all three rings chairs)")
    assert "hydroxyl equatorial and two methyls axial" in sentence


def test_a_missing_price_that_decides_is_named() -> None:
    sentence = _say("1b-OH 2a-NO2 4a-CN")
    assert "not determined" in sentence
    assert "hydroxyl/nitro" in sentence
    assert "no price" in sentence


@pytest.mark.parametrize(
    ("medium", "words"),
    [
        ("gas", "in the gas"),
        ("nonpolar", "in nonpolar media"),
        ("protic", "in water"),
        ("CCl4", "in carbon tetrachloride"),
    ],
)
def test_an_answer_that_hangs_on_the_medium_says_for_which(medium: str, words: str) -> None:
    assert words in _say("Cl[C@@H]1CCCC[C@H]1Cl", medium=medium)


def test_a_twist_boat_that_comes_next_is_called_so() -> None:
    assert "next comes twist-boat B" in _say("1b-tBu")


def test_several_ring_systems_get_a_sentence_each() -> None:
    first, second = headlines(analyze("C[C@H]1CC[C@H](CCC2CCCCC2)CC1", medium="gas"), LOOK)
    assert first.startswith("Ring system 1 (atoms ")
    assert second.startswith("Ring system 2 (atoms ")


def test_an_equal_share_of_copies_is_one_form() -> None:
    # 3-methylspiro[5.5]undecane: the unsubstituted ring's flip gives mirror images: common practice, no source
    sentence = _say("CC1CCC2(CC1)CCCCC2")
    assert sentence.startswith("Form A (both rings chairs) and its equivalent B, methyl equatorial: 95 %")
    assert "form C, methyl axial, 1.7 kcal/mol higher" in sentence


def test_an_interval_that_includes_zero_is_not_passed_off_as_sure() -> None:
    sentence = _say("Cl[C@@H]1CCCC[C@H]1Cl")
    assert "too close to call" in sentence or "likely but not certain" in sentence


def test_units_reach_the_headline() -> None:
    (sentence,) = headlines(analyze("CC1CCCCC1"), Look(units="kJ"))
    # 1.74 kcal/mol is 7.3 kJ/mol by 4.184 kJ = 1 kcal
    assert "7.3 kJ/mol" in sentence


def test_temperature_reaches_the_headline() -> None:
    assert "at 200 K" in _say("CC1CCCCC1", temperature_K=200)


@pytest.mark.parametrize(
    ("share", "text"),
    [
        (1.0, "100 %"),
        (0.99995, "over 99.9 %"),
        (0.997, "99.7 %"),
        (0.95, "95 %"),
        (0.004, "0.4 %"),
        (0.0001, "under 0.1 %"),
    ],
)
def test_shares_get_more_digits_near_the_ends(share: float, text: str) -> None:
    assert percent(share) == text


def test_limits_of_shares() -> None:
    assert percent_range(0.95, 0.94, 0.959) == "94 to 96"
    assert percent_range(0.995, 0.988, 1.0) == "98.8 to 100"
    assert percent_range(0.002, 0.0001, 0.008) == "0 to 0.8"


@pytest.mark.parametrize(
    ("value", "text"), [(1.0, "1"), (18.89, "18.9"), (8770.4, "8770"), (87496.9, "87500"), (3.2e9, "3.2e9")]
)
def test_constants_have_three_figures(value: float, text: str) -> None:
    assert constant(value) == text


@pytest.mark.parametrize("character", "±×−–…Δαβ─")
def test_every_sign_of_ours_has_an_ascii_stand_in(character: str) -> None:
    assert Look(ascii=True).say(character).isascii()
    assert "?" not in Look(ascii=True).say(character)


def test_inverting_nitrogen_is_said() -> None:
    # the N-methyl of N-methylpiperidine is equatorial by over 2 kcal/mol: common practice, no source
    assert _say("CN1CCCCC1").startswith("Two equivalent chairs, N-methyl equatorial in each: together 99 % at 298 K")
    assert "N-H " in _say("CC1COCCN1")


def test_a_group_on_a_flat_nitrogen_is_named_as_such() -> None:
    # A(1,3) strain puts the 2-methyl of N-acyl-2-methylpiperidine axial: common practice, no source
    assert "N-acetyl" in _say("CC(=O)N1CCCCC1C")
    assert "and methyl axial" in _say("CC(=O)N1CCCCC1C")


def test_half_chairs_are_called_so() -> None:
    # 4-methylcyclohexene prefers methyl equatorial: common practice, no source
    assert _say("CC1CCC=CC1").startswith("Half-chair A, methyl equatorial: ")
