"""What sums of products reach, with coefficients that are known or given at run time."""

from collections.abc import Iterable, Iterator, Mapping

from guardbit.arith.intervals import add, scale
from guardbit.arith.tapset import range_of
from guardbit.model.filter import TapSet
from guardbit.model.plan import Product
from guardbit.model.sizing import Interval

Rows = Mapping[str, Interval]


def partial_sums(
    terms: Iterable[Product], rows: Rows, registers: TapSet | None
) -> Iterator[Interval]:
    """Yield what the products added up to each one of them reach, from zero.

    `rows` is what the values of each row buffer can be. Coefficients in registers are bound
    to each other by what may be loaded, so that their products are looked at together.
    """
    known = Interval(0, 0)
    given: dict[str, tuple[int, ...]] = {}
    for term in terms:
        name = term.of.rows
        if term.register is None:
            known = add(known, scale(rows[name], term.coefficient))
        else:
            given[name] = (*given.get(name, ()), term.register)
        total = known
        if registers is not None:
            for source, numbers in given.items():
                total = add(total, range_of(registers, numbers, rows[source]))
        yield total


def product_range(term: Product, pixels: Interval, registers: TapSet | None) -> Interval:
    """Return what one product reaches."""
    return next(partial_sums((term,), {term.of.rows: pixels}, registers))


def coefficient_range(term: Product, registers: TapSet | None) -> Interval:
    """Return what a coefficient can be; of a known one its magnitude, which is what C writes."""
    if term.register is None or registers is None:
        return Interval(abs(term.coefficient), abs(term.coefficient))
    return Interval(registers.least[term.register], registers.greatest[term.register])
