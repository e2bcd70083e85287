import errno
import os
import pickle
from collections.abc import Callable, Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

from guardbit.cli import api, executor
from guardbit.cli.answer import Answer
from guardbit.cli.tasks import Task, Verify, emit, lost
from guardbit.model.finding import MachineError, Place, SpecError, finding
from guardbit.model.plan import Plan
from guardbit.model.routine import Emission
from guardbit.model.sizing import Sizing
from guardbit.report.certificate import load_certificate
from guardbit.report.wording import sentence

Guardbit = Callable[..., Any]
WRONG = finding("same-name", Place("a.toml"), name="a", other="b.toml")


def no_space() -> OSError:
    return OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))


@pytest.mark.parametrize(
    ("error", "status", "kind"),
    [
        (SpecError(WRONG), 2, "same-name"),
        (MachineError(WRONG), 3, "same-name"),
        (MemoryError(), 3, "no-memory"),
        (no_space(), 3, "machine-refused"),
        (RecursionError("too deep"), 70, "fault"),
        (KeyError("x"), 70, "fault"),
    ],
)
def test_every_error_is_an_answer(error: Exception, status: int, kind: str) -> None:
    def work(spec: str) -> Any:  # noqa: ANN401
        raise error

    answer = Task(work)("a.toml")
    assert (answer.spec, answer.status) == ("a.toml", status)
    assert [found.kind for found in answer.findings] == [kind]
    assert bool(answer.fault) is (status == 70)


@pytest.mark.parametrize("error", [KeyboardInterrupt(), SystemExit(143)])
def test_an_end_is_no_answer(error: BaseException) -> None:
    def work(spec: str) -> Any:  # noqa: ANN401
        raise error

    with pytest.raises(type(error)):
        Task(work)("a.toml")


def test_a_lost_worker_names_its_end() -> None:
    answer = lost("a.toml", -9)
    assert answer.status == 3
    assert sentence(answer.findings[0]).startswith("a.toml: The process that worked on this spec")
    assert "signal 9" in sentence(answer.findings[0])
    assert "exit status 1" in sentence(lost("a.toml", 1).findings[0])


def test_tasks_and_answers_travel_between_processes(soften: Path) -> None:
    for work in (emit, Verify(photograph="x.png")):
        assert pickle.loads(pickle.dumps(Task(work))) == Task(work)
    answer = Task(emit)(str(soften))
    assert pickle.loads(pickle.dumps(answer)) == answer


def test_wrong_c_fails_with_all_that_a_person_needs(
    guardbit: Guardbit, soften: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """The rounding constant is left out of the emitted C, behind the tool's back."""
    emitted = api._emitted

    def spoilt(sizing: Sizing) -> tuple[Plan, Emission]:
        plan, emission = emitted(sizing)
        sources = tuple(
            replace(s, text=s.text.replace("+ 8) >> 4", "+ 7) >> 4"))
            for s in emission.routine.sources
        )
        assert sources != emission.routine.sources
        return plan, replace(emission, routine=replace(emission.routine, sources=sources))

    def here(work: Task, specs: list[str], *_: object) -> Iterator[Answer]:
        return (work(spec) for spec in specs)

    monkeypatch.setattr(api, "_emitted", spoilt)
    monkeypatch.setattr(executor, "in_order", here)
    ran = guardbit("verify", soften, "--keep", "kept", "-o", "out")
    assert ran.status == 1
    assert "[X] FAILS    requantiser" in ran.out and "[X] FAILS: " in ran.out.splitlines()[-1]
    assert "the requantiser makes 0 of 8, not 1" in ran.err
    assert "do not ship this C" in ran.err and ran.err.endswith("What reproduces it is in kept\n")
    assert list(Path("kept").glob("*.npy"))
    text = Path("out/soften3.cert.json").read_text()
    assert any(rung["findings"] for rung in load_certificate(text)["rungs"])
    assert str(Path.cwd()) not in text and "kept/" not in text
