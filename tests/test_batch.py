"""Whole files: one row for each record in order, and the same bytes when a run is picked up again."""

from __future__ import annotations

import csv
import gzip
import io
import json
import multiprocessing
import os
from collections.abc import Iterator
from concurrent.futures import Executor, Future, ProcessPoolExecutor, ThreadPoolExecutor
from functools import partial
from pathlib import Path
from typing import Any

import pytest
import ringstrain as rs
from ringstrain.batch import Failure, analyze_many
from ringstrain.batch_read import RecordReader
from ringstrain.batch_rows import COLUMNS, ISOMER_COLUMNS, NMR_COLUMNS, BatchRecord, Row, Settings, answer, lost_row
from ringstrain.batch_write import cell
from ringstrain.cli.border import run
from ringstrain.crew import Crew, in_chunks, open_pool, run_in_order
from ringstrain.errors import InputError, OutOfScope, TableError
from ringstrain.results import Analysis

#: A mixed file: good ones, a blank line, an aromatic, open centres, nonsense, a shorthand, two ring systems.
MIXED = """CC1CCCCC1 methylcyclohexane
C[C@H]1CCC[C@@H](C)C1\tcis-1,3

c1ccccc1 benzene
CC1CCCC(C)C1
not-a-smiles
1b-tBu 4a-Me
CC1CCN(C2CCCCC2)CC1\ttwo systems
"""
STATUSES = ["ok", "ok", "input", "out-of-scope", "input", "input", "ok", "ok"]


@pytest.fixture
def mixed(tmp_path: Path) -> Path:
    path = tmp_path / "mixed.smi"
    path.write_text(MIXED, encoding="utf-8", newline="")
    return path


def rows_of(path: Path) -> list[dict[str, str]]:
    with open(path, encoding="utf-8", newline="") as stream:
        return list(csv.DictReader(stream, delimiter="\t" if path.suffix == ".tsv" else ","))


def batch(*arguments: str | Path) -> int:
    return run(["batch", *map(str, arguments)])


# ---- rows ------------------------------------------------------------------------------------------------------


def test_every_record_has_its_row_in_order(mixed: Path, tmp_path: Path) -> None:
    assert batch(mixed, "-o", tmp_path / "out.csv", "-q") == 0
    rows = rows_of(tmp_path / "out.csv")
    assert list(rows[0]) == list(COLUMNS)
    assert [row["status"] for row in rows] == STATUSES
    assert [row["input_line"] for row in rows] == [str(i) for i in range(1, 9)]
    assert [row["id"] for row in rows[:2]] == ["methylcyclohexane", "cis-1,3"]


def test_a_row_says_what_the_analysis_says(mixed: Path, tmp_path: Path) -> None:
    batch(mixed, "-o", tmp_path / "out.csv", "-q", "--medium", "polar", "-T", "350")
    row = rows_of(tmp_path / "out.csv")[6]
    result = rs.analyze("1b-tBu 4a-Me", medium="polar", temperature_K=350).ring_systems[0]
    assert result.equilibrium is not None
    assert result.equilibrium.K is not None
    assert float(row["dG_kcal"]) == pytest.approx(result.equilibrium.dG_kcal, abs=1e-6)
    assert float(row["K"]) == pytest.approx(result.equilibrium.K, rel=1e-6)
    assert float(row["population"]) == pytest.approx(result.states[0].population, abs=1e-6)


def test_fields_of_two_ring_systems_are_joined_with_semicolons(mixed: Path, tmp_path: Path) -> None:
    batch(mixed, "-o", tmp_path / "out.tsv", "-q")
    row = rows_of(tmp_path / "out.tsv")[7]
    analysis = rs.analyze("CC1CCN(C2CCCCC2)CC1")
    assert len(analysis.ring_systems) == 2
    assert len(row["dG_kcal"].split(";")) == len(row["population"].split(";")) == len(row["flags"].split(";")) == 2


def test_strict_exits_with_the_highest_code_seen(mixed: Path, tmp_path: Path) -> None:
    assert batch(mixed, "-o", tmp_path / "out.csv", "-q", "--strict") == 4


def test_strict_marks_a_missing_price() -> None:
    text = next(t for t in ("1b-NO2 2a-CN", "1b-NO2 2a-OAc", "1b-CN 2a-OAc") if _is_unpriced(t))
    record = BatchRecord(line=1, id="", text=text)
    assert answer(record, Settings(strict=True)).status == "missing"
    assert answer(record, Settings()).status == "ok"


def _is_unpriced(text: str) -> bool:
    return any(state.lower_bound for state in rs.analyze(text).ring_systems[0].states)


def test_json_lines_are_typed(mixed: Path, tmp_path: Path) -> None:
    batch(mixed, "-o", tmp_path / "out.jsonl", "-q")
    lines = (tmp_path / "out.jsonl").read_text(encoding="utf-8").splitlines()
    documents = [json.loads(line) for line in lines]
    assert [d["status"] for d in documents] == STATUSES
    assert all(d["schema"] == "ringstrain/1" for d in documents)
    assert documents[0]["dG_kcal"] == [pytest.approx(1.741056, abs=1e-5)]
    assert documents[3]["dG_kcal"] is None


def test_isomers_and_nmr_add_their_columns(mixed: Path, tmp_path: Path) -> None:
    batch(mixed, "-o", tmp_path / "out.csv", "-q", "--isomers", "--nmr")
    rows = rows_of(tmp_path / "out.csv")
    assert list(rows[0]) == [*COLUMNS, *ISOMER_COLUMNS, *NMR_COLUMNS]
    ranking = rs.rank_isomers("C[C@H]1CCC[C@@H](C)C1")
    assert rows[1]["isomers"] == str(len(ranking.isomers))
    assert rows[1]["input_rank"] == str(ranking.input_rank)
    assert rows[4]["status"] == "input"  # open centres: no chair, but a ranking
    assert rows[4]["isomers"] == "2"
    assert "H2ax=" in rows[0]["couplings"]


def test_sdf_goes_in_and_out_with_a_record_for_each(mixed: Path, tmp_path: Path) -> None:
    assert batch(mixed, "-o", tmp_path / "one.sdf", "-q") == 0
    text = (tmp_path / "one.sdf").read_text(encoding="utf-8")
    assert text.count("$$$$\n") == len(STATUSES)
    assert batch(tmp_path / "one.sdf", "-o", tmp_path / "two.csv", "-q") == 0
    first, second = (mixed, rows_of(tmp_path / "two.csv"))
    batch(first, "-o", tmp_path / "one.csv", "-q")
    for before, after in zip(rows_of(tmp_path / "one.csv"), second, strict=True):
        if before["status"] == "ok":
            assert (after["dG_kcal"], after["population"]) == (before["dG_kcal"], before["population"])


def test_tables_are_read_by_the_name_of_their_columns(tmp_path: Path) -> None:
    path = tmp_path / "in.csv"
    path.write_text('Name,SMILES\n"a, b",CC1CCCCC1\n\nc,OC1CCCCC1\n', encoding="utf-8-sig", newline="")
    with RecordReader(path) as reader:
        assert [(r.line, r.id, r.text) for r in reader] == [
            (2, "a, b", "CC1CCCCC1"),
            (3, "", ""),
            (4, "c", "OC1CCCCC1"),
        ]
    with RecordReader(path, smiles_column="name") as reader:
        assert next(iter(reader)).text == "a, b"


def test_a_comment_is_no_record_but_counts_as_a_line(tmp_path: Path) -> None:
    path = tmp_path / "in.smi"
    path.write_text("# library of May\nCC1CCCCC1\n\n  #OC1CCCCC1\nOC1CCCCC1 b\n", encoding="utf-8", newline="")
    with RecordReader(path) as reader:
        assert [(r.line, r.id, r.text) for r in reader] == [(2, "", "CC1CCCCC1"), (3, "", ""), (5, "b", "OC1CCCCC1")]


@pytest.mark.parametrize("rows_behind", [3, 20_000], ids=["to the end", "beyond the longest cell"])
def test_a_quotation_mark_left_open_costs_its_own_row_only(rows_behind: int, tmp_path: Path) -> None:
    path = tmp_path / "in.csv"
    rows = ["CC1CCCCC1,first", 'CC1CCCCC1,"torn', *("OC1CCCCC1,behind" for _ in range(rows_behind))]
    path.write_text("smiles,name\n" + "\n".join(rows), encoding="utf-8", newline="")
    with RecordReader(path) as reader:
        found = list(reader)
    assert [record.line for record in found] == list(range(2, len(rows) + 2))
    assert [record.line for record in found if record.fault] == [3]
    assert "never closed" in found[1].fault
    assert found[-1].id == "behind"


def test_cells_may_hold_line_ends_and_quotation_marks(tmp_path: Path) -> None:
    path = tmp_path / "in.csv"
    path.write_text(
        'smiles,id\nCC1CCCCC1,"a\nb"\nCC1CCCCC1,"5"" c"\nCC1CCCCC1,5" d\nCC1CCCCC1,"e"', encoding="utf-8", newline=""
    )
    with RecordReader(path) as reader:
        assert [(r.line, r.id) for r in reader] == [(2, "a\nb"), (4, '5" c'), (5, '5" d'), (6, "e")]


@pytest.mark.parametrize("sign", [",", ";", "\t"])
def test_a_csv_may_be_parted_as_spreadsheets_do(sign: str, tmp_path: Path) -> None:
    path = tmp_path / "in.csv"
    path.write_text(f"name{sign}smiles\r\nx{sign}CC1CCCCC1\r\n", encoding="utf-8-sig", newline="")
    with RecordReader(path) as reader:
        assert [(r.id, r.text) for r in reader] == [("x", "CC1CCCCC1")]


@pytest.mark.parametrize("name", ["in.smi", "in.csv", "in.tsv", "in.sdf", "comments.smi"])
def test_a_file_without_records_is_named(name: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / name).write_text("# nothing yet\n" if name == "comments.smi" else "", encoding="utf-8", newline="")
    assert batch(tmp_path / name, "-o", tmp_path / "out.csv", "-q") == 0
    assert rows_of(tmp_path / "out.csv") == []
    captured = capsys.readouterr()
    assert captured.out == ""
    assert "holds no record" in captured.err
    assert name in captured.err


@pytest.mark.parametrize("options", [("--smiles-column", "nix"), ("--id-column", "nix")])
def test_a_file_that_gives_no_record_costs_no_earlier_answer(options: tuple[str, str], tmp_path: Path) -> None:
    (tmp_path / "in.csv").write_text("smiles\nCC1CCCCC1\n", encoding="utf-8", newline="")
    assert batch(tmp_path / "in.csv", "-o", tmp_path / "out.csv", "-q") == 0
    before = (tmp_path / "out.csv").read_bytes()
    assert batch(tmp_path / "in.csv", "-o", tmp_path / "out.csv", "-q", *options) == 3
    assert (tmp_path / "out.csv").read_bytes() == before


def test_a_table_without_structures_is_refused(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = tmp_path / "in.csv"
    path.write_text("a,b\n1,2\n", encoding="utf-8", newline="")
    assert batch(path, "-o", tmp_path / "out.csv") == 3
    assert "--smiles-column" in capsys.readouterr().err


def test_bytes_that_are_no_utf8_cost_their_own_row_only(tmp_path: Path) -> None:
    (tmp_path / "in.smi").write_bytes(b"CC1CCCCC1\n\xff\xfe\x00bad\nOC1CCCCC1\n")
    assert batch(tmp_path / "in.smi", "-o", tmp_path / "out.csv", "-q") == 0
    assert [row["status"] for row in rows_of(tmp_path / "out.csv")] == ["ok", "input", "ok"]


def test_a_packed_file_that_breaks_off_keeps_the_rows_before(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    # noise after the structure keeps the packed size near the plain one, so that half a file is half the records
    lines = "".join(f"CC1CCCCC1 {os.urandom(40).hex()}\n" for _ in range(400))
    whole = gzip.compress(lines.encode())
    (tmp_path / "in.smi.gz").write_bytes(whole[: len(whole) // 2])
    assert batch(tmp_path / "in.smi.gz", "-o", tmp_path / "out.csv", "-q") == 3
    assert "breaks off" in capsys.readouterr().err
    assert 100 < len(rows_of(tmp_path / "out.csv")) < 400


def test_packed_output_has_the_same_bytes_each_time(mixed: Path, tmp_path: Path) -> None:
    for name in ("a", "b"):
        (tmp_path / name).mkdir()
        batch(mixed, "-o", tmp_path / name / "out.csv.gz", "-q")
    assert (tmp_path / "a/out.csv.gz").read_bytes() == (tmp_path / "b/out.csv.gz").read_bytes()
    batch(mixed, "-o", tmp_path / "out.csv", "-q")
    assert gzip.decompress((tmp_path / "a/out.csv.gz").read_bytes()) == (tmp_path / "out.csv").read_bytes()


def test_the_summary_counts_by_status(mixed: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    batch(mixed, "-o", tmp_path / "out.csv")
    captured = capsys.readouterr()
    assert captured.out == ""
    assert "8 records: 4 ok, 3 input, 1 out-of-scope" in captured.err


@pytest.mark.parametrize("resumed", [False, True])
def test_what_is_left_counts_the_work_and_not_the_reading(
    resumed: bool, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    class Terminal(io.StringIO):
        def isatty(self) -> bool:
            return True

    clock = iter(range(10_000))
    path, out, screen = tmp_path / "in.smi", tmp_path / "out.csv", Terminal()
    path.write_text("CC1CCCCC1\n" * 40, encoding="utf-8", newline="")
    if resumed:
        batch(path, "-o", out, "-q")
        out.write_bytes(b"".join(out.read_bytes().splitlines(keepends=True)[:11]))
    monkeypatch.setattr("ringstrain.cli.cmd_batch.time.monotonic", lambda: next(clock))
    monkeypatch.setattr("sys.stderr", screen)
    batch(path, "-o", out, *(["--resume"] if resumed else []))
    shown = [text for text in screen.getvalue().split("\r") if "left" in text]
    # the whole file is read before the first answer; one tick of the clock is a record
    assert "30 records, 1 a second, 10 s left" in shown
    assert len(shown) == (29 if resumed else 39)


@pytest.mark.parametrize("suffix", [".csv", ".tsv", ".jsonl"])
def test_a_line_end_or_tab_in_a_field_does_not_break_a_row(tmp_path: Path, suffix: str) -> None:
    (tmp_path / "in.csv").write_text('id,smiles\n"a\tb\nc","C1CC\n(C"\n', encoding="utf-8", newline="")
    batch(tmp_path / "in.csv", "-o", tmp_path / f"out{suffix}", "-q")
    lines = (tmp_path / f"out{suffix}").read_bytes().splitlines()
    assert len(lines) == (1 if suffix == ".jsonl" else 2)
    if suffix == ".tsv":
        assert lines[1].count(b"\t") == len(COLUMNS) - 1


@pytest.mark.parametrize(
    ("arguments", "code"),
    [
        (("missing.smi", "-o", "out.csv"), 3),
        (("mixed.smi", "-o", "out.txt"), 2),
        (("mixed.smi", "-o", "mixed.smi"), 2),
        (("mixed.smi", "-o", "out.csv", "--workers", "0"), 2),
        (("mixed.smi", "-o", "out.csv", "--medium", "all"), 2),
        (("mixed.smi", "-o", "out.csv", "-T", "200:300:50"), 2),
        (("mixed.smi", "-o", "out.csv", "--medium", "lava"), 2),
        (("mixed.smi", "-o", "out.csv.gz", "--resume"), 2),
        (("mixed.smi", "-o", "out.parquet", "--resume"), 2),
        (("mixed.smi",), 2),
    ],
)
def test_what_cannot_be_done_is_refused(
    mixed: Path, arguments: tuple[str, ...], code: int, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(mixed.parent)
    before = mixed.read_bytes()
    assert batch(*arguments) == code
    assert mixed.read_bytes() == before


# ---- going on ----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("suffix", [".csv", ".tsv", ".jsonl", ".sdf"])
def test_a_resumed_run_has_the_bytes_of_an_unbroken_one(mixed: Path, tmp_path: Path, suffix: str) -> None:
    whole, torn = tmp_path / f"whole{suffix}", tmp_path / f"torn{suffix}"
    batch(mixed, "-o", whole, "-q")
    wanted = whole.read_bytes()
    for cut in [*range(0, len(wanted), max(1, len(wanted) // 23)), len(wanted) - 1, len(wanted)]:
        torn.write_bytes(wanted[:cut])
        assert batch(mixed, "-o", torn, "-q", "--resume") == 0
        assert torn.read_bytes() == wanted, cut


@pytest.mark.parametrize(("suffix", "says"), [(".csv", True), (".csv.gz", False)])
def test_a_stopped_run_says_how_to_go_on_and_does(
    suffix: str,
    says: bool,
    mixed: Path,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    def stopped(chunk: tuple[BatchRecord, ...], settings: Settings) -> list[Row]:
        if chunk[0].line == 5:
            raise KeyboardInterrupt
        return [answer(record, settings) for record in chunk]

    out = tmp_path / f"out{suffix}"
    with monkeypatch.context() as patched:
        patched.setattr("ringstrain.batch_rows.answer_chunk", stopped)
        assert batch(mixed, "-o", out, "-q") == 130
    captured = capsys.readouterr()
    assert captured.out == ""
    assert ("--resume" in captured.err) is says
    if says:
        assert len(rows_of(out)) == 4
        assert batch(mixed, "-o", out, "-q", "--resume") == 0
        assert [row["status"] for row in rows_of(out)] == STATUSES


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="needs a device that is always full")
@pytest.mark.parametrize("suffix", [".csv", ".jsonl.gz", ".sdf"])
def test_a_full_disk_is_no_bug_of_ours(
    suffix: str, mixed: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (tmp_path / f"out{suffix}").symlink_to("/dev/full")
    assert batch(mixed, "-o", tmp_path / f"out{suffix}", "-q") == 3
    assert "Make room" in capsys.readouterr().err


def test_resuming_without_an_earlier_run_begins(mixed: Path, tmp_path: Path) -> None:
    assert batch(mixed, "-o", tmp_path / "out.csv", "-q", "--resume") == 0
    assert len(rows_of(tmp_path / "out.csv")) == len(STATUSES)


@pytest.mark.parametrize("suffix", [".csv", ".jsonl", ".sdf"])
def test_rows_of_another_input_are_left_alone(mixed: Path, tmp_path: Path, suffix: str) -> None:
    other, out = tmp_path / "other.smi", tmp_path / f"out{suffix}"
    other.write_text("OC1CCCCC1\nFC1CCCCC1\nClC1CCCCC1\n", encoding="utf-8", newline="")
    batch(mixed, "-o", out, "-q")
    out.write_bytes(out.read_bytes() + b"torn")
    before = out.read_bytes()
    assert batch(other, "-o", out, "-q", "--resume") == 3
    assert out.read_bytes() == before


def test_rows_with_other_columns_are_left_alone(mixed: Path, tmp_path: Path) -> None:
    for suffix in (".csv", ".jsonl"):
        out = tmp_path / f"out{suffix}"
        batch(mixed, "-o", out, "-q")
        before = out.read_bytes()
        assert batch(mixed, "-o", out, "-q", "--resume", "--isomers") == 3
        assert out.read_bytes() == before


@pytest.mark.parametrize("suffix", [".csv", ".tsv", ".jsonl", ".sdf"])
@pytest.mark.parametrize(
    "options",
    [("--medium", "polar"), ("-T", "250"), ("--ring", "oxane"), ("--table-file", "own.csv"), ("--nmr",), ("--strict",)],
)
def test_rows_made_with_other_options_are_left_alone(
    suffix: str,
    options: tuple[str, ...],
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    monkeypatch.chdir(tmp_path)
    Path("own.csv").write_text("table,group,value\navalues,OMe,9.0\n", encoding="utf-8", newline="")
    # what tells them apart is no longer the last row kept: no price of cyclohexane itself depends on anything
    lines = ["1b-NO2 3b-CN", "1b-OMe 2a-Br", "C1CCCCC1", "c1ccccc1", "", "CC1CCCCC1"]
    Path("in.smi").write_text("\n".join(lines) + "\n", encoding="utf-8", newline="")
    out = Path(f"out{suffix}")
    batch("in.smi", "-o", out, "-q")
    end = b"$$$$\n" if suffix == ".sdf" else b"\n"
    torn = end.join(out.read_bytes().split(end)[:-2]) + end + b"to"
    out.write_bytes(torn)
    assert batch("in.smi", "-o", out, "-q", "--resume", *options) == 3
    assert out.read_bytes() == torn
    captured = capsys.readouterr()
    assert captured.out == ""
    assert "other options" in captured.err or "header of this run" in captured.err
    assert "write another file" in captured.err


def test_a_row_whose_worker_died_is_not_tried_again(mixed: Path, tmp_path: Path) -> None:
    out = tmp_path / "out.csv"
    batch(mixed, "-o", out, "-q")
    lost = lost_row(BatchRecord(line=7, id="", text="1b-tBu 4a-Me"), Settings())
    cells = ",".join(cell(value) for value in lost.cells.values())
    kept = out.read_text(encoding="utf-8").splitlines(keepends=True)[:7]
    out.write_text("".join(kept) + cells + "\n", encoding="utf-8", newline="")
    assert batch(mixed, "-o", out, "-q", "--resume") == 0
    assert [row["status"] for row in rows_of(out)] == [*STATUSES[:6], "error", "ok"]


def test_strict_counts_the_rows_of_the_earlier_run(mixed: Path, tmp_path: Path) -> None:
    out = tmp_path / "out.csv"
    assert batch(mixed, "-o", out, "-q", "--strict") == 4
    out.write_bytes(out.read_bytes()[:-20])
    assert batch(mixed, "-o", out, "-q", "--strict", "--resume") == 4
    assert batch(mixed, "-o", out, "-q", "--resume") == 0


# ---- streams and workers -------------------------------------------------------------------------------------------


class Bomb:
    """Ends the process that unpickles it."""

    text = "bomb"

    def __reduce__(self) -> tuple[Any, ...]:
        return os._exit, (17,)


def work_or_die(chunk: tuple[str, ...], parent: int) -> list[str]:
    """Ends its own process, which must not be the parent, on the word ``die``."""
    if "die" in chunk and os.getpid() != parent:
        os._exit(17)
    return [f"done {item}" for item in chunk]


@pytest.mark.parametrize("deaths", [{30}, {0, 1, 30, 59}, set(range(20, 26))], ids=["one", "ends", "a row of them"])
def test_a_dead_worker_costs_its_own_item_only(deaths: set[int]) -> None:
    items = ["die" if i in deaths else str(i) for i in range(60)]
    reopen = partial(open_pool, 2)
    found = list(
        run_in_order(
            items,
            partial(work_or_die, parent=os.getpid()),
            lambda item, error: f"lost {item}",
            crew=Crew(reopen(), reopen),
            chunk=10,
            window=6,
        )
    )
    assert found == ["lost die" if item == "die" else f"done {item}" for item in items]


def test_items_are_read_only_as_far_as_the_window() -> None:
    taken = 0

    def source() -> Iterator[str]:
        nonlocal taken
        for number in range(10_000):
            taken += 1
            yield str(number)

    with ThreadPoolExecutor(2) as pool:
        outcomes = run_in_order(source(), list, lambda item, error: item, crew=Crew(pool), chunk=10, window=4)
        for _ in range(50):
            next(outcomes)
        assert taken <= 50 + 10 * 4
        outcomes.close()  # type: ignore[attr-defined]


def test_what_came_before_a_source_breaks_off_is_handed_out() -> None:
    def source() -> Iterator[int]:
        yield from range(25)
        raise InputError("The file breaks off.", "Mend it.")

    found: list[int] = []
    outcomes = run_in_order(
        source(), list, lambda item, error: item, crew=Crew(ThreadPoolExecutor(1)), chunk=10, window=2
    )
    with pytest.raises(InputError):
        found.extend(outcomes)
    assert found == list(range(25))


def test_chunks_hold_everything_once() -> None:
    assert list(in_chunks(range(7), 3)) == [(0, 1, 2), (3, 4, 5), (6,)]


@pytest.mark.parametrize("suffix", [".csv", ".sdf"])
def test_workers_change_nothing_but_the_time(tmp_path: Path, suffix: str) -> None:
    path = tmp_path / "in.smi"
    path.write_text(MIXED * 40, encoding="utf-8", newline="")
    for name, workers in (("one", 1), ("two", 2)):
        assert batch(path, "-o", tmp_path / f"{name}{suffix}", "-q", "--workers", str(workers)) == 0
    assert (tmp_path / f"one{suffix}").read_bytes() == (tmp_path / f"two{suffix}").read_bytes()


# ---- analyze_many --------------------------------------------------------------------------------------------------


def test_analyze_many_gives_an_answer_or_a_failure_for_each_in_order() -> None:
    texts = ["CC1CCCCC1", "", "c1ccccc1", "OC1CCCCC1"]
    answers = list(analyze_many(texts))
    assert [type(answer) for answer in answers] == [Analysis, Failure, Failure, Analysis]
    failure = answers[2]
    assert isinstance(failure, Failure)
    with pytest.raises(OutOfScope) as caught:
        rs.analyze("c1ccccc1")
    assert failure.message == caught.value.message
    assert failure.as_dict()["error"]["family"] == "out-of-scope"


def test_analyze_many_works_with_any_executor_and_an_endless_stream() -> None:
    def endless() -> Iterator[str]:
        while True:
            yield from ("CC1CCCCC1", "x", "OC1CCCCC1")

    with ThreadPoolExecutor(2) as pool:
        answers = analyze_many(endless(), executor=pool, chunk=2)
        kinds = [type(next(answers)) for _ in range(9)]
        answers.close()  # type: ignore[attr-defined]
    assert kinds == [Analysis, Failure, Analysis] * 3


def test_analyze_many_survives_a_dead_process() -> None:
    with ProcessPoolExecutor(1, mp_context=multiprocessing.get_context("spawn")) as pool:
        answers = list(analyze_many(["CC1CCCCC1", Bomb()], executor=pool, chunk=1))  # type: ignore[list-item]
    assert isinstance(answers[-1], Failure)
    assert answers[-1].code == "worker-lost"
    assert len(answers) == 2


def test_analyze_many_stops_for_faulty_tables() -> None:
    class Faulty(Executor):
        def submit(self, fn: Any, /, *args: Any, **kwargs: Any) -> Future[Any]:
            future: Future[Any] = Future()
            future.set_exception(TableError("no number", file="avalues.csv"))
            return future

    with pytest.raises(TableError):
        list(analyze_many(["CC1CCCCC1"], executor=Faulty()))


def test_parquet_without_its_package_says_what_to_install(
    mixed: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setitem(__import__("sys").modules, "pyarrow", None)
    assert batch(mixed, "-o", tmp_path / "out.parquet") == 2
    assert "ringstrain[parquet]" in capsys.readouterr().err


def test_parquet_holds_the_same_rows(mixed: Path, tmp_path: Path) -> None:
    parquet = pytest.importorskip("pyarrow.parquet")
    assert batch(mixed, "-o", tmp_path / "out.parquet", "-q") == 0
    assert batch(mixed, "-o", tmp_path / "out.csv", "-q") == 0
    found = parquet.read_table(tmp_path / "out.parquet").to_pylist()
    assert [{k: "" if v is None else str(v) for k, v in row.items()} for row in found] == rows_of(tmp_path / "out.csv")


def test_rows_pickle() -> None:
    import pickle

    row = answer(BatchRecord(line=1, id="", text="CC1CCCCC1"), Settings(blocks=True))
    again: Row = pickle.loads(pickle.dumps(row))
    assert again == row
    assert "V2000" in again.block


@pytest.mark.dask
def test_a_cluster_of_two_processes_gives_the_same_bytes(mixed: Path, tmp_path: Path) -> None:
    distributed = pytest.importorskip("distributed")
    mixed.write_text(MIXED * 60, encoding="utf-8", newline="")
    cluster = distributed.LocalCluster(n_workers=2, threads_per_worker=1, processes=True, dashboard_address=None)
    try:
        assert batch(mixed, "-o", tmp_path / "far.csv", "-q", "--scheduler", cluster.scheduler_address) == 0
        with distributed.Client(cluster) as client:
            answers = list(analyze_many(["CC1CCCCC1", "x"] * 20, executor=client.get_executor(pure=False), chunk=3))
    finally:
        cluster.close()
    assert batch(mixed, "-o", tmp_path / "near.csv", "-q") == 0
    assert (tmp_path / "far.csv").read_bytes() == (tmp_path / "near.csv").read_bytes()
    assert [type(answer) for answer in answers] == [Analysis, Failure] * 20
