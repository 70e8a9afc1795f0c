"""`ringstrain draw` and `chairs --draw` from the outside."""

from __future__ import annotations

import subprocess
import sys
import xml.etree.ElementTree as ET
from pathlib import Path

import pytest
from ringstrain.cli.border import run

MENTHOL = "CC(C)[C@@H]1CC[C@@H](C)C[C@H]1O"
Capture = pytest.CaptureFixture[str]


@pytest.mark.parametrize(
    "options",
    [
        [],
        ["--numbers", "--gauche"],
        ["--hydrogens", "--no-clashes"],
        ["--state", "B"],
        ["--newman", "4,10"],
        ["--ladder"],
        ["--isomers"],
        ["-T", "200:400:50"],
    ],
    ids=lambda o: " ".join(o) or "plain",
)
def test_every_picture_is_written_as_svg(options: list[str], tmp_path: Path) -> None:
    path = tmp_path / "out.svg"
    assert run(["draw", MENTHOL, "-o", str(path), *options]) == 0
    assert ET.parse(path).getroot().tag.endswith("svg")


@pytest.mark.parametrize(("suffix", "start"), [(".png", b"\x89PNG"), (".html", b"<!DOCTYPE html>"), (".SVG", b"<svg")])
def test_the_suffix_decides(suffix: str, start: bytes, tmp_path: Path) -> None:
    path = tmp_path / f"out{suffix}"
    assert run(["draw", MENTHOL, "-o", str(path)]) == 0
    assert path.read_bytes().startswith(start)


def test_text_goes_to_the_terminal_or_a_file(tmp_path: Path, capsys: Capture) -> None:
    assert run(["draw", MENTHOL, "--ascii"]) == 0
    shown = capsys.readouterr().out
    assert shown.isascii()
    assert "Chair A" in shown
    path = tmp_path / "out.txt"
    assert run(["draw", MENTHOL, "-o", str(path), "--ascii"]) == 0
    assert path.read_text(encoding="utf-8") == shown


def test_a_report_holds_couplings_when_asked(tmp_path: Path) -> None:
    path = tmp_path / "out.html"
    assert run(["draw", MENTHOL, "-o", str(path)]) == 0
    assert "Couplings" not in path.read_text(encoding="utf-8")
    assert run(["draw", MENTHOL, "-o", str(path), "--nmr", "-T", "200:300:50"]) == 0
    text = path.read_text(encoding="utf-8")
    assert "Couplings" in text
    assert "Shares against temperature" in text


@pytest.mark.parametrize(
    ("arguments", "code", "words"),
    [
        ([MENTHOL, "-o", "out.pdf"], 2, ".svg .png .txt .html"),
        ([MENTHOL, "CC1CCCCC1"], 2, "one structure"),
        ([MENTHOL, "--state", "Q"], 2, "There is no state Q"),
        ([MENTHOL, "--newman", "1"], 2, "--newman 1,2"),
        ([MENTHOL, "--newman", "1,4"], 3, "not joined by a bond"),
        ([MENTHOL, "--ladder", "--isomers"], 2, "one at a time"),
        ([MENTHOL, "--nmr"], 2, "report"),
        ([MENTHOL, "--medium", "all"], 2, "one medium"),
        (["c1ccccc1"], 4, "aromatic"),
        ([MENTHOL, "-o", "/nowhere/at/all.svg"], 3, "Cannot write"),
    ],
)
def test_mistakes_get_their_exit_code_and_a_next_step(
    arguments: list[str], code: int, words: str, capsys: Capture
) -> None:
    assert run(["draw", *arguments]) == code
    captured = capsys.readouterr()
    assert words in " ".join(captured.err.split())
    assert captured.out == ""


def test_chairs_shows_drawings_when_asked(capsys: Capture) -> None:
    assert run(["chairs", "1b-Me", "--draw", "--ascii"]) == 0
    text = capsys.readouterr().out
    assert "A-value methyl" in text
    assert text.index("Chair B; 1.74") > text.index("A-value methyl")
    assert run(["chairs", "1b-Me", "--draw", "--json"]) == 2


@pytest.mark.parametrize("width", [50, 60, 80])
@pytest.mark.parametrize("command", [["draw"], ["chairs", "--draw"]])
@pytest.mark.parametrize("look", [[], ["--ascii"]])
def test_captions_keep_to_a_narrow_terminal(
    width: int, command: list[str], look: list[str], monkeypatch: pytest.MonkeyPatch, capsys: Capture
) -> None:
    monkeypatch.setenv("COLUMNS", str(width))
    assert run([*command, "1b-tBu 3a-OH", *look]) == 0
    text = capsys.readouterr().out
    assert "regime additive" in " ".join(text.split())
    assert max(map(len, text.splitlines())) <= width


def test_a_c_locale_gets_a_drawing_too() -> None:
    code = "from ringstrain.cli import main; main()"
    environment = {"PATH": "/usr/bin:/bin", "LC_ALL": "C", "PYTHONUTF8": "0", "PYTHONCOERCECLOCALE": "0"}
    done = subprocess.run(
        [sys.executable, "-c", code, "draw", "1b-Me"], capture_output=True, env=environment, check=True, timeout=60
    )
    assert done.stdout.isascii()
    assert b"CH3" in done.stdout
    assert b"\\u" not in done.stdout
