"""Sums and multiples of values, and how one kind of value becomes another."""

from collections.abc import Callable, Mapping
from typing import ParamSpec

from guardbit.proof.algebra.pieces import Pieces, TooManyPiecesError
from guardbit.proof.algebra.shelf import Shelf
from guardbit.proof.algebra.values import Base, Form, InexpressibleError, Table, Value
from guardbit.proof.algebra.variables import Evaluation, Variables

P = ParamSpec("P")


def guarded(op: Callable[P, Pieces], *args: P.args, **kwargs: P.kwargs) -> Pieces:
    """Return what an operation on functions returns. Raises InexpressibleError."""
    try:
        return op(*args, **kwargs)
    except TooManyPiecesError:
        raise InexpressibleError("too-many-pieces") from None


class Sums:
    """Values that can be added. With `widen` functions are worked out on domains met before."""

    def __init__(self, *, widen: bool = True) -> None:
        self.shelf = Shelf()
        self.variables = Variables(self.shelf, widen=widen)

    def pixel(self, low: int, high: int) -> Value:
        """Return a new variable of that range; the number itself if there is only one."""
        if low == high:
            return low
        return Form({self.variables.new(low, high): 1}, 0, 0, low, high)

    def bounds(self, a: Value) -> tuple[int, int]:
        """Return the least and the greatest that a value can be, or a bound on them."""
        return (a, a) if isinstance(a, int) else (a.low, a.high)

    def add(self, a: Value, b: Value) -> Value:
        """Return a + b."""
        if isinstance(b, int):
            return self._moved(a, b)
        if isinstance(a, int):
            return self._moved(b, a)
        if isinstance(a, Form) and isinstance(b, Form):
            return self._sum(a, b)
        base = self._shared(a, b)
        if base is not None:
            f, g = self._aligned(base, a, b)
            return self._table(base, guarded(self.shelf.sum, f, g))
        return self.add(self.linear(a), self.linear(b))

    def subtract(self, a: Value, b: Value) -> Value:
        """Return a - b."""
        if isinstance(b, int):
            return self._moved(a, -b)
        return self.add(a, self._scaled(b, -1))

    def negate(self, a: Value) -> Value:
        """Return -a."""
        return self._scaled(a, -1)

    def at(self, a: Value, pixels: Mapping[int, int]) -> int:
        """Return the value for these pixels; pixels left out have their least value."""
        return self._at(a, Evaluation(self.variables, pixels))

    def _at(self, a: Value, evaluation: Evaluation) -> int:
        if isinstance(a, int):
            return a
        if isinstance(a, Table):
            return a.function.at(evaluation.sum_of(a.base.terms))
        value = evaluation.sum_of(a.terms) + a.constant
        if not a.modulus:
            return value
        if a.high - a.low >= 1 << a.modulus:
            raise InexpressibleError("modular")
        return a.low + (value - a.low) % (1 << a.modulus)

    def linear(self, a: Value) -> Value:
        """Return a value as a number or a form, over an atom if need be."""
        return self.variables.atomised(a.base, a.function) if isinstance(a, Table) else a

    def table(self, a: Value) -> Table:
        """Return a value that is not a number as a function of its base."""
        if isinstance(a, Table):
            return a
        assert isinstance(a, Form)
        if a.table is None:
            a.table = self._modular_table(a) if a.modulus else self._form_table(a)
        return a.table

    def _form_table(self, a: Form) -> Table:
        if len(a.terms) == 1:
            ((number, factor),) = a.terms.items()
            atom = self.variables.atoms.get(number)
            if atom is not None and atom.function is not None:
                f = guarded(self.shelf.scaled, atom.function, factor, a.constant)
                return Table(atom.base, f, a.low, a.high)
        base, factor = self.base_of(a)
        f = guarded(self.shelf.affine, *base.domain, factor, a.constant)
        return Table(base, f, a.low, a.high)

    def base_of(self, a: Form) -> tuple[Base, int]:
        """Return the base of which a form's terms are a multiple, and the factor."""
        if a.based is None:
            a.based = self.variables.base_of(a.terms)
        return a.based

    def _moved(self, a: Value, add: int) -> Value:
        if isinstance(a, int):
            return a + add
        if add == 0:
            return a
        if isinstance(a, Form):
            return Form(a.terms, a.constant + add, a.modulus, a.low + add, a.high + add, a.based)
        return self._table(a.base, guarded(self.shelf.scaled, a.function, 1, add))

    def _scaled(self, a: Value, factor: int) -> Value:
        if isinstance(a, int):
            return a * factor
        if factor == 0:
            return 0
        if factor == 1:
            return a
        if isinstance(a, Table):
            return self._table(a.base, guarded(self.shelf.scaled, a.function, factor, 0))
        low, high = a.low * factor, a.high * factor
        if factor < 0:
            low, high = high, low
        # congruent modulo 2**k: a multiple by 2**j is so modulo 2**(k + j)
        modulus = a.modulus and a.modulus + (factor & -factor).bit_length() - 1
        terms = {v: k * factor for v, k in a.terms.items()}
        based = a.based and (a.based[0], a.based[1] * factor)
        return Form(terms, a.constant * factor, modulus, low, high, based)

    def _sum(self, a: Form, b: Form) -> Value:
        if len(a.terms) < len(b.terms):
            a, b = b, a
        terms = dict(a.terms)
        siblings = self.variables.siblings
        overlap = crowded = False
        for number, k in b.terms.items():
            old = terms.get(number)
            if old is None:
                terms[number] = k
                if number in siblings and len(siblings[number]) > 1:
                    crowded = True
                continue
            overlap = True
            if old + k:
                terms[number] = old + k
            else:
                del terms[number]
        constant = a.constant + b.constant
        if crowded:
            terms, more = self._gathered(terms)
            constant += more
            overlap = True
        modulus = min(a.modulus, b.modulus) or a.modulus or b.modulus
        low, high = a.low + b.low, a.high + b.high
        if overlap and not modulus:
            least, most = self.variables.interval(terms)
            low, high = max(low, least + constant), min(high, most + constant)
        return self._form(terms, constant, modulus, low, high)

    def _form(
        self, terms: Mapping[int, int], constant: int, modulus: int, low: int, high: int
    ) -> Value:
        """Return a form, or a number where there are no terms."""
        if not terms:
            if not modulus:
                return constant
            if high - low < 1 << modulus:
                return low + (constant - low) % (1 << modulus)
        elif low == high:
            return low
        return Form(terms, constant, modulus, low, high)

    def _gathered(self, terms: dict[int, int]) -> tuple[dict[int, int], int]:
        """Return terms with one atom of a base each, and what is to be added."""
        constant = 0
        while True:
            crowd = self._crowd(terms)
            if not crowd:
                return terms, constant
            part = self.variables.together(crowd, terms)
            for number in crowd:
                del terms[number]
            if isinstance(part, int):
                constant += part
                continue
            assert isinstance(part, Form)
            constant += part.constant
            for number, k in part.terms.items():
                total = terms.get(number, 0) + k
                if total:
                    terms[number] = total
                else:
                    del terms[number]

    def _crowd(self, terms: Mapping[int, int]) -> list[int]:
        """Return atoms among the terms that have one base, at least two of them."""
        siblings = self.variables.siblings
        for number in terms:
            if number in siblings and len(siblings[number]) > 1:
                crowd = [v for v in siblings[number] if v in terms]
                if len(crowd) > 1:
                    return crowd
        return []

    def _exact(self, terms: Mapping[int, int], constant: int) -> Value:
        """Return an exact form, each variable free for itself."""
        low, high = self.variables.interval(terms)
        return self._form(terms, constant, 0, low + constant, high + constant)

    def _recovered(self, a: Form) -> Value:
        """Return a form known modulo 2**k as an exact one, where that can be told.

        Two numbers congruent modulo 2**k, in one range shorter than that, are equal.
        """
        size = 1 << a.modulus
        if a.high - a.low >= size:
            return a
        half = size >> 1
        terms = {v: c for v, k in a.terms.items() if (c := (k + half) % size - half)}
        least, most = self.variables.interval(terms)
        middle = (least + most) // 2 + a.constant
        constant = a.constant + ((a.low + a.high) // 2 - middle + half) // size * size
        low, high = least + constant, most + constant
        if max(high, a.high) - min(low, a.low) >= size:
            return a
        return self._form(terms, constant, 0, max(low, a.low), min(high, a.high))

    def _modular_table(self, a: Form) -> Table:
        """Return a form that is known modulo 2**k, and lies in a range as short, as a function."""
        size = 1 << a.modulus
        if a.high - a.low >= size or not a.terms:
            raise InexpressibleError("modular")
        exact = self._recovered(a)
        if isinstance(exact, Form) and not exact.modulus:
            return self.table(exact)
        table = self.table(self._exact(a.terms, a.constant - a.low))
        turns = guarded(self.shelf.floor_divided, table.function, size)
        rest = guarded(self.shelf.scaled, turns, -size, a.low)
        f = guarded(self.shelf.sum, table.function, rest)
        return Table(table.base, f, a.low, a.high)

    def _table(self, base: Base, f: Pieces) -> Value:
        """Return a function of a base in its simplest shape."""
        line = self.shelf.line(f, base.low, base.high)
        if line is not None:
            return self.variables.affine(base, *line)
        low, high = self.shelf.range(f, base.low, base.high)
        return low if low == high else Table(base, f, low, high)

    def _shared(self, a: Value, b: Value) -> Base | None:
        """Return the base of which both are functions, if there is one."""
        if isinstance(a, Form):
            a, b = b, a
        if isinstance(a, Table):
            if isinstance(b, Table):
                return a.base if a.base is b.base else None
            if isinstance(b, Form) and len(b.terms) not in (1, len(a.base.terms)):
                return None
        if isinstance(a, int) or isinstance(b, int):
            return None
        try:
            one, other = self.table(a).base, self.table(b).base
        except InexpressibleError:
            return None
        return one if one is other else None

    def _aligned(self, base: Base, *values: Value) -> list[Pieces]:
        """Return values, numbers or functions of that base, as functions on one domain."""
        found = [v if isinstance(v, int) else self.table(v).function for v in values]
        domains = {f.domain for f in found if not isinstance(f, int)}
        first, last = domains.pop() if len(domains) == 1 else (base.low, base.high)
        return [
            guarded(self.shelf.affine, first, last, 0, f)
            if isinstance(f, int)
            else self.shelf.restricted(f, first, last)
            for f in found
        ]
