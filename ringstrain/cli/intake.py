"""STRUCTURE arguments turned into records to read: text, files, standard input."""

from __future__ import annotations

import sys
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, replace
from itertools import chain, islice
from pathlib import Path
from typing import TYPE_CHECKING

from ringstrain.errors import InputError, UsageError

if TYPE_CHECKING:
    from ringstrain.structure.records import Structure

#: Parent ring of a shorthand when none is named.
PARENT = "cyclohexane"


@dataclass(frozen=True, slots=True, kw_only=True)
class Record:
    """One structure to read.

    Attributes
    ----------
    text
        SMILES, shorthand or molfile block.
    name
        A name that came with it.
    is_block
        True for a molfile block.
    fault
        Why the source could not be read, instead of a text.
    """

    text: str
    name: str = ""
    is_block: bool = False
    fault: InputError | None = None

    @property
    def takes_ring(self) -> bool:
        """True when a parent ring can be named for it: a shorthand, or nothing that could be read."""
        from ringstrain.structure.shorthand import is_shorthand

        text = self.text.strip()
        return self.fault is not None or not (self.is_block or (text and not is_shorthand(text)))

    @property
    def label(self) -> str:
        """What to call it in a message."""
        return (self.name or "molfile") if self.is_block else self.text

    def read(self, ring: str) -> Structure:
        """The structure.

        Raises
        ------
        RingstrainError
            As :func:`ringstrain.read`, or the fault of the source.
        """
        from ringstrain.structure.read import read, read_molblock

        if self.fault is not None:
            raise self.fault
        if self.is_block:
            return read_molblock(self.text, name=self.name)
        structure = read(self.text, ring=ring)
        return replace(structure, name=self.name) if self.name and not structure.name else structure


def records(arguments: Sequence[str]) -> Iterator[Record]:
    """Records of all STRUCTURE arguments in order; standard input when there are none.

    Parameters
    ----------
    arguments
        SMILES, shorthands, file names or ``-``.
    """
    for argument in arguments or ("-",):
        if argument == "-":
            yield from _from_lines(_standard_input())
        elif _is_file_name(argument):
            yield from _from_file(argument)
        else:
            yield Record(text=argument)


def only_record(arguments: Sequence[str], ring: str = PARENT, beside: Sequence[str] = ()) -> Record:
    """The one record a command takes.

    Parameters
    ----------
    arguments
        As for :func:`records`.
    ring
        Parent ring asked for.
    beside
        Other texts of the command that may be shorthands.

    Raises
    ------
    UsageError
        If there are several, or the ring is unknown or nothing can use it.
    """
    check_ring(ring, [*arguments, *beside] if arguments else ())
    found = list(islice(records(arguments), 2))
    if len(found) != 1:
        raise UsageError("This command takes one structure.", "Give one at a time.")
    if ring != PARENT and not any(record.takes_ring for record in (*found, *(Record(text=text) for text in beside))):
        raise _idle_ring(ring, found[0])
    return found[0]


def check_ring(ring: str, arguments: Sequence[str] = ()) -> None:
    """Refuse a parent ring that is unknown, or that no STRUCTURE typed on the command line can use.

    Parameters
    ----------
    ring
        Parent ring asked for.
    arguments
        STRUCTURE arguments; what files and standard input hold is not known yet.

    Raises
    ------
    UsageError
        If so.
    """
    if ring == PARENT:
        return
    from ringstrain.structure.shorthand import PARENT_RINGS

    if ring not in PARENT_RINGS:
        raise UsageError(f"No ring is called {ring!r}.", f"Choose one of {', '.join(PARENT_RINGS)}.")
    if not arguments or any(argument == "-" or _is_file_name(argument) for argument in arguments):
        return
    typed = [Record(text=argument) for argument in arguments]
    if not any(record.takes_ring for record in typed):
        raise _idle_ring(ring, typed[0])


def _idle_ring(ring: str, record: Record) -> UsageError:
    """A parent ring for a structure that brings its own."""
    what = "a molfile" if record.is_block else repr(record.text)
    return UsageError(
        f"--ring {ring} is the parent ring of a shorthand, and {what} is none.",
        "Leave --ring out, or write the groups as a shorthand such as '2b-Me 4b-OH'.",
    )


def nothing_given(arguments: Sequence[str] | None) -> bool:
    """True when there is no argument and nobody pipes anything in."""
    return not arguments and sys.stdin.isatty()


def _is_file_name(argument: str) -> bool:
    """True for a name with a structure suffix, and for a file that exists (its suffix is then refused)."""
    from ringstrain.structure.files import file_kind

    if file_kind(argument):
        return True
    if "/" not in argument and "." not in argument:
        return False
    try:
        return Path(argument).is_file()
    except (OSError, ValueError):
        return False


def _from_file(path: str) -> Iterator[Record]:
    """Records of a file; a file that cannot be read is one faulty record."""
    from ringstrain.structure.files import read_records

    empty = True
    try:
        for text, name, is_block in read_records(path):
            empty = False
            if is_block:
                yield Record(text=text, name=name, is_block=True)
            else:
                core, _, label = text.partition("\t")
                yield Record(text=core if label else text, name=label.strip())
    except InputError as error:
        yield Record(text=path, fault=error)
        return
    if empty:
        yield Record(text=path, fault=InputError(f"The file {path!r} holds no structure.", "Check the file."))


def _standard_input() -> Iterator[str]:
    """Lines of standard input; bytes that are no UTF-8 stay visible as escapes."""
    reconfigure = getattr(sys.stdin, "reconfigure", None)
    if reconfigure is not None:
        reconfigure(encoding="utf-8", errors="backslashreplace")
    yield from sys.stdin


def _from_lines(lines: Iterable[str]) -> Iterator[Record]:
    """One SMILES or shorthand a line, a name after a tab, no comments; molfile blocks show on their fourth line."""
    from ringstrain.structure.shorthand import is_remark

    stream = iter(lines)
    head = list(islice(stream, 4))
    if len(head) == 4 and ("V2000" in head[3] or "V3000" in head[3]):
        yield from _from_blocks(chain(head, stream))
        return
    empty = True
    for line in chain(head, stream):
        text, _, name = line.rstrip("\r\n").lstrip("\N{ZERO WIDTH NO-BREAK SPACE}").partition("\t")
        if text.strip() and not is_remark(text):
            empty = False
            yield Record(text=text.strip(), name=name.strip())
    if empty:
        fault = InputError("Standard input holds no structure.", "Pipe one SMILES per line, or give one as argument.")
        yield Record(text="", fault=fault)


def _from_blocks(lines: Iterable[str]) -> Iterator[Record]:
    """Molfile blocks, ended by four dollar signs."""
    block: list[str] = []
    for line in lines:
        if line.startswith("$$$$"):
            yield Record(text="".join(block), name=block[0].strip() if block else "", is_block=True)
            block = []
        else:
            block.append(line)
    if any(line.strip() for line in block):
        yield Record(text="".join(block), name=block[0].strip(), is_block=True)
