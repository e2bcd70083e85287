"""The command `sweep`: one spec at every point of a grid of words."""

from collections.abc import Callable, Generator, Sequence
from contextlib import closing
from dataclasses import dataclass
from pathlib import Path
from typing import TypeAlias

from guardbit.cli import api
from guardbit.cli.cluster import as_done_on
from guardbit.cli.failure import show_failure
from guardbit.cli.journal import Journal, journal, remove, sweep_digest
from guardbit.cli.machine import document, finding_entry
from guardbit.cli.many import cores
from guardbit.cli.session import Session
from guardbit.model.finding import GuardbitError, MachineError, SpecError, finding
from guardbit.model.spec import Spec
from guardbit.model.sweep import Grid, Row, Sweep
from guardbit.study.sweep import Batch, Evaluation, check_grid, swept

BATCH = 8
"""Points per task: few enough that little is lost when work is ended, and its cost shared."""

# Bringing up processes takes longer than so many points.
_FEW = 48

_Arriving: TypeAlias = Generator[tuple[int, Batch | None], None, None]


@dataclass(frozen=True)
class Options:
    """Where results go, and where the work is done."""

    csv: str | None = None
    plot: str | None = None
    journal: str | None = None
    json: bool = False
    every: bool = False
    jobs: int | None = None
    scheduler: str | None = None


def run_sweep(path: str, grid: Grid, options: Options) -> int:
    """Go through the grid, write and show what it comes to, and return the exit status."""
    session = Session(options.json)
    try:
        if options.plot is not None:
            from guardbit.report.plot import check_plot

            check_plot(options.plot)
        spec = api.read(path)
        check_grid(spec, grid)
        made = _swept(session, spec, grid, options)
    except GuardbitError as error:
        return show_failure(session, "sweep", error)
    _show(session, path, made, options)
    return 0


def _swept(session: Session, spec: Spec, grid: Grid, options: Options) -> Sweep:
    """Return the finished sweep, written where it was asked for.

    Only then is the journal removed, unless somebody asked for it.
    """
    digest = sweep_digest(api.TOOL, spec.digest, grid)
    path = _journal_path(spec, digest, options)
    with journal(path, digest, grid) as kept:
        rows = [*kept.rows.values()]
        missing = [index for index in range(len(grid)) if index not in kept.rows]
        show = session.bar("points", len(grid), begun=len(rows))
        for batch in _batches(Evaluation(api.TOOL, spec, grid), missing, options, kept):
            rows += batch
            show(len(rows))
        show(-1)
        made = swept(spec, grid, rows)
        _write(made, options)
        if options.journal is None:
            remove(path)
    return made


def _journal_path(spec: Spec, digest: str, options: Options) -> Path:
    if options.journal is not None:
        return Path(options.journal)
    folder = Path(options.csv).parent if options.csv is not None else Path()
    return folder / f"{spec.filter.name}.sweep-{digest[:12]}.journal"


def _batches(
    work: Evaluation, missing: Sequence[int], options: Options, kept: Journal
) -> Generator[Sequence[Row], None, None]:
    """Yield rows as they are made, each of them in the journal already."""
    lost: list[int] = []
    tasks = [tuple(missing[at : at + BATCH]) for at in range(0, len(missing), BATCH)]
    for tried in (tasks, None):
        tasks = tried if tried is not None else [(index,) for index in lost]
        with closing(_arriving(work, tasks, options, alone=tried is None)) as arriving:
            for number, batch in arriving:
                if batch is None:
                    lost += tasks[number]
                    continue
                kept.append(batch.rows)
                yield batch.rows


def _arriving(
    work: Evaluation, tasks: Sequence[tuple[int, ...]], options: Options, alone: bool
) -> _Arriving:
    """Yield (number of the task, its batch) from here, from processes or from a cluster.

    A task whose process died is None; each of its points is then worked on `alone`, and one
    that takes its process along again ends the sweep. Raises MachineError, SpecError.
    """
    jobs = options.jobs or cores()
    if options.scheduler is not None and tasks:
        for number, batch in as_done_on(options.scheduler, work, tasks):
            if batch.tool != work.tool:
                found = finding("sweep-version", got=batch.tool, wanted=work.tool)
                raise SpecError(found)
            yield number, batch
        return
    if not alone and (jobs == 1 or sum(map(len, tasks)) <= _FEW):
        yield from enumerate(map(work, tasks))
        return
    from guardbit.cli.executor import as_done

    with closing(as_done(_Guarded(work), tasks, jobs, _lost)) as arriving:
        for number, result in arriving:
            if isinstance(result, str) and alone:
                (index,) = tasks[number]
                raise MachineError(finding("sweep-lost", index=index, cause=result))
            if isinstance(result, Exception):
                raise result
            yield number, result if isinstance(result, Batch) else None


@dataclass(frozen=True)
class _Guarded:
    """The evaluation as a worker process needs it: it returns what it would raise."""

    work: Callable[[Sequence[int]], Batch]

    def __call__(self, numbers: Sequence[int]) -> Batch | str | Exception:
        try:
            return self.work(numbers)
        except Exception as error:
            return error


def _lost(numbers: Sequence[int], status: int) -> Batch | str | Exception:
    return f"signal {-status}" if status < 0 else f"exit status {status}"


def _write(made: Sweep, options: Options) -> None:
    from guardbit.files.writing import write_atomic
    from guardbit.report.sweep import sweep_csv

    if options.csv is not None:
        target = Path(options.csv)
        write_atomic(target.parent, {target.name: sweep_csv(made).encode("utf-8")})
    if options.plot is not None:
        from guardbit.report.plot import sweep_plot

        target = Path(options.plot)
        write_atomic(target.parent, {target.name: sweep_plot(made, target.name)})


def _show(session: Session, path: str, made: Sweep, options: Options) -> None:
    from guardbit.report.sweep import sweep_text
    from guardbit.report.terminal import written_text

    if session.json:
        session.out(document("sweep", 0, spec=path, sweep=_content(made)))
        return
    session.out(sweep_text(session.out_look, made, options.every))
    for file in (options.csv, options.plot):
        if file is not None:
            session.out(written_text(session.out_look, file))


def _content(made: Sweep) -> dict[str, object]:
    rows = [
        {
            "index": row.index,
            "point": row.point,
            "cost": row.cost,
            "refused": finding_entry(row.refused) if row.refused is not None else None,
        }
        for row in made.rows
    ]
    digest, grid = made.spec_digest, made.grid
    return {"name": made.name, "digest": digest, "grid": grid, "rows": rows, "front": made.front}
