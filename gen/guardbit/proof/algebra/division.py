"""Floors, quotients and remainders of values, by numbers."""

from guardbit.proof.algebra.choices import Choices
from guardbit.proof.algebra.pieces import TooManyPiecesError
from guardbit.proof.algebra.shelf import turned
from guardbit.proof.algebra.splits import Rest, lane_of, rest_of
from guardbit.proof.algebra.sums import guarded
from guardbit.proof.algebra.values import Base, Form, InexpressibleError, Value


class Division(Choices):
    """Values that can be divided."""

    def floor_divide(self, a: Value, n: int) -> Value:
        """Return floor(a / n), n > 0."""
        if n == 1:
            return a
        if isinstance(a, int):
            return a // n
        low, high = a.low // n, a.high // n
        if low == high:
            return low
        if (low, high) == (-1, 0):
            return self.negate(self._is_negative(a))
        if isinstance(a, Form):
            for way in (self._split, self._by_lanes, self._joined):
                found = way(a, n)
                if found is not None:
                    return found
        return self._bounded(self._floor(a, n), low, high)

    def _floor(self, a: Value, n: int) -> Value:
        table = self.table(a)
        f = table.function
        try:
            return self._table(table.base, self.shelf.floor_divided(f, n))
        except TooManyPiecesError:
            if not f.is_affine():
                raise InexpressibleError("too-many-pieces") from None
        return self.variables.floor(table.base, (int(f.slopes[0]), int(f.offsets[0]), n))

    def _rest(self, a: Form, n: int) -> Rest | None:
        """Return a modulo n if it is affine."""
        if a.modulus and (n & (n - 1) or n > 1 << a.modulus):
            return None
        return rest_of(self.variables, a.terms, a.constant, n)

    def _split(self, a: Form, n: int) -> Value | None:
        """Return floor(a / n) if it and the remainder are affine."""
        rest = self._rest(a, n)
        if rest is None:
            return None
        parts = rest.terms
        terms = {v: c for v, k in a.terms.items() if (c := (k - parts.get(v, 0)) // n)}
        constant = (a.constant - rest.constant) // n
        low, high = a.low // n, a.high // n
        if not a.modulus:
            return self._form(terms, constant, 0, low, high)
        modulus = a.modulus - n.bit_length() + 1
        if not modulus:
            return None
        return self._recovered(Form(terms, constant, modulus, low, high))

    def _by_lanes(self, a: Form, n: int) -> Value | None:
        """Return floor(a / n) of a word r + m h, m a power of two: only one lane is cut through.

        It is floor(h / (n / m)) where r is in 0..m-1, or floor(r / n) + (m / n) h.
        """
        for m in self._lane_sizes(a, n):
            made = self._above_lane(a, m, n) if m < n else self._through_lane(a, m, n)
            if made is not None:
                return made
        return None

    def _above_lane(self, a: Form, m: int, n: int) -> Value | None:
        rest = self._rest(a, m)
        if rest is None or not 0 < len(rest.terms) < len(a.terms):
            return None
        above = self._split(a, m)
        return None if above is None else self.floor_divide(above, n // m)

    def _through_lane(self, a: Form, m: int, n: int) -> Value | None:
        if a.modulus and (m > 1 << a.modulus or n == 1 << a.modulus):
            return None
        lane = lane_of(self.variables, a.terms, a.constant, m)
        if lane is None:
            return None
        below = self._form(lane.terms, lane.constant, 0, lane.low, lane.high)
        above = self._exact_quotient(self.subtract(a, below), n)
        made = self.add(self.floor_divide(below, n), above)
        made = self._bounded(made, a.low // n, a.high // n)
        return self._recovered(made) if isinstance(made, Form) and made.modulus else made

    def _exact_quotient(self, a: Value, n: int) -> Value:
        """Return a / n of a value whose coefficients and constant are multiples of n."""
        if not isinstance(a, Form):
            return self.floor_divide(a, n)
        terms = {v: k // n for v, k in a.terms.items()}
        modulus = a.modulus and a.modulus - n.bit_length() + 1
        return self._form(terms, a.constant // n, modulus, -(-a.low // n), a.high // n)

    def _lane_sizes(self, a: Form, n: int) -> list[int]:
        """Return powers of two at which a word might be two lanes."""
        if n & (n - 1):
            return []
        sizes = {k & -k: v for v, k in a.terms.items()}
        lowest = sizes[min(sizes)]
        least = self.variables.highs[lowest] - self.variables.lows[lowest]
        return sorted(m for m in sizes if m > least)

    def _joined(self, a: Form, n: int) -> Value | None:
        """Return the floor of a sum that ends in a floor, as one floor, if that is simpler.

        floor((r + floor(y / m)) / n) = floor((m r + y) / (m n)).
        """
        atoms = self.variables.atoms
        number = max((v for v in a.terms if v in atoms), default=None)
        if number is None or a.modulus or a.terms[number] not in (1, -1):
            return None
        atom = atoms[number]
        if len(a.terms) == 1 and atom.function is not None:
            return None
        rest = {v: k for v, k in a.terms.items() if v != number}
        for floor in atom.floors:
            g, q, m = floor if a.terms[number] == 1 else turned(floor, -1, 0)
            whole = self._exact({v: m * k for v, k in rest.items()}, m * a.constant + q)
            joined = self.add(whole, self.variables.affine(atom.base, g, 0))
            if self._is_simpler(joined, a):
                return self.floor_divide(joined, m * n)
        return None

    def _is_simpler(self, a: Value, than: Form) -> bool:
        if not isinstance(a, Form):
            return True
        atoms = self.variables.atoms
        return len(a.terms) < len(than.terms) or not any(v in atoms for v in a.terms)

    def low_bits(self, a: Value, bits: int) -> Value:
        """Return a modulo 2**bits."""
        n = 1 << bits
        if isinstance(a, int):
            return a & (n - 1)
        if a.low >= 0 and a.high < n:
            return a
        if isinstance(a, Form):
            rest = self._rest(a, n)
            if rest is not None:
                return self._form(rest.terms, rest.constant, 0, rest.low, rest.high)
            lane = lane_of(self.variables, a.terms, a.constant, n)
            if lane is not None and (not a.modulus or bits <= a.modulus):
                return self._form(lane.terms, lane.constant % n, bits, 0, n - 1)
            if a.modulus and a.high - a.low >= 1 << a.modulus:
                # only known modulo 2**k: enough for the bits below k
                if bits > a.modulus:
                    raise InexpressibleError("modular")
                a = self._exact(a.terms, a.constant)
        below = self.subtract(a, self._scaled(self.floor_divide(a, n), n))
        return self._bounded(below, 0, n - 1)

    def quotient(self, a: Value, b: Value) -> Value:
        """Return a / b rounded toward zero; b is never 0."""
        if not isinstance(b, int):
            return self._pointwise("quotient", a, b, _truncated)
        if b < 0:
            return self.quotient(self.negate(a), -b)
        low, high = self.bounds(a)
        if low >= 0:
            return self.floor_divide(a, b)
        up = self.negate(self.floor_divide(self.negate(a), b))
        if high <= 0:
            return up
        return self.where(self.compare("<", a, 0), up, self.floor_divide(a, b))

    def remainder(self, a: Value, b: Value) -> Value:
        """Return a - b * quotient(a, b)."""
        return self.subtract(a, self.multiply(self.quotient(a, b), b))

    def multiply(self, a: Value, b: Value) -> Value:
        """Return a * b: one of them a number or a mask, or both functions of one base."""
        if isinstance(a, int):
            return self._scaled(b, a)
        if isinstance(b, int):
            return self._scaled(a, b)
        base = self._base_of_both(a, b)
        if base is not None:
            f, g = self._aligned(base, a, b)
            return self._table(base, guarded(self.shelf.product, f, g))
        for one, other in ((a, b), (b, a)):
            if one.low >= 0 and one.high <= 1:
                return self.where(one, other, 0)
        raise InexpressibleError("product-of-pixels")

    def _base_of_both(self, a: Value, b: Value) -> Base | None:
        """Return the base of which both are functions, if there is one."""
        try:
            one, other = self.table(a).base, self.table(b).base
        except InexpressibleError:
            return None
        return one if one is other else None


def _truncated(a: int, b: int) -> int:
    # arguments at which b is 0 are such as no input has
    if b == 0:
        return 0
    return a // b if (a < 0) == (b < 0) else -(-a // b)
