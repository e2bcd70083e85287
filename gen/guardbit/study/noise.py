"""The error that frames show, in exact arithmetic, and the signal beside it."""

from collections.abc import Sequence
from fractions import Fraction

from guardbit.model.filter import Filter
from guardbit.model.practice import Measured
from guardbit.model.routine import Codes
from guardbit.reference.run import respond
from guardbit.verify.error import Deviation, deviation, ideal_filter


def snr(f: Filter, frames: Sequence[Codes]) -> Fraction | None:
    """Return the ratio of signal power to error power over all outputs of the frames.

    Signal power is the mean square of the clamped ideal code less the output pedestal, error
    power that of output code minus clamped ideal code. None: no error. Zero also where there is no
    output: frames that show nothing must not reach a goal. Frames are (rows, columns, channels) of
    legal codes, and the filter's widths are resolved.
    """
    found = measured(f, frames)
    return Fraction(0) if found is None else found.snr


def measured(f: Filter, frames: Sequence[Codes]) -> Measured | None:
    """Return the error over all outputs of the frames; None if they have no output.

    Frames with other codes than legal ones are left out: their error is not defined.
    """
    scale, ideal = ideal_filter(f)
    made = [
        deviation(f, scale, ideal, frame, respond(f, frame).output)
        for frame in frames
        if f.input.low <= frame.min() and frame.max() <= f.input.high
    ]
    some = [each for each in made if each.error.size]
    return _measured(f, some) if some else None


def _measured(f: Filter, made: Sequence[Deviation]) -> Measured:
    unit, count = made[0].unit, sum(each.error.size for each in made)
    zero = f.output.pedestal * unit
    powers = [(each.error * each.error).sum() for each in made]
    signals = [((each.ideal - zero) * (each.ideal - zero)).sum() for each in made]
    return Measured(
        outputs=count,
        least=Fraction(min(each.error.min() for each in made), unit),
        greatest=Fraction(max(each.error.max() for each in made), unit),
        mean=Fraction(sum(each.error.sum() for each in made), unit * count),
        power=Fraction(sum(powers), unit**2 * count),
        signal=Fraction(sum(signals), unit**2 * count),
    )
