"""What is built holds what it needs: wheel, wheel from the source archive, editable install, one version."""

from __future__ import annotations

import io
import json
import re
import subprocess
import sys
import tarfile
import tomllib
import zipfile
from importlib import metadata
from pathlib import Path
from typing import Any

import pytest
import ringstrain

CHECKOUT = Path(__file__).resolve().parents[1]
TABLES = sorted(path.name for path in (CHECKOUT / "tables").glob("*.csv"))
MODULES = sorted(
    path.relative_to(CHECKOUT).as_posix()
    for path in (CHECKOUT / "ringstrain").rglob("*.py")
    if "_tables" not in path.parts
)


def build(source: Path, target: Path, kind: str) -> Path:
    """Build with the back end of pyproject.toml, in a process of its own; no network is needed."""
    target.mkdir(parents=True, exist_ok=True)
    code = "import sys; from hatchling import build; print(getattr(build, sys.argv[1])(sys.argv[2]))"
    done = subprocess.run(
        [sys.executable, "-c", code, f"build_{kind}", str(target)],
        cwd=source,
        capture_output=True,
        check=True,
        text=True,
        encoding="utf-8",
    )
    return target / done.stdout.splitlines()[-1]


@pytest.fixture(scope="module")
def wheel(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return build(CHECKOUT, tmp_path_factory.mktemp("wheel"), "wheel")


@pytest.fixture(scope="module")
def sdist(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return build(CHECKOUT, tmp_path_factory.mktemp("sdist"), "sdist")


@pytest.fixture(scope="module")
def wheel_from_sdist(sdist: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("unpacked")
    with tarfile.open(sdist) as archive:
        archive.extractall(folder, filter="data")
    (source,) = folder.iterdir()
    return build(source, tmp_path_factory.mktemp("again"), "wheel")


@pytest.fixture(params=["wheel", "wheel_from_sdist"])
def built(request: pytest.FixtureRequest) -> Path:
    path: Path = request.getfixturevalue(request.param)
    return path


def contents(wheel: Path) -> dict[str, bytes]:
    """Files of a wheel."""
    with zipfile.ZipFile(wheel) as archive:
        return {name: archive.read(name) for name in archive.namelist()}


def test_the_wheel_holds_every_module_every_table_and_the_type_marker(built: Path) -> None:
    names = set(contents(built))
    assert {f"ringstrain/_tables/{name}" for name in TABLES} <= names
    assert set(MODULES) <= names
    assert "ringstrain/py.typed" in names


def test_the_wheel_holds_nothing_else(built: Path) -> None:
    tops = {name.split("/")[0] for name in contents(built)}
    assert {top for top in tops if not top.endswith(".dist-info")} == {"ringstrain"}


def test_both_ways_lead_to_the_same_files(wheel: Path, wheel_from_sdist: Path) -> None:
    direct, around = contents(wheel), contents(wheel_from_sdist)
    assert {name: data for name, data in direct.items() if not name.endswith("/RECORD")} == {
        name: data for name, data in around.items() if not name.endswith("/RECORD")
    }


def test_tables_arrive_byte_by_byte(built: Path) -> None:
    files = contents(built)
    for name in TABLES:
        assert files[f"ringstrain/_tables/{name}"] == (CHECKOUT / "tables" / name).read_bytes(), name


def test_the_unpacked_wheel_answers_outside_the_checkout_with_its_own_tables(built: Path, tmp_path: Path) -> None:
    site, elsewhere = tmp_path / "site", tmp_path / "elsewhere"
    elsewhere.mkdir()
    with zipfile.ZipFile(built) as archive:
        archive.extractall(site)
    code = (
        "import sys; sys.path.insert(0, sys.argv.pop(1))\n"
        "from ringstrain.tables.reader import tables_folder\n"
        "print(tables_folder(), flush=True)\n"
        "from ringstrain.cli import main; main()\n"
    )
    done = subprocess.run(
        [sys.executable, "-c", code, str(site), "chairs", "CC1CCCCC1", "--json"],
        cwd=elsewhere,
        capture_output=True,
        check=True,
        text=True,
        encoding="utf-8",
    )
    folder, answer = done.stdout.splitlines()
    assert Path(folder) == site / "ringstrain" / "_tables"
    states = json.loads(answer)["ring_systems"][0]["states"]
    assert states[0]["equatorial"] == [0]
    # 95:5 for methylcyclohexane: Eliel and Wilen, Stereochemistry of Organic Compounds, 1994, ch. 11 (recalled).
    assert states[0]["population"] == pytest.approx(0.95, abs=0.01)


def test_an_editable_install_reads_the_tables_of_the_checkout(tmp_path: Path) -> None:
    files = contents(build(CHECKOUT, tmp_path, "editable"))
    (pointer,) = (data.decode() for name, data in files.items() if name.endswith(".pth"))
    assert Path(pointer.strip()) == CHECKOUT
    # A packaged copy would hide what is edited in tables/.
    assert not (CHECKOUT / "ringstrain" / "_tables").exists()


def test_the_source_archive_holds_tests_examples_and_documents(sdist: Path) -> None:
    with tarfile.open(sdist) as archive:
        names = {name.partition("/")[2] for name in archive.getnames()}
    assert {"README.md", "DEVELOPERS.md", "pyproject.toml", "tests/conftest.py", "examples/README.md"} <= names
    assert {f"tables/{name}" for name in (*TABLES, "README.md")} <= names


def project() -> dict[str, Any]:
    """The project table of pyproject.toml."""
    table: dict[str, Any] = tomllib.loads((CHECKOUT / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    return table


def test_the_version_stands_in_one_place(wheel: Path) -> None:
    assert "version" not in project()
    assert project()["dynamic"] == ["version"]
    assert wheel.name.split("-")[1] == ringstrain.__version__
    assert metadata.version("ringstrain") == ringstrain.__version__


def test_requirements_are_lower_bounds_only() -> None:
    extras = project()["optional-dependencies"].values()
    for requirement in (*project()["dependencies"], *(one for extra in extras for one in extra)):
        assert re.fullmatch(r"[A-Za-z0-9_.\[\]-]+>=[0-9.]+", requirement), requirement


def test_five_packages_are_needed_at_run_time() -> None:
    names = {re.split(r"[<>=]", requirement)[0] for requirement in project()["dependencies"]}
    assert names == {"networkx", "numpy", "rdkit", "rich", "typer"}


def test_every_requirement_is_pinned_for_the_checks() -> None:
    constraints = CHECKOUT / ".ci" / "constraints.txt"
    if not constraints.exists():
        pytest.skip("not in the source archive")
    pinned = {
        line.partition("==")[0].lower()
        for line in constraints.read_text(encoding="utf-8").splitlines()
        if line and not line.startswith("#")
    }
    wanted = {*project()["dependencies"], *project()["optional-dependencies"]["tests"]}
    assert {re.split(r"[<>=]", requirement)[0].lower() for requirement in wanted} <= pinned


def test_no_ignore_rule_loses_a_table() -> None:
    done = subprocess.run(
        ["git", "check-ignore", *(f"tables/{name}" for name in TABLES)],
        cwd=CHECKOUT,
        capture_output=True,
        check=False,
        text=True,
        encoding="utf-8",
    )
    if done.returncode not in (0, 1):
        pytest.skip("no git checkout")
    assert done.stdout == ""


def test_tables_and_golden_files_keep_their_line_ends() -> None:
    rules = (CHECKOUT / ".gitattributes").read_text(encoding="utf-8").split("\n")
    assert "*.csv text eol=lf" in rules
    assert "tests/golden/** text eol=lf" in rules
    for path in (*(CHECKOUT / "tables").glob("*.csv"), *(CHECKOUT / "tests" / "golden").rglob("*.txt")):
        assert b"\r" not in io.BytesIO(path.read_bytes()).read(), path.name
