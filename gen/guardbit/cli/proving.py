"""The command `prove`: cases of the proof shared out to processes, one verdict for each spec."""

from collections.abc import Sequence
from contextlib import closing
from dataclasses import dataclass, replace
from pathlib import Path

from guardbit.cli import api
from guardbit.cli.answer import FAILED, HOLDS, Answer, overall
from guardbit.cli.machine import document, finding_entry
from guardbit.cli.many import cores
from guardbit.cli.session import Session
from guardbit.cli.tasks import Task
from guardbit.model.certificate import RungResult
from guardbit.model.filter import Filter
from guardbit.model.finding import GuardbitError, Place, finding
from guardbit.model.proof import DATA_MODELS, Case, CaseResult, DataModel, Verdict
from guardbit.model.routine import Routine

_CHUNK = 8
"""Cases that a process takes at once."""


@dataclass(frozen=True)
class Options:
    """`models` by name. `relaxed`: reliance on the implementation is listed, not refused.

    `against` is the user's own C: a file, a function in it and what its arguments are.
    """

    models: tuple[str, ...]
    thorough: bool
    relaxed: bool
    against: tuple[str, str, tuple[str, ...]] | None
    folder: str | None
    jobs: int | None
    json: bool


@dataclass(frozen=True)
class Chunk:
    """Some cases of one routine's proof."""

    filter: Filter
    routine: Routine
    cases: tuple[Case, ...]
    strict: bool

    def __call__(self) -> tuple[CaseResult, ...]:
        """Return the results up to the first that refutes."""
        from guardbit.proof.prove import prove_case

        made = []
        for case in self.cases:
            made.append(prove_case(self.filter, self.routine, case, self.strict))
            if made[-1].verdict in (Verdict.REFUTED, Verdict.BROKEN):
                break
        return tuple(made)


Outcome = tuple[CaseResult, ...] | Exception | int


def run_prove(specs: Sequence[str], options: Options) -> int:
    """Prove every spec's C, or the user's own, and return the exit status."""
    session = Session(options.json)
    answers, entries = [], []
    for number, spec in enumerate(specs):
        answer, rung, results = _proved(session, spec, options)
        answers.append(answer)
        entries.append(_entry(answer, rung, results))
        if not session.json:
            _show(session, answer, rung, first=number == 0)
        if answer.fault and session.debug:
            session.err(answer.fault)
    status = overall(answer.status for answer in answers)
    if session.json:
        session.out(document("prove", status, specs=entries))
    return status


def _proved(
    session: Session, spec: str, options: Options
) -> tuple[Answer, RungResult | None, tuple[CaseResult, ...]]:
    made: list[tuple[RungResult, tuple[CaseResult, ...]]] = []

    def work(path: str) -> Answer:
        answer, rung, results = _answered(session, path, options)
        made.append((rung, results))
        return answer

    answer = Task(work)(spec)
    return (answer, *made[0]) if made else (answer, None, ())


def _answered(
    session: Session, spec: str, options: Options
) -> tuple[Answer, RungResult, tuple[CaseResult, ...]]:
    from guardbit.cli.output import write_files
    from guardbit.proof.coverage import cases
    from guardbit.report.regression import regression_files
    from guardbit.verify.proof import rung

    sizing, routine = api.subject(spec, options.against)
    f = sizing.filter
    chosen = cases(f, routine, _models(options.models), thorough=options.thorough)
    strict = not (options.relaxed or routine.foreign)
    results = _worked(session, f, routine, chosen, (strict, options.jobs or cores()))
    found = rung(f, routine, results)
    status = HOLDS if found.holds else FAILED
    answer = Answer(spec, status, found.findings, sizing)
    wrong = next((r for r in results if r.counterexample is not None), None)
    if wrong is not None and options.folder is not None:
        files = regression_files(spec, f, wrong, options.against)
        written = write_files(Path(options.folder), files, force=True)
        answer = replace(answer, files=files, folder=options.folder, written=written)
    return answer, found, results


def _models(names: Sequence[str]) -> tuple[DataModel, ...]:
    return tuple(model for model in DATA_MODELS if model.name in names)


def _worked(
    session: Session,
    f: Filter,
    routine: Routine,
    chosen: Sequence[Case],
    way: tuple[bool, int],
) -> tuple[CaseResult, ...]:
    """Return the results in the order of the cases, up to the first that refutes."""
    from guardbit.cli.executor import in_order

    strict, jobs = way
    chunks = [
        Chunk(f, routine, tuple(chosen[i : i + _CHUNK]), strict)
        for i in range(0, len(chosen), _CHUNK)
    ]
    made: list[CaseResult] = []
    tick = session.bar("parts", len(chunks))
    with closing(in_order(_called, chunks, jobs, _lost, tick)) as arriving:
        for outcome in arriving:
            tick(-1)
            if isinstance(outcome, Exception):
                raise outcome
            if isinstance(outcome, int):
                raise GuardbitError(finding("worker-lost", Place(), cause=str(outcome)))
            made.extend(outcome)
            if made and made[-1].verdict in (Verdict.REFUTED, Verdict.BROKEN):
                break
    tick(-1)
    return tuple(made)


def _called(chunk: Chunk) -> Outcome:
    try:
        return chunk()
    except Exception as error:
        return error


def _lost(_: Chunk, status: int) -> Outcome:
    return status


def _show(session: Session, answer: Answer, rung: RungResult | None, *, first: bool) -> None:
    from guardbit.report.proof import proof_text
    from guardbit.report.terminal import finding_line, folder_text, next_line

    if rung is not None and answer.sizing is not None:
        text = proof_text(session.out_look, answer.sizing.filter, rung)
        session.out(text if first else f"\n{text}")
    for found in answer.findings:
        session.err(finding_line(session.err_look, found))
    if answer.written:
        session.out(folder_text(session.out_look, answer.folder, answer.written))
    elif answer.status == FAILED and rung is not None and rung.findings:
        again = f"guardbit prove {answer.spec} -o FOLDER"
        session.err(next_line(session.err_look, f"the frame, and a test that fails on it: {again}"))


def _entry(
    answer: Answer, rung: RungResult | None, results: Sequence[CaseResult]
) -> dict[str, object]:
    return {
        "spec": answer.spec,
        "status": answer.status,
        "findings": [finding_entry(each) for each in answer.findings],
        "proof": rung,
        "cases": [
            {
                "model": r.case.model.name,
                "width": r.case.width,
                "height": r.case.height,
                "codes": r.case.codes,
                "bands": len(r.case.bands),
                "verdict": r.verdict,
                "reason": r.reason,
                "outputs": r.outputs,
            }
            for r in results
        ],
        "folder": answer.folder,
        "written": answer.written,
    }
