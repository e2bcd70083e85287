"""What `size` can be asked for: the sheet, photographs, files, and pins."""

import json
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from cli.conftest import Ran
from guardbit.files.pgm import pgm_bytes
from guardbit.report.certificate import load_certificate

Guardbit = Callable[..., Ran]

LEAN = """# lean
[filter]
name = "lean"
[kernel]
formula = "gaussian"
size = 3
sigma = 0.9
divisor = "sum"
[input]
bits = 8   # raw
[goal]
error = 0.9
"""
SHAPED = """[filter]
name = "shaped"
[kernel]
taps = [[1, 2.4, 1], [2.4, 5, 2.4], [1, 2.4, 1]]
divisor = "sum"
[coefficient]
bits = 5
fit = "response"
[input]
bits = 8
"""


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    for name, text in (("lean", LEAN), ("shaped", SHAPED)):
        Path(f"{name}.toml").write_text(text)
    ramp = np.arange(600).reshape(20, 30, 1) % 256
    Path("ramp.pgm").write_bytes(pgm_bytes(ramp, 255, "ramp.pgm"))
    return tmp_path


def test_a_goal_is_found_pinned_and_kept(guardbit: Guardbit, folder: Path) -> None:
    assert guardbit("emit", "lean.toml", "-o", "out").status == 2
    found = guardbit("size", "lean.toml")
    assert found.status == 0 and "coefficient.bits" in found.out
    assert Path("lean.toml").read_text() == LEAN
    pinned = guardbit("size", "lean.toml", "--pin")
    assert pinned.status == 0 and "written in lean.toml" in pinned.out
    text = Path("lean.toml").read_text()
    assert text.startswith("# lean\n") and "# raw" in text and "error = 0.9" in text
    assert "leaves nothing to search" in guardbit("size", "lean.toml", "--pin").out
    assert Path("lean.toml").read_text() == text
    assert guardbit("emit", "lean.toml", "-o", "out").status == 0


def test_a_pinned_goal_is_checked_by_every_command(guardbit: Guardbit, folder: Path) -> None:
    guardbit("size", "lean.toml", "--pin")
    text = Path("lean.toml").read_text().replace("error = 0.9", "error = 0.55")
    Path("lean.toml").write_text(text)
    for command in (["size"], ["emit", "-o", "out"], ["verify"]):
        ran = guardbit(*command, "lean.toml")
        assert ran.status == 2 and "goal.error" in ran.err
    assert not Path("out").exists()


def test_a_response_fit_is_pinned(guardbit: Guardbit, folder: Path) -> None:
    refused = guardbit("size", "shaped.toml")
    assert refused.status == 2 and "size --pin" in refused.err
    pinned = guardbit("size", "shaped.toml", "--pin")
    assert pinned.status == 0 and "response fit" in pinned.out
    assert "pinned" in Path("shaped.toml").read_text()
    assert guardbit("emit", "shaped.toml", "-o", "out").status == 0


def test_what_cannot_be_met_is_not_pinned(guardbit: Guardbit, folder: Path) -> None:
    text = LEAN.replace("0.9\n", "0.5\n")
    Path("lean.toml").write_text(text)
    ran = guardbit("size", "lean.toml", "--pin")
    assert ran.status == 2 and ran.out == ""
    assert Path("lean.toml").read_text() == text


def test_the_sheet_with_a_photograph(guardbit: Guardbit, soften: Path, folder: Path) -> None:
    ran = guardbit("size", soften, "--photo", folder / "ramp.pgm")
    assert ran.status == 0
    assert "measured, 600 codes" in ran.out and "signal to noise" in ran.out
    assert guardbit("size", soften, "--markdown").out.startswith("# soften3")
    missing = guardbit("size", soften, "--photo", "none.pgm")
    assert missing.status != 0 and "none.pgm" in missing.err


def test_the_sheet_as_a_document(guardbit: Guardbit, soften: Path) -> None:
    (entry,) = json.loads(guardbit("size", soften, "--json").out)["specs"]
    assert entry["sheet"]["cost"]["passes"][0]["reads"] == 9
    assert entry["search"] is None and entry["fit"] is None and entry["pinned"] is False


def test_files_of_a_sheet(guardbit: Guardbit, soften: Path) -> None:
    ran = guardbit("size", soften, "-o", "out")
    assert ran.status == 0
    names = {path.name for path in Path("out").iterdir()}
    assert {"soften3.sheet.md", "soften3.sheet.json", "soften3.witnesses.json"} <= names
    record = load_certificate((Path("out") / "soften3.sheet.json").read_text())
    assert {entry["name"] for entry in record["emitted"]} == names - {"soften3.sheet.json"}
    # its own files are written again; an edited one stops all
    assert guardbit("size", soften, "-o", "out").status == 0
    (Path("out") / "soften3.sheet.md").write_text("approved by hand\n")
    stopped = guardbit("size", soften, "-o", "out")
    assert stopped.status == 2 and "sheet.md was edited" in stopped.err
    assert guardbit("size", soften, "-o", "out", "--force").status == 0
