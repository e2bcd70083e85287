"""The keys of [goal]: a part of the key table."""

from guardbit.model.enums import WordLength
from guardbit.spec.entries import Key
from guardbit.spec.forms import Order, Paths, Rational

GOAL = (
    Key(
        "goal.error",
        Rational(positive=True),
        "The largest distance of an output code from the ideal, in LSB.",
    ),
    Key(
        "goal.snr",
        Rational(positive=False),
        "The least signal-to-noise ratio on the frames, in dB; needs frames.",
    ),
    Key(
        "goal.frames",
        Paths(),
        "Real images for snr: .pgm, .png or .npy, relative to the spec's folder.",
    ),
    Key(
        "goal.response",
        Rational(positive=True),
        "The largest deviation of the frequency response, in output value per input value.",
    ),
    Key(
        "goal.minimise",
        Order(WordLength),
        "What is made least first: the bits of all accumulators together, of the intermediate, "
        "of a coefficient. Of equals the least error is taken.",
        shown='["accumulator", "intermediate", "coefficient"]',
    ),
)
