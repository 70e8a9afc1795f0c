"""What can go wrong, sorted by whose move it is.

Every failure the library reports is a :class:`RingstrainError`::

    RingstrainError
    |-- InputError       the user fixes the molecule or the command
    |   |-- ParseError          text that is no structure
    |   |-- StereoError         a stereocentre that matters is left open
    |   |-- UnknownGroup        a group name that no table knows
    |   `-- UsageError          an option or argument that makes no sense
    |-- OutOfScope       the model cannot answer for this kind of molecule
    |-- MissingValue     the tables lack a number the answer needs
    `-- TableError       a table is faulty: its maintainer fixes it

Each error holds data (atoms, character span, keys), builds one sentence from it and ends with the next
step.  Each pickles, so that a process pool can hand it back.
"""

from __future__ import annotations

from typing import Any, ClassVar


class RingstrainError(Exception):
    """Root of every error ringstrain raises on purpose.

    Parameters
    ----------
    problem
        One sentence that says what is wrong.
    next_step
        One sentence that says what to do about it.
    atoms
        Atoms concerned, zero-based, in input order.
    span
        First and one-past-last character of the input concerned.
    text
        The input the span refers to.
    """

    family: ClassVar[str] = "error"
    code: ClassVar[str] = "error"
    exit_code: ClassVar[int] = 1

    def __init__(
        self,
        problem: str,
        next_step: str = "",
        *,
        atoms: tuple[int, ...] = (),
        span: tuple[int, int] | None = None,
        text: str | None = None,
    ) -> None:
        super().__init__(problem, next_step)
        self.problem = problem
        self.next_step = next_step
        self.atoms = atoms
        self.span = span
        self.text = text

    @property
    def message(self) -> str:
        """The whole message in one line."""
        return f"{self.problem} {self.next_step}".strip()

    def __str__(self) -> str:
        return self.message

    def __reduce__(self) -> tuple[Any, ...]:
        return (_rebuild, (type(self), self.__dict__.copy()))


def _rebuild(kind: type[RingstrainError], state: dict[str, Any]) -> RingstrainError:
    """Make an error again from its pickled data."""
    error = kind.__new__(kind)
    Exception.__init__(error, state["problem"], state["next_step"])
    error.__dict__.update(state)
    return error


class InputError(RingstrainError):
    """The structure, file or command is at fault; the user mends it."""

    family: ClassVar[str] = "input"
    code: ClassVar[str] = "input"
    exit_code: ClassVar[int] = 3


class ParseError(InputError):
    """The text is not a structure."""

    code: ClassVar[str] = "parse"


class StereoError(InputError):
    """A configuration that the answer depends on is not given.

    Attributes
    ----------
    spans
        Characters of the input each open atom stands at.
    """

    code: ClassVar[str] = "stereo"
    spans: tuple[tuple[int, int], ...] = ()


class UnknownGroup(InputError):
    """A substituent name that is neither a table key nor an alias.

    Parameters
    ----------
    name
        The name as typed.
    suggestions
        Known names that look alike.
    span, text
        Where in the input the name stands.
    """

    code: ClassVar[str] = "unknown-group"

    def __init__(
        self,
        name: str,
        suggestions: tuple[str, ...] = (),
        *,
        span: tuple[int, int] | None = None,
        text: str | None = None,
    ) -> None:
        hint = f"Did you mean {' or '.join(suggestions)}? " if suggestions else ""
        super().__init__(
            f"No group is called {name!r}.",
            f"{hint}`ringstrain tables` lists every group and alias.",
            span=span,
            text=text,
        )
        self.name = name
        self.suggestions = suggestions


class UsageError(InputError):
    """An option or argument that cannot be right."""

    code: ClassVar[str] = "usage"
    exit_code: ClassVar[int] = 2


class OutOfScope(RingstrainError):
    """The molecule is well formed but the model does not cover it."""

    family: ClassVar[str] = "out-of-scope"
    code: ClassVar[str] = "out-of-scope"
    exit_code: ClassVar[int] = 4


class MissingValue(RingstrainError):
    """The tables hold no number for something the answer needs.

    Parameters
    ----------
    kind
        What sort of price is missing, e.g. ``"A-value"``.
    keys
        The groups it is missing for.
    atoms
        Atoms of the contact that stays unpriced, zero-based.
    """

    family: ClassVar[str] = "missing"
    code: ClassVar[str] = "missing-value"
    exit_code: ClassVar[int] = 5

    def __init__(self, kind: str, keys: tuple[str, ...], *, atoms: tuple[int, ...] = ()) -> None:
        super().__init__(
            f"No {kind} is tabulated for {' and '.join(keys)}.",
            "Give your own number with --table-file, or drop --strict to get a bound.",
            atoms=atoms,
        )
        self.kind = kind
        self.keys = keys


class TableError(RingstrainError):
    """A table row is faulty.

    Parameters
    ----------
    problem
        What is wrong.
    file
        File name.
    line
        Line number from 1, header included; 0 when the whole file is meant.
    column
        Column name, empty when the whole row is meant.
    """

    family: ClassVar[str] = "table"
    code: ClassVar[str] = "table"
    exit_code: ClassVar[int] = 6

    def __init__(self, problem: str, *, file: str, line: int = 0, column: str = "") -> None:
        place = file + (f", line {line}" if line else "") + (f", column {column}" if column else "")
        super().__init__(f"{place}: {problem}", "Mend the row, then run `ringstrain tables --check`.")
        self.file = file
        self.line = line
        self.column = column
        self.fault = problem
