"""Errors and exit codes at the border between library and shell."""

from __future__ import annotations

import importlib
import inspect
import os
import pkgutil
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest
import ringstrain
from ringstrain import errors
from ringstrain.cli import border
from ringstrain.errors import InputError, MissingValue, OutOfScope, RingstrainError, TableError, UsageError

PROGRAM = [sys.executable, "-c", "from ringstrain.cli import main; main()"]
#: Exit codes of contract.md by family; UsageError is the input error that is a usage error.
CONTRACT = {UsageError: 2, InputError: 3, OutOfScope: 4, MissingValue: 5, TableError: 6}


def _all_subclasses(kind: type[RingstrainError]) -> set[type[RingstrainError]]:
    return {kind}.union(*(_all_subclasses(child) for child in kind.__subclasses__()))


def _make(kind: type[RingstrainError]) -> RingstrainError:
    """An instance of an error class whatever its parameters."""
    if issubclass(kind, TableError):
        return kind("a fault", file="a.csv", line=2)
    if issubclass(kind, MissingValue):
        return kind("A-value", ("methyl",))
    parameters = inspect.signature(kind).parameters
    return kind("problem") if "problem" not in parameters else kind("A problem.", "A step.")


def test_every_error_has_the_exit_code_of_its_family() -> None:
    for module in pkgutil.walk_packages(ringstrain.__path__, "ringstrain."):
        if ".cli.cmd_" not in module.name:
            importlib.import_module(module.name)
    kinds = _all_subclasses(errors.RingstrainError) - {errors.RingstrainError}
    assert len(kinds) >= 8
    for kind in kinds:
        family = next(base for base in kind.__mro__ if base in CONTRACT)
        assert border.exit_code_of(_make(kind)) == CONTRACT[family], kind.__name__


def test_interruption_is_130_and_anything_unexpected_is_our_bug() -> None:
    assert border.exit_code_of(KeyboardInterrupt()) == 130
    assert border.exit_code_of(ZeroDivisionError()) == 1


def _break(monkeypatch: pytest.MonkeyPatch, error: BaseException) -> None:
    def fail(*args: object, **kwargs: object) -> None:
        raise error

    monkeypatch.setattr("ringstrain.analysis.analyze", fail)


def test_an_unexpected_error_is_owned_up_to_without_a_traceback(
    monkeypatch: pytest.MonkeyPatch, capfd: pytest.CaptureFixture[str]
) -> None:
    _break(monkeypatch, ZeroDivisionError("division by zero"))
    assert border.run(["chairs", "CC1CCCCC1"]) == 1
    err = capfd.readouterr().err
    assert "our bug" in err
    assert "Traceback" not in err
    assert "ZeroDivisionError" not in err


def test_debug_shows_the_traceback(monkeypatch: pytest.MonkeyPatch) -> None:
    _break(monkeypatch, ZeroDivisionError("division by zero"))
    with pytest.raises(ZeroDivisionError):
        border.run(["chairs", "--debug", "CC1CCCCC1"])


def test_ctrl_c_ends_with_130_and_a_word(monkeypatch: pytest.MonkeyPatch, capfd: pytest.CaptureFixture[str]) -> None:
    _break(monkeypatch, KeyboardInterrupt())
    assert border.run(["chairs", "CC1CCCCC1"]) == 130
    assert "Interrupted" in capfd.readouterr().err


def test_faulty_tables_end_with_6(monkeypatch: pytest.MonkeyPatch, capfd: pytest.CaptureFixture[str]) -> None:
    _break(monkeypatch, TableError("'x' is no number", file="avalues.csv", line=7, column="value"))
    assert border.run(["chairs", "CC1CCCCC1"]) == 6
    assert "avalues.csv, line 7, column value" in capfd.readouterr().err


@pytest.mark.skipif(os.name == "nt", reason="signals are POSIX")
def test_a_real_interrupt_ends_the_process_with_130() -> None:
    # A shell starts its background jobs deaf to the interrupt, and so are the tests when one of them runs them.
    before = signal.signal(signal.SIGINT, signal.default_int_handler)
    try:
        process = subprocess.Popen([*PROGRAM, "chairs", "-"], stdin=subprocess.PIPE, stderr=subprocess.PIPE)
    finally:
        signal.signal(signal.SIGINT, before)
    time.sleep(1.5)
    process.send_signal(signal.SIGINT)
    _, err = process.communicate(timeout=20)
    assert process.returncode == 130
    assert b"Traceback" not in err


@pytest.mark.parametrize("form", ["plain", "json", "table"])
def test_a_closed_pipe_is_left_quietly(form: str, tmp_path: Path) -> None:
    many = tmp_path / "many.smi"
    many.write_text("CC1CCCCC1\n" * 200, encoding="utf-8", newline="\n")
    process = subprocess.Popen(
        [*PROGRAM, "chairs", "--format", form, str(many)], stdout=subprocess.PIPE, stderr=subprocess.PIPE
    )
    assert process.stdout is not None
    assert process.stderr is not None
    process.stdout.readline()
    process.stdout.close()
    err = process.stderr.read()
    process.wait(timeout=60)
    process.stderr.close()
    assert (process.returncode, err) == (0, b"")


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="needs a device that is always full")
@pytest.mark.parametrize("arguments", [["chairs", "1b-Me"], ["patterns", "Me"], ["chairs", "--help"], ["--version"]])
def test_a_full_disk_is_no_bug_of_ours(arguments: list[str]) -> None:
    with open("/dev/full", "wb") as full:
        process = subprocess.run([*PROGRAM, *arguments], stdout=full, stderr=subprocess.PIPE, timeout=60)
    assert process.returncode == 3
    assert b"Make room" in process.stderr
    assert process.stderr.count(b"\n") == 2


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (["chairz"], "Did you mean 'chairs'"),
        (["chairs", "--bogus", "CC1CCCCC1"], "--bogus"),
        (["chairs", "CC1CCCCC1", "--format", "xml"], "table, plain or json"),
        (["chairs", "CC1CCCCC1", "--json", "--format", "plain"], "contradict"),
        (["chairs", "CC1CCCCC1", "--units", "J"], "kcal or kJ"),
        (["chairs", "CC1CCCCC1", "--medium", "chlorofrom"], "Did you mean chloroform"),
        (["chairs", "CC1CCCCC1", "-T", "warm"], "kelvin"),
        (["chairs", "CC1CCCCC1", "-T", "0"], "kelvin"),
        (["chairs", "CC1CCCCC1", "-T", "nan"], "kelvin"),
        (["chairs", "CC1CCCCC1", "-T", "200:500:0"], "kelvin"),
        (["chairs", "CC1CCCCC1", "-T", "500:200:50"], "kelvin"),
        (["chairs", "CC1CCCCC1", "-T", "1:2000:0.01"], "at most 500"),
        (["chairs", "1b-Me", "--ring", "benzene"], "No ring is called"),
        (["tables", "methyl", "--check"], "alone"),
    ],
)
def test_a_wrong_command_line_ends_with_2_and_says_what_to_do(
    arguments: list[str], words: str, capfd: pytest.CaptureFixture[str]
) -> None:
    assert border.run(arguments) == 2
    out, err = capfd.readouterr()
    assert words in err
    assert out == ""
    assert "Traceback" not in err
