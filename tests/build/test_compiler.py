"""Finding a compiler, and what comes of C that it does not like."""

import os
import sys
from pathlib import Path

import pytest

from guardbit.build.compilation import BuildError
from guardbit.build.compiler import Compiler, Family, find_compiler, identify
from guardbit.build.coverage import coverage_tool
from guardbit.build.library import compile_library
from guardbit.model.finding import MachineError
from tools import needs

from .snippets import turner


@pytest.mark.parametrize(("command", "family"), [("gcc", Family.GCC), ("clang", Family.CLANG)])
def test_families_are_told_apart(command: str, family: Family) -> None:
    needs(command)
    found = find_compiler({"CC": command})
    assert found.family is family
    assert found.command == (command,)
    assert found.version.count(".") == 2
    assert found.sanitizers == ("address", "undefined")


def test_arguments_in_the_variable_are_kept() -> None:
    assert find_compiler({"CC": "gcc -m64"}).command == ("gcc", "-m64")


@pytest.mark.parametrize("command", ["no-such-compiler", "true", "ls", f"{sys.executable} -c 1"])
def test_a_variable_that_names_no_compiler_is_an_error(command: str) -> None:
    with pytest.raises(MachineError) as caught:
        find_compiler({"CC": command})
    (finding,) = caught.value.findings
    assert finding.kind == "compiler-not-working"
    assert finding.value("command") == command


def test_a_machine_without_compilers_is_told_how_to_get_one(
    monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    monkeypatch.setenv("PATH", str(tmp_path))
    identify.cache_clear()
    with pytest.raises(MachineError) as caught:
        find_compiler({})
    identify.cache_clear()
    (finding,) = caught.value.findings
    assert caught.value.status == 3
    assert "ziglang" in str(finding.value("install"))


def test_messages_have_file_and_line(tmp_path: Path) -> None:
    bad = turner(more="int unused = 1 + ;")
    with pytest.raises(BuildError) as caught:
        compile_library(find_compiler(dict(os.environ)), [bad], (), tmp_path)
    first = caught.value.findings[0]
    assert (first.kind, first.place.file) == ("compile-error", "turn.c")
    assert (
        first.place.line
        == bad.sources[0].text[: bad.sources[0].text.index("unused")].count("\n") + 1
    )


def test_a_warning_is_a_finding(tmp_path: Path) -> None:
    with pytest.raises(BuildError) as caught:
        compile_library(find_compiler({"CC": "gcc"}), [turner(more="d[0] = (int)w;")], (), tmp_path)
    assert "conversion" in str(caught.value.findings[0].value("message"))


def test_a_compiler_without_a_coverage_tool_says_so(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PATH", "")
    with pytest.raises(MachineError):
        coverage_tool(Compiler(("gcc",), Family.GCC, "12.0.0"))
    with pytest.raises(MachineError):
        coverage_tool(Compiler(("zig", "cc"), Family.ZIG, "18.0.0"))


def test_only_what_a_compiler_has_is_promised() -> None:
    assert Compiler(("python", "-m", "ziglang", "cc"), Family.ZIG, "18.0.0").sanitizers == (
        "undefined",
    )
