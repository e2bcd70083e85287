"""Judging mutants: the rungs that test, the proof, and a referee that shares nothing with them.

The referee runs a mutant and the sound code, both compiled with sanitizers, on the same calls.
Whether the outputs, the statuses or the sanitizers tell them apart is all that it looks at.
"""

import time
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from itertools import pairwise
from pathlib import Path

import numpy as np

from guardbit.build.compiler import Compiler
from guardbit.build.sanitized import Program, diagnose
from guardbit.model.finding import MachineError, finding
from guardbit.model.proof import LP64, Verdict
from guardbit.model.routine import Call, Codes, Harm, Outcome, Routine, Status
from guardbit.verify import bands, calls, frames, impulses, requantiser, sanitized, witnesses
from guardbit.verify.bench import Bench
from guardbit.verify.cases import NUMBERS, Case
from guardbit.verify.compare import fault
from guardbit.verify.defects.calls import Trial, quick, thorough, wrong
from guardbit.verify.defects.jobs import Answers, Difference, Job, answers, differences, job
from guardbit.verify.defects.mutant import Mutant, with_mutant
from guardbit.verify.defects.proving import Proof, first_cases, full_cases, prove, shown
from guardbit.verify.defects.workshop import Bay, hosted, program, sanitizing

_COMPARED = (impulses, witnesses, frames, bands, calls)
_MOST_ARGUMENTS = 1 << 17
_UNSOUND = "the code as it is does not pass its own calls under sanitizers"

BUILD = "build"
RUNGS = (BUILD, *(rung.NAME for rung in _COMPARED), requantiser.NAME, sanitized.NAME)
"""The rungs that test, in the ladder's order."""

_MISUSE = {NUMBERS[s] for s in Status if s not in (Status.OK, Status.BAD_CODE)}


@dataclass(frozen=True)
class Seen:
    """A call by which a compiled mutant shows itself, and how.

    `misuse`: only in what a call with wrong arguments gets.
    """

    by: str
    call: str
    how: str
    misuse: bool


@dataclass(frozen=True)
class Judgement:
    """What became of a mutant.

    `noticed` are the rungs that found something. `seen` is how the referee saw it in compiled
    code; None: it never did. `reproduced` tells whether the frame of a refutation shows in
    compiled code; None: there is none to run. `clause` is the rule of C that is said to be
    broken.
    """

    mutant: Mutant
    valid: bool
    noticed: tuple[str, ...] = ()
    verdict: Verdict | None = None
    clause: str = ""
    host: bool = True
    error: str = ""
    seen: Seen | None = None
    reproduced: bool | None = None
    seconds: tuple[tuple[str, float], ...] = ()


@dataclass(frozen=True, eq=False)
class _Docket:
    """Calls of the rungs or of the referee as a job, and what the sound code makes of them.

    `names` has for each call what it belongs to.
    """

    names: tuple[str, ...]
    cases: tuple[Case | Trial, ...]
    job: Job
    host: Answers | None
    checked: dict[str, Answers]

    def next_rung(self, index: int) -> int:
        """Return the first call of the rung behind that of a call."""
        name = self.names[index]
        rest = (k for k in range(index, len(self.names)) if self.names[k] != name)
        return next(rest, len(self.names))


@dataclass(frozen=True, eq=False)
class Court:
    """Everything that judging one routine's mutants takes."""

    bench: Bench
    compiler: Compiler
    folder: Path
    bays: tuple[Bay, ...]
    sound: tuple[Program, ...]
    rungs: _Docket
    referee: _Docket
    more: _Docket
    tails: tuple[tuple[str, Codes, bytes], ...]
    proving: bool


def convene(
    bench: Bench, compiler: Compiler, other: Compiler | None, folder: Path, proving: bool = True
) -> Court:
    """Return a court for the mutants of a bench's routine, with the sound code's answers.

    Raises BuildError or MachineError if the sound code cannot be built or run.
    """
    routine, probes = bench.routine, bench.probes
    folder.mkdir(parents=True, exist_ok=True)
    bays = [sanitizing(compiler, "-O0", routine, probes, folder / "first")]
    if other is not None:
        bays.append(sanitizing(other, "-O1", routine, probes, folder / "second"))
    sound = tuple(_kept(bay, routine) for bay in bays)
    host = hosted(compiler, routine, probes, folder / "sound")
    launches = {bay.name: made.launch for bay, made in zip(bays, sound, strict=True)}

    def docket(cases: Sequence[Case | Trial], names: Sequence[str], hosts: bool) -> _Docket:
        made = job(routine, [case.call for case in cases])
        told = answers(made, host.library.launch(made.data())) if hosts else None
        checked = {by: answers(made, launch(made.data())) for by, launch in launches.items()}
        if (hosts and told is None) or None in checked.values():
            raise MachineError(finding("child-failed", reason=_UNSOUND))
        sure = {by: found for by, found in checked.items() if found is not None}
        return _Docket(tuple(names), tuple(cases), made, told, sure)

    own = [(rung.NAME, case) for rung in _COMPARED for case in rung.cases(bench)]
    tried = [*quick(bench), *wrong(bench)]
    more = thorough(bench, 1)
    return Court(
        bench,
        compiler,
        folder,
        tuple(bays),
        sound,
        docket([case for _, case in own], [name for name, _ in own], True),
        docket(tried, ["referee"] * len(tried), False),
        docket(more, ["referee"] * len(more), False),
        tuple(_tails(bench, sound[0])),
        proving,
    )


def _kept(bay: Bay, routine: Routine) -> Program:
    made = program(bay, routine)
    if made is None:
        raise MachineError(finding("child-failed", reason=_UNSOUND))
    place = bay.folder / "sound"
    made.path.parent.rename(place)
    return replace(made, path=place / made.path.name)


def _tails(bench: Bench, sound: Program) -> Iterator[tuple[str, Codes, bytes]]:
    """Yield the name of each tail, its arguments, and what the sound one makes of them."""
    for probe in bench.probes:
        r = bench.filter.passes[probe.requantiser].requantiser
        legal = requantiser.legal(bench, probe)
        values = requantiser.arguments(legal, r, _MOST_ARGUMENTS).values
        yield probe.function, values, sound.launch(_arguments(values), probe.function).data


def _arguments(values: Codes) -> bytes:
    return np.int64(values.size).tobytes() + values.astype(np.int64).tobytes()


def judge(court: Court, mutant: Mutant) -> Judgement:
    """Return what the rungs, the proof and the referee make of a mutant."""
    clock = [("start", time.monotonic())]
    routine = with_mutant(court.bench.routine, mutant)
    made = program(court.bays[0], routine)
    if made is None:
        return Judgement(mutant, valid=False)
    clock.append(("build", time.monotonic()))
    noticed = [*_tested(court, routine), *_probed(court, made)]
    checked, seen = _checked(court, made)
    noticed += [sanitized.NAME] * checked
    clock.append(("rungs", time.monotonic()))
    proof = _proved(court, routine)
    clock.append(("proof", time.monotonic()))
    seen = _refereed(court, made, routine, seen)
    judged = Judgement(mutant, True, tuple(n for n in RUNGS if n in noticed), seen=seen)
    if proof is not None:
        judged = _with_proof(court, judged, proof, made)
    clock.append(("referee", time.monotonic()))
    spent = tuple((b[0], b[1] - a[1]) for a, b in pairwise(clock))
    return replace(judged, seconds=spent)


def _tested(court: Court, routine: Routine) -> Iterator[str]:
    """Yield the rungs that notice something of a mutant that is built as the ladder builds."""
    host = hosted(court.compiler, routine, (), court.folder / "host")
    if host.warned:
        yield BUILD
    docket = court.rungs
    assert docket.host is not None
    told = {BUILD}
    for found in differences(docket.job, docket.host, host.library.launch, docket.next_rung):
        name = docket.names[found.index]
        if name not in told and _is_fault(court, docket, found):
            told.add(name)
            yield name


def _is_fault(court: Court, docket: _Docket, found: Difference) -> bool:
    """Return whether a rung says of a call that answers differently that it is wrong."""
    case = docket.cases[found.index]
    if found.segment is None:
        return True
    assert isinstance(case, Case)
    return fault(court.bench, case, docket.job.outcome(found.index, found.segment)) is not None


def _probed(court: Court, made: Program) -> Iterator[str]:
    """Yield the rung of the requantiser if a tail answers differently."""
    for function, values, sound in court.tails:
        if made.launch(_arguments(values), function).data != sound:
            yield requantiser.NAME
            return


def _checked(court: Court, made: Program) -> tuple[bool, Seen | None]:
    """Return whether the rungs' calls show anything under sanitizers, and what."""
    noticed, seen = False, None
    bay, docket = court.bays[0], court.rungs
    for found in differences(docket.job, docket.checked[bay.name], made.launch):
        noticed = noticed or _is_fault(court, docket, found)
        seen = _better(seen, _seen(bay, docket, found))
        if noticed and seen is not None and not seen.misuse:
            break
    return noticed, seen


def _better(old: Seen | None, new: Seen | None) -> Seen | None:
    """Return the one that says more: a wrong result says more than a wrong refusal."""
    return new if new is not None and (old is None or (old.misuse and not new.misuse)) else old


def _seen(bay: Bay, docket: _Docket, found: Difference) -> Seen | None:
    """Return how a call shows a mutant; None: the contract leaves open what it gives."""
    case = docket.cases[found.index]
    sound = docket.job.outcome(found.index, docket.checked[bay.name].segments[found.index])
    misuse = bool(set(sound.statuses) & _MISUSE)
    if found.segment is None:
        assert found.ended is not None
        harm, detail = diagnose(found.ended)
        return Seen(bay.name, case.name, f"{harm}: {detail}"[:160], misuse)
    outcome = docket.job.outcome(found.index, found.segment)
    how = _told(sound, outcome)
    if how is None or (not case.specified and outcome.harm is None):
        return None
    return Seen(bay.name, case.name, how, misuse)


def _told(sound: Outcome, outcome: Outcome) -> str | None:
    if outcome.harm is not None and outcome.harm is not Harm.NOT_RUN:
        return f"{outcome.harm}: {outcome.detail}"[:160]
    if outcome.statuses != sound.statuses:
        return f"statuses {outcome.statuses} for {sound.statuses}"[:160]
    if outcome.size != sound.size:
        return f"output size {outcome.size} for {sound.size}"
    if outcome.output is None or sound.output is None:
        return "something written" if outcome.output is not sound.output else None
    wrong = np.argwhere(outcome.output != sound.output)
    if not wrong.size:
        return None
    at = tuple(int(k) for k in wrong[0])
    return f"{int(outcome.output[at])} for {int(sound.output[at])} at {at}"


def _refereed(court: Court, made: Program, routine: Routine, seen: Seen | None) -> Seen | None:
    """Return how the referee sees a mutant, which it looks for longer the better it hides."""
    seen = _by(court.bays[0], made, (court.referee,), seen)
    if seen is not None and not seen.misuse:
        return seen
    for number, bay in enumerate(court.bays[1:]):
        second = program(bay, routine)
        if second is not None:
            dockets = (court.rungs, court.referee, court.more)
            seen = _by(bay, second, dockets if number == 0 else (court.more,), seen)
    return _by(court.bays[0], made, (court.more,), seen)


def _by(bay: Bay, made: Program, dockets: Sequence[_Docket], seen: Seen | None) -> Seen | None:
    for docket in dockets:
        if seen is not None and not seen.misuse:
            return seen
        for found in differences(docket.job, docket.checked[bay.name], made.launch):
            seen = _better(seen, _seen(bay, docket, found))
            if seen is not None and not seen.misuse:
                return seen
    return seen


def _proved(court: Court, routine: Routine) -> Proof | None:
    """Return what the proof rung says: of few cases first, of all if they are proved."""
    if not court.proving:
        return None
    f = court.bench.filter
    proof = prove(f, routine, first_cases(f, routine))
    if proof.verdict is not Verdict.PROVED:
        return proof
    rest = prove(f, routine, full_cases(f, routine))
    return replace(rest, cases=rest.cases + proof.cases)


def _with_proof(court: Court, judged: Judgement, proof: Proof, made: Program) -> Judgement:
    found = proof.result
    judged = replace(judged, verdict=proof.verdict, error=proof.error)
    if found is None or found.verdict is Verdict.PROVED:
        return judged
    place = f" line {found.place.line}: {found.place.expression}" if found.place else ""
    judged = replace(judged, clause=f"{found.reason}{place}"[:160], host=found.case.model == LP64)
    call = shown(court.bench.filter, found)
    if call is None:
        return judged
    again = _reproduces(court, made, call)
    seen = judged.seen
    if again and (seen is None or seen.misuse):
        seen = Seen(court.bays[0].name, "counterexample", "the proof's frame", misuse=False)
    return replace(judged, reproduced=again, seen=seen)


def _reproduces(court: Court, made: Program, call: Call) -> bool:
    """Return whether a call shows a mutant in compiled code."""
    one = job(court.bench.routine, [call])
    sound = answers(one, court.sound[0].launch(one.data()))
    if sound is None:
        return False
    return any(True for _ in differences(one, sound, made.launch))
