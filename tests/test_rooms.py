"""The claims of DEVELOPERS.md about the code's structure, checked against the code."""

import ast
import re
from collections.abc import Iterator
from pathlib import Path
from statistics import median

import pytest

ROOT = Path(__file__).parents[1]
PACKAGE = ROOT / "gen" / "guardbit"
MODULES = sorted(PACKAGE.rglob("*.py"))


def table() -> dict[str, set[str]]:
    """The rooms and what each imports, as the page says."""
    text = (ROOT / "DEVELOPERS.md").read_text()
    rows = re.findall(r"^\| (\w+) \| [^|]+ \| ([\w, -]+) \|$", text, re.MULTILINE)
    return {room: set(re.findall(r"\w+", rooms)) for room, rooms in rows if room != "room"}


def imported_rooms(module: Path) -> Iterator[str]:
    for node in ast.walk(ast.parse(module.read_text())):
        names = []
        if isinstance(node, ast.ImportFrom) and node.module:
            names = [node.module]
            if node.module == "guardbit":
                names = [f"guardbit.{alias.name}" for alias in node.names]
        elif isinstance(node, ast.Import):
            names = [alias.name for alias in node.names]
        for name in names:
            match name.split("."):
                case ["guardbit", room, *_]:
                    yield room


def functions(module: Path) -> Iterator[tuple[str, int]]:
    for node in ast.walk(ast.parse(module.read_text())):
        if isinstance(node, ast.FunctionDef):
            assert node.end_lineno is not None
            yield node.name, node.end_lineno - node.lineno + 1


def test_every_room_has_a_row_and_every_row_a_room() -> None:
    folders = {p.name for p in PACKAGE.iterdir() if (p / "__init__.py").exists()}
    assert set(table()) == folders
    assert len(folders) == 16


@pytest.mark.parametrize("room", sorted(table()))
def test_a_room_imports_only_what_its_row_names(room: str) -> None:
    allowed = table()[room] | {room, "__version__"}
    for module in sorted((PACKAGE / room).rglob("*.py")):
        assert set(imported_rooms(module)) <= allowed, module


def test_files_are_short() -> None:
    long = {str(m): n for m in MODULES if (n := len(m.read_text().splitlines())) > 400}
    assert not long


def test_functions_are_short() -> None:
    sizes = [(n, m.name, name) for m in MODULES for name, n in functions(m)]
    assert [s for s in sizes if s[0] > 60] == []
    assert median(n for n, _, _ in sizes) < 10


ORACLE = ("oracle.py", "oracle_reading.py", "oracle_registers.py", "oracle_words.py")


def test_the_oracle_shares_nothing_with_the_package() -> None:
    for name in (*ORACLE, "gainfit.py", "randomspecs.py", "randomregisters.py"):
        assert list(imported_rooms(ROOT / "tests" / name)) == []


def test_top_level_holds_what_it_says() -> None:
    expected = {"README.md", "DEVELOPERS.md", "pyproject.toml", "Makefile", "LICENSE"}
    expected |= {"MANIFEST.in", "gen", "templates", "tests", "examples"}
    found = {p.name for p in ROOT.iterdir() if not p.name.startswith(".")}
    assert found - {"demo", "build", "dist"} == expected
