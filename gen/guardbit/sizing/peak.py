"""The largest magnitude of a frequency response, between grid points too.

A response D(w) = sum d[k] exp(-i w.k) with k in a box of P x Q points is, but for a phase, of
exponential type N = ((P-1)/2, (Q-1)/2): centre the box. Let m be the largest |D|, at w0, and
turn the phase so that D(w0) = m there. The real part T is at most m everywhere, and along any
line from w0 it falls no faster than a cosine:

    |D(w0 + v)| >= T(w0 + v) >= m cos(N1 |v1| + N2 |v2|)   while that angle is at most pi

(M. Riesz 1914 for trigonometric polynomials; Duffin and Schaeffer 1938 for functions of
exponential type, which the values on a line of any direction and for even P, Q are. The bound
for equidistant points by Ehlich and Zeller 1964 follows from it. From memory.)

So cells of half widths h are laid over all frequencies, and |D| is computed at their centres.
The cell that holds w0 has a centre with |D| >= m c, c = cos(N1 h1 + N2 h2): cells below c times
the best value found cannot hold it and are dropped; the others are divided by three along
each axis, and so on. At every level m <= (largest centre left) / c, and c goes to 1.

Where a response is so flat that too many cells are left, a full grid has to do: axis after
axis, m <= (largest on the grid) / (cos(N1 h1) cos(N2 h2)), less than 1 % above it.

Sums are matrix products of doubles. What they are off by is bounded (`_error`), assuming IEEE
754 doubles, products summed in any order, and NumPy's sine and cosine within 4 units in the
last place; ends are rounded outwards. Where the response is real, sums are exact.
"""

from collections import defaultdict
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from fractions import Fraction
from math import cos, pi
from typing import TYPE_CHECKING, TypeAlias

from guardbit.model.frequency import Peak, Place

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    _Floats: TypeAlias = NDArray[np.float64]
    _Numbers: TypeAlias = NDArray[np.int64]

Taps: TypeAlias = Mapping[tuple[int, int], Fraction]

HALF = Fraction(1, 2)
EDGES: tuple[Place, ...] = (
    (Fraction(0), Fraction(0)),
    (HALF, Fraction(0)),
    (Fraction(0), HALF),
    (HALF, HALF),
)
"""Where every response is real: DC and the Nyquist edges."""

CLOSE = 1e-7
"""How close the ends of a peak come, as a share of it."""

# Cells per tap and axis: of a full grid, and of the first one where there are many taps.
_FINE, _COARSE, _SMALL = 16, 8, 64
_ENOUGH = 0.01
_WORK = 5 * 10**8
_MOST_CELLS = 400_000


def total(values: Iterable[Fraction]) -> Fraction:
    """Return the exact sum; fast for many values over few denominators."""
    tops: dict[int, int] = defaultdict(int)
    for value in values:
        tops[value.denominator] += value.numerator
    return sum((Fraction(top, bottom) for bottom, top in tops.items()), Fraction(0))


def edge_sums(taps: Taps) -> tuple[Fraction, Fraction, Fraction, Fraction]:
    """Return the response at the four EDGES, exactly; frequencies in cycles per tap."""
    parts = {
        parity: total(tap for (y, x), tap in taps.items() if (y % 2, x % 2) == parity)
        for parity in ((0, 0), (0, 1), (1, 0), (1, 1))
    }
    even, right, down, both = (parts[p] for p in ((0, 0), (0, 1), (1, 0), (1, 1)))
    return (
        even + right + down + both,
        even + right - down - both,
        even - right + down - both,
        even - right - down + both,
    )


def peak(taps: Taps, close: float = CLOSE) -> Peak:
    """Return the largest magnitude of the response of taps at integer places (y, x).

    `at` is in cycles per tap: 0..1/2 vertically, -1/2..1/2 horizontally. The ends are apart by
    a share of about `close`; in very flat responses by up to 1 %.
    """
    taps = {place: tap for place, tap in taps.items() if tap}
    exact, at = max(
        ((abs(value), edge) for value, edge in zip(edge_sums(taps), EDGES, strict=True)),
        key=lambda pair: pair[0],
    )
    most = total(map(abs, taps.values()))
    if exact == most:
        return Peak(exact, exact, at)
    found = _search(_polynomial(taps), close)
    guaranteed = max(min(found.guaranteed, most), exact)
    if found.attained > exact:
        return Peak(found.attained, guaranteed, found.at)
    return Peak(exact, guaranteed, at)


@dataclass(frozen=True, eq=False)
class _Polynomial:
    """Taps over their box, divided by `scale` (a power of two) so that they are below 1."""

    values: "_Floats"
    scale: Fraction

    @property
    def degrees(self) -> tuple[float, float]:
        rows, columns = self.values.shape
        return (rows - 1) / 2, (columns - 1) / 2


def _polynomial(taps: Taps) -> _Polynomial:
    import numpy as np

    ys, xs = zip(*taps, strict=True)
    top, left = min(ys), min(xs)
    largest = max(map(abs, taps.values()))
    scale = Fraction(2) ** (largest.numerator.bit_length() - largest.denominator.bit_length() + 1)
    values = np.zeros((max(ys) - top + 1, max(xs) - left + 1))
    for (y, x), tap in taps.items():
        values[y - top, x - left] = float(tap / scale)
    return _Polynomial(values, scale)


@dataclass(frozen=True, eq=False)
class _Cells:
    """Cells centred on the frequencies (y / down, x / across), of width 1 / down, 1 / across."""

    y: "_Numbers"
    x: "_Numbers"
    down: int
    across: int

    def drop(self, p: _Polynomial) -> float:
        """Return a number not above c of the module's text."""
        first, second = p.degrees
        # the subtrahend is far more than the cosine and its angle can be off by
        return cos(pi * (first / self.down + second / self.across)) - 2.0**-46


def _search(p: _Polynomial, close: float) -> Peak:
    import numpy as np

    density = _FINE if max(p.values.shape) <= _SMALL else _COARSE
    cells, values = _whole(p, density)
    error, best, at = _error(p), 0.0, (Fraction(0), Fraction(0))
    bound = _grid_bound(p, density, float(values.max()))
    while True:
        top = int(np.argmax(values))
        if values[top] > best:
            best = float(values[top])
            at = Fraction(int(cells.y[top]), cells.down), Fraction(int(cells.x[top]), cells.across)
        drop = cells.drop(p)
        bound = min(bound, _over(p, float(values.max()), drop))
        kept = np.flatnonzero(values >= best * drop - 2 * error)
        if 1 - drop <= close or 9 * len(kept) > min(_MOST_CELLS, _WORK // p.values.size):
            break
        cells = _divided(cells, kept, p)
        values = _at(p, cells)
    if bound > (1 + _ENOUGH) * Fraction(best) and density != _FINE:
        bound = min(bound, _grid_bound(p, _FINE, _grid_largest(p)))
    attained = max(_rounded(Fraction(best) - Fraction(error), up=False), Fraction(0))
    return Peak(attained * p.scale, _rounded(bound, up=True) * p.scale, _folded(at))


def _over(p: _Polynomial, largest: float, drop: float) -> Fraction:
    """Return what the true maximum does not exceed, where a computed one may be short of it."""
    return (Fraction(largest) + Fraction(_error(p))) / Fraction(drop)


def _grid_bound(p: _Polynomial, density: int, largest: float) -> Fraction:
    """Return a bound from the largest value on a full grid alone."""
    pairs = zip(p.degrees, (_cells_along(n, density) for n in p.values.shape), strict=True)
    first, second = (cos(pi * degree / cells) - 2.0**-46 for degree, cells in pairs)
    return _over(p, largest, first * second * (1 - 2.0**-46))


def _whole(p: _Polynomial, density: int) -> tuple[_Cells, "_Floats"]:
    """Return cells that cover half of all frequencies (the others are conjugate), and |D|."""
    import numpy as np

    down, across = (_cells_along(n, density) for n in p.values.shape)
    rows, columns = np.arange(down // 2 + 1), np.arange(across)
    values = _on_grid(p, rows, down, across)
    y, x = np.repeat(rows, across), np.tile(columns, len(rows))
    return _Cells(y, x, down, across), values.ravel()


def _grid_largest(p: _Polynomial) -> float:
    """Return the largest |D| on the finest grid, a few of its rows at a time."""
    import numpy as np

    down, across = (_cells_along(n, _FINE) for n in p.values.shape)
    rows = np.arange(down // 2 + 1)
    parts = np.array_split(rows, max(len(rows) * across // 2**20, 1))
    return max(float(_on_grid(p, part, down, across).max()) for part in parts)


def _on_grid(p: _Polynomial, rows: "_Numbers", down: int, across: int) -> "_Floats":
    """Return |D| at the frequencies (rows / down, n / across), n = 0..across - 1."""
    import numpy as np

    waves = _waves(rows, down, p.values.shape[0]) @ p.values.astype(np.complex128)
    values: _Floats = np.abs(waves @ _waves(np.arange(across), across, p.values.shape[1]).T)
    return values


def _cells_along(taps: int, density: int) -> int:
    """Return an even number of cells, or one where nothing varies."""
    return max(density * (taps - 1), 1)


def _waves(numbers: "_Numbers", parts: int, taps: int) -> "NDArray[np.complex128]":
    """Return exp(-2 pi i n k / parts) for each n and each tap k, the turns reduced exactly."""
    import numpy as np

    turns = np.outer(numbers, np.arange(taps)) % parts
    turns = np.where(2 * turns > parts, turns - parts, turns)
    angles = (-2 * np.pi) * (turns / parts)
    waves: NDArray[np.complex128] = np.cos(angles) + 1j * np.sin(angles)
    return waves


def _at(p: _Polynomial, cells: _Cells) -> "_Floats":
    """Return |D| at the centres, a block of them at a time."""
    import numpy as np

    values = p.values.astype(np.complex128)
    rows, columns = values.shape
    found = np.empty(len(cells.y))
    block = max(1, 2**20 // (rows + columns))
    for start in range(0, len(found), block):
        part = slice(start, start + block)
        waves = _waves(cells.y[part], cells.down, rows) @ values
        found[part] = np.abs((waves * _waves(cells.x[part], cells.across, columns)).sum(axis=1))
    return found


def _divided(cells: _Cells, kept: "_Numbers", p: _Polynomial) -> _Cells:
    """Return the kept cells, each divided by three along the axes on which D varies."""
    import numpy as np

    rows, columns = p.values.shape
    down, across = (3 if rows > 1 else 1), (3 if columns > 1 else 1)
    steps_down, steps_across = np.arange(down) - down // 2, np.arange(across) - across // 2
    y = down * cells.y[kept][:, None, None] + steps_down[:, None]
    x = across * cells.x[kept][:, None, None] + steps_across
    y, x = np.broadcast_arrays(y, x)
    return _Cells(y.ravel(), x.ravel(), down * cells.down, across * cells.across)


def _error(p: _Polynomial) -> float:
    """Return a bound of |computed - exact| of any value of |D|.

    With u = 2**-53 and L the sum of magnitudes: a wave is off by at most 16 u (its angle by
    3 pi u, sine and cosine by 4 u each); a sum of n complex products by less than 3 (n + 2) u
    of the sum of their magnitudes (Higham, Accuracy and Stability of Numerical Algorithms,
    sections 3.1 and 3.6, from memory); taps and magnitude by u each: together less than
    4 (P + Q + 16) u L.
    """
    import numpy as np

    rows, columns = p.values.shape
    largest_sum = float(np.abs(p.values).sum())
    return 4 * int(rows + columns + 16) * 2.0**-53 * largest_sum


def _rounded(value: Fraction, *, up: bool) -> Fraction:
    """Return a neighbour of 40 significant bits, not below (up) or not above the value."""
    if value <= 0:
        return value
    unit = Fraction(2) ** (value.numerator.bit_length() - value.denominator.bit_length() - 40)
    return (-(-value // unit) if up else value // unit) * unit


def _folded(at: Place) -> Place:
    """Return the frequency, or the one that is conjugate to it, in the half that is shown."""
    y, x = (part - round(part) for part in at)
    if y < 0 or (y in (0, -HALF, HALF) and x < 0):
        y, x = -y, -x
    return abs(y), x if x != -HALF else HALF
