"""Rich markup must not eat chemistry: aromatic brackets, SMARTS atoms and colons pass through every view."""

from __future__ import annotations

import io
from dataclasses import replace

import pytest
from rich.console import RenderableType
from ringstrain import analyze, load_tables
from ringstrain.cli.console import make_console, make_look
from ringstrain.errors import ParseError
from ringstrain.views import claims, faults, plain
from ringstrain.views.conditions import conditions_view
from ringstrain.views.look import Look
from ringstrain.views.rich_tables import chairs_view

#: The first two vanish under rich's defaults, the third turns into an emoji, the rest are markup in earnest.
CHEMISTRY = ["c1cc[nH]c1", "[#6]", "c1:c:c:o:c1", "[C@@H]", "[bold]C[/bold]", "[N+](=O)[O-]", "http://[x]", ":smile:"]


def _render(*parts: RenderableType) -> str:
    stream = io.StringIO()
    console = make_console(stream)
    for part in parts:
        console.print(part)
    return stream.getvalue()


@pytest.fixture(autouse=True)
def _wide(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("COLUMNS", "300")


@pytest.fixture
def look() -> Look:
    return make_look(make_console(io.StringIO()))


@pytest.mark.parametrize("text", CHEMISTRY)
def test_names_inputs_and_notes_pass_through_the_chairs_view(text: str, look: Look) -> None:
    analysis = analyze("C[C@@H]1CCC[C@H](C)C1")
    structure = replace(analysis.structure, text=f"input {text}", name=f"name {text}")
    marked = replace(analysis, structure=structure, notes=(f"note {text}",))
    shown = _render(*chairs_view(marked, load_tables().sources, look))
    assert shown.count(text) == 3
    several = _render(*conditions_view((marked, marked), look))
    assert several.count(text) == 3


@pytest.mark.parametrize("text", CHEMISTRY)
def test_error_messages_pass_through(text: str, look: Look) -> None:
    error = ParseError(f"Problem with {text}.", f"Mend {text}.", text=f"asked {text}", span=(0, 5))
    shown = _render(*(look.text(line) for line in faults.fault_lines(error)))
    assert shown.count(text) == 3


@pytest.mark.parametrize("text", CHEMISTRY)
def test_claims_pass_through_the_tables_views(text: str, look: Look) -> None:
    from ringstrain.cli.lookup import Entry, Topic

    tables = load_tables()
    claim = replace(tables.row("avalues/methyl-booth-everett-1980"), note=f"note {text}", method=f"method {text}")
    topic = Topic(kind="group", key=f"key {text}", smiles=text, entries=(Entry(claim=claim, used=()),))
    shown = _render(*claims.topic_view(topic, "anywhere", tables.sources, look))
    assert shown.count(text) == 4


@pytest.mark.parametrize("text", CHEMISTRY)
def test_tsv_keeps_them_and_never_breaks_a_line(text: str) -> None:
    line = plain.row((text, f"a\tb\n{text}", None, 1.5))
    assert line == f"{text}\ta b {text}\t\t1.5"


@pytest.mark.parametrize("text", CHEMISTRY)
def test_help_of_a_command_prints_them_whole(text: str) -> None:
    import typer

    app = typer.Typer(rich_markup_mode=None)
    app.callback()(lambda: None)
    app.command("one", help=f"Try {text} now")(lambda: None)
    from typer.testing import CliRunner

    assert text in CliRunner().invoke(app, ["one", "--help"]).output


def test_control_characters_never_reach_the_terminal(look: Look) -> None:
    assert look.say("a\x1b[31mb\x07c\td") == "a?[31mb?c d"
