"""The terminal: parse, call one function, choose a view, map errors to exit codes."""

from __future__ import annotations


def main() -> None:
    """Entry point of the ``ringstrain`` command."""
    import sys

    from ringstrain.cli.border import run

    sys.exit(run(sys.argv[1:]))
