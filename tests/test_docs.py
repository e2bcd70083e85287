"""What the README shows is what happens: its specs are read, its commands run, its C compiles."""

import re
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

from guardbit.build.compiler import STRICT, find_compiler
from guardbit.report.cautions import CAUTIONS
from guardbit.spec.reader import read_spec

README = (Path(__file__).parents[1] / "README.md").read_text(encoding="utf-8")


def blocks(language: str) -> list[str]:
    found = re.findall(rf"^```{language}\n(.*?)^```$", README, re.MULTILINE | re.DOTALL)
    assert found, language
    return found


def sessions() -> Iterator[tuple[str, list[str]]]:
    """The commands of all sh blocks, each with the output shown."""
    for block in blocks("sh"):
        command, *shown = block.rstrip("\n").split("\n")
        assert command.startswith("$ guardbit ")
        yield command.removeprefix("$ guardbit "), shown


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return a folder with the README's specs."""
    made = tmp_path_factory.mktemp("readme")
    for block in blocks("toml"):
        name = block.split("\n")[0].removeprefix("# ")
        (made / name).write_text(block, encoding="utf-8")
    return made


def guardbit(folder: Path, arguments: str) -> str:
    start = "from guardbit.cli.main import main; main()"
    done = subprocess.run(
        [sys.executable, "-c", start, *arguments.split()],
        cwd=folder,
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stderr
    return done.stdout


def pattern(shown: list[str]) -> str:
    """A regular expression: a line "..." stands for any lines, "..." at an end for the rest."""
    lines = []
    for line in shown:
        if line == "...":
            lines.append(r"(?:.*\n)*?")
        elif line.endswith(" ..."):
            lines.append(re.escape(line.removesuffix("...")) + r".*\n")
        else:
            lines.append(re.escape(line) + r"\n")
    return "".join(lines)


def test_specs_are_sound(folder: Path) -> None:
    for path in folder.glob("*.toml"):
        assert read_spec(path).filter.name == path.stem


def test_commands_print_what_is_shown(folder: Path) -> None:
    seen = 0
    for arguments, shown in sessions():
        printed = guardbit(folder, arguments)
        assert re.fullmatch(pattern(shown) + r"\n*", printed), f"{arguments}\n{printed}"
        seen += 1
    assert seen >= 3


def test_the_c_that_is_shown_compiles(folder: Path) -> None:
    (block,) = blocks("c")
    guardbit(folder, "emit soften5.toml -o shown")
    scratch, call = block.split("\n", 1)
    text = f'#include "soften5.h"\n{scratch}\nvoid use(const uint8_t *src, uint8_t *dst);\n'
    text += f"void use(const uint8_t *src, uint8_t *dst)\n{{\n{call}}}\n"
    (folder / "shown" / "use.c").write_text(text)
    command = [*find_compiler().command, *STRICT, "-c", "use.c", "-o", "use.o"]
    done = subprocess.run(
        command, cwd=folder / "shown", capture_output=True, text=True, check=False
    )
    assert done.returncode == 0, done.stderr


def test_the_cautions_are_those_of_the_tool() -> None:
    words = " ".join(README.split())
    for caution in CAUTIONS:
        assert " ".join(caution.split()) in words
