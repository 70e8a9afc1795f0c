"""The accuracy table as the user sees it."""

from __future__ import annotations

import json

import pytest
from ringstrain.cli.border import run
from ringstrain.validation.rows import read_equilibria


def test_json_is_one_line_of_ascii(capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["validate", "--rows", "--json"]) == 0
    text = capsys.readouterr().out
    assert text.isascii()
    assert text.count("\n") == 1
    document = json.loads(text)
    assert (document["schema"], document["kind"]) == ("ringstrain/1", "validate")
    assert [r["id"] for r in document["rows"]] == [r.id for r in read_equilibria()]
    assert {"group", "rows", "mean_absolute_kcal", "rms_kcal", "worst", "winners_right", "covered"} <= set(
        document["groups"][0]
    )
    menthol = next(r for r in document["rows"] if r["id"] == "carbo-d061")
    assert menthol["difference_kcal"] == pytest.approx(menthol["predicted_kcal"] - menthol["measured_kcal"], abs=1e-4)


def test_json_without_rows_lists_none(capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["validate", "--json"]) == 0
    assert "rows" not in json.loads(capsys.readouterr().out)


def test_piped_output_is_tab_separated(capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["validate"]) == 0
    lines = capsys.readouterr().out.splitlines()
    width = len(lines[0].split("\t"))
    assert lines[0].startswith("set\tgroup\trows\tmean_absolute_kcal")
    assert all(len(line.split("\t")) == width for line in lines)


def test_rows_plain_in_kilojoules_is_4_184_times_larger(capsys: pytest.CaptureFixture[str]) -> None:
    def measured(units: str) -> float:
        assert run(["validate", "--rows", "--format", "plain", "--units", units]) == 0
        lines = capsys.readouterr().out.splitlines()
        column = lines[0].split("\t").index(f"measured_{units}")
        return float(next(line for line in lines if line.startswith("carbo-c016\t")).split("\t")[column])

    # Thermochemical calorie, exact.
    assert measured("kJ") == pytest.approx(4.184 * measured("kcal"), abs=1e-3)


@pytest.mark.parametrize("width", [60, 80, 100])
def test_table_fits_the_terminal(
    width: int, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("COLUMNS", str(width))
    assert run(["validate", "--format", "table", "--ascii", "--rows"]) == 0
    text = capsys.readouterr().out
    assert text.isascii()
    # Headlines of --rows may wrap but nothing may stick out.
    assert max(map(len, text.splitlines())) <= width
    assert "all groups" in text
    assert "Left out: duplicate" in text
    for row in read_equilibria():
        assert row.id in text
