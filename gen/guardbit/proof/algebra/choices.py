"""Comparisons, masks - values 0 or 1 - and what they choose."""

from collections.abc import Callable
from dataclasses import dataclass

from guardbit.proof.algebra.pieces import Pieces
from guardbit.proof.algebra.sums import Sums, guarded
from guardbit.proof.algebra.values import Base, Form, InexpressibleError, Table, Value

_MOST_PARTS_CHOSEN = 8


@dataclass(frozen=True, slots=True)
class _Joint:
    """Masks that hold together, by the number of their base, and the sum of them."""

    parts: dict[int, Value]
    total: Value


class Choices(Sums):
    """Values that can be compared and chosen."""

    def __init__(self, *, widen: bool = True) -> None:
        super().__init__(widen=widen)
        self._joints: dict[tuple[int, int], _Joint] = {}

    def compare(self, op: str, a: Value, b: Value) -> Value:
        """Return 1 where a op b holds, else 0; a number where ranges decide."""
        decided = self._decided(op, a, b)
        if decided is not None:
            return decided
        gap = self.subtract(a, b)
        if op in ("==", "!="):
            apart = self.add(self._is_negative(gap), self._is_negative(self.negate(gap)))
            return apart if op == "!=" else self.opposite(apart)
        less = self._is_negative(gap if op in ("<", ">=") else self.negate(gap))
        return less if op in ("<", ">") else self.opposite(less)

    def opposite(self, mask: Value) -> Value:
        """Return 1 - mask: 1 where it does not hold."""
        return self._moved(self.negate(mask), 1)

    def _is_negative(self, a: Value) -> Value:
        low, high = self.bounds(a)
        if low >= 0 or high < 0 or isinstance(a, int):
            return int(high < 0)
        table = self.table(a)
        return self._table(table.base, guarded(self.shelf.negative, table.function))

    def _decided(self, op: str, a: Value, b: Value) -> int | None:
        (al, ah), (bl, bh) = self.bounds(a), self.bounds(b)
        if op in ("<", ">="):
            known = 1 if ah < bl else 0 if al >= bh else None
        elif op in (">", "<="):
            known = 1 if al > bh else 0 if ah <= bl else None
        else:
            equal = al == ah == bl == bh or a is b
            known = 0 if equal else 1 if ah < bl or bh < al else None
        if known is None:
            return None
        return known if op in ("<", ">", "!=") else 1 - known

    def where(self, mask: Value, then: Value, other: Value) -> Value:
        """Return `then` where the mask (0 or 1) holds, else `other`."""
        if isinstance(mask, int):
            return then if mask else other
        if then is other or (isinstance(then, int) and then == other):
            return then
        found = self._where(mask, then, other)
        if found is None:
            found = self._where_apart(mask, then, other)
        if found is None:
            raise InexpressibleError("choice-by-another-pixel")
        return found

    def _where(self, mask: Value, then: Value, other: Value) -> Value | None:
        """Return the choice where mask and values are functions of one base."""
        base = self.table(mask).base
        for value in (then, other):
            if not isinstance(value, int) and not self._is_over(base, value):
                return None
        holds, f, g = self._aligned_by(base, mask, then, other)
        return self._table(base, guarded(self.shelf.chosen, holds, f, g))

    def _where_apart(self, mask: Value, then: Value, other: Value) -> Value | None:
        """Return the choice where the values differ by a function of the mask's base.

        Or where the mask is two masks, and these choose one after the other.
        """
        gap = self.subtract(then, other)
        if isinstance(gap, int) and gap == 0:
            return other
        if not (isinstance(gap, Form) and gap.modulus):
            chosen = self._where(mask, gap, 0)
            if chosen is not None:
                made = self.add(other, chosen)
                (tl, th), (ol, oh) = self.bounds(then), self.bounds(other)
                return self._bounded(made, min(tl, ol), max(th, oh))
        return self._where_by_parts(mask, then, other)

    def _where_by_parts(self, mask: Value, then: Value, other: Value) -> Value | None:
        """Return the choice by masks that hold together, one after the other."""
        parts = list(self._joint(mask).parts.values())
        if not 1 < len(parts) <= _MOST_PARTS_CHOSEN:
            return None
        while parts:
            for part in parts:
                try:
                    then = self.where(part, then, other)
                except InexpressibleError:
                    continue
                parts.remove(part)
                break
            else:
                return None
        return then

    def _is_over(self, base: Base, value: Value) -> bool:
        try:
            return self.table(value).base is base
        except InexpressibleError:
            return False

    def _aligned_by(self, base: Base, mask: Value, *values: Value) -> list[Pieces]:
        """Return a mask and values as functions on one domain, on which the mask is 0 or 1."""
        functions = self._aligned(base, mask, *values)
        if functions[0].slopes.any():
            # beyond what the base can be a mask that has a slope takes other values
            return [self.shelf.restricted(f, base.low, base.high) for f in functions]
        return functions

    def _bounded(self, a: Value, low: int, high: int) -> Value:
        """Return a value that is known to lie in low..high, with bounds that say so."""
        if isinstance(a, Form) and (a.low < low or a.high > high):
            low, high = max(a.low, low), min(a.high, high)
            return Form(a.terms, a.constant, a.modulus, low, high, a.based)
        return a

    def both(self, a: Value, b: Value) -> Value:
        """Return the mask that holds where both do."""
        if isinstance(a, int):
            return b if a else 0
        if isinstance(b, int):
            return a if b else 0
        one, other = self._joint(a), self._joint(b)
        parts, total = dict(one.parts), one.total
        for number, part in other.parts.items():
            old = parts.get(number)
            new = part if old is None else self._where(old, part, 0)
            if new is None or isinstance(new, int):
                return 0
            parts[number] = new
            if old is not None:
                total = self.subtract(total, self.linear(old))
            total = self.add(total, self.linear(new))
        if len(parts) == 1:
            return next(iter(parts.values()))
        joint = self.compare(">=", total, len(parts))
        if isinstance(joint, Table):
            self._joints[joint.base.number, joint.function.number] = _Joint(parts, total)
        return joint

    def _joint(self, mask: Value) -> _Joint:
        """Return the masks that make up one that is not a number."""
        table = self.table(mask)
        found = self._joints.get((table.base.number, table.function.number))
        return found or _Joint({table.base.number: mask}, self.linear(mask))

    def bounds_where(self, a: Value, mask: Value) -> tuple[int, int] | None:
        """Return bounds of a where the mask holds; None if it never does."""
        if isinstance(mask, int):
            return self.bounds(a) if mask else None
        if self.bounds(mask)[1] == 0:
            return None
        low, high = self.bounds(a)
        for found in (self._bounds_over(a, mask), self._bounds_by_parts(a, mask)):
            if found is None:
                return None
            low, high = max(low, found[0]), min(high, found[1])
        return (low, high) if low <= high else None

    def _bounds_by_parts(self, a: Value, mask: Value) -> tuple[int, int] | None:
        low, high = self.bounds(a)
        for part in self._parts_about(a, mask):
            found = self._bounds_over(a, part)
            if found is None:
                return None
            low, high = max(low, found[0]), min(high, found[1])
        return low, high

    def _parts_about(self, a: Value, mask: Value) -> list[Value]:
        """Return those of the masks that make up one which have a variable of a value."""
        parts = self._joint(mask).parts
        if isinstance(a, int) or len(parts) == 1:
            return []
        atoms = self.variables.atoms
        own = set(a.base.terms if isinstance(a, Table) else a.terms)
        own.update(v for n in list(own) if n in atoms for v in atoms[n].base.terms)
        return [m for m in parts.values() if not own.isdisjoint(self.table(m).base.terms)]

    def _bounds_over(self, a: Value, mask: Value) -> tuple[int, int] | None:
        """Return bounds by what of a value is a function of the mask's base."""
        table = self.table(mask)
        base = table.base
        if isinstance(a, int):
            return a, a
        found = (a, (0, 0)) if self._is_over(base, a) else self._share(base, a)
        if found is None:
            return self.bounds(a)
        over, rest = found
        holds, f = self._aligned_by(base, table, over)
        ends = self._extremes_where(base, holds, f)
        return None if ends is None else (ends[0] + rest[0], ends[1] + rest[1])

    def _extremes_where(self, base: Base, holds: Pieces, f: Pieces) -> tuple[int, int] | None:
        low, high = self.shelf.range(f, *f.domain)
        ends = []
        for fill, pick in ((high + 1, 0), (low - 1, 1)):
            flat = guarded(self.shelf.affine, f.first, f.last, 0, fill)
            kept = guarded(self.shelf.chosen, holds, f, flat)
            ends.append(self.shelf.range(kept, base.low, base.high)[pick])
        return None if ends[0] > high else (ends[0], ends[1])

    def _share(self, base: Base, a: Value) -> tuple[Value, tuple[int, int]] | None:
        """Return the part of a form that is a function of the base, and the rest's range."""
        a = self.linear(a)
        if not isinstance(a, Form) or a.modulus:
            return None
        atoms = self.variables.atoms
        own = {v: k for v, k in a.terms.items() if v in atoms and atoms[v].base is base}
        part: Value = 0
        for number, k in own.items():
            part = self.add(part, self._exact({number: k}, 0))
        first, size = next(iter(base.terms.items()))
        times, odd = divmod(a.terms.get(first, 0), size)
        if times and not odd and all(a.terms.get(v) == times * k for v, k in base.terms.items()):
            part = self.add(part, self.variables.affine(base, times, 0))
            own.update(base.terms)
        if isinstance(part, int) or not self._is_over(base, part):
            return None
        rest = {v: k for v, k in a.terms.items() if v not in own}
        low, high = self.variables.interval(rest)
        return part, (low + a.constant, high + a.constant)

    def _pointwise(self, name: str, a: Value, b: Value, of: Callable[[int, int], int]) -> Value:
        """Return a function of two values over one base."""
        bases = {
            id(t.base): t.base for t in (self.table(v) for v in (a, b) if not isinstance(v, int))
        }
        if len(bases) > 1:
            raise InexpressibleError("operation-on-pixels")
        (base,) = bases.values()
        f, g = (self.shelf.restricted(h, base.low, base.high) for h in self._aligned(base, a, b))
        return self._table(base, guarded(self.shelf.pointwise, name, f, g, of))
