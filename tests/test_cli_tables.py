"""`ringstrain tables` from the outside."""

from __future__ import annotations

import csv
import io
import json

import pytest
from ringstrain import load_tables
from ringstrain.cli.border import run

Capture = pytest.CaptureFixture[str]


def _rows(text: str) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(text), delimiter="\t", quoting=csv.QUOTE_NONE))


def test_without_a_key_every_group_is_listed_with_an_a_value(capsys: Capture) -> None:
    assert run(["tables"]) == 0
    rows = {r["group"]: r for r in _rows(capsys.readouterr().out)}
    assert len(rows) == len(load_tables().groups)
    # A(methyl) 1.74: Booth & Everett, J. Chem. Soc., Perkin Trans. 2 1980, 255
    assert float(rows["methyl"]["A_kcal"]) == pytest.approx(1.74, abs=0.01)
    assert rows["methyl"]["source"] == "booth-everett-1980"


@pytest.mark.parametrize("key", ["isopropyl", "iPr", "CHMe2", "*C(C)C", "CC(*)C"])
def test_key_alias_and_smiles_find_the_same_group(key: str, capsys: Capture) -> None:
    assert run(["tables", key, "--json"]) == 0
    document = json.loads(capsys.readouterr().out)
    assert (document["kind"], document["topic"], document["key"]) == ("tables", "group", "isopropyl")
    assert len([c for c in document["claims"] if c["table"] == "avalues"]) >= 3, "rivals are kept"
    chosen = [c for c in document["claims"] if c["table"] == "avalues" and c["used_in"]]
    assert len(chosen) == 1
    assert chosen[0]["used_in"][0]["why"]
    assert document["sources"][chosen[0]["source"]]


def test_a_pair_is_found_in_either_order(capsys: Capture) -> None:
    documents = []
    for key in ("methyl/hydroxy", "OH/Me"):
        assert run(["tables", key, "--json"]) == 0
        documents.append(json.loads(capsys.readouterr().out))
    assert documents[0]["key"] == documents[1]["key"] == "hydroxy/methyl"
    assert documents[0]["claims"] == documents[1]["claims"] != []


def test_a_source_key_lists_what_rests_on_it(capsys: Capture) -> None:
    assert run(["tables", "booth-everett-1980"]) == 0
    rows = _rows(capsys.readouterr().out)
    assert {"avalues/methyl-booth-everett-1980"} <= {r["row"] for r in rows}
    assert {r["source"] for r in rows} == {"booth-everett-1980"}


def test_a_row_of_a_ledger_can_be_looked_up(capsys: Capture) -> None:
    assert run(["tables", "avalues/methyl-booth-everett-1980"]) == 0
    (row,) = _rows(capsys.readouterr().out)
    assert row["groups"] == "methyl"


def test_an_untabulated_group_gets_its_class_estimate(capsys: Capture) -> None:
    assert run(["tables", "*CC(C)(C)O", "--json"]) == 0
    document = json.loads(capsys.readouterr().out)
    assert document["prices"][0]["estimated"] is True
    assert document["claims"] == []


@pytest.mark.parametrize(
    ("key", "words"),
    [
        ("isopropil", "isopropyl"),
        ("methyl/hydroxi", "hydroxy"),
        ("both-everett-1980", "booth-everett-1980"),
        ("@@", "lists every group"),
    ],
)
def test_an_unknown_key_ends_with_3_and_a_suggestion(key: str, words: str, capsys: Capture) -> None:
    assert run(["tables", key]) == 3
    out, err = capsys.readouterr()
    assert out == ""
    assert words in err


def test_an_unknown_key_in_json_is_an_error_document(capsys: Capture) -> None:
    assert run(["tables", "isopropil", "--json"]) == 3
    document = json.loads(capsys.readouterr().out)
    assert (document["kind"], document["error"]["code"]) == ("tables", "unknown-group")


def test_the_table_shows_conditions_rivals_reason_and_citation(
    monkeypatch: pytest.MonkeyPatch, capsys: Capture
) -> None:
    monkeypatch.setenv("COLUMNS", "140")
    assert run(["tables", "tBu", "--format", "table"]) == 0
    out = capsys.readouterr().out
    claims = [c for c in load_tables().claims if c.table == "avalues" and c.groups == ("tert-butyl",)]
    assert len(claims) >= 2
    for claim in claims:
        assert claim.row in out
    why = next(p.why for p in load_tables().preferences if p.table == "avalues" and p.key == "tert-butyl")
    assert why.split(";")[0] in out
    assert "rival" in out
    assert "Stereochemistry of Organic Compounds" in out


def test_units_change_the_list_only_by_the_exact_factor(capsys: Capture) -> None:
    run(["tables"])
    kcal = _rows(capsys.readouterr().out)
    run(["tables", "--units", "kJ"])
    kj = _rows(capsys.readouterr().out)
    for a, b in zip(kcal, kj, strict=True):
        # 4.184 kJ = 1 kcal, exact by definition
        assert float(b["A_kJ"] or 0) == pytest.approx(4.184 * float(a["A_kcal"] or 0), abs=1e-3)


def test_the_lint_of_the_shipped_tables_is_clear(capsys: Capture) -> None:
    code = run(["tables", "--check", "--format", "table"])
    out = capsys.readouterr().out
    assert (code, out.strip()) == (0, "All tables are in order.")


def test_the_lint_prints_every_fault_and_ends_with_6(monkeypatch: pytest.MonkeyPatch, capsys: Capture) -> None:
    from ringstrain.errors import TableError

    faults = (
        TableError("'x' is no number", file="avalues.csv", line=3, column="value"),
        TableError("no source is called 'y'", file="gauche.csv", line=9, column="source"),
    )
    monkeypatch.setattr("ringstrain.tables.check.check_tables", lambda folder: faults)
    assert run(["tables", "--check", "--format", "table"]) == 6
    out = capsys.readouterr().out
    assert "avalues.csv, line 3, column value" in out
    assert "gauche.csv, line 9, column source" in out
    assert run(["tables", "--check", "--json"]) == 6
    document = json.loads(capsys.readouterr().out)
    assert [(f["file"], f["line"], f["column"]) for f in document["faults"]] == [
        ("avalues.csv", 3, "value"),
        ("gauche.csv", 9, "source"),
    ]


@pytest.mark.parametrize("width", ["60", "80", "100"])
@pytest.mark.parametrize("key", [[], ["isopropyl"], ["methyl/hydroxy"]], ids=["list", "group", "pair"])
def test_tables_keep_within_the_width(
    width: str, key: list[str], monkeypatch: pytest.MonkeyPatch, capsys: Capture
) -> None:
    monkeypatch.setenv("COLUMNS", width)
    assert run(["tables", *key, "--format", "table"]) == 0
    out = capsys.readouterr().out
    assert max(len(line) for line in out.splitlines()) <= int(width)
    assert "\N{HORIZONTAL ELLIPSIS}" not in out


def test_completion_offers_keys_and_aliases() -> None:
    from ringstrain.cli.lookup import completions

    assert {"isopropyl", "isocyano"} <= set(completions(load_tables(), "iso"))
