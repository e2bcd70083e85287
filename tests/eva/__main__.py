"""An outside judge: Frama-C's Eva looks for undefined behaviour in the C of every example.

    python tests/eva            (make eva)

Each example runs at a size with all borders and an interior, source pixels unknown, on machines
of 16, 32 and 64 bits. The ten legacy routines follow, beside our own proof's verdict.
Exit status: 0 no alarm in emitted C; 1 otherwise; 3 frama-c is not on this machine.
"""

import re
import shutil
import subprocess
import sys
import tempfile
from pathlib import Path

ROOT = Path(__file__).parents[2]
sys.path.insert(0, str(ROOT / "tests"))

from guardbit.cli import api  # noqa: E402
from guardbit.model.filter import Filter  # noqa: E402
from guardbit.model.proof import IP16, LP64, DataModel, Verdict  # noqa: E402
from guardbit.model.routine import Role, Routine  # noqa: E402
from guardbit.proof.contract.geometry import outputs  # noqa: E402
from guardbit.proof.coverage import cases, lengths  # noqa: E402
from guardbit.proof.prove import prove_case  # noqa: E402
from proof.test_legacy_c import RIGHT, WRONG, against, spec  # noqa: E402

MACHINES = ("gcc_x86_16", "gcc_x86_32", "gcc_x86_64")
OPTIONS = ("-eva-precision", "6", "-eva-slevel", "4000", "-eva-auto-loop-unroll", "400")
_FOUND = re.compile(r"\[eva:alarm\] ([^:\s]+:\d+): Warning:\s*\n?\s*(.+)")
_COUNT = re.compile(r"(\d+) alarms? generated")


def main() -> int:
    if shutil.which("frama-c") is None:
        print("frama-c is not on this machine: apt-get install frama-c-base (Debian)")
        return 3
    total = 0
    for path in sorted((ROOT / "examples").glob("*.toml")):
        sizing, routine = api.subject(path)
        for machine in MACHINES:
            found = alarms(sizing.filter, routine, machine)
            total += len(found)
            print(f"{path.stem:<14}{machine:<12}{len(found)} alarms", flush=True)
            print("".join(f"    {each}\n" for each in found), end="")
    print(f"emitted C: {total} alarms")
    for name in (*RIGHT, *WRONG):
        sizing, routine = api.subject(spec(name), against(name))
        for machine, model in (("gcc_x86_16", IP16), ("gcc_x86_64", LP64)):
            found = alarms(sizing.filter, routine, machine)
            said = verdict(sizing.filter, routine, model)
            print(f"{name:<16}{machine:<12}{len(found)} alarms, our proof: {said}", flush=True)
            print("".join(f"    {each}\n" for each in found), end="")
    return 1 if total else 0


def verdict(f: Filter, routine: Routine, model: DataModel) -> str:
    """What the proof says, and of what kind."""
    found = None
    for case in cases(f, routine, (model,), thorough=False):
        found = prove_case(f, routine, case, strict=False)
        if found.verdict is not Verdict.PROVED:
            break
    assert found is not None
    place = "" if found.place is None else f" line {found.place.line}"
    return f"{found.verdict.value} {found.reason}{place}".strip()


def alarms(f: Filter, routine: Routine, machine: str) -> list[str]:
    """Eva's alarms on a routine, as place and assertion."""
    with tempfile.TemporaryDirectory(prefix="guardbit-eva-") as name:
        folder = Path(name)
        for source in routine.sources:
            (folder / source.name).write_text(source.text)
        (folder / "driver.c").write_text(driver(f, routine))
        files = [str(folder / s.name) for s in routine.sources if s.name.endswith(".c")]
        command = ["frama-c", "-eva", *OPTIONS, "-machdep", machine]
        command += [str(folder / "driver.c"), *files, f"-cpp-extra-args=-I{folder}"]
        done = subprocess.run(command, capture_output=True, text=True, check=False)
    said = done.stdout + done.stderr
    count = _COUNT.search(said)
    if done.returncode or count is None:
        return [f"frama-c failed: {said[-400:]}"]
    found = [f"{Path(place).name}: {what.strip()}" for place, what in _FOUND.findall(said)]
    assert len(found) >= min(int(count.group(1)), 1)
    return found


def driver(f: Filter, routine: Routine) -> str:
    """A main that calls the routine once, on a source of unknown codes."""
    height, width = (
        next((n for n in lengths(f, routine, axis) if n >= 5), lengths(f, routine, axis)[-1])
        for axis in (0, 1)
    )
    g, channels = f.geometry, f.geometry.channels
    rows = len(outputs(g.rows, g.extent, height))
    columns = len(outputs(g.columns, g.extent, width))
    scratch = max(routine.scratch_per_column * width + routine.scratch_fixed, 1)
    word = routine.word or (8, False)
    taps = routine.taps
    values = {
        Role.SRC: "src",
        Role.SRC_STRIDE: str(width * channels),
        Role.DST: "dst",
        Role.DST_STRIDE: str(columns * channels),
        Role.WIDTH: str(width),
        Role.HEIGHT: str(height),
        Role.SCRATCH: "scratch",
        Role.SCRATCH_LEN: str(scratch),
        Role.TAPS: "taps",
    }
    kinds = {
        Role.SRC: f"const {_type(routine.source.bits, routine.source.signed)} *",
        Role.DST: f"{_type(routine.destination.bits, routine.destination.signed)} *",
        Role.SCRATCH: f"{_type(*word)} *",
        Role.TAPS: f"const {_type(*taps.word)} *" if taps else "",
    }
    roles = routine.frame.roles
    returns = "int" if routine.frame.status else "void"
    source, target = kinds[Role.SRC][6:-2], kinds[Role.DST][:-2]
    lines = [
        "#include <stddef.h>\n#include <stdint.h>",
        f"{returns} {routine.frame.function}({', '.join(kinds.get(r, 'size_t') for r in roles)});",
        f"volatile {source} any;",
        f"static {source} src[{height * width * channels}];",
        f"static {target} dst[{max(rows * columns * channels, 1)}];",
        f"static {_type(*word)} scratch[{scratch}];",
    ]
    if taps:
        tap_list = ", ".join(map(str, taps.nominal))
        lines.append(f"static const {_type(*taps.word)} taps[] = {{ {tap_list} }};")
    lines += [
        "int main(void)\n{",
        f"    for (int i = 0; i < {height * width * channels}; i++) src[i] = any;",
        f"    {routine.frame.function}({', '.join(values[r] for r in roles)});",
        "    return 0;\n}\n",
    ]
    return "\n".join(lines)


def _type(bits: int, signed: bool) -> str:
    return f"{'' if signed else 'u'}int{bits}_t"


if __name__ == "__main__":
    sys.exit(main())
