"""The documents are true: what they print is what the program prints, and they name all there is."""

from __future__ import annotations

import doctest
import json
import re
import sys
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
import typer
from ringstrain.cli.app import build_app, command_names

from documents import CHECKOUT, DOCUMENTS, EXAMPLES, README, Block, agrees, blocks, dialogues, play, read, scratch

DEVELOPERS = CHECKOUT / "DEVELOPERS.md"
TABLES = CHECKOUT / "tables"
#: Where the options that every command shares are explained.
SHARED = "Options that mean the same everywhere"


def console_blocks() -> Iterator[Any]:
    """Every console block of the documents, named by file and line."""
    for path in DOCUMENTS:
        for block in blocks(read(path), "console"):
            yield pytest.param(block, id=f"{path.parent.name}-{path.name}-{block.line}")


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return scratch(tmp_path_factory.mktemp("docs") / "checkout")


@pytest.mark.skipif(sys.platform == "win32", reason="needs a pseudo-terminal")
@pytest.mark.parametrize("block", tuple(console_blocks()))
def test_a_console_block_shows_what_the_program_shows(block: Block, folder: Path) -> None:
    assert dialogues(block)
    for dialogue in dialogues(block):
        shown = play(dialogue.command, folder)
        assert agrees(dialogue.output, shown), (
            f"$ {dialogue.command}\n{shown}\nRun `python tests/documents.py` and look at what changed."
        )


@pytest.mark.parametrize("path", DOCUMENTS, ids=lambda path: f"{path.parent.name}-{path.name}")
def test_python_blocks_are_doctests_that_pass(path: Path, folder: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(folder)
    text = "\n".join(block.text for block in blocks(read(path), "python"))
    session = doctest.DocTestParser().get_doctest(text, {}, path.name, str(path), 0)
    assert session.examples or path != README
    runner = doctest.DocTestRunner(optionflags=doctest.ELLIPSIS)
    report: list[str] = []
    runner.run(session, out=report.append)
    assert not runner.failures, "".join(report)


def test_three_dots_stand_for_anything_and_nothing_else_does() -> None:
    assert agrees("a ... d\n", "a b\nc d\n")
    assert not agrees("a b\n", "a c\n")
    assert not agrees("a ... d\n", "a b\n")


def sections(text: str, level: int) -> dict[str, str]:
    """Text below each heading of a level, by heading."""
    parts = re.split(rf"^{'#' * level} (.*)\n", text, flags=re.MULTILINE)
    return dict(zip(parts[1::2], parts[2::2], strict=True))


def command(name: str) -> Any:
    """A command of the program."""
    group: Any = typer.main.get_command(build_app([]))
    return group.commands[name] if name else group


def options(name: str) -> set[str]:
    """Options of a command, long and short; of the program itself when the name is empty."""
    chosen = command(name)
    context = typer.Context(chosen, info_name=name or "ringstrain", help_option_names=["-h", "--help"])
    parameters = (p for p in chosen.get_params(context) if p.param_type_name == "option")
    return {option for p in parameters for option in (*p.opts, *p.secondary_opts)}


def names(text: str) -> set[str]:
    """Options a text names."""
    return set(re.findall(r"(?<![\w/-])(--[a-z][a-z-]*|-[a-zA-Z])(?![\w-])", text))


@pytest.mark.parametrize("name", command_names())
def test_every_command_has_its_section_and_every_option_is_named_there_or_among_the_shared_ones(name: str) -> None:
    below = sections(read(README), 3)
    assert name in below, f"README has no section '### {name}'"
    assert f"ringstrain {name}" in below[name]
    assert options(name) <= names(below[name]) | names(below[SHARED])


def test_options_of_the_program_itself_are_named() -> None:
    assert options("") <= names(read(README))


def test_no_section_describes_a_command_that_does_not_exist() -> None:
    below = sections(read(README), 2)["Commands"]
    described = set(re.findall(r"(?:`|^\$ )ringstrain ([a-z]+)\b", read(README), re.MULTILINE))
    described |= set(re.findall(r"^### ([a-z]+)$", below, re.MULTILINE))
    assert described == set(command_names())


@pytest.mark.parametrize("name", command_names())
def test_no_section_names_an_option_the_command_does_not_have(name: str) -> None:
    below = sections(read(README), 3)[name]
    everything = set().union(*(options(other) for other in command_names()))
    assert {option for option in names(below) if option.startswith("--")} <= everything


@pytest.mark.parametrize("path", [README, DEVELOPERS, TABLES / "README.md", EXAMPLES / "README.md"], ids=str)
def test_links_lead_somewhere(path: Path) -> None:
    text = re.sub(r"`[^`\n]+`", "", re.sub(r"^```.*?^```$", "", read(path), flags=re.MULTILINE | re.DOTALL))
    headings = {
        re.sub(r"[^\w -]", "", heading.lower()).replace(" ", "-") for heading in re.findall(r"^#+ (.*)", text, re.M)
    }
    for target in re.findall(r"\]\(([^)\s]+)\)", text):
        if target.startswith("#"):
            assert target[1:] in headings, target
        else:
            assert (path.parent / target).exists(), target


def test_the_readme_starts_with_the_job_and_two_set_up_commands() -> None:
    text = read(README)
    assert text.startswith("# ringstrain\n\n")
    setup = next(blocks(text, "sh")).text.splitlines()
    assert len(setup) == 2
    assert all(line.startswith("python3 -m venv .venv && .venv/bin/pip install ") for line in setup)
    assert ".venv/bin/ringstrain chairs" in setup[0]
    assert setup[1].endswith(".venv/bin/pytest")


def kinds_of_documents() -> list[Any]:
    """Kind, command and fields of each row of the JSON table."""
    rows = re.findall(r"^\| `([a-z-]+)` \| `(ringstrain [^`]+)` \| (.*) \|$", read(README), re.MULTILINE)
    return [pytest.param(kind, command, set(re.findall(r"`(\w+)`", cell)), id=kind) for kind, command, cell in rows]


def keys(value: Any) -> set[str]:
    """Keys of a JSON value at any depth."""
    if isinstance(value, dict):
        return set(value).union(*map(keys, value.values()))
    return set().union(*map(keys, value)) if isinstance(value, list) else set()


@pytest.mark.parametrize(("kind", "command", "fields"), kinds_of_documents())
def test_json_documents_have_the_fields_the_readme_lists(
    kind: str, command: str, fields: set[str], folder: Path
) -> None:
    document = json.loads(play(f"{command} --json", folder).splitlines()[0])
    assert document["schema"] == "ringstrain/1"
    assert document["kind"] == kind
    assert fields <= keys(document)


def test_every_command_that_writes_json_has_its_row() -> None:
    commands = {parameter.values[1].split()[1] for parameter in kinds_of_documents()}
    assert {name for name in command_names() if "--json" in options(name)} <= commands


def test_every_exit_code_is_listed() -> None:
    from ringstrain import errors

    listed = {int(code) for code in re.findall(r"^\| (\d+) \|", sections(read(README), 3)["Exit codes"], re.MULTILINE)}
    kinds = [kind for kind in vars(errors).values() if isinstance(kind, type) and hasattr(kind, "exit_code")]
    assert {kind.exit_code for kind in kinds} | {0, 1, 130} == listed


def test_every_public_name_of_the_package_is_in_the_readme() -> None:
    import ringstrain

    text = read(README)
    missing = [name for name in ringstrain.__all__ if not re.search(rf"\b{re.escape(name)}\b", text)]
    assert not missing


def test_every_table_file_is_described() -> None:
    text = read(TABLES / "README.md")
    assert not [path.name for path in sorted(TABLES.glob("*.csv")) if path.name not in text]


def test_examples_say_that_they_are_invented() -> None:
    assert "invented" in read(EXAMPLES / "README.md").splitlines()[0]
    mentioned = read(EXAMPLES / "README.md") + read(README)
    for path in EXAMPLES.iterdir():
        assert path.name == "README.md" or f"examples/{path.name}" in mentioned, path.name
