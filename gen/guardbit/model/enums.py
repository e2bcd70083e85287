"""The closed vocabularies of a spec file; each value is spelt as the user writes it."""

from enum import StrEnum


class Operation(StrEnum):
    CONVOLUTION = "convolution"
    CORRELATION = "correlation"


class FitRule(StrEnum):
    NEAREST = "nearest"
    GAIN = "gain"
    RESPONSE = "response"


class Scale(StrEnum):
    BINARY = "binary"
    EXACT = "exact"


class Outside(StrEnum):
    """What a frame with codes outside the input range gets."""

    UNDEFINED = "undefined"
    CLAMP = "clamp"
    REJECT = "reject"


class Overflow(StrEnum):
    FORBID = "forbid"
    WRAP = "wrap"
    SATURATE = "saturate"


class Preload(StrEnum):
    ZERO = "zero"
    ROUNDING = "rounding"


class Rounding(StrEnum):
    """IEEE 754-2019 directions (4.3.1, 4.3.2), and add-half-then-floor."""

    TOWARD_NEGATIVE = "toward-negative"
    TOWARD_POSITIVE = "toward-positive"
    TOWARD_ZERO = "toward-zero"
    TIES_TO_EVEN = "ties-to-even"
    TIES_TO_AWAY = "ties-to-away"
    TIES_TO_POSITIVE = "ties-to-positive"


class First(StrEnum):
    """The pass that runs first when there is an intermediate."""

    VERTICAL = "vertical"
    HORIZONTAL = "horizontal"


class WordLength(StrEnum):
    """A word length that a search can make small; of two passes both accumulators count."""

    ACCUMULATOR = "accumulator"
    INTERMEDIATE = "intermediate"
    COEFFICIENT = "coefficient"


class BorderMode(StrEnum):
    CONSTANT = "constant"
    REPLICATE = "replicate"
    HALF_SAMPLE = "half-sample"
    WHOLE_SAMPLE = "whole-sample"
    PERIODIC = "periodic"


class Grid(StrEnum):
    PIXEL = "pixel"
    SITE = "site"


class Extent(StrEnum):
    SAME = "same"
    FULL = "full"
    VALID = "valid"


class Container(StrEnum):
    """The C type that stores a code."""

    U8 = "u8"
    I8 = "i8"
    U16 = "u16"
    I16 = "i16"
    U32 = "u32"
    I32 = "i32"

    @property
    def bits(self) -> int:
        """Return the width of the type."""
        return int(self.value[1:])

    @property
    def signed(self) -> bool:
        """Return whether the type is two's complement."""
        return self.value[0] == "i"
