import errno
import hashlib
import os
from collections.abc import Mapping
from dataclasses import replace
from pathlib import Path

import pytest

from guardbit.cli.answer import FAULT, overall, rung_status
from guardbit.cli.output import write_files
from guardbit.model import canonical
from guardbit.model.certificate import RungResult
from guardbit.model.finding import GuardbitError, MachineError, SpecError, finding


def sha(data: bytes) -> str:
    return hashlib.sha256(data).hexdigest()


def product(text: str = "int one;\n") -> dict[str, bytes]:
    """Return a C file and a certificate that vouches for it, as far as writing looks at it."""
    document = {"schema": 1, "emitted": [{"name": "a.c", "sha256": sha(text.encode())}]}
    seal = sha(canonical.dumps(document).encode())
    record = canonical.dumps({**document, "seal": seal})
    return {"a.cert.json": record.encode(), "a.c": text.encode()}


def contents(folder: Path) -> dict[str, bytes]:
    return {path.name: path.read_bytes() for path in folder.iterdir()}


def refused(folder: Path, files: Mapping[str, bytes]) -> list[tuple[str, str]]:
    before = contents(folder)
    with pytest.raises(SpecError) as caught:
        write_files(folder, files)
    assert contents(folder) == before
    return [(f.kind, Path(str(f.value("path"))).name) for f in caught.value.findings]


def test_writes_into_a_folder_that_it_makes(tmp_path: Path) -> None:
    digests = write_files(tmp_path / "deep" / "er", product())
    assert contents(tmp_path / "deep" / "er") == product()
    assert [(d.name, d.sha256) for d in digests] == [
        (name, sha(product()[name])) for name in ("a.c", "a.cert.json")
    ]


def test_writes_again_over_its_own(tmp_path: Path) -> None:
    write_files(tmp_path, product())
    write_files(tmp_path, product("int two;\n"))
    assert contents(tmp_path) == product("int two;\n")


@pytest.mark.parametrize("name", ["a.c", "a.cert.json"])
def test_one_edited_file_stops_all(tmp_path: Path, name: str) -> None:
    write_files(tmp_path, product())
    edited = (tmp_path / name).read_text().replace("one", "two").replace("a.c", "b.c")
    (tmp_path / name).write_text(edited)
    found = refused(tmp_path, product("int three;\n"))
    # An edited certificate vouches for nothing any more.
    other = [("output-unknown", "a.cert.json"), ("output-unknown", "a.c")]
    assert found == ([("output-edited", "a.c")] if name == "a.c" else other)


def test_files_of_others_are_left_alone(tmp_path: Path) -> None:
    (tmp_path / "a.c").write_text("my own\n")
    assert refused(tmp_path, product()) == [("output-unknown", "a.c")]


def test_what_is_there_already_is_no_edit(tmp_path: Path) -> None:
    (tmp_path / "a.c").write_text("int one;\n")
    write_files(tmp_path, product())
    assert contents(tmp_path) == product()


def test_a_lost_file_is_written_again(tmp_path: Path) -> None:
    write_files(tmp_path, product())
    (tmp_path / "a.c").unlink()
    write_files(tmp_path, product())
    assert contents(tmp_path) == product()


def test_force_overwrites(tmp_path: Path) -> None:
    write_files(tmp_path, product())
    (tmp_path / "a.c").write_text("my own\n")
    (tmp_path / "a.cert.json").write_text("{")
    write_files(tmp_path, product(), force=True)
    assert contents(tmp_path) == product()


def test_a_full_disk_leaves_the_old_files(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def no_space(descriptor: int) -> None:
        raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))

    write_files(tmp_path, product())
    monkeypatch.setattr(os, "fsync", no_space)
    with pytest.raises(MachineError) as caught:
        write_files(tmp_path, product("int two;\n"))
    assert [f.kind for f in caught.value.findings] == ["disk-full"]
    assert contents(tmp_path) == product()


def test_a_file_for_a_folder(tmp_path: Path) -> None:
    (tmp_path / "out").write_text("")
    with pytest.raises(GuardbitError) as caught:
        write_files(tmp_path / "out", product())
    assert caught.value.status == 3


@pytest.mark.parametrize(
    ("statuses", "status"),
    [
        ((), 0),
        ((0, 0), 0),
        ((0, 1, 0), 1),
        ((1, 3), 3),
        ((3, 1, 2), 2),
        ((2, FAULT, 0), FAULT),
    ],
)
def test_overall_status(statuses: tuple[int, ...], status: int) -> None:
    assert overall(statuses) == status


def test_status_of_rungs() -> None:
    holds = RungResult("impulses", True, 5, (), (), (), ())
    fails = replace(holds, findings=(finding("x"),))
    idle = replace(holds, cases=0)
    absent = replace(holds, ran=False, cases=0)
    assert rung_status([holds]) == 0
    assert rung_status([holds, fails, absent]) == 1
    assert rung_status([holds, idle]) == 1
    assert rung_status([holds, absent]) == 3
    assert rung_status([]) == 1
