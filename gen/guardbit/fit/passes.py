"""The passes of a filter: kernels, accumulators and requantisers put together."""

from collections.abc import Sequence
from fractions import Fraction

from guardbit.fit.coefficients import Fitted
from guardbit.fit.factors import in_pairs
from guardbit.fit.geometry import terms
from guardbit.fit.nearest import width
from guardbit.fit.places import place
from guardbit.fit.registers import loadable
from guardbit.model.enums import First, FitRule, Overflow, Preload, Rounding, Scale
from guardbit.model.filter import Accumulator, Kernel, Pass, PixelFormat, Requantiser
from guardbit.model.finding import Finding, finding
from guardbit.model.spec import AccumulatorTable, Auto, IntermediateTable, Spec

_BOTH, _COLUMN, _ROW = (0, 1), (0,), (1,)


def passes(
    spec: Spec, fitted: Sequence[Fitted], formats: dict[str, PixelFormat]
) -> tuple[Pass, ...]:
    """Return the one pass of a spec, or the two of one with an intermediate, in their order.

    `fitted` is one matrix, or the column's and the row's; `formats` as `formats.formats`.
    """
    if spec.intermediate is None:
        return (_single(spec, fitted, formats),)
    column, row = _kernel(spec, fitted[0], _COLUMN), _kernel(spec, fitted[1], _ROW)
    return _two(spec, spec.intermediate, (column, row), formats)


def _single(spec: Spec, fitted: Sequence[Fitted], formats: dict[str, PixelFormat]) -> Pass:
    whole = _outer(fitted[0], fitted[1], spec.coefficient.signed) if in_pairs(spec) else fitted[0]
    kernel = _kernel(spec, whole, _BOTH)
    tail = _requantiser(
        formats["input"], kernel, formats["output"], spec.output.rounding, spec.output.overflow
    )
    return Pass(formats["input"], kernel, _accumulator(spec.accumulator), tail)


def _two(
    spec: Spec,
    table: IntermediateTable,
    kernels: tuple[Kernel, Kernel],
    formats: dict[str, PixelFormat],
) -> tuple[Pass, Pass]:
    """Return both passes; `kernels` are the column's and the row's."""
    first, second = kernels if table.first is First.VERTICAL else kernels[::-1]
    source, middle, result = (formats[name] for name in ("input", "intermediate", "output"))
    to_middle = _requantiser(source, first, middle, table.rounding, table.overflow)
    to_result = _requantiser(middle, second, result, spec.output.rounding, spec.output.overflow)
    return (
        Pass(source, first, _accumulator(table.accumulator), to_middle),
        Pass(middle, second, _accumulator(spec.accumulator), to_result),
    )


def _outer(column: Fitted, row: Fitted, signed: bool) -> Fitted:
    """Return the outer product of two fitted vectors; fracs add, divisors multiply.

    `coefficient.bits` limited each vector; the products get the register that holds them.
    """
    ideal = tuple(tuple(a * b for (a,) in [y] for b in row.ideal[0]) for y in column.ideal)
    integers = tuple(tuple(a * b for (a,) in [y] for b in row.integers[0]) for y in column.integers)
    products = width((tap for line in integers for tap in line), signed) or 0
    bits = max(products, column.bits, row.bits)
    frac, divisor = column.frac + row.frac, column.divisor * row.divisor
    return Fitted(ideal, integers, frac, divisor, bits)


def _kernel(spec: Spec, fitted: Fitted, axes: tuple[int, ...]) -> Kernel:
    pinned = spec.coefficient.pinned is not None
    # The integers of an exact scale are the taps themselves: no rule could choose others.
    rule = FitRule.NEAREST if spec.coefficient.scale is Scale.EXACT else spec.coefficient.fit
    ideal_sum = sum((tap for line in fitted.ideal for tap in line), Fraction(0))
    whole = sum(tap for line in fitted.integers for tap in line)
    registers = spec.coefficient.registers
    kept, held = terms(spec, fitted.ideal, fitted.integers, axes), None
    if registers is not None:
        kept, held = loadable(spec, registers, fitted)
    return Kernel(
        terms=kept,
        scale=spec.coefficient.scale,
        frac=fitted.frac,
        divisor=fitted.divisor,
        bits=fitted.bits,
        signed=spec.coefficient.signed,
        rule=None if pinned else rule,
        residual=whole - Fraction(2) ** fitted.frac * fitted.divisor * ideal_sum,
        registers=held,
    )


def _accumulator(table: AccumulatorTable) -> Accumulator:
    bits = None if isinstance(table.bits, Auto) else table.bits
    return Accumulator(bits, table.signed, table.overflow, table.preload)


def _requantiser(
    source: PixelFormat, kernel: Kernel, to: PixelFormat, rounding: Rounding, overflow: Overflow
) -> Requantiser:
    exponent = to.frac - source.frac - kernel.frac
    return Requantiser(exponent, kernel.divisor, rounding, overflow, to)


def preload_findings(spec: Spec, made: Sequence[Pass]) -> tuple[Finding, ...]:
    """Return findings on accumulators that cannot start at the rounding constant.

    There is one only for ties-to-positive and a shift of at least 1; the exact scale divides.
    """
    names = ("accumulator",) if len(made) == 1 else ("intermediate.accumulator", "accumulator")
    found = [
        _preload_finding(spec, f"{name}.preload", each)
        for name, each in zip(names, made, strict=False)
        if each.accumulator.preload is Preload.ROUNDING
    ]
    return tuple(each for each in found if each is not None)


def _preload_finding(spec: Spec, key: str, each: Pass) -> Finding | None:
    tail = each.requantiser
    if tail.rounding is not Rounding.TIES_TO_POSITIVE:
        return finding("preload-other-rounding", place(spec, key), rounding=tail.rounding.value)
    if each.kernel.scale is Scale.EXACT:
        return finding("preload-with-exact", place(spec, key))
    if tail.exponent > -1:
        return finding("preload-without-shift", place(spec, key), shift=-tail.exponent)
    return None
