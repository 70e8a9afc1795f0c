"""The typer application; every command registers itself from its own module ``cmd_<name>``."""

from __future__ import annotations

from collections.abc import Sequence
from importlib import import_module
from pkgutil import iter_modules
from typing import Annotated

import typer

import ringstrain.cli

_PREFIX = "cmd_"
HELP = """Which chair or diastereomer of a six-membered ring wins, by how much, how surely and why.

\b
  ringstrain chairs 'C[C@@H]1CC[C@@H](C(C)C)[C@H](O)C1'
  ringstrain chairs '1b-tBu 4a-Me' --medium polar -T 250

Quote the SMILES: shells interpret ( ) [ ] # \\ $ !. Atom numbers in text count from 1.
Exit codes: 0 answered, 1 our bug, 2 usage, 3 input, 4 out of scope, 5 missing value, 6 faulty tables, 130 interrupted.
"""


def command_names() -> tuple[str, ...]:
    """Every command that has a module."""
    found = (module.name for module in iter_modules(ringstrain.cli.__path__))
    return tuple(sorted(name.removeprefix(_PREFIX) for name in found if name.startswith(_PREFIX)))


def build_app(arguments: Sequence[str]) -> typer.Typer:
    """The application with the command that is asked for, or with all of them.

    Parameters
    ----------
    arguments
        Command line without the program name; when its first plain word is a command only that one is loaded.
    """
    app = typer.Typer(
        name="ringstrain",
        help=HELP,
        rich_markup_mode=None,
        pretty_exceptions_enable=False,
        no_args_is_help=True,
        context_settings={"help_option_names": ["-h", "--help"]},
    )
    app.callback()(_common)
    names = command_names()
    wanted = next((word for word in arguments if not word.startswith("-")), "")
    for name in (wanted,) if wanted in names else names:
        import_module(f"ringstrain.cli.{_PREFIX}{name}").register(app)
    return app


def _print_version(asked: bool) -> None:
    """Print our version, RDKit's and the revision of the tables."""
    if not asked:
        return
    from rdkit import rdBase

    from ringstrain import __version__
    from ringstrain.tables import load_tables

    typer.echo(f"ringstrain {__version__} (RDKit {rdBase.rdkitVersion}, tables {load_tables().revision})")
    raise typer.Exit


def _common(
    version: Annotated[
        bool,
        typer.Option(
            "--version",
            help="Print the versions of ringstrain, RDKit and the tables.",
            callback=_print_version,
            is_eager=True,
        ),
    ] = False,
    debug: Annotated[bool, typer.Option("--debug", help="Show the traceback of an unexpected error.")] = False,
) -> None:
    pass


_common.__doc__ = HELP
