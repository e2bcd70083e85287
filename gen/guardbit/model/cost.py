"""What a filter costs in a part or in silicon, counted from its taps."""

from dataclasses import dataclass


@dataclass(frozen=True)
class PassCost:
    """One pass, per result of it.

    `reads`: pixels read, one for each tap that is not zero. `multipliers`: taps that are no
    power of two; `shifts`: those that are. `adders`: two-input adders of the sum.
    `folded_multipliers`: the multipliers left when taps of equal magnitude at places mirrored
    in the pass's centre share one, their pixels added or subtracted first. `magnitudes`: distinct
    ones of the taps, all that a store of coefficients with signs apart has to hold. `constants`:
    distinct odd factors of the magnitudes, 1 left out: the multiplier blocks that a fabric
    without multipliers needs. `signed_digit_adders`: adders in all where each tap is a sum of
    shifted pixels in canonical signed digits; both None where taps are loaded at run time, which
    also share no multiplier. `constant_bits`: the coefficients as a table.
    `line_bits`: pixels that a raster stream has to keep for a pixel of width, in bits.
    """

    name: str
    reads: int
    multipliers: int
    shifts: int
    adders: int
    folded_multipliers: int
    magnitudes: int
    constants: int | None
    signed_digit_adders: int | None
    constant_bits: int
    line_rows: int
    line_bits: int


@dataclass(frozen=True)
class Cost:
    """`widest` is the greatest legal width in pixels, `line_bits` the line buffers' at it."""

    passes: tuple[PassCost, ...]
    widest: int
    line_bits: int
