"""The commands that take specs: what each does, shows and advises."""

from dataclasses import replace
from functools import partial

from guardbit.cli.answer import WRONG, Answer
from guardbit.cli.many import Call, Command, run
from guardbit.cli.sizing import Size
from guardbit.cli.tasks import Task, Verify, emit
from guardbit.report.look import Look


def run_size(call: Call, work: Size, markdown: bool, folder: str | None, force: bool) -> int:
    """Size every spec and return the exit status."""
    work = replace(work, sheet=work.sheet or markdown or call.json, files=folder is not None)
    show = _size_markdown if markdown else partial(_size_text, work)
    command = Command("size", Task(work), show, _size_advice, folder, force, long=work.pin)
    return run(call, command)


def run_emit(call: Call, folder: str, force: bool) -> int:
    """Write the files of every spec and return the exit status."""
    return run(call, Command("emit", Task(emit), _emit_text, _emit_advice, folder, force))


def run_verify(call: Call, folder: str | None, force: bool, work: Verify) -> int:
    """Check every spec's C and return the exit status."""
    advice = partial(_verify_advice, work.keep)
    command = Command("verify", Task(work), _verify_text, advice, folder, force, long=True)
    return run(call, command)


def _size_text(work: Size, look: Look, answer: Answer) -> str:
    from guardbit.report.goals import fit_text, goal_text
    from guardbit.report.terminal import folder_text, pinned_text, sheet_text, size_text

    if answer.sizing is None:
        return ""
    shown = answer.sheet if work.sheet or work.photographs else None
    parts = [sheet_text(look, shown) if shown else size_text(look, answer.sizing, answer.orders)]
    if answer.search is not None:
        parts.append(goal_text(look, answer.search))
    if answer.fit is not None:
        parts.append(fit_text(look, answer.fit))
    if work.pin and not answer.findings:
        parts.append(pinned_text(look, answer.spec, answer.pinned))
    if answer.written:
        parts.append(folder_text(look, answer.folder, answer.written))
    return "\n".join(parts)


def _size_markdown(look: Look, answer: Answer) -> str:
    from guardbit.report.sheet import sheet_markdown

    return sheet_markdown(answer.sheet) if answer.sheet else ""


def _emit_text(look: Look, answer: Answer) -> str:
    from guardbit.report.terminal import emit_text

    if answer.sizing is None or not answer.written:
        return ""
    return emit_text(look, answer.sizing.filter, answer.folder, answer.written)


def _verify_text(look: Look, answer: Answer) -> str:
    from guardbit.report.terminal import verify_text

    if answer.sizing is None or answer.certificate is None:
        return ""
    sizing, rungs = answer.sizing, answer.certificate.rungs
    return verify_text(look, sizing.filter, sizing.error, rungs)


def _size_advice(answer: Answer) -> str:
    if answer.status == WRONG:
        return f"correct the spec, then: guardbit size {answer.spec}"
    return ""


def _emit_advice(answer: Answer) -> str:
    if answer.status != WRONG or answer.certificate is not None:
        return ""
    return f"to see every width: guardbit size {answer.spec}"


def _verify_advice(keep: str | None, answer: Answer) -> str:
    if answer.certificate is None:
        return "" if answer.status != WRONG else f"to see every width: guardbit size {answer.spec}"
    if any(rung.findings for rung in answer.certificate.rungs):
        again = f"guardbit verify {answer.spec} --keep FOLDER"
        where = f"is in {keep}" if keep else f"can be had by: {again}"
        return f"do not ship this C: it and the spec disagree. What reproduces it {where}"
    if any(not rung.ran for rung in answer.certificate.rungs):
        return "what could not run says why beside 'not covered'"
    return ""
