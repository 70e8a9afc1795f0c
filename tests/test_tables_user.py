"""A user's own values: they win, they are marked, and their mistakes are pointed at."""

from __future__ import annotations

from pathlib import Path

import pytest
from ringstrain.analysis import analyze
from ringstrain.errors import InputError
from ringstrain.tables import Tables, load_tables
from ringstrain.tables.user import YOUR_SOURCE, load_user_tables


def write(tmp_path: Path, text: str, *, encoding: str = "utf-8") -> Path:
    path = tmp_path / "mine.csv"
    path.write_bytes(text.encode(encoding))
    return path


def test_own_a_value_wins_and_is_marked(tmp_path: Path) -> None:
    tables = load_user_tables(write(tmp_path, "table,group,value,uncertainty\navalues,Me,2.5,0.2\n"), load_tables())
    system = analyze("CC1CCCCC1", tables=tables).ring_systems[0]
    line = system.states[1].lines[0]
    assert system.equilibrium is not None
    assert system.equilibrium.dG_kcal == pytest.approx(2.5)
    assert (line.known_by, line.source) == ("yours", YOUR_SOURCE)
    assert line.uncertainty_kcal == pytest.approx(0.2)
    assert YOUR_SOURCE in tables.sources


def test_our_tables_stay_as_they_are(tmp_path: Path) -> None:
    base = load_tables()
    rivals = base.rivals("avalues", "methyl")
    tables = load_user_tables(write(tmp_path, "table,group,value\navalues,*C(C)(C)CC,5\navalues,Me,9\n"), base)
    assert base.rivals("avalues", "methyl") == rivals
    assert base.find_group("*C(C)(C)CC") is None
    assert tables.revision != base.revision
    # A methyl group costs 1.74 kcal/mol, booth-everett-1980.
    system = analyze("CC1CCCCC1", tables=base).ring_systems[0]
    assert system.equilibrium is not None
    assert system.equilibrium.dG_kcal == pytest.approx(1.74, abs=0.01)


def test_kilojoules(tmp_path: Path) -> None:
    text = "table,group,value,unit,uncertainty\navalues,methyl,10.46,kJ/mol,4.184\n"
    tables = load_user_tables(write(tmp_path, text), load_tables())
    claim = next(c for c in tables.rivals("avalues", "methyl") if c.known_by == "yours")
    # Thermochemical calorie, exact: 4.184 kJ.
    assert claim.value == pytest.approx(2.5)
    assert claim.uncertainty == pytest.approx(1.0)
    assert "10.46 kJ/mol" in claim.note


def test_medium_of_the_row_limits_it(tmp_path: Path) -> None:
    tables = load_user_tables(write(tmp_path, "table,group,value,medium\navalues,chloro,3,protic\n"), load_tables())
    water = analyze("ClC1CCCCC1", tables=tables, medium="protic").ring_systems[0].states[1]
    hexane = analyze("ClC1CCCCC1", tables=tables, medium="nonpolar").ring_systems[0].states[1]
    assert water.energy_kcal == pytest.approx(3.0)
    assert hexane.energy_kcal < 1.0


def test_new_group_by_smiles(tmp_path: Path) -> None:
    text = "table,group,value,uncertainty\navalues,*C(C)(C)CC,5.1,0.3\n"
    tables = load_user_tables(write(tmp_path, text), load_tables())
    line = analyze("CCC(C)(C)[C@H]1CC[C@@H](C)CC1", tables=tables).ring_systems[0].states[-1].lines[0]
    assert (line.groups, line.value_kcal, line.known_by) == (("*C(C)(C)CC",), 5.1, "yours")


def test_known_group_by_smiles_is_that_group(tmp_path: Path) -> None:
    # Written another way than groups.csv writes it.
    text = "table,group,value\navalues,CC(*)C,3.3\n"
    tables = load_user_tables(write(tmp_path, text), load_tables())
    assert any(c.known_by == "yours" for c in tables.rivals("avalues", "isopropyl"))
    assert len(tables.groups) == len(load_tables().groups)


@pytest.mark.parametrize("order", ["methyl,hydroxy", "hydroxy,methyl", "Me,OH"])
def test_own_pair_term_in_any_order(tmp_path: Path, order: str) -> None:
    text = f"table,group_x,group_y,value,uncertainty\ngauche,{order},1.25,0.1\n"
    tables = load_user_tables(write(tmp_path, text), load_tables())
    state = analyze("C[C@@H]1CCCC[C@H]1O", tables=tables).ring_systems[0].states[0]
    line = next(item for item in state.lines if item.rule == "vicinal gauche")
    assert (line.value_kcal, line.known_by) == (1.25, "yours")


def test_own_syn_axial_contact_is_the_whole_contact(tmp_path: Path) -> None:
    text = "table,group_x,group_y,value\nsyndiaxial,methyl,methyl,4.0\n"
    tables = load_user_tables(write(tmp_path, text), load_tables())
    states = analyze("C[C@H]1CCC[C@@H](C)C1", tables=tables).ring_systems[0].states
    flipped = next(state for state in states if state.shapes == ("chair",) and len(state.axial) == 2)
    # Two A-values (booth-everett-1980, 1.74) and the contact less the two X//H shares it replaces.
    assert flipped.energy_kcal == pytest.approx(2 * 1.74 + 4.0 - 1.74, abs=0.02)


@pytest.mark.parametrize(("order", "sign"), [("ethyl,methyl", 1), ("methyl,ethyl", -1)])
def test_own_geminal_value_weighs_on_the_chair_with_the_first_group_axial(
    tmp_path: Path, order: str, sign: int
) -> None:
    def gap(tables: Tables) -> float:
        states = analyze("CCC1(C)CCCCC1", tables=tables).ring_systems[0].states
        axial = {state.axial[0]: state.energy_kcal for state in states if state.shapes == ("chair",)}
        # Atom 1 is the CH2 of ethyl, atom 3 the methyl.
        return axial[1] - axial[3]

    text = f"table,group_x,group_y,value\ngeminal,{order},1.5\n"
    own = load_user_tables(write(tmp_path, text), load_tables())
    assert gap(own) - gap(load_tables()) == pytest.approx(sign * 1.5)


def test_own_heteroring_value(tmp_path: Path) -> None:
    text = "table,group,ring,position,value,uncertainty\nheteroring,methyl,oxane,2,3.5,0.2\n"
    tables = load_user_tables(write(tmp_path, text), load_tables())
    system = analyze("C[C@@H]1CCCCO1", tables=tables).ring_systems[0]
    assert system.equilibrium is not None
    assert system.equilibrium.dG_kcal == pytest.approx(3.5)
    assert system.states[1].lines[0].known_by == "yours"


def test_spreadsheet_export_is_accepted(tmp_path: Path) -> None:
    text = "table,group,value\r\navalues, methyl ,2.5\r\n\r\n"
    tables = load_user_tables(write(tmp_path, text, encoding="utf-8-sig"), load_tables())
    assert any(c.known_by == "yours" for c in tables.rivals("avalues", "methyl"))


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("table,group,value\navalues,Me,high\n", ("line 2, column value", "'high' is no number")),
        ("table,group,value\navalues,Me,nan\n", ("line 2, column value", "no number")),
        ("table,group,value\navalues,Me,\n", ("line 2, column value", "empty")),
        ("table,group,value\navalues,Methly,2\n", ("line 2, column group", "did you mean ethyl or methyl")),
        ("table,group,value\navalues,*C(C,2\n", ("line 2, column group", "is no group")),
        ("table,group,value\navalues,*CC*,2\n", ("line 2, column group", "is no group")),
        ("table,group,value\nnmr,Me,2\n", ("line 2, column table", "avalues, gauche")),
        ("table,group,value,unit\navalues,Me,2,eV\n", ("line 2, column unit", "kJ/mol")),
        ("table,group,value,medium\navalues,Me,2,oil\n", ("line 2, column medium", "nonpolar")),
        ("table,group,value,uncertainty\navalues,Me,2,-1\n", ("line 2, column uncertainty",)),
        ("table,group_x,group_y,value\ngauche,Me,,2\n", ("line 2, column group_y", "needs")),
        ("table,group,value\ngauche,Me,2\n", ("line 2, column group_x", "column group:")),
        ("table,group,ring,position,value\nheteroring,Me,oxan,2,3\n", ("line 2, column ring", "oxane")),
        ("table,group,ring,position,value\nheteroring,Me,oxane,7,3\n", ("line 2, column position",)),
        ("table,group,value\navalues,Me,1\navalues,methyl,2\n", ("line 3", "stands in line 2")),
        ("table,group,value\navalues,Me\n", ("line 2", "2 cells")),
        ("table,group,cost\navalues,Me,2\n", ("line 1, column cost", "column value: the column is missing")),
        ("table;group;value\navalues;Me;2\n", ("line 1", "not separated by commas")),
        ("table,group,value\n", ("holds no values",)),
        ("", ("column table: the column is missing",)),
    ],
)
def test_mistakes_name_line_and_column(tmp_path: Path, text: str, words: tuple[str, ...]) -> None:
    with pytest.raises(InputError) as caught:
        load_user_tables(write(tmp_path, text), load_tables())
    assert caught.value.exit_code == 3
    assert caught.value.next_step
    for word in words:
        assert word in caught.value.message


def test_all_mistakes_come_at_once(tmp_path: Path) -> None:
    with pytest.raises(InputError) as caught:
        load_user_tables(write(tmp_path, "table,group,value\navalues,Me,x\navalues,Xy,2\n"), load_tables())
    assert "line 2" in caught.value.message
    assert "line 3" in caught.value.message


def test_unreadable_files(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="Cannot read"):
        load_user_tables(tmp_path / "none.csv", load_tables())
    with pytest.raises(InputError, match="Cannot read"):
        load_user_tables(tmp_path, load_tables())
    with pytest.raises(InputError, match="UTF-8"):
        load_user_tables(
            write(tmp_path, "table,group,value,note\navalues,Me,2,\xfc\n", encoding="latin-1"), load_tables()
        )
