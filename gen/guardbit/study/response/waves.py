"""Responses of tied taps in floating point: on a grid, at chosen frequencies, where they peak.

Nothing here is a claim. What these numbers suggest is measured by `sizing.peak` afterwards, or
is one of infinitely many conditions, any of which may be left out of a bound.
"""

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from guardbit.study.response.tied import Tied

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]

_DENSITY = 8
_CLIMBS, _HALVINGS = 3, 20
_MOST_PEAKS = 200


def basis(t: Tied, places: Floats) -> Complexes:
    """Return each orbit's response (columns) at each place (rows), about the box's centre.

    Places are (vertical, horizontal) in cycles per tap.
    """
    rows, columns = t.shape
    down = _waves(places[:, 0], rows)
    across = _waves(places[:, 1], columns)
    found = np.zeros((len(places), len(t.orbits)), dtype=np.complex128)
    for j, orbit in enumerate(t.orbits):
        for (y, x), sign in zip(orbit.positions, orbit.signs, strict=True):
            found[:, j] += sign * down[:, y] * across[:, x]
    return found


def _waves(frequencies: Floats, taps: int) -> Complexes:
    offsets = np.arange(taps) - (taps - 1) / 2
    waves: Complexes = np.exp(-2j * np.pi * np.outer(frequencies, offsets))
    return waves


def grid(shape: tuple[int, int], density: int) -> Floats:
    """Return the places of half a grid of `density` points per tap and axis."""
    down, across = (max(density * (taps - 1), 1) for taps in shape)
    y, x = np.meshgrid(np.arange(down // 2 + 1) / down, np.arange(across) / across, indexing="ij")
    return np.stack([y.ravel(), x.ravel()], axis=1)


def peaks(t: Tied, differences: Sequence[float], level: float) -> tuple[Floats, Floats]:
    """Return the places where |response| has a local peak above `level`, and its phases there.

    `differences` are value - target for each orbit.
    """
    places = _local_maxima(t, np.asarray(differences), level)
    step = 1 / (2 * _DENSITY * max(max(t.shape) - 1, 1))
    for _ in range(_HALVINGS):
        for _ in range(_CLIMBS):
            places = _climbed(t, np.asarray(differences), places, step)
        step /= 2
    response = basis(t, places) @ differences
    kept = np.abs(response) > level
    return places[kept], np.angle(response[kept])


def _local_maxima(t: Tied, differences: Floats, level: float) -> Floats:
    """Return the places of a grid, in one half of it, that no neighbour exceeds."""
    rows, columns = t.shape
    matrix = np.zeros((rows, columns))
    for value, orbit in zip(differences, t.orbits, strict=True):
        for place, sign in zip(orbit.positions, orbit.signs, strict=True):
            matrix[place] = sign * value
    sizes = [max(_DENSITY * (taps - 1), 1) for taps in (rows, columns)]
    size = np.abs(np.fft.fft2(matrix, sizes))
    top = np.ones_like(size, dtype=np.bool_)
    for dy in (-1, 0, 1):
        for dx in (-1, 0, 1):
            top &= size >= np.roll(size, (dy, dx), axis=(0, 1)) * (1 - 1e-12)
    # a peak between grid points is at most 1 / cos(pi / 8) times the nearest of them
    top &= (size > 0.92 * level) & (np.arange(sizes[0]) <= sizes[0] // 2)[:, None]
    y, x = np.nonzero(top)
    most = np.argsort(-size[y, x], kind="stable")[:_MOST_PEAKS]
    return np.stack([y[most] / sizes[0], x[most] / sizes[1]], axis=1)


def _climbed(t: Tied, differences: Floats, places: Floats, step: float) -> Floats:
    """Return each place moved to the best of itself and its eight neighbours at `step`."""
    moves = np.array([(dy, dx) for dy in (0, -1, 1) for dx in (0, -1, 1)]) * step
    around = (places[:, None, :] + moves).reshape(-1, 2)
    sizes = np.abs(basis(t, around) @ differences).reshape(len(places), len(moves))
    chosen: Floats = places + moves[sizes.argmax(axis=1)]
    return chosen
