"""The commands from end to end: exit statuses, what is printed, what is written."""

import json
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import jsonschema
import pytest

from guardbit.report.cautions import CAUTIONS
from guardbit.report.certificate import load_certificate, schema_text

Guardbit = Callable[..., Any]
Maker = Callable[..., Path]
NAMES = ["soften3.cert.json", "soften3.c", "soften3.h", "soften3_selfcheck.c"]


def listing(folder: Path) -> list[str]:
    return sorted(path.name for path in folder.iterdir())


def contents(folder: Path) -> dict[str, bytes]:
    return {path.name: path.read_bytes() for path in folder.iterdir()}


def test_size(guardbit: Guardbit, soften: Path) -> None:
    ran = guardbit("size", soften)
    assert (ran.status, ran.err) == (0, "")
    assert "0 .. 4080" in ran.out  # 16 * 255
    assert "13 bits signed" in ran.out  # 4080 < 2^12


def test_size_with_an_unmet_forbid_shows_table_and_remedy(
    guardbit: Guardbit, soften: Path, spec_file: Maker
) -> None:
    ran = guardbit("size", spec_file("narrow", bits="12"))
    assert ran.status == 2
    assert "0 .. 4080" in ran.out and "spare bits" in ran.out
    assert ran.err.startswith("narrow.toml:10: accumulator.bits: ")
    assert "13" in ran.err and "4080" in ran.err


def test_emit_writes_the_set(guardbit: Guardbit, soften: Path) -> None:
    ran = guardbit("emit", soften, "-o", "out")
    assert (ran.status, ran.err) == (0, "")
    assert listing(Path("out")) == sorted(NAMES)
    assert all(name in ran.out for name in NAMES)


def test_emit_is_reproducible(guardbit: Guardbit, soften: Path, start: Guardbit) -> None:
    guardbit("emit", soften, "-o", "one")
    processes = {
        seed: start("emit", soften, "-o", seed, env={"PYTHONHASHSEED": seed}) for seed in "12"
    }
    for seed, process in processes.items():
        assert process.communicate(timeout=60)[1] == ""
        assert contents(Path(seed)) == contents(Path("one"))


def test_the_certificate_is_valid(guardbit: Guardbit, soften: Path) -> None:
    guardbit("emit", soften, "-o", "out")
    document = load_certificate(Path("out/soften3.cert.json").read_text())
    jsonschema.Draft202012Validator(json.loads(schema_text())).validate(document)
    assert document["cautions"] == list(CAUTIONS)
    assert document["spec"]["name"] == "soften3.toml"
    assert document["rungs"] == []
    assert sorted(d["name"] for d in document["emitted"]) == sorted(
        set(NAMES) - {"soften3.cert.json"}
    )


def test_the_certificate_knows_no_folder(guardbit: Guardbit, soften: Path) -> None:
    guardbit("emit", soften.resolve(), "-o", "out")
    assert str(soften.resolve().parent) not in Path("out/soften3.cert.json").read_text()


def test_emit_of_a_wrong_spec_writes_nothing(
    guardbit: Guardbit, soften: Path, spec_file: Maker
) -> None:
    ran = guardbit("emit", spec_file("narrow", bits="12"), "-o", "out")
    assert ran.status == 2 and "narrow.toml:10" in ran.err
    assert not Path("out").exists()


def test_edited_output_is_kept(guardbit: Guardbit, soften: Path) -> None:
    guardbit("emit", soften, "-o", "out")
    Path("out/soften3.c").write_text("/* mine */\n")
    before = contents(Path("out"))
    ran = guardbit("emit", soften, "-o", "out")
    assert ran.status == 2
    assert ran.err.startswith("out/soften3.c: ") and "--force" in ran.err
    assert contents(Path("out")) == before
    assert guardbit("emit", soften, "-o", "out", "--force").status == 0
    assert b"mine" not in contents(Path("out"))["soften3.c"]


def test_a_changed_spec_replaces_its_own_output(
    guardbit: Guardbit, soften: Path, spec_file: Maker
) -> None:
    guardbit("emit", soften, "-o", "out")
    spec_file("soften3", bits="20")
    assert guardbit("emit", soften, "-o", "out").status == 0
    assert (
        load_certificate(Path("out/soften3.cert.json").read_text())["sizing"]["registers"][0][
            "bits"
        ]
        == 20
    )


def test_namesakes_are_refused(guardbit: Guardbit, soften: Path, spec_file: Maker) -> None:
    twin = spec_file("soften3", file="twin.toml")
    capital = spec_file("SOFTEN3", file="capital.toml")
    other = spec_file("other")
    ran = guardbit("emit", soften, twin, capital, other, "-o", "out", "--jobs", "1")
    assert ran.status == 2
    assert [line.split(":")[0] for line in ran.err.splitlines() if "called" in line] == [
        "soften3.toml",
        "twin.toml",
        "capital.toml",
    ]
    assert all(name.startswith("other") for name in listing(Path("out")))


def test_many_specs_come_in_the_order_given(
    guardbit: Guardbit, soften: Path, spec_file: Maker
) -> None:
    names = ["b", "a", "d", "c"]
    specs = [spec_file(name) for name in names]
    ran = guardbit("size", *specs, "--jobs", "2")
    titles = [line.split()[0] for line in ran.out.splitlines() if "binomial" in line]
    assert titles == names
    assert ran.out == guardbit("size", *specs, "--jobs", "1").out


def test_one_wrong_spec_does_not_stop_the_others(
    guardbit: Guardbit, soften: Path, spec_file: Maker
) -> None:
    ran = guardbit("emit", soften, "missing.toml", spec_file("other"), "-o", "out", "--jobs", "1")
    assert ran.status == 2
    assert ran.err.startswith("missing.toml: ")
    assert len(listing(Path("out"))) == 8


@pytest.mark.parametrize("command", ["size", "emit"])
def test_json_is_one_document(guardbit: Guardbit, soften: Path, command: str) -> None:
    extra = ["-o", "out"] if command == "emit" else []
    ran = guardbit(command, soften, "missing.toml", "--json", "--jobs", "1", *extra)
    document = json.loads(ran.out)
    assert ran.err == ""
    assert (document["command"], document["status"], ran.status) == (command, 2, 2)
    good, bad = document["specs"]
    assert (good["spec"], good["status"], good["findings"]) == ("soften3.toml", 0, [])
    assert good["sizing"]["registers"][0]["bits"] == 13
    assert bad["findings"][0]["sentence"].startswith("missing.toml: ")
    assert len(good["written"]) == (4 if command == "emit" else 0)


def test_verify_holds(guardbit: Guardbit, soften: Path) -> None:
    Path("cap.pgm").write_bytes(b"P5 32 32 255 " + bytes(i * i % 251 for i in range(1024)))
    ran = guardbit("verify", soften, "--photo", "cap.pgm")
    assert (ran.status, ran.err) == (0, "")
    assert "1 photograph" in ran.out and "no photograph" not in ran.out
    last = ran.out.splitlines()[-1]
    assert last.startswith("  [+] holds")
    for rung in ("impulses", "witnesses", "frames", "requantiser", "sanitized"):
        assert f"[+] holds    {rung}" in ran.out
    assert "  not covered  " in ran.out and "  error bound  " in ran.out


def test_verify_writes_the_evidence(guardbit: Guardbit, soften: Path) -> None:
    assert guardbit("emit", soften, "-o", "out").status == 0
    before = contents(Path("out"))
    ran = guardbit("verify", soften, "-o", "out", "--json")
    after = contents(Path("out"))
    answer = json.loads(ran.out)["specs"][0]
    assert (ran.status, ran.err, answer["findings"], len(answer["written"])) == (0, "", [], 4)
    document = load_certificate(after.pop("soften3.cert.json").decode())
    jsonschema.Draft202012Validator(json.loads(schema_text())).validate(document)
    assert {**answer["certificate"], "seal": document["seal"]} == document
    assert all(rung["cases"] > 0 for rung in document["rungs"])
    assert after == {name: data for name, data in before.items() if name in after}


def test_a_missing_compiler_is_named(
    guardbit: Guardbit, soften: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    empty = Path("empty")
    empty.mkdir()
    monkeypatch.setenv("PATH", str(empty.resolve()))
    monkeypatch.delenv("CC", raising=False)
    ran = guardbit("verify", soften)
    assert ran.status == 3
    assert "compiler" in ran.err and "install" in ran.err


def test_a_compiler_that_is_none(guardbit: Guardbit, soften: Path) -> None:
    ran = guardbit("verify", soften, "--cc", "no-such-compiler")
    assert ran.status == 3 and "no-such-compiler" in ran.err


def test_a_folder_that_cannot_be_made(guardbit: Guardbit, soften: Path) -> None:
    Path("out").write_text("a file")
    ran = guardbit("emit", soften, "-o", "out")
    assert ran.status == 3 and "out" in ran.err
    assert Path("out").read_text() == "a file"


def test_an_unwritable_folder(guardbit: Guardbit, soften: Path) -> None:
    """/proc refuses new files to everybody, the superuser included."""
    ran = guardbit("emit", soften, "-o", "/proc/guardbit")
    assert ran.status == 3 and "/proc" in ran.err


@pytest.mark.parametrize(
    "arguments",
    [
        [],
        ["size"],
        ["no-such-command"],
        ["size", "--no-such-option", "a.toml"],
        ["size", "--jobs", "0", "a.toml"],
        ["size", "--jobs", "many", "a.toml"],
        ["emit", "a.toml"],
        ["explain", "no-such-topic"],
        ["init"],
        ["size", ""],
        ["size", "."],
        ["size", "a\0b"],
        ["size", "/dev/zero"],
        ["verify", "soften3.toml", "--photo", "missing.png"],
    ],
)
def test_a_wrong_call(guardbit: Guardbit, soften: Path, arguments: list[str]) -> None:
    ran = guardbit(*arguments)
    assert ran.status == 2
    assert ran.out == "" and ran.err.endswith("\n")
    assert "Traceback" not in ran.err and "This is a fault" not in ran.err


@pytest.mark.parametrize("command", [[], ["init"], ["size"], ["emit"], ["verify"], ["explain"]])
def test_help(guardbit: Guardbit, command: list[str]) -> None:
    ran = guardbit(*command, "--help")
    assert ran.status == 0 and "Usage: guardbit" in ran.out
    assert max(map(len, ran.out.splitlines())) <= 80


def test_help_carries_the_cautions(guardbit: Guardbit) -> None:
    said = " ".join(guardbit("--help").out.split())
    assert " ".join(CAUTIONS) in said
    assert "bench" not in said


def test_version(guardbit: Guardbit) -> None:
    assert guardbit("--version").out == "guardbit 0.1.0\n"


def test_a_fault_says_so(guardbit: Guardbit, soften: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def broken(path: Path) -> None:
        raise ZeroDivisionError("of our own making")

    monkeypatch.setattr("guardbit.spec.reader.read_spec", broken)
    ran = guardbit("size", soften)
    assert ran.status == 70
    assert "fault in guardbit" in ran.err and "GUARDBIT_DEBUG=1" in ran.err
    assert "of our own making" in ran.err and "Traceback" not in ran.err
    monkeypatch.setenv("GUARDBIT_DEBUG", "1")
    assert "Traceback" in guardbit("size", soften).err


def test_light_import() -> None:
    """Help and completion must not wait for numerical libraries."""
    code = (
        "import sys, guardbit.cli.main, guardbit.cli.api; "
        "print([m for m in ('numpy', 'scipy', 'jinja2', 'rich', 'cffi') if m in sys.modules])"
    )
    done = subprocess.run(
        [sys.executable, "-c", code],
        capture_output=True,
        text=True,
        check=True,
    )
    assert done.stdout == "[]\n"
