"""Reads the fenced blocks of README and its like, runs them, and writes true output back.

``python tests/documents.py`` rewrites every console block whose output has changed; look at the difference before
you commit it.
"""

from __future__ import annotations

import os
import re
import shutil
import subprocess
import sys
import tempfile
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

CHECKOUT = Path(__file__).resolve().parents[1]
README = CHECKOUT / "README.md"
EXAMPLES = CHECKOUT / "examples"
#: Documents whose blocks must be true.
DOCUMENTS = (README, EXAMPLES / "README.md")
WIDTH = 100
_FENCE = re.compile(r"^```(\w*)\n(.*?)^```$", re.MULTILINE | re.DOTALL)
#: What is printed when something is broken; never written into a document.
_OUR_BUG = "Something went wrong inside ringstrain"
_STYLE = re.compile(r"\x1b\[[0-9;]*[A-Za-z]")


@dataclass(frozen=True, slots=True)
class Block:
    """A fenced block.

    Attributes
    ----------
    language
        Word behind the opening fence.
    text
        What stands between the fences.
    span
        Where the text stands in the document, first and one past the last character.
    line
        Line of the opening fence, from 1.
    """

    language: str
    text: str
    span: tuple[int, int]
    line: int


@dataclass(frozen=True, slots=True)
class Dialogue:
    """One command of a console block and the output printed below it."""

    command: str
    output: str


def read(path: Path) -> str:
    """Text of a document."""
    return path.read_text(encoding="utf-8")


def blocks(text: str, language: str) -> Iterator[Block]:
    """Fenced blocks in one language."""
    for match in _FENCE.finditer(text):
        if match.group(1) == language:
            yield Block(language, match.group(2), match.span(2), text.count("\n", 0, match.start()) + 1)


def dialogues(block: Block) -> tuple[Dialogue, ...]:
    """Commands of a console block, each behind ``$``, with their outputs."""
    parts = re.split(r"^\$ (.*)\n", block.text, flags=re.MULTILINE)
    assert not parts[0].strip(), "a console block starts with a command"
    return tuple(Dialogue(command, output) for command, output in zip(parts[1::2], parts[2::2], strict=True))


def scratch(folder: Path) -> Path:
    """A folder like a checkout as far as the documents care: the examples, and ``ringstrain`` to be called."""
    shutil.copytree(EXAMPLES, folder / "examples")
    program = folder / "bin" / "ringstrain"
    program.parent.mkdir()
    code = "from ringstrain.cli import main; main()"
    program.write_text(f'#!/bin/sh\nexec "{sys.executable}" -c "{code}" "$@"\n', encoding="utf-8", newline="\n")
    program.chmod(0o755)
    return folder


def play(command: str, folder: Path) -> str:
    """What a command shows on a terminal of our width, errors included.

    Parameters
    ----------
    command
        A shell command.
    folder
        A scratch folder.
    """
    import pty

    ours, theirs = pty.openpty()
    environment = {
        "PATH": os.pathsep.join((str(folder / "bin"), os.environ.get("PATH", os.defpath))),
        "HOME": str(folder),
        "LC_ALL": "C.UTF-8",
        "TERM": "xterm",
        "NO_COLOR": "1",
        "COLUMNS": str(WIDTH),
        "LINES": "50",
        "PYTHONWARNINGS": "error",
    }
    process = subprocess.Popen(
        ["/bin/sh", "-c", command],
        stdin=subprocess.DEVNULL,
        stdout=theirs,
        stderr=theirs,
        cwd=folder,
        env=environment,
    )
    os.close(theirs)
    shown = b"".join(_chunks(ours))
    os.close(ours)
    process.wait(timeout=60)
    text = _STYLE.sub("", shown.decode("utf-8").replace("\r\n", "\n"))
    # Progress goes back to the start of its line and is written over.
    return tidy("\n".join(line.rpartition("\r")[2] for line in text.split("\n")))


def _chunks(terminal: int) -> Iterator[bytes]:
    """What arrives at a terminal until the other side hangs up."""
    while True:
        try:
            chunk = os.read(terminal, 65536)
        except OSError:
            return
        if not chunk:
            return
        yield chunk


def tidy(text: str) -> str:
    """Lines without trailing blanks, ended by one line break."""
    stripped = "\n".join(line.rstrip() for line in text.split("\n")).strip("\n")
    return f"{stripped}\n" if stripped else ""


def agrees(documented: str, shown: str) -> bool:
    """True when a documented output is what is shown; three dots stand for anything."""
    pattern = ".*?".join(re.escape(part) for part in tidy(documented).split("..."))
    return re.fullmatch(pattern, shown, flags=re.DOTALL) is not None


def refreshed(text: str, folder: Path) -> str:
    """A document with the outputs that are no longer true replaced."""
    for block in reversed(tuple(blocks(text, "console"))):
        parts = []
        for dialogue in dialogues(block):
            shown = play(dialogue.command, folder)
            stale = not agrees(dialogue.output, shown) and _OUR_BUG not in shown
            output = shown if stale else dialogue.output
            parts.append(f"$ {dialogue.command}\n{output}")
        text = text[: block.span[0]] + "".join(parts) + text[block.span[1] :]
    return text


def _main() -> None:
    for path in DOCUMENTS:
        with tempfile.TemporaryDirectory() as name:
            before = read(path)
            after = refreshed(before, scratch(Path(name)))
        if after != before:
            path.write_text(after, encoding="utf-8", newline="\n")
            sys.stdout.write(f"{path.relative_to(CHECKOUT)} rewritten\n")


if __name__ == "__main__":
    _main()
