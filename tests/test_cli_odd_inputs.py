"""Odd inputs: the contracted exit code, one clear sentence on stderr, no traceback, no line of RDKit's."""

from __future__ import annotations

import io
import json
from pathlib import Path

import pytest
from ringstrain.cli.border import run

#: Name, input, exit code (contract: 2 usage, 3 input, 4 out of scope), words the message must hold.
ODD = [
    ("empty", "", 3, "empty"),
    ("blanks", "   ", 3, "empty"),
    ("tab", "\t", 3, "empty"),
    ("word", "nonsense", 3, "no atom or bond"),
    ("two words", "hello world", 3, "no atom or bond"),
    ("open branch", "CC(C", 3, "parenthesis"),
    ("closed branch", "CC)C1CCCCC1", 3, "parenthesis"),
    ("open ring", "C1CCCC", 3, "never closed"),
    ("open bracket", "C[C@H", 3, "bracket"),
    ("broken ring number", "C1CCCCC%1", 3, "valid SMILES"),
    ("open aromatic ring", "cccccc1", 3, "never closed"),
    ("reaction", "C1CCCCC1>>C1CCCCC1", 3, "reaction"),
    ("reaction with agent", "C1CCCCC1>O>C1CCCCC1O", 3, "reaction"),
    ("dummy", "*C1CCCCC1", 3, "dummy"),
    ("numbered dummy", "[*:1]C1CCCCC1", 3, "dummy"),
    ("R group", "[R1]C1CCCCC1", 3, "valid SMILES"),
    ("any bond", "C~C1CCCCC1", 3, "any bond"),
    ("two ring fragments", "C1CCCCC1.C1CCCCC1", 3, "2 molecules"),
    ("two different ring fragments", "CC1CCCCC1.OC1CCCCC1", 3, "2 molecules"),
    ("five bonds", "C[C](C)(C)(C)(C)C1CCCCC1", 3, "more bonds"),
    ("six bonds on a ring atom", "C1CCCCC1(=O)(=O)", 3, "more bonds"),
    ("over 100 kB", "x" * 120_000, 3, "120000 characters"),
    ("Greek letter", "C1CCCCC1\N{GREEK SMALL LETTER ALPHA}", 3, "cannot stand in a SMILES"),
    ("full-width letters", "\N{FULLWIDTH LATIN CAPITAL LETTER C}" * 2, 3, "cannot stand in a SMILES"),
    ("emoji", "\N{SLIGHTLY SMILING FACE}", 3, "cannot stand in a SMILES"),
    ("escape sequence", "\x1b[31mC1CCCCC1", 3, "cannot stand in a SMILES"),
    ("shell leftovers", "C1CCCCC1;rm", 3, "no atom or bond"),
    ("InChI", "InChI=1S/C6H12/c1-2-4-6-5-3-1/h1-6H2", 3, "never closed"),
    ("file that is not there", "/no/such/file.smi", 3, "cannot be read"),
    ("packed file that is not there", "/no/such/file.sdf.gz", 3, "cannot be read"),
    ("relative path", "./no-such-file.mol", 3, "cannot be read"),
    ("file name only", "nosuch.smi", 3, "cannot be read"),
    ("folder name", "/no/such/folder/", 3, "no atom or bond"),
    ("shorthand without group", "1b-", 3, "ring shorthand"),
    ("shorthand with a position only", "1b", 3, "ring shorthand"),
    ("shorthand without face", "1-Me", 3, "ring shorthand"),
    ("shorthand with a wrong face", "1b-Me, 2q-Me", 3, "ring shorthand"),
    ("position 7", "7b-Me", 3, "Position 7"),
    ("position 0", "0b-Me", 3, "Position 0"),
    ("unknown group", "1b-Xyz", 3, "No group is called 'Xyz'"),
    ("misspelt group", "1b-metyl", 3, "Did you mean methyl"),
    ("site taken twice", "1b-Me 1b-Et", 3, "two groups"),
    ("number", "99", 3, "ring shorthand"),
    ("open 1,2 centres", "CC1CCCCC1C", 3, "configuration not given"),
    ("open 1,4 centres", "CC1CCC(C)CC1", 3, "configuration not given"),
    ("benzene", "c1ccccc1", 4, "aromatic"),
    ("naphthalene", "c1ccc2ccccc2c1", 4, "aromatic"),
    ("no ring", "CCO", 4, "no ring"),
    ("five-membered ring", "C1CCCC1", 4, "no six-membered ring"),
    ("pyrrole", "c1cc[nH]c1", 4, "no six-membered ring"),
    ("norbornane", "C1CC2CCC1C2", 4, "no six-membered ring"),
    ("cubane", "C12C3C4C1C5C2C3C45", 4, "no six-membered ring"),
    ("macrocycle", "C1CCCCCCCCCCC1", 4, "macrocycle"),
    ("iron in the ring", "[Fe]1CCCCC1", 4, "Fe in the ring"),
    ("platinum in the ring", "C1CC[Pt]CC1", 4, "Pt in the ring"),
    ("cyclohexadiene", "C1=CC=CCC1", 4, "flat bonds"),
    ("quinone", "O=C1C=CC(=O)C=C1", 4, "flat"),
    ("5,000 atoms", "C" * 5000, 4, "5000 heavy atoms"),
    ("long chain on a ring", "C1CCCCC1" + "C" * 600, 4, "606 heavy atoms"),
    ("unknown option", "-x", 2, "-x"),
]


@pytest.mark.parametrize(("text", "code", "words"), [pytest.param(*case[1:], id=case[0]) for case in ODD])
def test_odd_input_gets_its_exit_code_and_one_clear_message(
    text: str, code: int, words: str, capfd: pytest.CaptureFixture[str]
) -> None:
    assert run(["chairs", text]) == code
    out, err = capfd.readouterr()
    assert words in err
    assert out == ""
    assert "Traceback" not in err
    assert "Error" not in err
    assert "[" not in err or "[" in text, "RDKit's log lines start with a time in brackets"
    lines = err.rstrip("\n").split("\n")
    assert 1 <= len(lines) <= 3
    assert all(len(line) < 260 for line in lines)


@pytest.mark.parametrize(
    ("text", "code", "family"),
    [(case[1], case[2], {3: "input", 4: "out-of-scope"}[case[2]]) for case in ODD if case[2] != 2],
)
def test_the_same_in_json_is_an_error_document(
    text: str, code: int, family: str, capfd: pytest.CaptureFixture[str]
) -> None:
    assert run(["chairs", "--json", text]) == code
    out, err = capfd.readouterr()
    assert err == ""
    (line,) = out.splitlines()
    document = json.loads(line)
    assert list(document) == ["schema", "kind", "input", "error"]
    assert (document["schema"], document["kind"]) == ("ringstrain/1", "chairs")
    assert list(document["error"]) == ["family", "code", "message", "atoms"]
    assert document["error"]["family"] == family


def test_nothing_on_standard_input_is_an_input_error(
    monkeypatch: pytest.MonkeyPatch, capfd: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setattr("sys.stdin", io.StringIO(""))
    assert run(["chairs"]) == 3
    assert "holds no structure" in capfd.readouterr().err


def test_carets_stand_under_every_open_centre(capfd: pytest.CaptureFixture[str]) -> None:
    run(["chairs", "CC1CCCCC1O"])
    asked, marks, step = capfd.readouterr().err.rstrip("\n").split("\n")
    carets = [asked[place] + str(place) for place, mark in enumerate(marks[: len(asked)]) if mark == "^"]
    assert carets == ["C1", "C7"]
    assert "2, 7" in marks
    assert "isomers" in step


@pytest.mark.parametrize(
    "command",
    ["chairs", "isomers", "nmr", "reactivity", "draw", "crosscheck", "assign --observed H1=10"],
)
@pytest.mark.parametrize(("ring", "words"), [("oxane", "of a shorthand"), ("hexane", "No ring is called")])
def test_a_parent_ring_nothing_can_use_is_refused(
    command: str, ring: str, words: str, capfd: pytest.CaptureFixture[str]
) -> None:
    assert run([*command.split(), "CC1CCCCC1", "--ring", ring]) == 2
    out, err = capfd.readouterr()
    assert out == ""
    assert words in err


def test_a_parent_ring_for_a_molfile_is_refused_too(tmp_path: Path, capfd: pytest.CaptureFixture[str]) -> None:
    assert run(["batch", str(_written(tmp_path / "a.smi", "CC1CCCCC1\n")), "-o", str(tmp_path / "a.sdf"), "-q"]) == 0
    assert run(["nmr", str(tmp_path / "a.sdf"), "--ring", "oxane"]) == 2
    assert "a molfile is none" in capfd.readouterr().err


def test_candidates_may_use_the_parent_ring(capfd: pytest.CaptureFixture[str]) -> None:
    arguments = ["assign", "CC1CCCCO1", "--observed", "H2=10,2", "--candidate", "2b-Me", "--ring", "oxane", "--json"]
    assert run(arguments) == 0
    assert capfd.readouterr().err == ""


@pytest.mark.parametrize("command", ["chairs", "batch"])
def test_a_list_with_a_shorthand_may_hold_smiles_besides(
    command: str, tmp_path: Path, capfd: pytest.CaptureFixture[str]
) -> None:
    tail = ["-o", str(tmp_path / "out.csv"), "-q"] if command == "batch" else ["--json"]
    mixed = _written(tmp_path / "mixed.smi", "CC1CCCCC1\n2b-Me\n")
    assert run([command, str(mixed), "--ring", "oxane", *tail]) == 0
    assert capfd.readouterr().err == ""
    alone = _written(tmp_path / "alone.smi", "CC1CCCCC1\n")
    assert run([command, str(alone), "--ring", "oxane", *tail]) == 0
    assert "--ring oxane was not used" in capfd.readouterr().err


def _written(path: Path, text: str) -> Path:
    path.write_text(text, encoding="utf-8", newline="")
    return path
