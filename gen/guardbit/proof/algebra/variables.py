"""The variables of one proof: open pixels, and atoms, each a function of an affine form.

An atom stands for a value that is no affine form, as one term in forms of later sums. It is
normalised - it begins at 0, by the common divisor of its differences, rising first - so that what
is computed in two ways becomes the same variable. A form has no more than one atom of a base:
sums see to it.
"""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from math import gcd

from guardbit.proof.algebra.pieces import Floor, Pieces
from guardbit.proof.algebra.shelf import Shelf
from guardbit.proof.algebra.values import Base, Form, Value


@dataclass(frozen=True, slots=True)
class Atom:
    """A function of a base, or a floor of it that has too many pieces to be a function."""

    base: Base
    function: Pieces | None
    floor: Floor | None = None

    @property
    def floors(self) -> tuple[Floor, ...]:
        """Return floors of the base that the atom equals."""
        if self.function is not None:
            return self.function.floors
        return () if self.floor is None else (self.floor,)

    def at(self, x: int) -> int:
        """Return the value where the base is x."""
        if self.function is not None:
            return self.function.at(x)
        assert self.floor is not None
        g, q, m = self.floor
        return (g * x + q) // m


class Variables:
    """Ranges and meanings of variables by number, and the bases of forms over them."""

    def __init__(self, shelf: Shelf, *, widen: bool) -> None:
        self.shelf = shelf
        self.lows: list[int] = []
        self.highs: list[int] = []
        self.atoms: dict[int, Atom] = {}
        self.siblings: dict[int, set[int]] = {}
        self._numbers: dict[tuple[int, int | Floor], int] = {}
        self._atomised: dict[tuple[int, int], Value] = {}
        self._of_base: dict[int, set[int]] = {}
        self._bases: dict[tuple[tuple[int, int], ...], Base] = {}
        self._domains: list[tuple[int, int]] = []
        self._chosen: dict[tuple[int, int], tuple[int, int]] = {}
        self._widen = widen

    def new(self, low: int, high: int) -> int:
        """Return the number of a new variable with that range."""
        self.lows.append(low)
        self.highs.append(high)
        return len(self.lows) - 1

    def interval(self, terms: Mapping[int, int]) -> tuple[int, int]:
        """Return the range of a form's terms, each variable free for itself."""
        low = high = 0
        lows, highs = self.lows, self.highs
        for number, k in terms.items():
            if k > 0:
                low += k * lows[number]
                high += k * highs[number]
            else:
                low += k * highs[number]
                high += k * lows[number]
        return low, high

    def base_of(self, terms: Mapping[int, int]) -> tuple[Base, int]:
        """Return the base of which the terms, at least one, are a multiple, and the factor."""
        items = sorted(terms.items())
        factor = gcd(*terms.values())
        if items[0][1] < 0:
            factor = -factor
        key = tuple(items) if factor == 1 else tuple((v, k // factor) for v, k in items)
        base = self._bases.get(key)
        if base is None:
            primitive = dict(key)
            ends = self.interval(primitive)
            base = Base(len(self._bases), primitive, *ends, self._domain(ends))
            self._bases[key] = base
        return base, factor

    def _domain(self, wanted: tuple[int, int]) -> tuple[int, int]:
        """Return a domain met before that holds this one and is not much larger, or this one."""
        found = self._chosen.get(wanted)
        if found is None:
            found = self._chosen[wanted] = self._holding(*wanted)
        return found

    def _holding(self, low: int, high: int) -> tuple[int, int]:
        if self._widen:
            fits = [
                (b - a, a, b)
                for a, b in self._domains
                if a <= low and high <= b and b - a <= 4 * (high - low) + 1024
            ]
            if fits:
                return min(fits)[1:]
        self._domains.append((low, high))
        return low, high

    def atomised(self, base: Base, function: Pieces) -> Value:
        """Return a function of a base as a form over an atom."""
        key = (base.number, function.number)
        found = self._atomised.get(key)
        if found is None:
            found = self._atomised[key] = self._as_atom(base, function)
        return found

    def _as_atom(self, base: Base, function: Pieces) -> Value:
        shelf = self.shelf
        f = shelf.restricted(function, base.low, base.high)
        if f.is_affine():
            return self.affine(base, int(f.slopes[0]), int(f.offsets[0]))
        low, high = shelf.range(f, base.low, base.high)
        normal = shelf.normal(f)
        number = self._atom(base, normal.steps)
        return Form({number: normal.factor}, normal.offset, 0, low, high)

    def affine(self, base: Base, slope: int, offset: int) -> Value:
        """Return slope * base + offset."""
        if slope == 0 or base.low == base.high:
            return slope * base.low + offset
        if slope == 1:
            return Form(base.terms, offset, 0, base.low + offset, base.high + offset, (base, 1))
        low, high = slope * base.low + offset, slope * base.high + offset
        if slope < 0:
            low, high = high, low
        terms = {v: slope * k for v, k in base.terms.items()}
        return Form(terms, offset, 0, low, high, (base, slope))

    def floor(self, base: Base, floor: Floor) -> Value:
        """Return a floor of a base as a form over an atom without pieces."""
        g, q, m = floor
        common = gcd(g, m)
        g, q, m = g // common, q // common, m // common
        whole, q = divmod(q, m)
        ends = sorted(((g * base.low + q) // m, (g * base.high + q) // m))
        key = (base.number, (g, q, m))
        number = self._numbers.get(key)
        if number is None:
            number = self._added(key, Atom(base, None, (g, q, m)), ends[0], ends[1])
        return Form({number: 1}, whole, 0, ends[0] + whole, ends[1] + whole)

    def _atom(self, base: Base, steps: Pieces) -> int:
        key = (base.number, steps.number)
        number = self._numbers.get(key)
        if number is None:
            ends = self.shelf.range(steps, steps.first, steps.last)
            number = self._added(key, Atom(base, steps), *ends)
            siblings = self._of_base.setdefault(base.number, set())
            siblings.add(number)
            self.siblings[number] = siblings
        return number

    def _added(self, key: tuple[int, int | Floor], atom: Atom, low: int, high: int) -> int:
        number = self._numbers[key] = self.new(low, high)
        self.atoms[number] = atom
        return number

    def together(self, numbers: Iterable[int], terms: Mapping[int, int]) -> Value:
        """Return the sum of terms that are atoms of one base."""
        shelf = self.shelf
        total: Pieces | None = None
        for number in sorted(numbers):
            atom = self.atoms[number]
            assert atom.function is not None
            part = shelf.scaled(atom.function, terms[number], 0)
            total = part if total is None else shelf.sum(total, part)
            base = atom.base
        assert total is not None
        return self.atomised(base, total)


class Evaluation:
    """Values of forms at given pixels; pixels left out have their least value."""

    def __init__(self, variables: Variables, pixels: Mapping[int, int]) -> None:
        self._variables = variables
        self._known = dict(pixels)

    def sum_of(self, terms: Mapping[int, int]) -> int:
        """Return the value of a form's terms."""
        known = self._known
        for number in terms:
            if number not in known:
                self._settle(number)
        return sum(k * known[number] for number, k in terms.items())

    def _settle(self, number: int) -> None:
        """Work out a variable, and before it what it depends on. No recursion: it may be deep."""
        variables, known = self._variables, self._known
        waiting = [number]
        while waiting:
            number = waiting[-1]
            atom = variables.atoms.get(number)
            if number in known or atom is None:
                known.setdefault(number, variables.lows[number])
                waiting.pop()
                continue
            missing = [v for v in atom.base.terms if v not in known]
            if missing:
                waiting.extend(missing)
                continue
            known[number] = atom.at(sum(k * known[v] for v, k in atom.base.terms.items()))
            waiting.pop()
