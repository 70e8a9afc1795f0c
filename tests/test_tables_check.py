"""The lint of the tables: clean as shipped, and every kind of fault found where it stands."""

from __future__ import annotations

import shutil
from collections.abc import Callable
from pathlib import Path

import pytest
from ringstrain.errors import TableError
from ringstrain.tables.check import check_tables
from ringstrain.tables.reader import tables_folder


def copy_of_tables(target: Path) -> Path:
    folder = target / "tables"
    shutil.copytree(tables_folder(), folder)
    return folder


def edit(folder: Path, file: str, line: int, change: Callable[[str], str]) -> None:
    """Change one line (from 1, header included) and leave the others where they are."""
    path = folder / file
    lines = path.read_bytes().decode("utf-8").split("\n")
    before = lines[line - 1]
    lines[line - 1] = change(before)
    assert lines[line - 1] != before, f"{file}:{line} was not changed"
    path.write_bytes("\n".join(lines).encode("utf-8"))


def swap(old: str, new: str) -> Callable[[str], str]:
    return lambda text: text.replace(old, new, 1)


def cell(column: str, new: str, file: str) -> Callable[[str], str]:
    """Replace the cell of a named column."""
    import csv
    import io

    header = next(csv.reader([(tables_folder() / file).read_text(encoding="utf-8").split("\n", 1)[0]]))

    def change(text: str) -> str:
        cells = next(csv.reader([text]))
        cells[header.index(column)] = new
        out = io.StringIO()
        csv.writer(out, lineterminator="").writerow(cells)
        return out.getvalue()

    return change


def line_of(file: str, start: str) -> int:
    for number, text in enumerate((tables_folder() / file).read_text(encoding="utf-8").split("\n"), start=1):
        if text.startswith(start):
            return number
    raise AssertionError(f"{file} has no line that starts with {start!r}")


def find(faults: tuple[TableError, ...], file: str, line: int, column: str) -> list[str]:
    return [f.fault for f in faults if (f.file, f.line, f.column) == (file, line, column)]


def test_shipped_tables_are_clean() -> None:
    assert [fault.problem for fault in check_tables(tables_folder())] == []


#: File, start of the line, column the fault stands in, new cell, part of the sentence.
CELL_FAULTS = [
    ("avalues.csv", "methyl-wiberg-1999,", "value", "1,79", "no number"),
    ("avalues.csv", "ethyl-wiberg-1999,", "uncertainty", "-0.1", "not negative"),
    ("avalues.csv", "isopropyl-wiberg-1999,", "temperature_K", "0", "above zero"),
    ("avalues.csv", "methyl-booth-everett-1980,", "medium", "oily", "no medium"),
    ("avalues.csv", "ethyl-booth-everett-1980,", "known_by", "yours", "no way of knowing"),
    ("avalues.csv", "isopropyl-booth-everett-1980,", "source", "nobody-1900", "no source is called"),
    ("avalues.csv", "hydroxy-reich,", "group", "hydroxyl", "no group or class"),
    ("avalues.csv", "hydroxy-yale,", "unit", "eV", "none of kcal/mol"),
    ("avalues.csv", "hydroxy-hirsch-1967,", "id", "Hydroxy hirsch", "well-formed"),
    ("avalues.csv", "hydroxy-abraham-1993-acetone,", "source", "", "needs its source"),
    ("gauche.csv", "t12-cl-cl-ccl4,", "unit", "ratio", "no unit of dE"),
    ("gauche.csv", "t12-cl-cl-dmso,", "form", "raw", "none of"),
    ("gauche.csv", "t12-br-br-dmso,", "group_y", "class:metal", "no group or class"),
    ("groups.csv", "iodo,", "smiles", "*I(", "no structure"),
    ("groups.csv", "ethyl,", "aliases", "Et|Me", "means 'methyl' already"),
    ("groups.csv", "bromo,", "smiles", "*Cl", "is 'chloro' already"),
    ("groups.csv", "isopropyl,", "aliases", "iPr||i-Pr", "part of the list is empty"),
    ("solvents.csv", "hexane,", "medium", "any", "one medium"),
    ("solvents.csv", "heptane,", "aliases", "Pentane", "means 'pentane' already"),
    ("preference.csv", "avalues,fluoro,", "row", "fluoro-nobody", "has no row"),
    ("preference.csv", "avalues,chloro,", "key", "bromo", "the row is about 'chloro'"),
    ("preference.csv", "avalues,tritio,", "why", "", "empty"),
    ("classes.csv", "secondary alkyl,", "key", "quaternary alkyl", "no class is called"),
    ("classes.csv", "primary alkyl,", "n", "13.5", "whole number"),
    ("estimates.csv", "butyl-estimate,", "analogues", "octyl", "no group or class"),
    ("model_terms.csv", "polar,", "regime", "guessed", "none of"),
    ("columns.csv", "avalues.csv,note,", "type", "prose", "no type"),
    ("columns.csv", "avalues.csv,method,", "name", "methods", "has no column"),
    ("equilibria.csv", "carbo-d001,", "smiles_b", "CCC1CCCCC1C", "different constitutions"),
    ("equilibria.csv", "carbo-c004,", "smiles_b", "CC[C@H]1CC[C@H](C)CC1", "different compounds"),
    ("equilibria.csv", "carbo-c005,", "orientation", "Et eq", "not described"),
    ("equilibria.csv", "hetero-w01,", "role_note", "carbo-x", "is no row"),
    ("equilibria.csv", "carbo-d054,", "value", "-3.76", "is no ratio"),
    ("equilibria.csv", "carbo-d061,", "smiles_a", "CC(C)[C@@H]1CC", "no structure"),
    ("equilibria.csv", "carbo-d062,", "id", "carbo-d060", "stands in line"),
]  # fmt: skip


@pytest.fixture(scope="module")
def broken(tmp_path_factory: pytest.TempPathFactory) -> tuple[TableError, ...]:
    """Faults of a copy in which every cell of CELL_FAULTS is wrong at once."""
    folder = copy_of_tables(tmp_path_factory.mktemp("broken"))
    for file, start, column, new, _ in CELL_FAULTS:
        edit(folder, file, line_of(file, start), cell(column, new, file))
    return check_tables(folder)


@pytest.mark.parametrize(("file", "start", "column", "new", "words"), CELL_FAULTS)
def test_faulty_cell_is_reported_where_it_stands(
    broken: tuple[TableError, ...], file: str, start: str, column: str, new: str, words: str
) -> None:
    found = find(broken, file, line_of(file, start), column)
    assert any(words in fault for fault in found), found


def test_all_faults_of_one_run_are_reported_in_order(broken: tuple[TableError, ...]) -> None:
    assert len(broken) >= len(CELL_FAULTS)
    places = [(f.file, f.line) for f in broken]
    assert places == sorted(places)


def test_lost_regime_is_named(broken: tuple[TableError, ...]) -> None:
    assert any("'polar' has no row" in f.fault for f in broken if f.file == "model_terms.csv")


def test_undescribed_column_is_named(broken: tuple[TableError, ...]) -> None:
    assert find(broken, "avalues.csv", 1, "method") == ["columns.csv does not describe the column"]


def test_form_of_the_files(tmp_path: Path) -> None:
    folder = copy_of_tables(tmp_path)
    edit(folder, "avalues.csv", 2, lambda text: text + "\r")
    edit(folder, "estimates.csv", 3, lambda text: text + "  ")
    edit(folder, "gauche.csv", 2, lambda text: text + "\N{GREEK SMALL LETTER ALPHA}")
    edit(folder, "geminal.csv", 2, lambda text: text + "\n")
    edit(folder, "kin.csv", 2, lambda text: text + ",extra")
    edit(folder, "sizes.csv", 2, swap("computed", " computed"))
    edit(folder, "rules.csv", 2, swap(",", ',"'))
    path = folder / "solvents.csv"
    path.write_bytes(path.read_bytes().rstrip(b"\n"))
    faults = check_tables(folder)
    assert any("plain line feed" in f for f in find(faults, "avalues.csv", 2, ""))
    assert any("blanks" in f for f in find(faults, "estimates.csv", 3, "note"))
    assert any("not ASCII" in f for f in find(faults, "gauche.csv", 2, ""))
    assert any("blank" in f for f in find(faults, "geminal.csv", 3, ""))
    assert any("cells where the header has" in f for f in find(faults, "kin.csv", 2, ""))
    assert any("blanks" in f for f in find(faults, "sizes.csv", 2, "known_by"))
    assert any("no valid CSV" in f.fault for f in faults if f.file == "rules.csv")
    assert any("no line end" in f.fault for f in faults if f.file == "solvents.csv")


def test_missing_file_is_one_fault_not_a_crash(tmp_path: Path) -> None:
    folder = copy_of_tables(tmp_path)
    (folder / "sources.csv").unlink()
    assert [f.fault for f in check_tables(folder) if f.file == "sources.csv"] == ["the file is missing"]


def test_choice_made_twice_is_refused(tmp_path: Path) -> None:
    folder = copy_of_tables(tmp_path)
    path = folder / "preference.csv"
    text = path.read_text(encoding="utf-8")
    second = text.split("\n")[1]
    path.write_text(text + second + "\n", encoding="utf-8", newline="")
    assert [f.fault for f in check_tables(folder)] == ["the choice is made twice"]
