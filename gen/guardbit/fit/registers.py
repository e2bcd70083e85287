"""The coefficients that may be loaded at run time, and whether the kernel's own are among them."""

from collections.abc import Iterator
from dataclasses import replace

from guardbit.fit.coefficients import Fitted
from guardbit.fit.geometry import placed
from guardbit.fit.nearest import Integers, width
from guardbit.fit.places import number, place
from guardbit.model.filter import TapSet, Term
from guardbit.model.finding import Finding, Place, finding
from guardbit.model.spec import Auto, Registers, Spec

_SHOWN = 60


def with_register_bits(spec: Spec) -> Spec:
    """Return the spec with coefficient bits "auto" resolved, if registers say how many.

    They are the fewest that hold every tap that may be loaded.
    """
    table, registers = spec.coefficient, spec.coefficient.registers
    if registers is None or not isinstance(table.bits, Auto):
        return spec
    limits = (*registers.least, *registers.greatest)
    bits = width((tap for row in limits for tap in row), table.signed)
    assert bits is not None
    return replace(spec, coefficient=replace(table, bits=bits))


def loadable(spec: Spec, registers: Registers, fitted: Fitted) -> tuple[tuple[Term, ...], TapSet]:
    """Return the terms of a kernel whose taps are loaded, and what may be loaded into them.

    Terms are all cells that can be other than zero.
    """
    least, greatest = _flat(registers.least), _flat(registers.greatest)
    cells = enumerate(placed(spec, fitted.ideal, fitted.integers))
    kept = sorted(((t.dy, t.dx), cell, t) for cell, t in cells if least[cell] or greatest[cell])
    order = tuple(cell for _, cell, _ in kept)
    kernels = [_flat(kernel) for kernel in registers.kernels]
    registers_set = TapSet(
        count=len(least),
        cells=order,
        least=tuple(least[cell] for cell in order),
        greatest=tuple(greatest[cell] for cell in order),
        sum=registers.sum,
        magnitudes=registers.magnitudes,
        kernels=tuple(dict.fromkeys(tuple(k[cell] for cell in order) for k in kernels)),
    )
    return tuple(term for _, _, term in kept), registers_set


def _flat(rows: Integers) -> tuple[int, ...]:
    return tuple(tap for row in rows for tap in row)


def nominal_findings(spec: Spec, fitted: Fitted) -> tuple[Finding, ...]:
    """Return why the kernel's own integers may not be loaded; nothing where they may."""
    registers = spec.coefficient.registers
    return () if registers is None else tuple(_nominal(spec, registers, fitted))


def _nominal(spec: Spec, registers: Registers, fitted: Fitted) -> Iterator[Finding]:
    where, taps = place(spec, "coefficient.registers"), _flat(fitted.integers)
    if registers.kernels:
        if fitted.integers not in registers.kernels:
            yield finding("nominal-not-listed", where, taps=_shown(fitted.integers))
            return
        yield from _cells(registers, fitted, where)
        return
    yield from _cells(registers, fitted, where)
    if registers.sum is not None and sum(taps) != registers.sum:
        yield finding("nominal-sum", where, got=sum(taps), sum=registers.sum)
    size = sum(map(abs, taps))
    if registers.magnitudes is not None and size > registers.magnitudes:
        yield finding("nominal-magnitudes", where, got=size, magnitudes=registers.magnitudes)


def _cells(registers: Registers, fitted: Fitted, where: Place) -> Iterator[Finding]:
    """Yield the first tap that its register cannot hold, or that has no register."""
    columns = len(fitted.integers[0])
    limits = zip(_flat(registers.least), _flat(registers.greatest), strict=True)
    ideals = (tap for row in fitted.ideal for tap in row)
    cells = zip(_flat(fitted.integers), ideals, limits, strict=True)
    for cell, (tap, ideal, (low, high)) in enumerate(cells):
        name = f"taps[{cell // columns}][{cell % columns}]"
        if not low <= tap <= high:
            yield finding(
                "nominal-outside-limits", where, tap=name, integer=tap, least=low, greatest=high
            )
            return
        if ideal and low == high == 0:
            yield finding("nominal-without-register", where, tap=name, ideal=number(ideal))
            return


def _shown(integers: Integers) -> str:
    text = str([list(row) for row in integers])
    return text if len(text) <= _SHOWN else f"{text[:_SHOWN]}..."
