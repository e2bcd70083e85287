"""Bits of values, and their conversion to C's integer types."""

from collections.abc import Mapping, Sequence

from guardbit.proof.algebra.division import Division
from guardbit.proof.algebra.pieces import LIMIT
from guardbit.proof.algebra.splits import rest_of
from guardbit.proof.algebra.sums import guarded
from guardbit.proof.algebra.values import Form, InexpressibleError, Table, Value


class Bits(Division):
    """Values whose bits can be taken: two's complement of any length."""

    def shift_down(self, a: Value, bits: int) -> Value:
        """Return floor(a / 2**bits)."""
        return self.floor_divide(a, 1 << bits)

    def complement(self, a: Value) -> Value:
        """Return ~a."""
        return self._moved(self.negate(a), -1)

    def bits_and(self, a: Value, b: Value) -> Value:
        """Return a & b."""
        if isinstance(a, int):
            a, b = b, a
        if isinstance(a, int) and isinstance(b, int):
            return a & b
        if not isinstance(b, int):
            return self._and(a, b)
        if b < 0:
            return self.subtract(a, self.bits_and(a, ~b))
        total: Value = 0
        bit = 0
        while b >> bit:
            if b >> bit & 1:
                run = ((b >> bit) ^ ((b >> bit) + 1)).bit_length() - 1
                part = self.low_bits(self.shift_down(a, bit), run)
                total = self.add(total, self._scaled(part, 1 << bit))
                bit += run
            bit += 1
        return total

    def _and(self, a: Value, b: Value) -> Value:
        """Return a & b of two symbols."""
        ends = (*self.bounds(a), *self.bounds(b))
        if min(ends) >= 0 and max(ends) <= 1:
            return self.both(a, b)
        for one, other in ((a, b), (b, a)):
            low, high = self.bounds(one)
            if low >= -1 and high <= 0:
                # all bits or none: what branch-free code masks with
                return self.where(self.negate(one), other, 0)
            if low >= 0 and self._is_multiple(other, 1 << high.bit_length()):
                return 0
        return self._pointwise("and", a, b, lambda x, y: x & y)

    def bits_or(self, a: Value, b: Value) -> Value:
        """Return a | b."""
        return self.subtract(self.add(a, b), self._shared_bits(a, b))

    def bits_xor(self, a: Value, b: Value) -> Value:
        """Return a ^ b."""
        for one, other in ((a, b), (b, a)):
            if isinstance(other, int) and not isinstance(one, int):
                if other == -1:
                    return self.complement(one)
                bits = other.bit_length()
                if other > 0 and other == 1 << bits - 1 and one.low >= 0 and one.high < 1 << bits:
                    # the highest bit of a number: adding it and dropping the carry turns it over
                    return self.wrap(self._moved(one, other), bits, signed=False)
        return self.subtract(self.add(a, b), self._scaled(self._shared_bits(a, b), 2))

    def _shared_bits(self, a: Value, b: Value) -> Value:
        """Return a & b; 0 without looking closer where one lies above all bits of the other."""
        for one, other in ((a, b), (b, a)):
            low, high = self.bounds(one)
            if low >= 0 and self._is_multiple(other, 1 << high.bit_length()):
                return 0
        return self.bits_and(a, b)

    def _is_multiple(self, a: Value, n: int) -> bool:
        if isinstance(a, int):
            return a % n == 0
        if isinstance(a, Table):
            f = a.function
            return n < LIMIT and not ((f.slopes % n).any() or (f.offsets % n).any())
        if a.modulus and n > 1 << a.modulus:
            return False
        return a.constant % n == 0 and all(k % n == 0 for k in a.terms.values())

    def wrap(self, a: Value, bits: int, signed: bool) -> Value:
        """Return the number of that type that is congruent to a modulo 2**bits.

        That is `a` itself, as an object, if its range lies in the type.
        """
        least = -(1 << bits - 1) if signed else 0
        if isinstance(a, int):
            return (a - least) % (1 << bits) + least
        inside = least <= a.low and a.high < least + (1 << bits)
        if inside:
            return a
        if isinstance(a, Form):
            return self._wrapped(a, bits, least)
        turns = self.floor_divide(self._moved(a, -least), 1 << bits)
        return self.subtract(a, self._scaled(turns, 1 << bits))

    def _wrapped(self, a: Form, bits: int, least: int) -> Value:
        """Return a form in a type: exact if a congruent one fits in it, else modular."""
        size = 1 << bits
        most = least + size - 1
        if a.modulus and a.modulus < bits:
            return Form(a.terms, a.constant, a.modulus, least, most)
        if not a.modulus:
            turns = (a.low - least) // size
            if turns == (a.high - least) // size:
                return self._moved(a, -turns * size)
        rest = rest_of(self.variables, a.terms, a.constant, size, least)
        if rest is not None:
            return self._form(rest.terms, rest.constant, 0, rest.low, rest.high)
        return self._form(_centred(a.terms, size), a.constant % size, bits, least, most)

    def look_up(self, entries: Sequence[int], index: Value) -> Value:
        """Return entries[index]."""
        if isinstance(index, int):
            return entries[index]
        table = self.table(index)
        low, high = self.bounds(index)
        if low < 0 or high >= len(entries):
            raise InexpressibleError("index-out-of-range")
        return self._table(table.base, guarded(self.shelf.looked_up, entries, table.function))


def _centred(terms: Mapping[int, int], n: int) -> dict[int, int]:
    half = n >> 1
    return {v: c for v, k in terms.items() if (c := (k + half) % n - half)}
