"""The border between the library and the shell: errors become three lines and an exit code."""

from __future__ import annotations

import errno
import os
import sys
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import typer

from ringstrain.cli.console import make_console, make_look, prepare_streams, silence
from ringstrain.errors import InputError, RingstrainError, TableError, UsageError

if TYPE_CHECKING:
    from ringstrain.cli.common import Output

OUR_BUG, USAGE, INTERRUPTED = 1, 2, 130
#: What the system says when a disk takes no more.
_FULL = (errno.ENOSPC, errno.EDQUOT, errno.EFBIG)
HELP_NAMES = ("-h", "--help")
_COMPLETION_VARIABLE = "_RINGSTRAIN_COMPLETE"


def exit_code_of(error: BaseException) -> int:
    """Exit code of an error: what the contract says for ours, 130 for Ctrl-C, 1 for a bug."""
    if isinstance(error, RingstrainError):
        return error.exit_code
    if isinstance(error, KeyboardInterrupt | typer.Abort):
        return INTERRUPTED
    return OUR_BUG


def run(arguments: Sequence[str]) -> int:
    """Run the command line and return the exit code; nothing but Python's own exit escapes.

    Parameters
    ----------
    arguments
        Command line without the program name.
    """
    prepare_streams()
    try:
        code = _run([_as_typed(word) for word in arguments])
        sys.stdout.flush()
    except BrokenPipeError:
        silence(sys.stdout)
        return 0
    except KeyboardInterrupt:
        _say(["", "Interrupted."])
        return INTERRUPTED
    except OSError as error:
        if error.errno not in _FULL:
            raise
        silence(sys.stdout)
        _say([f"The answer cannot be written: {error.strerror}.", "Make room, or send it elsewhere."])
        return InputError.exit_code
    return code


def _as_typed(word: str) -> str:
    """A word of the command line as UTF-8, also where a bare locale made Python take it for ASCII."""
    if word.isprintable() or not any("\udc80" <= character <= "\udcff" for character in word):
        return word
    return os.fsencode(word).decode("utf-8", errors="surrogateescape")


def _run(arguments: list[str]) -> int:
    """Parse, run, and turn what goes wrong into a message."""
    from ringstrain.cli.app import build_app

    debug = "--debug" in arguments
    try:
        command: Any = typer.main.get_command(build_app(arguments))
        _take_text_as_it_is(command)
        if _COMPLETION_VARIABLE in os.environ:
            command.main(prog_name="ringstrain")
        with command.make_context("ringstrain", arguments) as context:
            outcome = command.invoke(context)
        return outcome if isinstance(outcome, int) else 0
    except typer.Exit as stop:
        return int(stop.exit_code)
    except typer.Abort:
        return INTERRUPTED
    except RingstrainError as error:
        complain(error)
        return exit_code_of(error)
    except (BrokenPipeError, KeyboardInterrupt):
        raise
    except Exception as error:
        if isinstance(error, OSError) and error.errno in _FULL:
            raise
        if hasattr(error, "format_message"):
            return _usage(error)
        if debug:
            raise
        _say(
            [
                "Something went wrong inside ringstrain: our bug, not a fault of your input.",
                "Run the same command with --debug and send us what it prints.",
            ]
        )
        return OUR_BUG


class _AsItIs:
    """Hands the words of an option on unchanged."""

    def coerce(self, value: Any, param: Any, ctx: Any) -> Any:
        """The value, an empty list when a repeated one is missing."""
        if value is None:
            return [] if param.nargs == -1 or param.multiple else None
        return list(value) if isinstance(value, tuple) else value


def _take_text_as_it_is(command: Any) -> None:
    """Spare flags and plain text typer's conversion, whose library takes longer to load than an answer takes."""
    for child in (command, *getattr(command, "commands", {}).values()):
        for parameter in child.get_params(typer.Context(child, help_option_names=list(HELP_NAMES))):
            annotation = getattr(getattr(parameter, "type_descriptor", None), "annotation", None)
            if annotation in (str, list[str], bool) and getattr(parameter, "_runtime_param", 0) is None:
                parameter._runtime_param = _AsItIs()


def _usage(error: Any) -> int:
    """A command line that typer refuses: its sentence, then where the help is."""
    context = getattr(error, "ctx", None)
    if type(error).__name__ == "NoArgsIsHelpError" and context is not None:
        sys.stderr.write(context.get_help() + "\n")
        return USAGE
    path = context.command_path if context is not None else "ringstrain"
    message = " ".join(str(error.format_message()).split())
    _say([message if message.endswith((".", "?", "!")) else f"{message}.", f"`{path} --help` lists what it takes."])
    return USAGE


def complain(error: RingstrainError, asked: str = "") -> None:
    """Write an error to standard error in three lines.

    Parameters
    ----------
    error
        What went wrong.
    asked
        The input, for errors that do not carry it.
    """
    from ringstrain.views.faults import fault_lines

    _say(fault_lines(error, asked))


def refuse(error: RingstrainError, command: str, label: str, output: Output) -> int:
    """Say what is wrong with one structure, as a document where documents are asked for, and return the exit code.

    Raises
    ------
    UsageError, TableError
        When the fault is not the structure's: those end the whole command.
    """
    if isinstance(error, UsageError | TableError):
        raise error
    if output.format == "json":
        from ringstrain.views.as_json import error_document, to_line

        output.line(to_line(error_document(command, label, error)))
    else:
        complain(error, label)
    return exit_code_of(error)


def remark(text: str) -> None:
    """Say on standard error, in one line, what the answer does not show and is no error."""
    _say([text])


def _say(lines: Sequence[str]) -> None:
    """Lines on standard error, without wrapping, so that carets stay under their atoms."""
    console = make_console(sys.stderr)
    look = make_look(console)
    for line in lines:
        console.print(look.text(line), soft_wrap=True)
