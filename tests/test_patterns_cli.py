"""`ringstrain patterns` on the terminal: formats, conditions, refusals."""

from __future__ import annotations

import json

import pytest
import ringstrain as rs
from ringstrain.cli.border import run
from ringstrain.patterns import enumerate_patterns
from ringstrain.sieve import Wish


def patterns(*arguments: str) -> int:
    return run(["patterns", *arguments])


def test_json_lines_are_what_the_records_say(capsys: pytest.CaptureFixture[str]) -> None:
    assert patterns("Me", "OH", "--json") == 0
    documents = [json.loads(line) for line in capsys.readouterr().out.splitlines()]
    records = list(enumerate_patterns(["Me", "OH"]))
    assert [d["smiles"] for d in documents] == [r.smiles for r in records]
    assert documents[0]["schema"] == "ringstrain/1"
    assert documents[0]["dG_kcal"] == pytest.approx(records[0].dG_kcal, abs=1e-5)


def test_plain_has_a_header_and_one_line_for_each(capsys: pytest.CaptureFixture[str]) -> None:
    assert patterns("Me", "Me", "--format", "plain") == 0
    head, *lines = capsys.readouterr().out.splitlines()
    assert len(lines) == 7  # common practice, no source: the seven dimethylcyclohexanes
    assert {line.count("\t") for line in lines} == {head.count("\t")}


def test_smiles_lines_can_be_fed_back(capsys: pytest.CaptureFixture[str]) -> None:
    assert patterns("Me", "OH", "--cis", "1,4", "--smiles") == 0
    smiles, name = capsys.readouterr().out.strip().split("\t")
    assert rs.analyze(smiles).smiles == rs.analyze(name).smiles


def test_the_table_shows_the_pattern_and_what_was_gone_through(capsys: pytest.CaptureFixture[str]) -> None:
    assert patterns("Me", "Me", "Me", "OH", "--axial", "OH>=0.95", "--format", "table", "--ascii") == 0
    text = capsys.readouterr().out
    total = len(list(enumerate_patterns(["Me", "Me", "Me", "OH"])))
    assert f"out of {total} patterns" in " ".join(text.split())
    assert text.isascii()


@pytest.mark.parametrize("width", ["50", "60", "72", "80", "100"])
@pytest.mark.parametrize("look", [(), ("--ascii", "--units", "kJ")])
def test_a_narrow_terminal_shows_every_pattern_whole(
    width: str, look: tuple[str, ...], monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setenv("COLUMNS", width)
    assert patterns("CO2Et", "iPr", "OMe", "--top", "3", "--format", "table", *look) == 0
    text = capsys.readouterr().out
    assert max(map(len, text.splitlines())) <= int(width)
    assert "\N{HORIZONTAL ELLIPSIS}" not in text
    words = " ".join(text.split()).replace(";", "").split()
    for pattern in enumerate_patterns(["CO2Et", "iPr", "OMe"], top=3):
        assert set(pattern.pattern.split()) <= set(words)


def test_a_gap_is_in_the_unit_that_was_asked_for(capsys: pytest.CaptureFixture[str]) -> None:
    assert patterns("Me", "OH", "--gap", ">=2", "--smiles") == 0
    in_kcal = capsys.readouterr().out
    assert patterns("Me", "OH", "--gap", ">=8.368", "--units", "kJ", "--smiles") == 0
    assert capsys.readouterr().out == in_kcal
    assert in_kcal.count("\n") == len(list(enumerate_patterns(["Me", "OH"], wish=Wish(gap=">=2"))))


def test_a_range_of_counts_is_taken(capsys: pytest.CaptureFixture[str]) -> None:
    assert patterns("--choose-from", "Me,OH", "--count", "1:2", "--no-geminal", "--smiles") == 0
    # by Burnside: 1 + 1 singles, 6 like pairs twice, 6 unlike ones, no geminal
    assert capsys.readouterr().out.count("\n") == 2 + 6 + 6 + 6


@pytest.mark.parametrize(
    ("arguments", "code"),
    [
        ((), 2),
        (("Mx",), 3),
        (("Me", "--count", "a"), 2),
        (("Me", "--axial", "OH"), 2),
        (("Me", "--gap", "big"), 2),
        (("Me", "--ring", "hexane"), 2),
        (("Me", "--ring", "[CH3:1]C1CCCCC1"), 2),
        (("Me", "--medium", "all"), 2),
        (("Me", "--smiles", "--json"), 2),
        (("Me", "--smiles"), 2),  # a format is given besides
        (("Me", "--rank", "beauty"), 2),
        (("Me", "--ring", "[cH:1]1ccccc1"), 4),
        (("Me", "--ring", "[CH2:1]1[CH2:1]CCCC1"), 2),
        (("Me",) * 13, 2),
        (("Me", "--choose-from", "OH", "--count", "12:13"), 2),
        (("Me", "--choose-from", ","), 2),
        (("Me", "--count", "2"), 2),
        (("Me", "--axial", ">=0.5"), 2),
        (("Me", "OH", "--cis", "1,2,3"), 2),
        (("Me", "OH", "--cis", "1,Me"), 2),
        (("Me", "OH", "--trans", "1,7"), 2),
        (("Me", "--locked", "nan"), 2),
    ],
)
@pytest.mark.parametrize("format", ["plain", "json", "table"])
def test_refusals_have_the_exit_code_of_their_family(
    arguments: tuple[str, ...], code: int, format: str, capsys: pytest.CaptureFixture[str]
) -> None:
    assert patterns(*arguments, "--format", format) == code
    captured = capsys.readouterr()
    assert captured.out == ""
    assert captured.err.strip()


def test_a_condition_nothing_meets_lists_nothing(capsys: pytest.CaptureFixture[str]) -> None:
    assert patterns("Me", "--axial", "Me>=0.5", "--format", "plain") == 0
    assert len(capsys.readouterr().out.splitlines()) == 1
