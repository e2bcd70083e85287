"""Arithmetic on what C objects hold: numbers, affine forms, functions of one form.

Everything here is mathematics on whole numbers; what C makes of it - types, overflow, undefined
behaviour - is the machine's. Sums stay affine. What is not affine becomes a table over one base,
and a table that meets another base in a sum becomes an atom, a variable of its own.
"""

from collections.abc import Hashable

from guardbit.proof.algebra.bits import Bits
from guardbit.proof.algebra.values import Base, Form, InexpressibleError, Table, Value
from guardbit.proof.algebra.witness import Solver


class Space(Bits):
    """All variables of one proof, and the functions over them. Its values mix with no other's.

    With `widen` functions are worked out on domains met before where these are larger, which
    saves time; ranges are exact all the same. Operations raise InexpressibleError.
    """

    def same(self, a: Value, b: Value) -> bool:
        """Return whether both are shown to be equal for every input."""
        if a is b:
            return True
        if isinstance(a, int) and isinstance(b, int):
            return a == b
        try:
            gap = self.subtract(a, b)
            if isinstance(gap, Form) and gap.modulus:
                return self._same_modular(a, b, gap)
        except InexpressibleError:
            return False
        return self.bounds(gap) == (0, 0)

    def _same_modular(self, a: Value, b: Value, gap: Form) -> bool:
        """Return whether values known modulo 2**k are shown to be equal: congruent, and close."""
        size = 1 << gap.modulus
        (al, ah), (bl, bh) = self.bounds(a), self.bounds(b)
        congruent = gap.constant % size == 0 and all(k % size == 0 for k in gap.terms.values())
        if congruent and max(ah, bh) - min(al, bl) < size:
            return True
        one, other = (v if isinstance(v, int) else self.table(v) for v in (a, b))
        return self.bounds(self.subtract(one, other)) == (0, 0)

    def difference(self, a: Value, b: Value, mask: Value = 1) -> dict[int, int] | None:
        """Return pixels for which the mask holds and a differs from b; None if none were found."""
        return Solver(self).difference(a, b, mask)

    def witness(
        self, mask: Value, a: Value | None = None, inside: tuple[int, int] | None = None
    ) -> dict[int, int] | None:
        """Return pixels for which the mask holds (and a lies not `inside`); None if not found."""
        return Solver(self).witness(mask, a, inside)

    def pixels(self, *values: Value) -> list[int]:
        """Return the pixels that values are made of, in order."""
        return Solver(self).pixels(values)

    def breakpoints(self, a: Value) -> tuple[Base, tuple[int, ...]] | None:
        """Return the base of a table and where its pieces start; None for other values."""
        if not isinstance(a, Table):
            return None
        starts = a.function.starts
        inside = starts[(starts > a.base.low) & (starts <= a.base.high)]
        return a.base, (a.base.low, *inside.tolist())

    def shape(self, a: Value) -> Hashable | None:
        """Return what decides every function of a value, whichever its pixels are.

        What is computed from one value alone, and every check on the way, comes out the same for
        another of the same shape: see `carried`. None: it has no such shape.
        """
        if isinstance(a, int):
            return a
        if isinstance(a, Form) and a.modulus:
            return None
        table = self.table(a)
        return table.function.number, table.base.low, table.base.high, a.low, a.high

    def carried(self, made: Value, of: Value, to: Value) -> Value | None:
        """Return what was made of one value, made of another of its shape instead.

        None if it is no function of the one value's base.
        """
        if isinstance(made, int):
            return made
        if isinstance(of, int) or isinstance(to, int):
            return None
        try:
            table = self.table(made)
        except InexpressibleError:
            return None
        if table.base is not self.table(of).base:
            return None
        return self._table(self.table(to).base, table.function)
