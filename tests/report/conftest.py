"""Snapshots, and a filter with its sizing written out by hand.

A snapshot test compares with a file in `snapshots/`. To accept new text:

    GUARDBIT_ACCEPT=1 pytest tests/report tests/cli

then read the difference before committing it.
"""

import os
from collections.abc import Callable
from fractions import Fraction
from pathlib import Path

import pytest

from guardbit.model.certificate import Certificate, Digest, Figure, RungResult
from guardbit.model.enums import (
    BorderMode,
    Container,
    Extent,
    FitRule,
    Grid,
    Operation,
    Outside,
    Overflow,
    Preload,
    Rounding,
    Scale,
)
from guardbit.model.filter import (
    Accumulator,
    Axis,
    Border,
    Filter,
    Geometry,
    Kernel,
    Pass,
    PixelFormat,
    Requantiser,
    Term,
)
from guardbit.model.finding import Place, finding
from guardbit.model.sizing import (
    ClassRange,
    End,
    ErrorBound,
    ErrorPart,
    Interval,
    RegisterSizing,
    RequantiserSizing,
    Sizing,
    Witness,
)

Snapshot = Callable[[str, str], None]
ACCEPT = os.environ.get("GUARDBIT_ACCEPT", "0") not in ("", "0")
HINT = "accept it with: GUARDBIT_ACCEPT=1 pytest tests/report tests/cli"


@pytest.fixture
def snapshot() -> Snapshot:
    """Return a check of a text against the file of that name."""

    def check(name: str, text: str) -> None:
        file = Path(__file__).parent / "snapshots" / name
        if ACCEPT:
            file.parent.mkdir(exist_ok=True)
            file.write_text(text, encoding="utf-8")
        assert file.is_file(), f"no snapshot {name}; {HINT}"
        assert text == file.read_text(encoding="utf-8"), f"{name} differs; {HINT}"

    return check


def _pixel(bits: int = 8, pedestal: int = 0) -> PixelFormat:
    return PixelFormat(bits, False, 0, pedestal, 0, 2**bits - 1, Container.U8)


@pytest.fixture
def sizing() -> Sizing:
    """Return the sizing of a row of three taps 1 2 1 over 4, worked by hand.

    The sum reaches 4 * 255 = 1020 (10 bits, and a sign bit); plus half a step 1022; the
    output 255. Rounding alone is off by -1/4 .. 1/2.
    """
    taps = tuple(Term(0, dx, Fraction(n, 4), n) for dx, n in ((-1, 1), (0, 2), (1, 1)))
    kernel = Kernel(taps, Scale.BINARY, 2, 1, 3, True, FitRule.NEAREST, Fraction(0))
    one = Pass(
        _pixel(),
        kernel,
        Accumulator(16, True, Overflow.FORBID, Preload.ZERO),
        Requantiser(-2, 1, Rounding.TIES_TO_POSITIVE, Overflow.SATURATE, _pixel()),
    )
    filter_ = Filter(
        "soften3",
        "a row of three \u00b7 \x1b[31mred\x1b[0m",
        Operation.CONVOLUTION,
        Outside.UNDEFINED,
        (one,),
        Border(BorderMode.REPLICATE, 0, Grid.PIXEL),
        Geometry(Extent.SAME, Axis(0, 0, (1, 65535), 1, 0, 1), Axis(-1, 1, (1, 65535), 1, 0, 1), 1),
        "ab" * 32,
    )
    return Sizing(filter_, (_register(),), (_requantiser(),), _error())


def _register() -> RegisterSizing:
    whole = Interval(0, 1020)
    witness = Witness("accumulator", End.GREATEST, False, 1, 3, 255, (), (0, 1), 3, 1020)
    return RegisterSizing(
        name="accumulator",
        bits=16,
        signed=True,
        final=whole,
        partial=whole,
        held=whole,
        exact=True,
        bits_forbid=11,
        bits_wrap=11,
        spare=5,
        headroom=Fraction(32767, 1020),
        rule_l1=11,
        rule_count=13,
        classes=(ClassRange(("interior", "interior"), whole, whole),),
        witnesses=(witness,),
    )


def _requantiser() -> RequantiserSizing:
    codes = Interval(0, 255)
    return RequantiserSizing("output", Interval(0, 1020), codes, codes, 11, False)


def _error() -> ErrorBound:
    parts = (
        ErrorPart("coefficients", Fraction(0), Fraction(0)),
        ErrorPart("output rounding", Fraction(-1, 3), Fraction(1, 2)),
    )
    return ErrorBound(Fraction(-1, 3), Fraction(1, 2), parts, False)


@pytest.fixture
def rungs() -> tuple[RungResult, ...]:
    """Return one rung in each state."""
    wrong = finding(
        "worker-lost",
        Place("/home/kim/line/soften3.toml", 3),
        cause="signal 9",
        path="/home/kim/x.json",
    )
    return (
        RungResult(
            "impulses",
            True,
            1204,
            ("every tap at 9 border classes",),
            ("images wider than 64 pixels are argued from border classes",),
            (Figure("largest error measured", "0.5", "LSB"),),
            (),
        ),
        RungResult("frames", True, 32, ("random frames",), (), (), (wrong,)),
        RungResult("witnesses", True, 0, (), (), (), ()),
        RungResult("sanitized", False, 0, (), ("no AddressSanitizer in this compiler",), (), ()),
    )


@pytest.fixture
def certificate(sizing: Sizing, rungs: tuple[RungResult, ...]) -> Certificate:
    """Return a certificate over the hand-made sizing, with a number beyond 2^53 in it."""
    figures = (*rungs[0].figures, Figure("sums formed", 2**60))
    first = RungResult("impulses", True, 1204, (), (), figures, ())
    return Certificate(
        schema=1,
        tool="guardbit 0.1.0",
        cautions=("be careful",),
        spec=Digest("soften3.toml", "ab" * 32),
        emitted=(Digest("soften3.c", "cd" * 32),),
        plan="direct",
        sizing=sizing,
        rungs=(first, *rungs[1:]),
    )
