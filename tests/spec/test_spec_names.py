"""Names that prefix C symbols and lines that stand in C comments, as compilers see them."""

import shutil
import subprocess
from pathlib import Path

import pytest

from guardbit.spec.names import KEYWORDS, NAME, line_faults, name_faults
from tools import needs

# The 34 keywords of ISO/IEC 9899:1999, 6.4.1, that begin with a letter.
C99 = """
auto break case char const continue default do double else enum extern float for goto if inline
int long register restrict return short signed sizeof static struct switch typedef union unsigned
void volatile while
"""


def test_all_keywords_of_c99_are_known() -> None:
    assert len(C99.split()) == 34
    assert set(C99.split()) <= KEYWORDS


def test_words_that_a_cpp17_compiler_refuses_are_known(tmp_path: Path) -> None:
    """The compiler is the outside source: each word it takes no declaration of is a keyword."""
    compiler = "g++" if shutil.which("g++") else "clang++"
    needs(compiler)
    no_limit = "-fmax-errors=0" if compiler == "g++" else "-ferror-limit=0"
    words = sorted(KEYWORDS | {"soften", "int8", "main", "final", "override", "std", "size_t"})
    path = tmp_path / "words.cpp"
    path.write_text(
        "".join(f"namespace n{k} {{ struct {w} {{}}; }}\n" for k, w in enumerate(words))
    )
    ran = subprocess.run(
        [compiler, "-std=c++17", "-fsyntax-only", no_limit, str(path)],
        capture_output=True,
        text=True,
        check=False,
        env={"LC_ALL": "C", "PATH": "/usr/bin:/bin"},
    )
    lines = [line.split(":") for line in ran.stderr.splitlines() if ": error:" in line]
    refused = {words[int(parts[1]) - 1] for parts in lines if parts[0] == str(path)}
    assert len(refused) >= 80
    assert refused <= KEYWORDS


@pytest.mark.parametrize("name", ["a", "soften5", "Int", "a_b_c", "x" * 24, "int8", "selfcheck"])
def test_names_that_will_do(name: str) -> None:
    assert NAME.fullmatch(name) and not name_faults(name)


@pytest.mark.parametrize(
    "name", ["", "5a", "_a", "a" * 25, "a b", "a\n", "a\u00e9", "a*/", "a;", "a\0"]
)
def test_names_that_are_malformed(name: str) -> None:
    assert [kind for kind, _ in name_faults(name)] == ["name-malformed"]


@pytest.mark.parametrize(
    "text",
    [
        "a */ b",
        "*/",
        "a /* b",
        "a??/",
        "a\\",
        "a\nb",
        "a\rb",
        "a\x00",
        "a\x85b",
        "a\u2028b",
        "a\x1b",
    ],
)
def test_lines_that_would_disturb_a_comment(text: str) -> None:
    assert line_faults(text)


@pytest.mark.parametrize(
    "text", ["", "a * / b", "a // b", "C:\\x is fine", "??? /", "é", "100 %", "x" * 200, '"quoted"']
)
def test_lines_that_will_do(text: str) -> None:
    assert not line_faults(text)


@pytest.mark.parametrize("text", ["a // b", "C:\\x is fine", "??? /", "x" * 200, "é", "a * / b"])
def test_a_compiler_takes_them_in_a_comment(tmp_path: Path, text: str) -> None:
    compiler = shutil.which("gcc") or shutil.which("clang")
    assert compiler is not None
    path = tmp_path / "a.c"
    path.write_text(f"/* {text} */\nint a;\n", encoding="utf-8")
    command = [compiler, "-std=c99", "-pedantic", "-Wall", "-Wextra", "-Werror", "-fsyntax-only"]
    subprocess.run([*command, str(path)], check=True, capture_output=True)
