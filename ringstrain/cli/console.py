"""The only place where consoles are made: rich markup eats chemistry, so it is off in all of them."""

from __future__ import annotations

import os
import sys
from typing import TYPE_CHECKING, TextIO

from ringstrain.views.look import SAMPLE, Look, Units

if TYPE_CHECKING:
    from rich.console import Console

#: Below this width tables would have to drop figures; a narrower terminal wraps the lines instead [characters].
MIN_WIDTH = 50


def make_console(stream: TextIO | None = None, *, no_color: bool = False) -> Console:
    """A console that prints brackets as brackets.

    Parameters
    ----------
    stream
        Where it prints; standard output when None.
    no_color
        True to leave colour out whatever the terminal can do.

    Returns
    -------
    Console
        Without markup, emoji codes or highlighting.
    """
    from rich.console import Console

    class _Plain(Console):
        def on_broken_pipe(self) -> None:
            """Leave a closed pipe to the border."""
            raise BrokenPipeError

    console = _Plain(file=stream or sys.stdout, markup=False, emoji=False, highlight=False, no_color=no_color or None)
    if console.width < MIN_WIDTH:
        console.width = MIN_WIDTH
    return console


def make_look(console: Console, *, ascii: bool = False, units: Units = "kcal") -> Look:
    """How to write on a console; ASCII without asking when its encoding cannot take our signs."""
    return Look(width=console.width, ascii=ascii or not takes(console.encoding, SAMPLE), units=units)


def takes(encoding: str, text: str) -> bool:
    """True when an encoding has every character of a text."""
    try:
        text.encode(encoding)
    except (UnicodeEncodeError, LookupError):
        return False
    return True


def prepare_streams() -> None:
    """Let no character of an input crash the output: what the encoding lacks is written as an escape."""
    for stream in (sys.stdout, sys.stderr):
        reconfigure = getattr(stream, "reconfigure", None)
        if reconfigure is not None:
            reconfigure(errors="backslashreplace")


def silence(stream: TextIO) -> None:
    """Send what is left in a stream nowhere, so that closing it cannot fail again."""
    try:
        nowhere = os.open(os.devnull, os.O_WRONLY)
        os.dup2(nowhere, stream.fileno())
        os.close(nowhere)
    except (OSError, ValueError):
        return
