"""`ringstrain nmr`: the document, labels, averages, multiplets, populations from spectra, freezing out."""

from __future__ import annotations

import csv
import io
import json
from typing import Any

import pytest
from ringstrain.analysis import analyze
from ringstrain.cli.border import run
from ringstrain.consequences.multiplets import read_multiplet
from ringstrain.consequences.nmr import Spectrum, predict_nmr, usual_spectrometer
from ringstrain.tables.spectra import load_spectra

Capture = pytest.CaptureFixture[str]
MENTHOL = "C[C@@H]1CC[C@@H](C(C)C)[C@H](O)C1"
TBU_TRANS = "CC(C)(C)[C@H]1CC[C@H](O)CC1"


def document(capsys: Capture, *arguments: str) -> dict[str, Any]:
    assert run(["nmr", *arguments, "--json"]) == 0
    loaded: dict[str, Any] = json.loads(capsys.readouterr().out)
    return loaded


def spectrum(text: str, **options: Any) -> Spectrum:
    return predict_nmr(analyze(text, **options))


# ---- the document --------------------------------------------------------------------------------------------


def test_document_has_one_entry_for_each_ring_hydrogen(capsys: Capture) -> None:
    found = document(capsys, "CC1CCCCC1")
    assert (found["schema"], found["kind"]) == ("ringstrain/1", "nmr")
    # methylcyclohexane: one CH and five CH2 in the ring
    assert len(found["hydrogens"]) == 11
    assert sorted({h["atom"] for h in found["hydrogens"]}) == [1, 2, 3, 4, 5, 6]


def test_labels_are_the_atom_number_from_one_and_the_favoured_position(capsys: Capture) -> None:
    found = document(capsys, "CC1CCCCC1")
    labels = {h["label"]: h for h in found["hydrogens"]}
    assert {"H2ax", "H3ax", "H3eq"} <= set(labels)
    assert labels["H2ax"]["orientation"]["A"] == "ax"
    assert labels["H2ax"]["orientation"]["B"] == "eq"
    for hydrogen in found["hydrogens"]:
        assert hydrogen["label"].startswith(f"H{hydrogen['atom'] + 1}")


def test_isoclinal_hydrogens_of_one_carbon_are_told_apart_by_primes() -> None:
    # the 1,4-dione is a twist-boat, with isoclinal carbons on its axis (common practice, no source)
    labels = [s.label for s in spectrum("O=C1CCC(=O)CC1").signals]
    assert len(set(labels)) == len(labels) == 8


def test_couplings_name_their_partner_and_stand_on_both_ends() -> None:
    found = spectrum(MENTHOL)
    by_label = {s.label: s for s in found.signals}
    for signal in found.signals:
        for coupling in signal.couplings:
            if coupling.partner is None:
                continue
            back = next(c for c in by_label[coupling.label].couplings if c.label == signal.label)
            assert back.per_state == coupling.per_state
            assert back.average_Hz == coupling.average_Hz
            assert coupling.to in analyze(MENTHOL).structure.neighbours[signal.hydrogen.atom]


def test_a_locked_ring_has_no_freezing_out(capsys: Capture) -> None:
    # trans-decalin cannot flip: common practice, no source
    assert document(capsys, "C1CC[C@@H]2CCCC[C@H]2C1")["freezing_out"] is None


def test_a_structure_that_fails_gives_an_error_document(capsys: Capture) -> None:
    assert run(["nmr", "c1ccccc1", "--json"]) == 4
    found = json.loads(capsys.readouterr().out)
    assert (found["kind"], found["error"]["family"]) == ("nmr", "out-of-scope")


def test_several_structures_are_refused(capsys: Capture) -> None:
    assert run(["nmr", "CC1CCCCC1", "C1CCCCC1"]) == 2


def test_plain_has_one_row_for_each_coupling(capsys: Capture) -> None:
    assert run(["nmr", "CC1CCCCC1", "--format", "plain"]) == 0
    rows = list(csv.DictReader(io.StringIO(capsys.readouterr().out), delimiter="\t", quoting=csv.QUOTE_NONE))
    own = [r for r in rows if r["hydrogen"] == "H2ax"]
    assert sorted(r["partner"] for r in own) == ["CH3 1", "H3ax", "H3eq", "H7ax", "H7eq"]
    assert {r["partners"] for r in own if r["partner"] == "CH3 1"} == {"3"}


@pytest.mark.parametrize("smiles", ["c1cc[nH]c1C1CCCCC1", MENTHOL])
def test_table_keeps_the_brackets_of_a_structure(smiles: str, capsys: Capture) -> None:
    assert run(["nmr", smiles, "--format", "table"]) == 0
    assert smiles in capsys.readouterr().out


def test_ascii_stays_ascii(capsys: Capture) -> None:
    assert run(["nmr", "OC1CCCCC1", "--format", "table", "--ascii"]) == 0
    assert capsys.readouterr().out.isascii()


# ---- multiplets ----------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("splittings", "geminal", "word"),
    [
        ([10.8, 10.8, 4.2], False, "td"),
        ([11.0, 11.0, 4.3, 4.3], False, "tt"),
        ([2.8, 2.8, 2.8, 2.8], False, "br s"),
        ([11.4, 4.8], False, "dd"),
        ([12.3, 11.4], True, "q"),
        ([9.5, 9.3], False, "t"),
        ([3.7], False, "d"),
        ([], False, "s"),
        ([7.0, 7.0, 7.0], False, "q"),
        ([8.1, 0.9], False, "br d"),
    ],
)
def test_words_are_those_a_chemist_would_choose(splittings: list[float], geminal: bool, word: str) -> None:
    """Common practice, no source."""
    found = read_multiplet(splittings, geminal=geminal, tables=load_spectra())
    assert found.word == word
    assert found.width_Hz == pytest.approx(sum(splittings))


def test_carbinol_hydrogens_look_as_in_every_report() -> None:
    """trans-4-tert-Butylcyclohexanol tt, cis a narrow signal; axial wide, equatorial narrow (common practice)."""
    axial = spectrum(TBU_TRANS).signal("H8ax").multiplet
    equatorial = spectrum("CC(C)(C)[C@H]1CC[C@@H](O)CC1").signal("H8eq").multiplet
    assert axial is not None
    assert equatorial is not None
    assert (axial.word, equatorial.word) == ("tt", "br s")
    assert 28 <= axial.width_Hz <= 34
    assert 9 <= equatorial.width_Hz <= 14


def test_menthol_carbinol_is_a_td() -> None:
    """Widely reported: 3.41 ppm, td, 10.4 and 4.3 Hz (recalled)."""
    multiplet = spectrum(MENTHOL).signal("H9ax").multiplet
    assert multiplet is not None
    assert multiplet.word == "td"
    assert multiplet.splittings_Hz == pytest.approx((10.4, 10.4, 4.3), abs=1.1)


# ---- equivalence ---------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("smiles", "sets"),
    [
        pytest.param("C1CCCCC1", 1, id="cyclohexane"),
        pytest.param("CC1CCCCC1", 7, id="methylcyclohexane"),
        pytest.param("CC1(C)CCCCC1", 3, id="1,1-dimethyl"),
        pytest.param("C[C@H]1CC[C@@H](C)CC1", 3, id="cis-1,4-dimethyl"),
        pytest.param("C[C@H]1CC[C@H](C)CC1", 3, id="trans-1,4-dimethyl"),
        pytest.param("C[C@@H]1CCCC[C@H]1C", 5, id="trans-1,2-dimethyl"),
        pytest.param("C[C@@H]1CCCC[C@@H]1C", 5, id="cis-1,2-dimethyl"),
        pytest.param("C[C@H]1CCC[C@@H](C)C1", 7, id="cis-1,3-dimethyl"),
        pytest.param("C[C@@H]1CCC[C@@H](C)C1", 5, id="trans-1,3-dimethyl"),
        pytest.param("C1CCOCC1", 3, id="oxane"),
        pytest.param("C1CC[C@H]2CCCC[C@H]2C1", 5, id="cis-decalin"),
        pytest.param("C1CC[C@@H]2CCCC[C@H]2C1", 5, id="trans-decalin"),
        pytest.param("O1CCOCC1", 1, id="1,4-dioxane"),
        pytest.param("CN1CCCCC1", 3, id="N-methylpiperidine"),
    ],
)
def test_exchange_and_symmetry_leave_as_many_kinds_of_hydrogen_as_point_groups_say(smiles: str, sets: int) -> None:
    """Counted by hand from the average symmetry of the flipping ring (common practice, no source).

    Enantiotopic hydrogens count as one kind.
    """
    found = spectrum(smiles)
    assert len({s.hydrogen.alike for s in found.signals}) == sets


def test_alike_hydrogens_have_the_same_averages() -> None:
    for smiles in ("C[C@@H]1CCCC[C@@H]1C", "CC1CCCCC1", "C1CC[C@H]2CCCC[C@H]2C1", "O[C@@H]1CCCC[C@H]1O"):
        found = spectrum(smiles)
        for signal in found.signals:
            patterns = {tuple(round(j, 6) for j in sorted(s.splittings() or ())) for s in found.alike(signal)}
            assert len(patterns) == 1


def test_couplings_of_alike_hydrogens_are_not_observable() -> None:
    found = spectrum("C1CCCCC1")
    assert not any(c.observable for s in found.signals for c in s.couplings)
    assert all(s.multiplet is not None and s.multiplet.word == "s" for s in found.signals)


# ---- averages ------------------------------------------------------------------------------------------------


def test_averages_are_weighted_by_populations() -> None:
    found = spectrum("CC1CCCCC1")
    shares = {s.id: s.population or 0.0 for s in found.analysis.ring_systems[0].states}
    for signal in found.signals:
        for c in signal.couplings:
            expected = sum(shares[state] * (value or 0.0) for state, value in c.per_state)
            assert c.average_Hz == pytest.approx(expected)


def test_error_of_an_average_grows_where_populations_are_unsure() -> None:
    lopsided, even = spectrum("CC(C)C1CCCCC1"), spectrum("O[C@@H]1CCCC[C@H]1Br")

    def worst(found: Spectrum) -> float:
        return max(c.uncertainty_Hz or 0.0 for s in found.signals for c in s.couplings)

    assert worst(lopsided) < 0.6
    assert worst(even) > 1.0


def test_error_from_populations_is_the_slope_times_the_error_of_the_free_energy() -> None:
    found = spectrum("O[C@@H]1CCCC[C@H]1Br")
    result = found.analysis.ring_systems[0]
    equilibrium = result.equilibrium
    assert equilibrium is not None
    assert equilibrium.uncertainty_kcal is not None
    first, second = (s.population or 0.0 for s in result.states[:2])
    coupling = found.signal("H2ax").couplings[0]
    gap = abs((coupling.per_state[0][1] or 0.0) - (coupling.per_state[1][1] or 0.0))
    spread = first * second * gap * equilibrium.uncertainty_kcal / (0.0019872043 * 298.15)
    assert coupling.uncertainty_Hz == pytest.approx((spread**2 + 0.25) ** 0.5, rel=0.02)


def test_flat_neighbours_double_the_error() -> None:
    found = spectrum("O=C1CCCCC1")
    beside = next(c for c in found.signal("H4ax").couplings if c.label == "H3ax")
    flat = [c for s in found.signals for c in s.couplings if c.doubled]
    assert flat
    # one standard deviation, 0.5 Hz doubled
    assert all(c.uncertainty_Hz == pytest.approx(1.0) for c in flat if c.uncertainty_Hz)
    assert beside.uncertainty_Hz == pytest.approx(1.0 if beside.doubled else 0.5)


def test_an_amide_nitrogen_in_the_ring_doubles_the_error_one_in_a_side_chain_does_not() -> None:
    inside = spectrum("CC(=O)N1CCCCC1C")
    assert all(c.doubled for c in inside.signal("H5eq").couplings)
    outside = spectrum("CC(=O)N[C@@H]1CCCC[C@H]1O")
    assert not any(c.doubled for s in outside.signals for c in s.couplings)


def test_an_unpriced_contact_leaves_couplings_per_form_only() -> None:
    found = spectrum("1b-OH 2a-NO2 4a-CN")
    coupling = next(c for s in found.signals for c in s.couplings)
    assert coupling.average_Hz is None
    assert all(value is not None for _, value in coupling.per_state)
    assert any("without a price" in note for note in found.notes)


def test_a_high_state_with_an_unpriced_contact_does_not_spoil_the_averages() -> None:
    """No table knows mercury syn-axial to an alkyl, but the rest of the triaxial chair costs 5 kcal/mol already."""
    found = spectrum("C[C@@H]1C[C@H]([Hg]Cl)C[C@H](C(C)C)C1")
    states = found.analysis.ring_systems[0].states
    unpriced = [place for place, state in enumerate(states) if state.lower_bound]
    assert unpriced
    assert all(state.population is None for state in states)
    shares = found.shares[0]
    assert shares is not None
    assert sum(shares) == pytest.approx(1.0)
    assert all(shares[place] == 0.0 for place in unpriced)
    assert any(c.average_Hz is not None for s in found.signals for c in s.couplings)


def test_an_element_without_electronegativity_gives_no_number() -> None:
    """Selenium stands in no table of the equation: missing is missing."""
    found = spectrum("C1CC[Se]CC1")
    beside = next(s for s in found.signals if s.hydrogen.atom == 2)
    assert all(value is None for c in beside.couplings for _, value in c.per_state)
    assert any("electronegativity" in note for note in found.notes)


def test_methyl_groups_split_with_seven_hertz_and_other_side_chains_are_named() -> None:
    found = spectrum(MENTHOL)
    methine = found.signal("H2ax")
    assert [c.average_Hz for c in methine.couplings if c.count == 3] == [7.0]
    assert [u.atom for u in found.signal("H5ax").unpredicted] == [5]


def test_vinyl_hydrogens_are_listed_but_not_predicted() -> None:
    found = spectrum("C1=CCCCC1")
    vinyl = next(s for s in found.signals if s.hydrogen.atom == 0)
    assert vinyl.couplings == ()
    assert vinyl.multiplet is None
    assert {u.atom for u in vinyl.unpredicted} == {1, 5}


def test_deuterium_is_no_hydrogen_of_the_spectrum() -> None:
    assert len(spectrum("[2H]C1CCCCC1").signals) == 11


def test_a_temperature_range_shows_how_averages_move(capsys: Capture) -> None:
    assert run(["nmr", "CC1CCCCC1", "-T", "200:400:100", "--json"]) == 0
    lines = [json.loads(line) for line in capsys.readouterr().out.splitlines()]
    averages = []
    for line in lines:
        signal = next(h for h in line["hydrogens"] if h["label"] == "H2ax")
        averages.append(next(c["average_Hz"] for c in signal["couplings"] if c["label"] == "H3ax"))
    assert averages == sorted(averages, reverse=True)
    assert run(["nmr", "CC1CCCCC1", "-T", "200:400:100", "--format", "table"]) == 0
    assert "400 K" in capsys.readouterr().out


# ---- populations from spectra --------------------------------------------------------------------------------


def test_an_average_between_the_model_values_gives_populations(capsys: Capture) -> None:
    found = document(capsys, "O[C@@H]1CCCC[C@H]1Br", "--observed-average", "H2-H7=7.0")
    (estimate,) = found["populations_from_averages"]
    first, second = estimate["model_values"]
    assert estimate["share"] == pytest.approx((7.0 - second) / (first - second), abs=1e-5)
    assert estimate["K_low"] < estimate["K"] < estimate["K_high"]


@pytest.mark.parametrize(
    ("value", "verdict"), [("12.9", "outside the model values"), ("9.3", "beyond 95:5"), ("3.3", "beyond 95:5")]
)
def test_out_of_reach_it_says_so_instead_of_a_number(value: str, verdict: str, capsys: Capture) -> None:
    found = document(capsys, "O[C@@H]1CCCC[C@H]1Br", "--observed-average", f"H2-H7={value}")
    (estimate,) = found["populations_from_averages"]
    assert estimate["verdict"] == verdict
    assert estimate["share"] is estimate["K"] is estimate["dG_kcal"] is None
    assert estimate["reason"]


def test_shifts_take_model_values(capsys: Capture) -> None:
    # cyclohexanol between the 4-tert-butyl models, 3.52 and 4.03 ppm (student spectra, assignment common practice)
    found = document(capsys, "OC1CCCCC1", "--observed-average", "H2=3.62", "--models", "3.52,4.03")
    (estimate,) = found["populations_from_averages"]
    assert estimate["unit"] == "ppm"
    assert estimate["share"] == pytest.approx(0.804, abs=0.001)


def test_a_width_gives_populations_too(capsys: Capture) -> None:
    """x = (W - W eq)/(W ax - W eq) with the widths worked out from the equation, 32.2 and 12.0 Hz for X = OH."""
    found = document(capsys, "OC1CCCCC1", "--observed-average", "W(H2)=28")
    (estimate,) = found["populations_from_averages"]
    assert estimate["model_values"] == [pytest.approx(32.2, abs=0.06), pytest.approx(12.0, abs=0.06)]
    assert estimate["share"] == pytest.approx((28 - 12.0) / (32.2 - 12.0), abs=0.005)
    # four couplings of 0.5 Hz each
    assert estimate["model_uncertainties"] == [pytest.approx(1.0)] * 2


def test_a_coupling_between_alike_hydrogens_is_never_used(capsys: Capture) -> None:
    assert run(["nmr", "Cl[C@@H]1CCCC[C@H]1Cl", "--observed-average", "H2-H7=7"]) == 2
    assert "alike" in capsys.readouterr().err


@pytest.mark.parametrize(
    "arguments",
    [
        ["OC1CCCCC1", "--observed-average", "H2=3.62"],
        ["OC1CCCCC1", "--observed-average", "W(H3)=20"],
        ["OC1CCCCC1", "--observed-average", "W(H2-H3)=20"],
        ["OC1CCCCC1", "--observed-average", "7.1"],
        ["OC1CCCCC1", "--observed-average", "nonsense"],
        ["OC1CCCCC1", "--observed-average", "H2-H9=3"],
        ["OC1CCCCC1", "--observed-average", "H2-H4=3"],
        ["OC1CCCCC1", "--observed-average", "H2-H3=5"],
        ["OC1CCCCC1", "--models", "1,2"],
        ["OC1CCCCC1", "--observed-average", "H2-H3ax=5", "--models", "1"],
        ["C1CCCCC1", "--observed-average", "H1ax-H2ax=5"],
        ["C1CC[C@@H]2CCCC[C@H]2C1", "--observed-average", "H1ax-H2ax=5"],
        ["OC1CCCCC1", "--spectrometer", "-1"],
        ["OC1CCCCC1", "--gap", "nan"],
    ],
)
def test_a_question_that_makes_no_sense_is_refused(arguments: list[str], capsys: Capture) -> None:
    assert run(["nmr", *arguments]) == 2
    assert capsys.readouterr().err.strip()


# ---- freezing out --------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("smiles", "ring", "barrier_kcal"),
    [
        ("C1CCOCC1", "oxane", 10.3),
        ("C1CCSCC1", "thiane", 9.4),
        ("C1CCNCC1", "piperidine", 10.4),
        ("C1COCOC1", "1,3-dioxane", 9.9),
        ("C1COCCO1", "1,4-dioxane", 9.7),
        ("C1CSCSC1", "1,3-dithiane", 10.3),
        ("C1OCOCO1", "1,3,5-trioxane", 10.9),
        ("C1=CCCCC1", "cyclohexene", 5.3),
        ("O=C1CCCCC1", "cyclohexanone", 4.0),
        ("C1CC[C@H]2CCCC[C@H]2C1", "cis-decalin", 12.6),
    ],
)
def test_barriers_are_those_published_for_the_ring(smiles: str, ring: str, barrier_kcal: float) -> None:
    """Lambert et al. 1973; Anet and co-workers 1965-1973; Friebolin 1962; Dalling, Grant, Johnson 1971 (recalled)."""
    block = spectrum(smiles).freezing[0]
    assert block is not None
    assert block.barrier is not None
    assert block.barrier.ring == ring
    assert (block.barrier_kcal or 0.0) + (block.reverse_barrier_kcal or 0.0) == pytest.approx(
        2 * barrier_kcal, abs=0.11
    )


def test_a_ring_without_a_tabulated_barrier_says_so() -> None:
    block = spectrum("C1CC[Si](C)(C)CC1").freezing[0]
    assert block is not None
    assert block.barrier is None
    assert block.coalescence_K is None
    assert "No barrier" in block.remark


def test_a_wider_gap_coalesces_at_a_higher_temperature() -> None:
    rows = load_spectra()
    found = []
    for gap_Hz in (50.0, 100.0, 400.0):
        watched = usual_spectrometer(rows, gap_Hz=gap_Hz)
        block = predict_nmr(analyze("ClC1CCCCC1"), spectrometer=watched).freezing[0]
        assert block is not None
        assert block.coalescence_K is not None
        assert block.coalescence_low_K is not None
        assert block.coalescence_high_K is not None
        assert block.coalescence_low_K < block.coalescence_K < block.coalescence_high_K
        found.append(block.coalescence_K)
    assert found == sorted(found)


def test_barriers_of_the_two_directions_differ_by_the_free_energy() -> None:
    block = spectrum("ClC1CCCCC1").freezing[0]
    assert block is not None
    assert (block.barrier_kcal or 0.0) - (block.reverse_barrier_kcal or 0.0) == pytest.approx(block.dG_kcal)
    assert "chair to chair" in block.convention


def test_the_cold_spectrum_integrates_to_the_populations_at_180_kelvin() -> None:
    block = spectrum("ClC1CCCCC1").freezing[0]
    assert block is not None
    states = analyze("ClC1CCCCC1", temperature_K=180.0).ring_systems[0].states
    assert [f.share for f in block.frozen[:2]] == [pytest.approx(s.population) for s in states[:2]]
    assert all(f.visible for f in block.frozen[:2])


def test_a_minor_form_below_one_percent_is_not_promised() -> None:
    block = spectrum("CC1CCCCC1").freezing[0]
    assert block is not None
    # 0.6 % axial near 173 K for A = 1.74 (worked by hand)
    assert [f.visible for f in block.frozen] == [True, False]
