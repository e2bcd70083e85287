"""Which part of an affine form is its remainder: packed words and split words stay affine."""

from collections.abc import Mapping
from dataclasses import dataclass

from guardbit.proof.algebra.variables import Variables


@dataclass(frozen=True, slots=True)
class Rest:
    """An affine form that is another one modulo some n, and its range."""

    terms: Mapping[int, int]
    constant: int
    low: int
    high: int


def rest_of(
    variables: Variables, terms: Mapping[int, int], constant: int, n: int, least: int = 0
) -> Rest | None:
    """Return the form in least..least+n-1 that is congruent modulo n, if there is an affine one.

    With least 0 it is the remainder: v = n * h + r with 0 <= r < n has one solution. Its
    coefficients are those given modulo n, nearest to 0, or the least that are not negative.
    """
    for residues in _residues(terms, n):
        low, high = variables.interval(residues)
        moved = (constant + low - least) % n - low + least
        if high + moved < least + n:
            return Rest(residues, moved, low + moved, high + moved)
    return None


def lane_of(variables: Variables, terms: Mapping[int, int], constant: int, n: int) -> Rest | None:
    """Return a form in fewer variables that is congruent modulo n and takes fewer than n values."""
    residues = _residues(terms, n)[0]
    if not 0 < len(residues) < len(terms):
        return None
    low, high = variables.interval(residues)
    if high - low >= n:
        return None
    moved = (constant + n // 2) % n - n // 2
    return Rest(residues, moved, low + moved, high + moved)


def _residues(terms: Mapping[int, int], n: int) -> list[dict[int, int]]:
    half = n >> 1
    if all(-half <= k < n - half for k in terms.values()):
        centred = dict(terms)
    else:
        centred = {v: c for v, k in terms.items() if (c := (k + half) % n - half)}
    found = [centred]
    if any(k < 0 for k in centred.values()):
        found.append({v: c for v, k in terms.items() if (c := k % n)})
    return found
