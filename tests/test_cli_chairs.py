"""`ringstrain chairs` from the outside: formats, media, temperatures, several structures, streams."""

from __future__ import annotations

import csv
import gzip
import io
import json
import os
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest
from ringstrain.cli.border import run

PROGRAM = [sys.executable, "-c", "from ringstrain.cli import main; main()"]
MENTHOL = "C[C@@H]1CC[C@@H](C(C)C)[C@H](O)C1"
TRANS_DICHLORO = "Cl[C@@H]1CCCC[C@H]1Cl"
CHOLESTANOL = "C[C@H](CCCC(C)C)[C@H]1CC[C@@H]2[C@@]1(CC[C@H]3[C@H]2CC[C@@H]4[C@@]3(CC[C@@H](C4)O)C)C"
SPIRO = "CC1CCC2(CC1)CCCCC2"
#: No table has a price for the two groups together.
UNPRICED = "1b-OH 2a-NO2 4a-CN"

Capture = pytest.CaptureFixture[str]


def _rows(text: str) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(text), delimiter="\t", quoting=csv.QUOTE_NONE))


def _documents(text: str) -> list[dict[str, Any]]:
    return [json.loads(line) for line in text.splitlines()]


def test_plain_has_one_row_for_each_state(capsys: Capture) -> None:
    assert run(["chairs", "CC1CCCCC1"]) == 0
    rows = _rows(capsys.readouterr().out)
    assert [(r["state"], r["axial"], r["equatorial"]) for r in rows] == [("A", "", "1"), ("B", "1", "")]
    # 95:5 at 298 K: Eliel & Wilen, Stereochemistry of Organic Compounds, 1994, from A(methyl) 1.74
    assert round(float(rows[0]["population"]), 2) == 0.95
    assert float(rows[0]["dG_kcal"]) == pytest.approx(1.74, abs=0.06)


def test_plain_ledger_has_one_row_for_each_line_with_its_source(capsys: Capture) -> None:
    assert run(["chairs", "--ledger", MENTHOL]) == 0
    rows = _rows(capsys.readouterr().out)
    chair_b = [r for r in rows if r["state"] == "B"]
    assert {r["groups"] for r in chair_b if r["rule"] == "A-value"} == {"methyl", "isopropyl", "hydroxy"}
    assert all(r["source"] and r["known_by"] for r in rows)


def test_units_change_values_and_column_names_of_tsv_by_the_exact_factor(capsys: Capture) -> None:
    run(["chairs", "CC1CCCCC1"])
    kcal = _rows(capsys.readouterr().out)
    run(["chairs", "CC1CCCCC1", "--units", "kJ"])
    kj = _rows(capsys.readouterr().out)
    assert "energy_kcal" not in kj[1]
    # 4.184 kJ = 1 kcal, exact by definition
    assert float(kj[1]["energy_kJ"]) == pytest.approx(4.184 * float(kcal[1]["energy_kcal"]), abs=1e-3)


def test_json_stays_in_kcal_whatever_the_units(capsys: Capture) -> None:
    run(["chairs", "CC1CCCCC1", "--json"])
    first = capsys.readouterr().out
    run(["chairs", "CC1CCCCC1", "--json", "--units", "kJ"])
    assert capsys.readouterr().out == first


def test_json_has_every_contracted_field_in_one_ascii_line(capsys: Capture) -> None:
    assert run(["chairs", "1\N{GREEK SMALL LETTER BETA}-Me", "--json"]) == 0
    text = capsys.readouterr().out
    assert text.isascii()
    (document,) = _documents(text)
    contracted = "schema kind version input smiles temperature_K medium ring_systems notes"
    assert set(contracted.split()) <= set(document)
    assert document["schema"] == "ringstrain/1"
    assert next(iter(document)) == "schema"
    (system,) = document["ring_systems"]
    assert {"rings", "states", "equilibrium", "locked"} <= set(system)
    state = (
        "id shapes axial equatorial axial_H equivalent_to counts energy_kcal uncertainty_kcal lower_bound regime "
        "population population_low population_high lines sites nitrogen"
    )
    assert set(state.split()) <= set(system["states"][0])
    line = "rule groups atoms count value_kcal subtotal_kcal uncertainty_kcal known_by source"
    assert set(line.split()) <= set(system["states"][1]["lines"][0])
    equilibrium = "favoured other dG_kcal uncertainty_kcal K K_low K_high"
    assert set(equilibrium.split()) <= set(system["equilibrium"])


def test_json_populations_sum_to_one_even_when_one_is_tiny(capsys: Capture) -> None:
    run(["chairs", "1b-tBu 3b-tBu", "--json"])
    (document,) = _documents(capsys.readouterr().out)
    shares = [state["population"] for state in document["ring_systems"][0]["states"]]
    assert sum(shares) == pytest.approx(1, abs=1e-5)
    assert min(shares) > 0


def test_a_locked_ring_has_no_equilibrium(capsys: Capture) -> None:
    # trans-decalin cannot flip: common practice, no source
    run(["chairs", "C1CC[C@@H]2CCCC[C@H]2C1", "--json"])
    (document,) = _documents(capsys.readouterr().out)
    assert document["ring_systems"][0]["equilibrium"] is None
    assert document["ring_systems"][0]["locked"] is True


def test_medium_all_gives_four_documents_in_json(capsys: Capture) -> None:
    assert run(["chairs", TRANS_DICHLORO, "--medium", "all", "--json"]) == 0
    documents = _documents(capsys.readouterr().out)
    assert [d["medium"] for d in documents] == ["gas", "nonpolar", "polar", "protic"]


def test_medium_all_puts_four_columns_side_by_side(monkeypatch: pytest.MonkeyPatch, capsys: Capture) -> None:
    monkeypatch.setenv("COLUMNS", "100")
    assert run(["chairs", TRANS_DICHLORO, "--medium", "all", "--format", "table"]) == 0
    heads = [line for line in capsys.readouterr().out.splitlines() if line.startswith("state")]
    assert [head.split()[1:] for head in heads] == [["gas", "nonpolar", "polar", "protic"]]


@pytest.mark.parametrize("width", ["50", "60", "80"])
@pytest.mark.parametrize("text", ["1b-OMe 2a-Br", "1b-CO2Et 2a-iPr 3b-iPr"])
def test_medium_all_breaks_no_name_in_a_narrow_terminal(
    text: str, width: str, monkeypatch: pytest.MonkeyPatch, capsys: Capture
) -> None:
    monkeypatch.setenv("COLUMNS", width)
    assert run(["chairs", text, "--medium", "all", "--format", "table"]) == 0
    narrow = capsys.readouterr().out
    monkeypatch.setenv("COLUMNS", "140")
    run(["chairs", text, "--medium", "all", "--format", "table"])
    # a table mixes its columns line by line, but a word that was whole stays whole
    words = {word for word in capsys.readouterr().out.split() if word.strip(",:").isalpha()}
    assert not words - set(narrow.split())


def test_a_named_solvent_is_reported_by_its_name(capsys: Capture) -> None:
    assert run(["chairs", TRANS_DICHLORO, "--medium", "CCl4", "--json"]) == 0
    (document,) = _documents(capsys.readouterr().out)
    assert document["medium"] == "carbon tetrachloride"


def test_a_temperature_range_gives_one_document_for_each(capsys: Capture) -> None:
    assert run(["chairs", "CC1CCCCC1", "-T", "200:500:50", "--json"]) == 0
    documents = _documents(capsys.readouterr().out)
    assert [d["temperature_K"] for d in documents] == [200, 250, 300, 350, 400, 450, 500]
    constants = [d["ring_systems"][0]["equilibrium"]["K"] for d in documents]
    # van 't Hoff: a dG above zero that hardly changes makes K fall with temperature
    assert constants == sorted(constants, reverse=True)


def test_a_temperature_range_makes_a_table_of_rows(monkeypatch: pytest.MonkeyPatch, capsys: Capture) -> None:
    monkeypatch.setenv("COLUMNS", "100")
    assert run(["chairs", "CC1CCCCC1", "-T", "200:300:50", "--format", "table"]) == 0
    rows = [line.split()[0] for line in capsys.readouterr().out.splitlines() if " K  " in line]
    assert rows == ["T", "200", "250", "300"]


def test_strict_refuses_a_missing_price_with_5(capsys: Capture) -> None:
    assert run(["chairs", UNPRICED, "--strict"]) == 5
    assert "--table-file" in capsys.readouterr().err


def test_without_strict_a_missing_price_leaves_k_open(capsys: Capture) -> None:
    assert run(["chairs", UNPRICED, "--json"]) == 0
    (document,) = _documents(capsys.readouterr().out)
    equilibrium = document["ring_systems"][0]["equilibrium"]
    assert (equilibrium["K"], equilibrium["dG_kcal"]) == (None, None)
    assert equilibrium["bound"] in ("at least", "at most", "not determined")
    assert any(state["lower_bound"] for state in document["ring_systems"][0]["states"])


def test_several_structures_go_on_and_end_with_the_highest_code(capsys: Capture) -> None:
    assert run(["chairs", "CC(C", "CC1CCCCC1", "c1ccccc1", "CC(C", "OC1CCCCC1"]) == 4
    out, err = capsys.readouterr()
    assert {r["input"] for r in _rows(out)} == {"CC1CCCCC1", "OC1CCCCC1"}
    assert err.count("never closed") == 2


def test_several_structures_in_json_keep_their_order_errors_included(capsys: Capture) -> None:
    assert run(["chairs", "--json", "CC1CCCCC1", "CC(C", "c1ccccc1"]) == 4
    documents = _documents(capsys.readouterr().out)
    assert [d["input"] for d in documents] == ["CC1CCCCC1", "CC(C", "c1ccccc1"]
    assert ["error" in d for d in documents] == [False, True, True]


def test_plain_writes_its_header_once(capsys: Capture) -> None:
    run(["chairs", "CC1CCCCC1", "OC1CCCCC1"])
    assert sum(line.startswith("input\t") for line in capsys.readouterr().out.splitlines()) == 1


def test_standard_input_takes_a_smiles_and_a_name_per_line(monkeypatch: pytest.MonkeyPatch, capsys: Capture) -> None:
    monkeypatch.setattr("sys.stdin", io.StringIO("CC1CCCCC1\tmine\n\n1b-Me 2a-Me\ttwo\r\n"))
    assert run(["chairs", "-", "--json"]) == 0
    documents = _documents(capsys.readouterr().out)
    assert [(d["input"], d["name"]) for d in documents] == [("CC1CCCCC1", "mine"), ("1b-Me 2a-Me", "two")]


@pytest.mark.parametrize("piped", [True, False], ids=["standard input", "file"])
def test_a_comment_line_is_no_structure(
    piped: bool, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: Capture
) -> None:
    text = "# from the notebook\nCC1CCCCC1\tone\n #OC1CCCCC1\n"
    path = tmp_path / "in.smi"
    path.write_text(text, encoding="utf-8", newline="")
    monkeypatch.setattr("sys.stdin", io.StringIO(text))
    assert run(["chairs", "--json", "-" if piped else str(path)]) == 0
    captured = capsys.readouterr()
    assert [document["smiles"] for document in _documents(captured.out)] == ["CC1CCCCC1"]
    assert captured.err == ""


def test_standard_input_takes_an_sdf(monkeypatch: pytest.MonkeyPatch, capsys: Capture) -> None:
    from rdkit import Chem

    block = Chem.MolToMolBlock(Chem.MolFromSmiles("CC1CCCCC1"))
    monkeypatch.setattr("sys.stdin", io.StringIO(f"{block}$$$$\n{block}$$$$\n"))
    assert run(["chairs", "-", "--json"]) == 0
    assert [d["smiles"] for d in _documents(capsys.readouterr().out)] == ["CC1CCCCC1"] * 2


@pytest.mark.parametrize("packed", [False, True], ids=["plain", "gz"])
def test_files_are_read_by_their_suffix(packed: bool, tmp_path: Path, capsys: Capture) -> None:
    path = tmp_path / ("set.smi.gz" if packed else "set.smi")
    data = b"CC1CCCCC1\tfirst\nnonsense\nOC1CCCCC1 second\n"
    path.write_bytes(gzip.compress(data) if packed else data)
    assert run(["chairs", "--json", str(path)]) == 3
    documents = _documents(capsys.readouterr().out)
    assert [d.get("name") for d in documents] == ["first", None, "second"]


def test_a_file_without_a_structure_suffix_is_refused_by_name(tmp_path: Path, capsys: Capture) -> None:
    path = tmp_path / "set.txt"
    path.write_text("CC1CCCCC1\n", encoding="utf-8", newline="\n")
    assert run(["chairs", str(path)]) == 3
    assert ".sdf" in capsys.readouterr().err


def test_a_torn_gz_file_is_an_input_error(tmp_path: Path, capsys: Capture) -> None:
    path = tmp_path / "torn.smi.gz"
    path.write_bytes(gzip.compress(b"CC1CCCCC1\n" * 50)[:30])
    assert run(["chairs", str(path)]) == 3
    assert "cannot be read" in capsys.readouterr().err


def test_notes_reach_every_format(capsys: Capture) -> None:
    for form in ("table", "plain", "json"):
        assert run(["chairs", "[Na+].[O-]C1CCCCC1", "--format", form]) == 0
        assert "set aside" in capsys.readouterr().out


def test_ascii_keeps_to_ascii_and_says_the_same(capsys: Capture) -> None:
    run(["chairs", MENTHOL, "--format", "table"])
    fancy = capsys.readouterr().out
    run(["chairs", MENTHOL, "--format", "table", "--ascii"])
    plain = capsys.readouterr().out
    assert not fancy.isascii()
    assert plain.isascii()
    assert plain.split()[-10:] == fancy.split()[-10:]


@pytest.mark.parametrize("width", ["50", "60", "80", "100", "140"])
@pytest.mark.parametrize(
    "question",
    [
        [MENTHOL],
        ["1b-tBu 4b-Me"],
        [SPIRO],
        [CHOLESTANOL],
        [UNPRICED],
        [MENTHOL, "--medium", "all"],
        [MENTHOL, "-T", "200:300:50"],
    ],
    ids=["menthol", "twist-boats", "spiro", "steroid", "unpriced", "media", "temperatures"],
)
def test_tables_keep_within_the_width_and_cut_nothing_off(
    width: str, question: list[str], monkeypatch: pytest.MonkeyPatch, capsys: Capture
) -> None:
    monkeypatch.setenv("COLUMNS", width)
    assert run(["chairs", *question, "--format", "table"]) == 0
    out = capsys.readouterr().out
    assert max(len(line) for line in out.splitlines()) <= int(width)
    assert "\N{HORIZONTAL ELLIPSIS}" not in out


def test_colour_is_off_in_a_pipe_and_under_no_color(monkeypatch: pytest.MonkeyPatch, capsys: Capture) -> None:
    run(["chairs", MENTHOL, "--format", "table"])
    assert "\x1b" not in capsys.readouterr().out
    monkeypatch.setenv("FORCE_COLOR", "1")
    monkeypatch.setenv("NO_COLOR", "1")
    run(["chairs", MENTHOL, "--format", "table"])
    out = capsys.readouterr().out
    assert not any(f"\x1b[{code}m" in out for code in range(30, 38))


def test_meaning_does_not_hang_on_style(monkeypatch: pytest.MonkeyPatch, capsys: Capture) -> None:
    import re

    monkeypatch.setenv("COLUMNS", "100")
    run(["chairs", MENTHOL, "--format", "table"])
    bare = capsys.readouterr().out
    monkeypatch.setenv("FORCE_COLOR", "1")
    run(["chairs", MENTHOL, "--format", "table"])
    assert re.sub(r"\x1b\[[0-9;]*m", "", capsys.readouterr().out) == bare


def test_version_names_rdkit_and_the_tables(capsys: Capture) -> None:
    import ringstrain
    from rdkit import rdBase
    from ringstrain import load_tables

    assert run(["--version"]) == 0
    out = capsys.readouterr().out
    assert all(part in out for part in (ringstrain.__version__, rdBase.rdkitVersion, load_tables().revision))


@pytest.mark.parametrize("arguments", [["-h"], ["--help"], ["chairs", "-h"], ["tables", "--help"]])
def test_help_leads_with_two_examples_and_keeps_the_brackets(arguments: list[str], capsys: Capture) -> None:
    assert run(arguments) == 0
    out = capsys.readouterr().out
    examples = [line.strip() for line in out.splitlines() if line.strip().startswith("ringstrain ")]
    assert len(examples) >= 2
    assert "'C[C@@H]1CC[C@@H](C(C)C)[C@H](O)C1'" in out or "'*C(C)C'" in out


def test_no_argument_shows_help_and_ends_with_2(capsys: Capture) -> None:
    assert run([]) == 2
    assert "Usage" in capsys.readouterr().err


def test_a_users_own_value_wins_and_is_marked(tmp_path: Path, capsys: Capture) -> None:
    path = tmp_path / "mine.csv"
    path.write_text("table,group,value,uncertainty\navalues,Me,2.00,0.05\n", encoding="utf-8", newline="\n")
    assert run(["chairs", "CC1CCCCC1", "--table-file", str(path), "--json"]) == 0
    (document,) = _documents(capsys.readouterr().out)
    (line,) = document["ring_systems"][0]["states"][1]["lines"]
    assert (line["value_kcal"], line["known_by"]) == (2.0, "yours")
    run(["chairs", "CC1CCCCC1", "--table-file", str(path), "--format", "table"])
    out = capsys.readouterr().out
    assert "yours [1]" in out
    assert "with your own values" in out


@pytest.mark.parametrize("locale", [{"LC_ALL": "C"}, {"LC_ALL": "C", "PYTHONUTF8": "0", "PYTHONCOERCECLOCALE": "0"}])
def test_nothing_breaks_in_a_bare_locale(locale: dict[str, str]) -> None:
    environment = {k: v for k, v in os.environ.items() if k not in ("LANG", "PYTHONIOENCODING")} | locale
    arguments = ["chairs", "1\N{GREEK SMALL LETTER BETA}-tBu 4\N{GREEK SMALL LETTER ALPHA}-Me", "--format", "table"]
    done = subprocess.run([*PROGRAM, *arguments], capture_output=True, env=environment, check=False)
    assert done.returncode == 0, done.stderr
    assert b"tert-butyl" in done.stdout
    if "PYTHONUTF8" in locale:
        assert done.stdout.isascii()


def test_a_corrupt_gz_file_is_an_input_error(tmp_path: Path, capsys: Capture) -> None:
    data = bytearray(gzip.compress(b"CC1CCCCC1\n" * 500))
    data[14] ^= 0xFF
    data[16] ^= 0xFF
    path = tmp_path / "corrupt.smi.gz"
    path.write_bytes(bytes(data))
    assert run(["chairs", str(path)]) == 3
    assert "cannot be read" in capsys.readouterr().err
