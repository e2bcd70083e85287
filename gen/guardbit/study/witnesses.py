"""Witness frames as files, with an index that says what each of them shows."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from guardbit.arith.borders import positions
from guardbit.arith.rounding import unlimited
from guardbit.files.npy import npy_bytes
from guardbit.files.pgm import MAXVAL_LIMIT, pgm_bytes
from guardbit.model.canonical import dumps
from guardbit.model.enums import Overflow
from guardbit.model.filter import Filter, holding, raster, registers_of
from guardbit.model.sizing import End, Interval, RegisterSizing, RequantiserSizing, Sizing, Witness
from guardbit.model.vectors import Codes
from guardbit.reference.run import respond
from guardbit.sizing.outcome import Outcome, outcome
from guardbit.sizing.passes import is_preloaded
from guardbit.vectors.witnesses import MOST_PIXELS, Attained, Shows, witnesses

BOUND = "bound: no frame is known to attain it"
TOO_LARGE = f"its frame has more than {MOST_PIXELS} pixels"

SATURATED = "saturated"
LATER = "later taps"
NO_OUTPUT = "no output at this position"


@dataclass(frozen=True)
class FrameEntry:
    """One file: which end it shows, where, and what the reference puts out there.

    `register` names an accumulator, or a requantiser if `shows` is "code". The value is
    reached after `after` taps, at output position `position` (row, column; for a first pass,
    the position of the intermediate). `output` is the reference's code there, of the first
    channel; None: there is no output. `hidden` says why the output does not tell the value,
    with the unit that hides it; None: it is not hidden. `taps` are to be loaded meanwhile, row
    by row of the kernel; None: coefficients are fixed.
    """

    file: str
    register: str
    shows: str
    end: str
    value: int
    position: tuple[int, int]
    after: int
    height: int
    width: int
    output: int | None
    hidden: str | None
    taps: tuple[int, ...] | None = None


@dataclass(frozen=True)
class EndEntry:
    """One end of one range, and the file that shows it; None: `why` there is none."""

    unit: str
    range: str
    end: str
    value: int
    file: str | None
    why: str | None


@dataclass(frozen=True)
class Index:
    """All that a folder of witness frames shows. `spec` is the spec file's SHA-256."""

    filter: str
    spec: str
    frames: tuple[FrameEntry, ...]
    ends: tuple[EndEntry, ...]


def witness_files(sizing: Sizing) -> Mapping[str, bytes]:
    """Return each witness's frame as a file's bytes by its name, and then a JSON index.

    Frames are grey maps where codes are unsigned, of at most 16 bits and of one channel, else
    .npy files of (height, width, channels).
    """
    f = sizing.filter
    files: dict[str, bytes] = {}
    frames = []
    for attained in witnesses(sizing):
        if attained.stimulus is not None:
            name = _file_name(f, attained)
            files[name] = _bytes(f, attained.stimulus.frame, name)
            frames.append(_entry(f, name, attained, attained.stimulus.frame))
    index = Index(f.name, f.spec_digest, tuple(frames), tuple(_ends(sizing)))
    return {**files, f"{f.name}.witnesses.json": dumps(index).encode()}


def _file_name(f: Filter, attained: Attained) -> str:
    suffix = "pgm" if _is_grey_map(f) else "npy"
    return f"{f.name}.{attained.name.replace('.', '_')}.{suffix}"


def _is_grey_map(f: Filter) -> bool:
    return not f.input.signed and f.geometry.channels == 1 and _greatest(f) <= MAXVAL_LIMIT


def _greatest(f: Filter) -> int:
    return (1 << f.input.bits) - 1


def _bytes(f: Filter, frame: Codes, name: str) -> bytes:
    return pgm_bytes(frame, _greatest(f), name) if _is_grey_map(f) else npy_bytes(frame)


def _entry(f: Filter, name: str, attained: Attained, frame: Codes) -> FrameEntry:
    w = attained.witness
    s = registers_of(f)
    output = _output(f, w, frame)
    return FrameEntry(
        file=name,
        register=w.register,
        shows=attained.shows,
        end=w.end,
        value=w.value,
        position=w.position,
        after=w.after,
        height=w.height,
        width=w.width,
        output=output,
        hidden=_hidden(f, attained, output),
        taps=None if s is None or w.taps is None else raster(s, w.taps),
    )


def _output(f: Filter, w: Witness, frame: Codes) -> int | None:
    """Return the reference's code at the witness's position, if there is an output."""
    rows = positions(f.geometry.rows, f.geometry.extent, w.height)
    columns = positions(f.geometry.columns, f.geometry.extent, w.width)
    if w.position[0] not in rows or w.position[1] not in columns:
        return None
    at = rows.index(w.position[0]), columns.index(w.position[1])
    return int(respond(holding(f, w.taps), frame).output[at][0])


def _hidden(f: Filter, attained: Attained, output: int | None) -> str | None:
    """Return why the output at the witness's position does not tell the value."""
    w, index = attained.witness, attained.pass_index
    final = outcome(f, index, w, Overflow.FORBID).held
    if attained.shows is Shows.PARTIAL and final != w.value:
        return LATER
    units = ("intermediate", "output") if len(f.passes) == 2 else ("output",)
    if _saturates(f, index, w):
        return f"{SATURATED} {units[index]}"
    if output is None:
        return NO_OUTPUT
    if index < len(f.passes) - 1 and _saturates(f, index + 1, w):
        return f"{SATURATED} output"
    return None


def _saturates(f: Filter, index: int, w: Witness) -> bool:
    """Return whether the requantiser of a pass changes the value at the witness's position."""
    p, made = f.passes[index], _made(f, index, w)
    if p.requantiser.overflow is not Overflow.SATURATE:
        return False
    return unlimited(p.requantiser, is_preloaded(p), made.held) != made.code


def _made(f: Filter, index: int, w: Witness) -> Outcome:
    return outcome(f, index, w, f.passes[index].accumulator.overflow)


def _ends(sizing: Sizing) -> Iterator[EndEntry]:
    """Yield every end of every accumulator and requantiser, in the order of the passes."""
    shown = witnesses(sizing)
    for index, r in enumerate(sizing.registers):
        mine = [a for a in shown if a.pass_index == index]
        ends = _Ends(sizing.filter, index, mine)
        yield from ends.sums(r)
        yield from ends.codes(r, sizing.requantisers[index])


@dataclass(frozen=True)
class _Ends:
    """The frames of one pass, by what they show."""

    filter: Filter
    index: int
    attained: list[Attained]

    def sums(self, r: RegisterSizing) -> Iterator[EndEntry]:
        """Yield the ends of an accumulator: final and partial sums, and what it holds."""
        for what, values in ((Shows.FINAL, r.final), (Shows.PARTIAL, r.partial)):
            for end in End:
                yield self._entry(r.name, what, end, values, self._first(end, what))
        for end in End:
            yield self._entry(r.name, Shows.HELD, end, r.held, self._holding(r, end))

    def codes(self, r: RegisterSizing, q: RequantiserSizing) -> Iterator[EndEntry]:
        """Yield the ends of a requantiser: before overflow, and the codes that leave it."""
        for end in End:
            held = self._holding(r, end) if q.exact else None
            yield self._entry(q.name, "rounded", end, q.unlimited, held)
        for end in End:
            code = self._first(end, Shows.CODE)
            if code is None and q.output_exact and not q.witnesses:
                code = self._holding(r, end)
            yield self._entry(q.name, "code", end, q.output, code)

    def _first(self, end: End, *shows: Shows) -> Attained | None:
        found = (a for what in shows for a in self.attained if a.shows is what)
        return next((a for a in found if a.witness.end is end), None)

    def _holding(self, r: RegisterSizing, end: End) -> Attained | None:
        """Return the frame in which the register ends at an end of what it holds."""
        value = r.held.low if end is End.LEAST else r.held.high
        found = self._first(end, Shows.HELD, Shows.FINAL)
        if found is None or _made(self.filter, self.index, found.witness).held != value:
            return None
        return found

    def _entry(
        self, unit: str, what: str, end: End, values: Interval, found: Attained | None
    ) -> EndEntry:
        value = values.low if end is End.LEAST else values.high
        if found is None:
            return EndEntry(unit, what, end, value, None, BOUND)
        if found.stimulus is None:
            return EndEntry(unit, what, end, value, None, TOO_LARGE)
        return EndEntry(unit, what, end, value, _file_name(self.filter, found), None)
