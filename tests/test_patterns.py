"""Patterns: counted against group theory, weighed against the ledger, filtered as asked."""

from __future__ import annotations

import math
from collections import Counter
from fractions import Fraction
from itertools import product

import numpy as np
import pytest
import ringstrain as rs
from ringstrain.errors import UnknownGroup, UsageError
from ringstrain.palette import find_group
from ringstrain.pattern_records import Pattern
from ringstrain.patterns import enumerate_patterns, plan_search
from ringstrain.placing import choose_multisets, make_scaffold, place_groups
from ringstrain.screening import Screener
from ringstrain.sieve import Wish, parse_comparison
from ringstrain.structure.shorthand import PARENT_RINGS, read_shorthand
from ringstrain.tables import load_tables
from ringstrain.tables.conditions import make_conditions

RINGS = (
    "cyclohexane",
    "oxane",
    "piperidine",
    "1,3-dioxane",
    "1,4-dioxane",
    "morpholine",
    "piperazine",
    "1,3-oxathiane",
)
#: One composition for each way in which up to six groups can be alike.
COMPOSITIONS = (
    "A",
    "AA",
    "AB",
    "AAA",
    "AAB",
    "ABC",
    "AAAA",
    "AABB",
    "AAAB",
    "AAABB",
    "ABCD",
    "AAAAAA",
    "AAABBB",
    "AABBCC",
)


# ---- an independent count (Burnside's lemma on cycles of sites), sharing no code with the package ----------------


def symmetry_of(elements: tuple[str, ...], *, improper: bool) -> list[tuple[tuple[int, ...], bool]]:
    """Permutations of the places of a flat ring that keep its elements, each with whether the faces change over."""
    found = []
    for start, step in product(range(6), (1, -1)):
        places = tuple((start + step * i) % 6 for i in range(6))
        if any(elements[places[i]] != elements[i] for i in range(6)):
            continue
        # a turn about the main axis keeps the faces, a turn about an axis in the plane changes them over
        for flips in (False, True):
            proper = (step == 1) != flips
            if proper or improper:
                found.append((places, flips))
    return found


def fixed_colourings(
    places: tuple[int, ...], flips: bool, elements: tuple[str, ...], groups: Counter[str], geminal: bool
) -> int:
    """How many placements of the groups one operation leaves as they are."""
    choices: list[list[Counter[str]]] = []
    seen: set[int] = set()
    for start in range(6):
        if start in seen or elements[start] not in "CN":
            continue
        cycle, place = 0, start
        while place not in seen:
            seen.add(place)
            cycle, place = cycle + 1, places[place]
        twisted = flips and cycle % 2 == 1
        nothing = [Counter[str]()]
        one = [Counter({g: cycle}) for g in groups]
        if elements[start] == "N":
            choices.append(nothing + one)
        elif geminal and twisted:  # both faces of every place of the cycle are one orbit of sites
            choices.append(nothing + [Counter({g: 2 * cycle}) for g in groups])
        elif geminal:  # the two faces are two orbits of sites
            choices.extend([nothing + one] * 2)
        else:  # at most one face of a place: none survives a twist
            choices.append(nothing if twisted else nothing + one + one)
    ways: Counter[tuple[tuple[str, int], ...]] = Counter({(): 1})
    for options in choices:
        grown: Counter[tuple[tuple[str, int], ...]] = Counter()
        for key, number in ways.items():
            for option in options:
                total = Counter(dict(key)) + option
                if all(total[g] <= groups[g] for g in total):
                    grown[tuple(sorted(total.items()))] += number
        ways = grown
    return ways[tuple(sorted(groups.items()))]


def burnside(ring: str, composition: str, *, geminal: bool, enantiomers: bool) -> int:
    """Patterns up to symmetry by Burnside's lemma."""
    elements = PARENT_RINGS[ring]
    operations = symmetry_of(elements, improper=not enantiomers)
    total = sum(fixed_colourings(p, f, elements, Counter(composition), geminal) for p, f in operations)
    count = Fraction(total, len(operations))
    assert count.denominator == 1
    return int(count)


@pytest.mark.parametrize("enantiomers", [False, True], ids=["merged", "apart"])
@pytest.mark.parametrize("geminal", [True, False], ids=["geminal", "no-geminal"])
@pytest.mark.parametrize("ring", RINGS)
def test_number_of_patterns_is_that_of_burnsides_lemma(ring: str, geminal: bool, enantiomers: bool) -> None:
    scaffold = make_scaffold(ring, load_tables())
    mirrors = list(range(8))
    for composition in COMPOSITIONS:
        chosen = tuple(sorted("ABCD".index(letter) + 1 for letter in composition))
        blocks = place_groups(scaffold, [chosen], mirrors, geminal=geminal, enantiomers=enantiomers)
        found = sum(len(block) for block in blocks)
        assert found == burnside(ring, composition, geminal=geminal, enantiomers=enantiomers), composition


def test_six_different_groups_on_cyclohexane_are_counted_too() -> None:
    scaffold = make_scaffold("cyclohexane", load_tables())
    found = sum(len(block) for block in place_groups(scaffold, [(1, 2, 3, 4, 5, 6)], list(range(7))))
    assert found == burnside("cyclohexane", "ABCDEF", geminal=True, enantiomers=False)


@pytest.mark.parametrize(
    ("groups", "geminal", "enantiomers", "count"),
    [
        # common practice, no source: 1,1-, and cis and trans 1,2-, 1,3- and 1,4-dimethylcyclohexane
        (["Me"] * 2, True, False, 7),
        # common practice, no source: trans-1,2- and trans-1,3- are chiral
        (["Me"] * 2, True, True, 9),
        # recalled: eight inositols if mirror images count once, nine in all (D- and L-chiro)
        (["OH"] * 6, False, False, 8),
        (["OH"] * 6, False, True, 9),
    ],
    ids=["dimethyl", "dimethyl-apart", "hexol", "hexol-apart"],
)
def test_numbers_chemists_know(groups: list[str], geminal: bool, enantiomers: bool, count: int) -> None:
    found = list(enumerate_patterns(groups, geminal=geminal, enantiomers=enantiomers))
    assert len(found) == count


def test_placements_add_up_to_all_labelled_placements() -> None:
    found = enumerate_patterns(["Me", "Me", "OH"], wish=Wish(rank_by="none"))
    assert sum(pattern.placements for pattern in found) == math.comb(12, 3) * 3


# ---- the kernel against the ledger -----------------------------------------------------------------------------

GROUPS = ("Me", "OH", "F", "tBu", "Cl", "Ph", "NH2", "OMe", "CN", "OAc", "iPr", "CO2Me", "D", "Br", "CF3", "NO2")
KERNEL_CASES = [
    ("cyclohexane", "nonpolar", 298.15, 700),
    ("cyclohexane", "protic", 350.0, 200),
    ("oxane", "polar", 298.15, 350),
    ("oxane", "protic", 298.15, 100),
    ("1,3-dioxane", "gas", 200.0, 150),
    ("piperidine", "nonpolar", 298.15, 200),
    ("thiane", "nonpolar", 298.15, 100),
    ("piperazine", "polar", 298.15, 100),
    ("silacyclohexane", "nonpolar", 298.15, 50),
    ("morpholine", "water", 298.15, 50),
]


def screener_of(ring: str, medium: str = "nonpolar", temperature_K: float = 298.15) -> Screener:
    tables = load_tables()
    return Screener(
        scaffold=make_scaffold(ring, tables),
        palette=tuple(find_group(name, tables) for name in GROUPS),
        tables=tables,
        conditions=make_conditions(tables, temperature_K=temperature_K, medium=medium),
    )


def random_rows(
    screener: Screener, count: int, generator: np.random.Generator
) -> np.ndarray[tuple[int, int], np.dtype[np.int16]]:
    slots = len(screener.scaffold.slots)
    rows = np.zeros((count, slots), dtype=np.int16)
    for row in rows:
        size = int(generator.integers(1, min(slots, 6) + 1))
        row[generator.choice(slots, size, replace=False)] = generator.integers(1, len(GROUPS) + 1, size)
    return rows


@pytest.mark.parametrize(("ring", "medium", "temperature_K", "count"), KERNEL_CASES)
def test_kernel_adds_what_the_ledger_adds(ring: str, medium: str, temperature_K: float, count: int) -> None:
    """2,000 random patterns in all; the ledger is the reference."""
    screener = screener_of(ring, medium, temperature_K)
    rows = random_rows(screener, count, np.random.default_rng(20))
    covered = rows[~screener.needs_analysis(rows)]
    assert len(covered) > count // 3
    energies, _, _ = screener.energies(covered)
    screen = screener.screen(covered)
    twisted = 0
    for number, row in enumerate(covered):
        structure, heads = screener.structure(row)
        result = screener.system_of(screener.analysis(structure))
        states = sorted(energies[number][np.isfinite(energies[number])])
        assert states == pytest.approx([state.energy_kcal for state in result.states], abs=1e-9)
        twisted += "twist-boat" in {shape for state in result.states for shape in state.shapes}
        gap = result.equilibrium.dG_kcal if result.equilibrium else None
        assert float(screen.dg_kcal[number]) == pytest.approx(math.nan if gap is None else gap, abs=1e-9, nan_ok=True)
        weighed = screener.weigh(result, heads)
        assert np.isnan(screen.energy_kcal[number]) == (weighed.energy_kcal is None)
        if weighed.energy_kcal is not None:
            assert screen.energy_kcal[number] == pytest.approx(weighed.energy_kcal, abs=1e-9)
            assert screen.form_share[number] == pytest.approx(weighed.form_share, abs=1e-9)
            shares = {slot: screen.axial_share[number, slot] for slot in weighed.axial_share}
            assert shares == pytest.approx(weighed.axial_share, abs=1e-9)
    assert twisted > 0


def test_kernel_cases_hold_two_thousand_patterns() -> None:
    assert sum(case[-1] for case in KERNEL_CASES) == 2000


# ---- patterns as they are handed out ---------------------------------------------------------------------------


@pytest.mark.parametrize("ring", ["cyclohexane", "oxane", "1,3-dioxane"])
def test_smiles_and_shorthand_of_a_pattern_are_one_molecule(ring: str) -> None:
    for pattern in enumerate_patterns(
        ["OH", "Me", "Cl"], ring=ring, enantiomers=True, wish=Wish(rank_by="none"), top=60
    ):
        drawn = read_shorthand(pattern.pattern, ring=ring).smiles
        ours, theirs = rs.analyze(pattern.smiles), rs.analyze(drawn)
        if pattern.smiles.count("@") == drawn.count("@"):
            assert pattern.smiles == drawn
        for analysis in (ours, theirs):
            equilibrium = analysis.ring_systems[0].equilibrium
            assert equilibrium is not None
            assert equilibrium.dG_kcal == pytest.approx(pattern.dG_kcal, abs=1e-9)


def test_enantiomers_apart_have_different_smiles() -> None:
    found = [p.smiles for p in enumerate_patterns(["Me", "OH"], enantiomers=True)]
    assert len(set(found)) == len(found)


def test_a_lone_centre_gets_no_configuration() -> None:
    assert [p.smiles for p in enumerate_patterns(["Me"])] == ["CC1CCCCC1"]


def test_patterns_come_ranked_and_numbered() -> None:
    found = list(enumerate_patterns(["Me", "Me", "OH"]))
    energies = [p.energy_kcal for p in found if p.energy_kcal is not None]
    assert energies == sorted(energies)
    assert [p.rank for p in found] == list(range(1, len(found) + 1))


def test_the_all_equatorial_isomer_leads_among_1_3_5_trimethylcyclohexanes() -> None:
    # common practice, no source: the all-cis isomer puts all three groups equatorial, the other one group axial
    first, second = (p for p in enumerate_patterns(["Me"] * 3) if p.positions == (1, 3, 5))
    assert {group.face for group in first.groups} in ({"up"}, {"down"})
    assert not any(group.axial for group in first.groups)
    assert sum(group.axial for group in second.groups) == 1


def test_as_dict_names_what_the_record_holds() -> None:
    pattern = next(enumerate_patterns(["Me", "OH"]))
    document = pattern.as_dict()
    assert document["kind"] == "pattern"
    assert document["dG_kcal"] == pattern.dG_kcal
    assert [group["locant"] for group in document["groups"]] == [group.locant for group in pattern.groups]


# ---- filters -----------------------------------------------------------------------------------------------------


def share_of(pattern: Pattern, group: str) -> float:
    """Largest axial share of a group, from the SMILES alone."""
    states = rs.analyze(pattern.smiles).ring_systems[0].states
    oxygens = [i for i, atom in enumerate(rs.read(pattern.smiles).atoms) if atom.element == group]
    return max(sum(s.population or 0.0 for s in states if oxygen in s.axial) for oxygen in oxygens)


def test_axial_filter_keeps_just_the_patterns_whose_analysis_says_so() -> None:
    everything = list(enumerate_patterns(["Me", "Me", "Me", "OH"]))
    wanted = {p.smiles for p in everything if share_of(p, "O") >= 0.95}
    found = {p.smiles for p in enumerate_patterns(["Me", "Me", "Me", "OH"], wish=Wish(axial=("OH>=95%",)))}
    assert found == wanted
    assert 0 < len(found) < len(everything)


def test_filters_combine() -> None:
    wish = Wish(equatorial=("tBu",), gap=">=3", locked=0.99, trans=("OH,Me",), rank_by="bias")
    found = list(enumerate_patterns(["tBu", "OH", "Me"], wish=wish, geminal=False))
    assert found
    for pattern in found:
        faces = {group.group: group.face for group in pattern.groups}
        assert faces["OH"] != faces["Me"]
        assert pattern.dG_kcal is not None
        assert pattern.dG_kcal >= 3
        assert pattern.population is not None
        assert pattern.population >= 0.99
        assert not any(group.axial for group in pattern.groups if group.group == "tBu")
        assert len(set(pattern.positions)) == 3


def test_cis_by_position_holds_for_every_numbering_of_the_ring() -> None:
    found = list(enumerate_patterns(["Me", "OH"], wish=Wish(cis=("1,2",))))
    assert len(found) == 1
    assert rs.read(found[0].smiles).smiles == read_shorthand("1b-Me 2b-OH").smiles or found[0].placements == 24


def test_ranking_by_axial_share_puts_the_surest_first() -> None:
    found = list(enumerate_patterns(["Me", "Me", "OH"], wish=Wish(rank_by="axial:OH")))
    shares = [share_of(pattern, "O") for pattern in found]
    assert shares == pytest.approx(sorted(shares, reverse=True), abs=1e-9)


def test_top_is_the_head_of_the_whole_list() -> None:
    whole = [p.smiles for p in enumerate_patterns(["Me", "OH", "F"])]
    assert [p.smiles for p in enumerate_patterns(["Me", "OH", "F"], top=5)] == whole[:5]


def test_choosing_counts_every_multiset() -> None:
    search = plan_search(["tBu"], choose_from=["Me", "OH"], count=(1, 2))
    # {Me}, {OH}, {Me,Me}, {Me,OH}, {OH,OH}, each with tert-butyl
    compositions = {tuple(sorted(g.group for g in p.groups)) for p in search.run()}
    assert len(compositions) == 5
    expected = sum(
        burnside("cyclohexane", c, geminal=True, enantiomers=False) for c in ("AB", "AB", "ABB", "ABC", "ABB")
    )
    assert search.tally.enumerated == expected


def test_choose_multisets_is_combinations_with_repetition() -> None:
    assert len(choose_multisets([1, 2, 3], range(1, 4))) == sum(math.comb(3 + k - 1, k) for k in range(1, 4))


def test_a_marked_scaffold_takes_groups_on_its_marks_only() -> None:
    found = list(enumerate_patterns(["OH"], ring="[CH2:1]1[CH2:2]CCCC1=O"))
    canonical = {rs.read(text).smiles for text in ("O=C1CCCC[C@@H]1O", "O=C1CCC[C@H](O)C1")}
    mirrored = {rs.read(text).smiles for text in ("O=C1CCCC[C@H]1O", "O=C1CCC[C@@H](O)C1")}
    assert {p.smiles for p in found} <= canonical | mirrored
    assert len(found) == 2


@pytest.mark.parametrize(
    ("groups", "options", "error"),
    [
        (["tBx"], {}, UnknownGroup),
        ([], {}, UsageError),
        (["Me"], {"ring": "cyclohexene"}, UsageError),
        (["Me"], {"ring": "C1CCCCC1"}, UsageError),
        (["Me"], {"wish": Wish(axial=("OH",))}, UsageError),
        (["Me"], {"wish": Wish(axial=("Me>=2",))}, UsageError),
        (["Me"], {"wish": Wish(gap="2")}, UsageError),
        (["Me"], {"wish": Wish(cis=("1",))}, UsageError),
        (["Me"], {"wish": Wish(rank_by="size")}, UsageError),
        (["Me"], {"wish": Wish(locked=1.5)}, UsageError),
        (["Me"], {"top": 0}, UsageError),
        (["*=C"], {}, UsageError),
        (["Me"] * 13, {}, UsageError),
        (["Me", "Et", "OH", "F", "Cl", "Br", "I", "CN"], {}, UsageError),
    ],
)
def test_what_makes_no_sense_is_refused_with_a_next_step(
    groups: list[str], options: dict[str, object], error: type[Exception]
) -> None:
    with pytest.raises(error) as caught:
        list(enumerate_patterns(groups, **options))  # type: ignore[arg-type]
    assert str(caught.value).endswith((".", "?"))


@pytest.mark.parametrize(
    ("text", "name", "sign", "value"),
    [("OH>=0.9", "OH", ">=", 0.9), (" OH < 5 %", "OH", "<", 0.05), (">=2", "", ">=", 2.0), ("tBu", "tBu", "", 0.0)],
)
def test_conditions_are_read(text: str, name: str, sign: str, value: float) -> None:
    condition = parse_comparison(text)
    assert (condition.name, condition.sign) == (name, sign)
    assert condition.value == pytest.approx(value)
