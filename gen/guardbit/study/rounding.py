"""The mean and variance of the rounding that frames show, beside those of uniform residues."""

from collections.abc import Iterable, Sequence
from fractions import Fraction
from typing import Any

import numpy as np
from numpy.typing import NDArray

from guardbit.arith.rounding import ratio, round_ratio
from guardbit.model.enums import Rounding
from guardbit.model.filter import Filter, Pass
from guardbit.model.practice import MeasuredRounding
from guardbit.model.vectors import Codes
from guardbit.reference.run import respond
from guardbit.sizing.passes import INTERMEDIATE, OUTPUT, is_preloaded, start_value


def measured_rounding(f: Filter, frames: Iterable[Codes]) -> tuple[MeasuredRounding, ...]:
    """Return the rounding of each requantiser over frames, (height, width, channels) of codes.

    The filter's widths are resolved. Requantisers that rounded nothing are left out.
    """
    names = (OUTPUT,) if len(f.passes) == 1 else (INTERMEDIATE, OUTPUT)
    responses = [respond(f, frame) for frame in frames]
    made = [
        _measured(name, p, [response.accumulators[i] for response in responses])
        for i, (name, p) in enumerate(zip(names, f.passes, strict=True))
    ]
    return tuple(one for one in made if one is not None)


def _measured(name: str, p: Pass, sums: Sequence[NDArray[Any]]) -> MeasuredRounding | None:
    count = total = squares = 0
    denominator = ratio(p.requantiser)[1]
    for each in sums:
        error = _errors(p, each)
        count += error.size
        total += int(error.sum())
        squares += int((error * error).sum())
    if not count:
        return None
    mean = Fraction(total, count * denominator)
    return MeasuredRounding(
        name, count, mean, Fraction(squares, count * denominator**2) - mean * mean
    )


def _errors(p: Pass, sums: NDArray[Any]) -> NDArray[Any]:
    """Return what rounding adds to each sum, over the requantiser's denominator.

    A rounding constant in the sum and a floor round as ties-to-positive.
    """
    numerator, denominator = ratio(p.requantiser)
    mode = Rounding.TIES_TO_POSITIVE if is_preloaded(p) else p.requantiser.rounding
    # Python's integers: the squares of differences are added up exactly
    values: Any = (sums.astype(object) - start_value(p)) * numerator
    if not values.size:
        return np.zeros(0, dtype=object)
    errors: NDArray[Any] = round_ratio(values, denominator, mode) * denominator - values
    return errors
