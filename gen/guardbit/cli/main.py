"""The command `guardbit`.

Exit status: 0 all holds; 1 a check failed; 2 a spec or the call is wrong, an unmet `forbid`
included; 3 something is missing on this machine; 70 a fault in guardbit itself; 130 stopped by
Ctrl-C, 143 by a signal to end, 141 the reader of the output went away. With many specs the
first of 70, 2, 3, 1 that any of them has.
"""

import signal
import sys
from collections.abc import Callable, Sequence
from functools import partial
from typing import Any, NoReturn, TypeVar

import click

from guardbit import __version__
from guardbit.cli.answer import ENDED, FAULT, HOLDS, INTERRUPTED, MISSING, PIPE_CLOSED, WRONG
from guardbit.cli.ranges import DEFECTS, Callback, against, choices, defects, numbers
from guardbit.model.enums import FitRule, Rounding
from guardbit.report.cautions import CAUTIONS

F = TypeVar("F", bound=Callable[..., Any])
Work = Callable[[], int]

MODELS = ("IP16", "ILP32", "LP64", "LLP64")
_EXIT = (
    "Exit status: 0 all holds, 1 a check failed, 2 a spec or the call is wrong,"
    " 3 something is missing on this machine, 70 a fault in guardbit."
)
_EPILOG = f"{_EXIT}\n\n{' '.join(CAUTIONS)}"
_SETTINGS = {"help_option_names": ["-h", "--help"], "max_content_width": 100}


@click.group(context_settings=_SETTINGS, epilog=_EPILOG, no_args_is_help=True)
@click.version_option(__version__, prog_name="guardbit", message="%(prog)s %(version)s")
def command() -> None:
    """Two-dimensional filters in integer arithmetic, exact to the last bit.

    From one spec file (TOML): the width of every register, portable C, and the evidence that
    the C does what the spec says. Begin with: guardbit init NAME
    """


def _many(function: F) -> F:
    specs = click.argument("specs", nargs=-1, required=True, metavar="SPEC...")
    jobs = click.option(
        "--jobs", "-j", type=click.IntRange(min=1), metavar="N", help="Processes (default: cores)."
    )
    return specs(jobs(_json(function)))


def _json(function: F) -> F:
    return click.option("--json", "json", is_flag=True, help="One JSON document on stdout.")(
        function
    )


def _axis(option: str, read: Callback, said: str) -> Callable[[F], F]:
    return click.option(option, callback=read, metavar="VALUES", help=said)


def _own(function: F) -> F:
    file = click.option("--against", metavar="FILE", help="Check this C instead of the emitted.")
    name = click.option("--function", metavar="NAME", help="The function in it.")
    roles = click.option(
        "--arguments",
        metavar="ROLES",
        help="Its arguments, in order: src, src_stride, dst, dst_stride, width, height, a number.",
    )
    return file(name(roles(function)))


_force = click.option("--force", is_flag=True, help="Overwrite files even if they were edited.")


@command.command()
@click.argument("name")
@click.option("--output", "-o", metavar="FILE", help="Where to write it (default: NAME.toml).")
@_json
def init(name: str, output: str | None, json: bool) -> Work:
    """Write a commented spec to start from. Never over a file that is there."""
    from guardbit.cli.starter import run_init

    return partial(run_init, name, output, json)


@command.command()
@_many
@click.option("--sheet", is_flag=True, help="Show the sizing sheet: a page for a design review.")
@click.option("--markdown", is_flag=True, help="Show the sizing sheet as Markdown.")
@click.option(
    "--photo",
    multiple=True,
    metavar="IMAGE",
    help="A photograph to filter for the sheet (PNG, PGM).",
)
@click.option(
    "--pin", is_flag=True, help="Write what is searched for (goal, response) into the spec."
)
@click.option("--output", "-o", metavar="FOLDER", help="Write the sheet and the witness frames.")
@_force
def size(
    specs: tuple[str, ...],
    jobs: int | None,
    json: bool,
    **asked: Any,  # noqa: ANN401
) -> Work:
    """Say how many bits each register needs, and the bound of the error.

    With a goal in the spec: find the word lengths that reach it.
    """
    from guardbit.cli.many import Call
    from guardbit.cli.sizing import Size
    from guardbit.cli.specs import run_size

    work = Size(asked["sheet"], tuple(asked["photo"]), pin=asked["pin"])
    shown = (asked["markdown"], asked["output"], asked["force"])
    return partial(run_size, Call(specs, jobs, json), work, *shown)


@command.command()
@_many
@click.option("--output", "-o", required=True, metavar="FOLDER", help="Where the files go.")
@_force
def emit(specs: tuple[str, ...], jobs: int | None, json: bool, output: str, force: bool) -> Work:
    """Write the C, its self-check and the certificate."""
    from guardbit.cli.many import Call
    from guardbit.cli.specs import run_emit

    return partial(run_emit, Call(specs, jobs, json), output, force)


@command.command()
@_many
@click.option("--output", "-o", metavar="FOLDER", help="Write the files too, with the evidence.")
@_force
@click.option("--cc", metavar="COMMAND", help="The C compiler (default: $CC, cc, gcc, clang).")
@click.option("--photo", metavar="IMAGE", help="A photograph to run as well (PNG, PGM).")
@click.option("--keep", metavar="FOLDER", help="Where to leave what reproduces a mismatch.")
@click.option(
    "--seed-defects",
    is_flag=False,
    flag_value=DEFECTS,
    callback=defects,
    metavar="[N]",
    help=f"Seed N faults in the C ({DEFECTS}), after SPEC: how many does each rung notice?",
)
@_own
def verify(
    specs: tuple[str, ...],
    jobs: int | None,
    json: bool,
    output: str | None,
    force: bool,
    **ladder: Any,  # noqa: ANN401
) -> Work:
    """Compile the C and check it, rung by rung, to the last bit."""
    from guardbit.cli.many import Call
    from guardbit.cli.specs import run_verify
    from guardbit.cli.tasks import Verify

    own = against(ladder["against"], ladder["function"], ladder["arguments"])
    work = Verify(ladder["cc"], ladder["photo"], ladder["keep"], ladder["seed_defects"], own)
    return partial(run_verify, Call(specs, jobs, json), output, force, work)


@command.command()
@_many
@click.option(
    "--model",
    type=click.Choice(["all", *MODELS]),
    default="all",
    metavar="MODEL",
    help=f"Widths of C's types: {', '.join(MODELS)} (default: all of them).",
)
@click.option("--thorough", is_flag=True, help="More sizes, and the largest legal ones.")
@click.option("--relaxed", is_flag=True, help="List what C leaves to the implementation.")
@_own
@click.option("--output", "-o", metavar="FOLDER", help="Where a counterexample's test goes.")
def prove(specs: tuple[str, ...], jobs: int | None, json: bool, **given: Any) -> Work:  # noqa: ANN401
    """Prove that the C equals the spec for every possible frame of a size.

    The C is executed on symbols instead of codes, at every size up to twice the taps' reach.
    """
    from guardbit.cli.proving import Options, run_prove

    options = Options(
        models=MODELS if given["model"] == "all" else (given["model"],),
        thorough=given["thorough"],
        relaxed=given["relaxed"],
        against=against(given["against"], given["function"], given["arguments"]),
        folder=given["output"],
        jobs=jobs,
        json=json,
    )
    return partial(run_prove, specs, options)


@command.command()
@click.argument("spec", metavar="SPEC")
@_axis("--coefficient-bits", numbers(1, 32), "Bits of a coefficient, such as 4..12 or 8,10.")
@_axis("--frac", numbers(-64, 64, auto=True), "Fraction bits of the coefficients, or auto.")
@_axis("--intermediate-bits", numbers(2, 32), "Bits between two passes.")
@_axis("--intermediate-frac", numbers(-64, 64), "Fraction bits between two passes.")
@_axis("--rounding", choices(*Rounding), "How every requantiser rounds.")
@_axis("--fit", choices(FitRule.NEAREST, FitRule.GAIN), "How taps become integers.")
@click.option("--response", is_flag=True, help="Tell the deviation of the frequency response too.")
@click.option("--all", "every", is_flag=True, help="List every point, however many there are.")
@click.option("--csv", metavar="FILE", help="Write every point to FILE.")
@click.option("--plot", metavar="FILE", help="Plot error against bits to FILE (PNG, SVG).")
@click.option(
    "--journal",
    metavar="FILE",
    help="Where finished points are kept (default: beside the output, until the sweep is done).",
)
@click.option(
    "--jobs", "-j", type=click.IntRange(min=1), metavar="N", help="Processes (default: cores)."
)
@click.option("--scheduler", metavar="ADDRESS", help="Work on this Dask cluster instead.")
@_json
def sweep(spec: str, response: bool, **given: Any) -> Work:  # noqa: ANN401
    """Size a spec at every combination of word lengths, and show the best of them.

    Each axis that is left out stays as the spec has it. The same command goes on where it was
    interrupted.
    """
    from guardbit.cli.sweep import Options, run_sweep
    from guardbit.model.sweep import AXES, Grid

    given["coefficient_frac"] = given.pop("frac")
    axes = {name: given.pop(name) for name in AXES}
    return partial(run_sweep, spec, Grid(**axes, response=response), Options(**given))


@command.command()
@click.argument("topic", nargs=-1, metavar="[TOPIC]")
@_json
def explain(topic: tuple[str, ...], json: bool) -> Work:
    """Explain a key of the spec file, a table of it, or a word."""
    from guardbit.cli.topics import run_explain

    return partial(run_explain, " ".join(topic) or None, json)


class _EndedError(BaseException):
    """A signal asked this process to end."""


def main(arguments: Sequence[str] | None = None) -> NoReturn:
    """Run the command and exit with its status."""
    sys.exit(status_of(arguments))


def status_of(arguments: Sequence[str] | None = None) -> int:
    """Run the command and return its exit status. Nothing but the status comes out of it."""
    before = signal.signal(signal.SIGTERM, _end)
    try:
        return _guarded(arguments)
    except (KeyboardInterrupt, click.Abort):
        _say("interrupted; every file is either whole or not there")
        return INTERRUPTED
    except _EndedError:
        return ENDED
    finally:
        signal.signal(signal.SIGTERM, before)


def _end(number: int, frame: object) -> None:
    raise _EndedError


def _guarded(arguments: Sequence[str] | None) -> int:
    from guardbit.cli.session import OutputError, PipeClosedError

    try:
        result = command.main(arguments, prog_name="guardbit", standalone_mode=False)
        # Run outside of click, which has its own ideas of Ctrl-C and of a closed pipe.
        return result() if callable(result) else int(result or HOLDS)
    except click.ClickException as error:
        return _misused(error)
    except PipeClosedError:
        return PIPE_CLOSED
    except OutputError as error:
        return _unwritten(str(error))
    except OSError as error:
        return _unwritten(error.strerror or type(error).__name__)
    except Exception as error:
        return _fault(error)


def _misused(error: click.ClickException) -> int:
    context = getattr(error, "ctx", None)
    path = context.command_path if context else "guardbit"
    if isinstance(error, click.exceptions.NoArgsIsHelpError):
        _say(error.format_message())
        return WRONG
    _say(f"{path}: {error.format_message()} See: {path} --help")
    return WRONG


def _fault(error: Exception) -> int:
    from guardbit.cli.session import Session
    from guardbit.cli.tasks import fault
    from guardbit.report.wording import sentence

    answer = fault("", error)
    _say(sentence(answer.findings[0]))
    session = Session()
    if session.debug:
        session.err(answer.fault)
    return FAULT


def _unwritten(reason: str) -> int:
    from guardbit.model.finding import finding
    from guardbit.report.wording import sentence

    _say(sentence(finding("output-failed", reason=reason)))
    return MISSING


def _say(text: str) -> None:
    from guardbit.cli.session import Session

    Session().err(f"{text}\n")


if __name__ == "__main__":
    main()
