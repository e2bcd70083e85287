"""Files that let a person repeat a call that went wrong."""

import re
from collections.abc import Mapping
from pathlib import Path

from guardbit.build.job import DTYPES, layout, taps_given
from guardbit.build.texts import prototype
from guardbit.files.npy import npy_bytes
from guardbit.files.writing import write_atomic
from guardbit.model.routine import Call, Role, Routine


def keep(
    folder: Path,
    routine: Routine,
    case: str,
    call: Call,
    facts: Mapping[str, str | int],
) -> Path:
    """Return the path of a text that says how to repeat the call on the frame kept beside it.

    Raises MachineError if the folder cannot be written.
    """
    name = re.sub(r"[^A-Za-z0-9_.-]+", "-", f"{routine.name}-{case}")[:100]
    frame = npy_bytes(call.frame.astype(DTYPES[routine.source]))
    text = replay_text(routine, f"{name}.npy", call, facts)
    write_atomic(folder, {f"{name}.npy": frame, f"{name}.txt": text.encode("utf-8")})
    return folder / f"{name}.txt"


def replay_text(routine: Routine, frame: str, call: Call, facts: Mapping[str, str | int]) -> str:
    """Return what was called on which frame, and what came of it."""
    height, width, channels = call.frame.shape
    made = layout(routine, call)
    entry = routine.band if call.bands and routine.band else routine.frame
    named = {
        Role.SRC_STRIDE: made.src_stride,
        Role.DST_STRIDE: made.dst_stride,
        Role.WIDTH: width,
        Role.HEIGHT: height,
        Role.SCRATCH_LEN: made.scratch_len,
    }
    values = {role: str(named[role]) for role in entry.roles if role in named}
    faults = {role: "NULL" if value is None else str(value) for role, value in call.faults}
    taps = taps_given(routine, call)
    lines = [
        f"{frame}: the source, {height} rows of {width} pixels of {channels} channel(s),",
        "in the routine's own element type. Copy row r to src + r * src_stride.",
        "",
        f"Call: {prototype(routine, entry)}",
        *(f"  {role} = {value}" for role, value in {**values, **faults}.items()),
        *(f"  rows {a} to {b} (from, to), dst at row {a}" for a, b in call.bands),
        *([f"  taps = {', '.join(map(str, taps))}"] if taps and Role.TAPS not in faults else []),
        f"dst holds {call.shape[0]} rows of {call.shape[1]} pixels.",
        "",
        "What came of it:",
        *(f"  {name}: {value}" for name, value in facts.items()),
    ]
    return "\n".join(lines) + "\n"
