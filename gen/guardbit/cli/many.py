"""A command on many specs: the work shared out, the answers shown in the order given."""

import os
from collections.abc import Callable, Generator, Sequence
from contextlib import closing
from dataclasses import dataclass, replace
from pathlib import Path

from guardbit.cli.answer import Answer, overall
from guardbit.cli.machine import specs_document
from guardbit.cli.output import without_namesakes, write_files
from guardbit.cli.session import Session
from guardbit.cli.tasks import Task, lost
from guardbit.model.finding import GuardbitError
from guardbit.report.look import Look


@dataclass(frozen=True)
class Command:
    """What a command does with each spec.

    `show` draws an answer's table; `advice` says what to do next about one that failed.
    `folder`: where its files go, if anywhere. `long`: one spec alone may take seconds.
    """

    name: str
    task: Task
    show: Callable[[Look, Answer], str]
    advice: Callable[[Answer], str]
    folder: str | None = None
    force: bool = False
    long: bool = False


@dataclass(frozen=True)
class Call:
    """The specs of a call, how many processes may work on them, and who reads the answer."""

    specs: tuple[str, ...]
    jobs: int | None
    json: bool


def cores() -> int:
    """Return the number of processor cores that this process may use."""
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0))
    return os.cpu_count() or 1


def run(call: Call, command: Command) -> int:
    """Do the work on every spec, show it, and return the exit status."""
    session = Session(call.json)
    answers: list[Answer] = []
    for answer in _finished(session, command, call.specs, call.jobs or cores()):
        answers.append(answer)
        if not session.json:
            _show(session, command, answer, first=len(answers) == 1)
        if answer.fault and session.debug:
            session.err(answer.fault)
    status = overall(answer.status for answer in answers)
    if session.json:
        session.out(specs_document(command.name, status, answers))
    return status


def _finished(
    session: Session, command: Command, specs: Sequence[str], jobs: int
) -> Generator[Answer, None, None]:
    with closing(_worked(session, command, specs, jobs)) as working:
        if command.folder is None:
            yield from working
            return
        # Two specs may claim the same files, which shows only when all have been read.
        for answer in without_namesakes(list(working)):
            yield _written(answer, Path(command.folder), command.force)


def _worked(
    session: Session, command: Command, specs: Sequence[str], jobs: int
) -> Generator[Answer, None, None]:
    # Long work always gets processes of its own, so that this one can end it at any time.
    if min(jobs, len(specs)) < 2 and not command.long:
        yield from map(command.task, specs)
        return
    # Bringing up the machinery of processes takes longer than many a spec.
    from guardbit.cli.executor import in_order

    tick = session.bar("spec" if len(specs) == 1 else "specs", len(specs))
    with closing(in_order(command.task, specs, jobs, lost, tick)) as answers:
        for answer in answers:
            tick(-1)
            yield answer
    tick(-1)


def _written(answer: Answer, folder: Path, force: bool) -> Answer:
    if not answer.files:
        return answer
    try:
        digests = write_files(folder, answer.files, force)
    except GuardbitError as error:
        status = overall((answer.status, error.status))
        findings = (*answer.findings, *error.findings)
        return replace(answer, status=status, findings=findings)
    return replace(answer, folder=str(folder), written=digests)


def _show(session: Session, command: Command, answer: Answer, first: bool) -> None:
    from guardbit.report.terminal import finding_line, next_line

    text = command.show(session.out_look, answer)
    if text:
        session.out(text if first else f"\n{text}")
    for found in answer.findings:
        session.err(finding_line(session.err_look, found))
    if answer.status and (advice := command.advice(answer)):
        session.err(next_line(session.err_look, advice))
