"""Random programs on symbols, against the same programs on plain integers."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass

from hypothesis import given, settings
from hypothesis import strategies as st

from guardbit.proof.algebra.space import Space
from guardbit.proof.algebra.values import Form, InexpressibleError, Table, Value
from tools import examples

Plain = Callable[[Mapping[int, int]], int]
Symbolic = Callable[[Space, Value, Value, int], Value]
Scalar = Callable[[int, int, int], int]


def truncated(a: int, b: int) -> int:
    """Return C's a / b (ISO/IEC 9899:1999, 6.5.5)."""
    return abs(a) // abs(b) * (1 if (a < 0) == (b < 0) else -1)


def wrapped(a: int, bits: int, signed: bool) -> int:
    """Return the number of a type that is congruent to a."""
    rest = a % (1 << bits)
    return rest - (1 << bits) if signed and rest >> bits - 1 else rest


def _looked_up(s: Space, x: Value, y: Value, c: int) -> Value:
    return s.look_up(range(c, c + 256), s.wrap(x, 8, signed=False))


OPERATIONS: dict[str, tuple[Symbolic, Scalar]] = {
    "add": (lambda s, x, y, c: s.add(x, y), lambda x, y, c: x + y),
    "subtract": (lambda s, x, y, c: s.subtract(x, y), lambda x, y, c: x - y),
    "scale": (lambda s, x, y, c: s.multiply(x, c - 20), lambda x, y, c: x * (c - 20)),
    "move": (lambda s, x, y, c: s.add(x, 9 * c - 90), lambda x, y, c: x + 9 * c - 90),
    "multiply": (lambda s, x, y, c: s.multiply(x, y), lambda x, y, c: x * y),
    "complement": (lambda s, x, y, c: s.complement(x), lambda x, y, c: ~x),
    "floor": (lambda s, x, y, c: s.floor_divide(x, c), lambda x, y, c: x // c),
    "shift": (lambda s, x, y, c: s.shift_down(x, c % 12), lambda x, y, c: x >> c % 12),
    "low": (lambda s, x, y, c: s.low_bits(x, c % 12), lambda x, y, c: x & ((1 << c % 12) - 1)),
    "quotient": (lambda s, x, y, c: s.quotient(x, c), lambda x, y, c: truncated(x, c)),
    "negative quotient": (
        lambda s, x, y, c: s.quotient(x, -c),
        lambda x, y, c: truncated(x, -c),
    ),
    "remainder": (
        lambda s, x, y, c: s.remainder(x, c),
        lambda x, y, c: x - c * truncated(x, c),
    ),
    "and": (lambda s, x, y, c: s.bits_and(x, 5 * c - 60), lambda x, y, c: x & 5 * c - 60),
    "and two": (lambda s, x, y, c: s.bits_and(x, y), lambda x, y, c: x & y),
    "or": (lambda s, x, y, c: s.bits_or(x, y), lambda x, y, c: x | y),
    "xor": (lambda s, x, y, c: s.bits_xor(x, 5 * c - 60), lambda x, y, c: x ^ 5 * c - 60),
    "xor top": (
        lambda s, x, y, c: s.bits_xor(s.wrap(x, 8, signed=False), 128),
        lambda x, y, c: x & 255 ^ 128,
    ),
    "unsigned": (
        lambda s, x, y, c: s.wrap(x, 4 + c % 9, signed=False),
        lambda x, y, c: wrapped(x, 4 + c % 9, signed=False),
    ),
    "signed": (
        lambda s, x, y, c: s.wrap(x, 4 + c % 9, signed=True),
        lambda x, y, c: wrapped(x, 4 + c % 9, signed=True),
    ),
    "less": (lambda s, x, y, c: s.compare("<", x, y), lambda x, y, c: int(x < y)),
    "at most": (lambda s, x, y, c: s.compare("<=", x, c), lambda x, y, c: int(x <= c)),
    "greater": (lambda s, x, y, c: s.compare(">", x, c), lambda x, y, c: int(x > c)),
    "at least": (lambda s, x, y, c: s.compare(">=", x, y), lambda x, y, c: int(x >= y)),
    "equal": (lambda s, x, y, c: s.compare("==", x, c), lambda x, y, c: int(x == c)),
    "unequal": (lambda s, x, y, c: s.compare("!=", x, y), lambda x, y, c: int(x != y)),
    "where": (
        lambda s, x, y, c: s.where(s.compare("<", x, c), y, c),
        lambda x, y, c: y if x < c else c,
    ),
    "greatest": (
        lambda s, x, y, c: s.where(s.compare("<", x, y), y, x),
        lambda x, y, c: max(x, y),
    ),
    "both": (
        lambda s, x, y, c: s.both(s.compare("<", x, c), s.compare(">", y, -c)),
        lambda x, y, c: int(x < c and y > -c),
    ),
    "look up": (_looked_up, lambda x, y, c: c + x % 256),
    "word": (
        lambda s, x, y, c: s.add(x, s.multiply(y, 1 << c % 12)),
        lambda x, y, c: x + (y << c % 12),
    ),
    "residues": (
        lambda s, x, y, c: s.subtract(s.wrap(x, 12, signed=False), s.wrap(y, 12, signed=True)),
        lambda x, y, c: wrapped(x, 12, signed=False) - wrapped(y, 12, signed=True),
    ),
    "atom": (lambda s, x, y, c: s.linear(x), lambda x, y, c: x),
}


@dataclass(frozen=True)
class Program:
    """Values of a space, each with what it is on plain integers, and pixels to try."""

    space: Space
    values: list[tuple[Value, Plain]]
    frames: list[dict[int, int]]


def _both_ways(name: str, of: Scalar, left: Plain, right: Plain, c: int) -> Plain:
    return lambda p: of(left(p), right(p), c)


def _variable(number: int) -> Plain:
    return lambda p: p[number]


@st.composite
def programs(draw: st.DrawFn) -> Program:
    """Draw pixels, operations on them and on what came of them, and frames."""
    space = Space(widen=draw(st.booleans()))
    lows = draw(st.lists(st.integers(-30, 9), min_size=1, max_size=4))
    highs = [low + draw(st.sampled_from((1, 2, 15, 255, 5000))) for low in lows]
    values = [
        (space.pixel(low, high), _variable(i))
        for i, (low, high) in enumerate(zip(lows, highs, strict=True))
    ]
    numbers = st.integers(1, 40)
    for name in draw(st.lists(st.sampled_from(sorted(OPERATIONS)), max_size=10)):
        (x, left), (y, right) = draw(st.sampled_from(values)), draw(st.sampled_from(values))
        symbolic, scalar = OPERATIONS[name]
        c = draw(numbers)
        try:
            made = symbolic(space, x, y, c)
        except InexpressibleError:
            continue
        values.append((made, _both_ways(name, scalar, left, right, c)))
    ranges = [
        st.one_of(st.just(a), st.just(b), st.integers(a, b))
        for a, b in zip(lows, highs, strict=True)
    ]
    frames = draw(st.lists(st.tuples(*ranges), min_size=12, max_size=12))
    return Program(space, values, [dict(enumerate(f)) for f in frames])


def _at(space: Space, value: Value, frame: dict[int, int]) -> int | None:
    """Return a value on a frame; None for one of which only a residue is known."""
    try:
        return space.at(value, frame)
    except InexpressibleError:
        assert isinstance(value, Form) and value.modulus
        return None


@settings(max_examples=examples(120), deadline=None)
@given(programs())
def test_values_and_bounds_are_those_of_plain_integers(program: Program) -> None:
    for value, plain in program.values:
        low, high = program.space.bounds(value)
        for frame in program.frames:
            wanted = plain(frame)
            assert low <= wanted <= high
            got = _at(program.space, value, frame)
            assert got is None or got == wanted
            if isinstance(value, Form) and value.modulus:
                exact = Form(value.terms, value.constant, 0, low, high)
                gap = program.space.at(exact, frame) - wanted
                assert gap % (1 << value.modulus) == 0


@settings(max_examples=examples(120), deadline=None)
@given(programs())
def test_the_simplest_shape_is_kept(program: Program) -> None:
    for value, _ in program.values:
        if isinstance(value, Form):
            assert value.terms or value.modulus
            assert 0 not in value.terms.values()
        if isinstance(value, Table):
            low, high = value.base.low, value.base.high
            inner = program.space.shelf.restricted(value.function, low, high)
            assert not inner.is_affine()


@settings(max_examples=examples(150), deadline=None)
@given(programs(), st.data())
def test_same_is_never_said_of_what_differs(program: Program, data: st.DataObject) -> None:
    space = program.space
    (a, left), (b, right) = (data.draw(st.sampled_from(program.values)) for _ in range(2))
    differing = [f for f in program.frames if left(f) != right(f)]
    found = None
    if space.same(a, b):
        assert not differing
    else:
        found = space.difference(a, b)
    if found is not None:
        frame = {**program.frames[0], **found}
        assert left(frame) != right(frame)


@settings(max_examples=examples(150), deadline=None)
@given(programs(), st.data())
def test_bounds_where_a_mask_holds(program: Program, data: st.DataObject) -> None:
    space = program.space
    (a, plain), (b, other) = (data.draw(st.sampled_from(program.values)) for _ in range(2))
    limit = data.draw(st.integers(-60, 60))
    try:
        mask = space.compare("<", b, limit)
    except InexpressibleError:
        return
    bounds = space.bounds_where(a, mask)
    inside = [plain(f) for f in program.frames if other(f) < limit]
    if bounds is None:
        assert not inside
        assert space.witness(mask) is None
    else:
        assert all(bounds[0] <= v <= bounds[1] for v in inside)


@settings(max_examples=examples(120), deadline=None)
@given(programs(), st.data())
def test_witnesses_are_real(program: Program, data: st.DataObject) -> None:
    space = program.space
    (a, plain), (b, other) = (data.draw(st.sampled_from(program.values)) for _ in range(2))
    limit = data.draw(st.integers(-60, 60))
    inside = (limit - 50, limit + 50)
    try:
        mask = space.compare(">=", b, limit)
    except InexpressibleError:
        return
    found = space.witness(mask, a, inside)
    if found is not None:
        frame = {**program.frames[0], **found}
        assert other(frame) >= limit
        assert not inside[0] <= plain(frame) <= inside[1]


@settings(max_examples=examples(120), deadline=None)
@given(
    st.integers(-900, 900), st.integers(1, 2000), st.integers(1, 60), st.integers(1, 9), st.data()
)
def test_over_one_pixel_same_is_complete(
    low: int, span: int, divisor: int, bits: int, data: st.DataObject
) -> None:
    space = Space()
    x = space.pixel(low, low + span)
    add = data.draw(st.integers(-200, 200))
    a = space.floor_divide(space.floor_divide(space.add(x, add), divisor), 1 << bits)
    b = space.floor_divide(space.add(x, add), divisor << bits)
    assert space.same(a, b)
    moved = space.floor_divide(space.add(x, add + 1), divisor << bits)
    equal = all(
        (v + add) // (divisor << bits) == (v + add + 1) // (divisor << bits)
        for v in range(low, low + span + 1)
    )
    assert space.same(a, moved) == equal
    found = space.difference(a, moved)
    assert (found is None) == equal
    if found is not None:
        assert space.at(a, found) != space.at(moved, found)
