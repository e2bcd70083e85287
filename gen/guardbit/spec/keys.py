"""The key table: every key of a spec file, as one piece of data.

The reader converts by it, messages quote it, `explain` shows it and the documentation is
made from it. `default` is what the reader puts in the Spec for a key that is left out; None
stands for a default that depends on other keys, which `shown` then puts in words.
"""

from collections.abc import Mapping
from fractions import Fraction

from guardbit.model.enums import (
    BorderMode,
    Container,
    Extent,
    First,
    FitRule,
    Grid,
    Operation,
    Outside,
    Overflow,
    Preload,
    Rounding,
    Scale,
)
from guardbit.model.spec import Auto
from guardbit.spec.entries import Key, Table
from guardbit.spec.forms import (
    BOX_LIMIT,
    TAP_LIMIT,
    Among,
    Choice,
    DivisorForm,
    Flag,
    Identifier,
    Line,
    Numbers,
    PinnedForm,
    Positive,
    RegistersForm,
    RelativePath,
    Reserved,
    Rows,
    Size,
    Span,
    Two,
    Whole,
    WholeOrTwo,
)
from guardbit.spec.formulas import RECIPES, Direction, Formula
from guardbit.spec.keys_goal import GOAL

# Wide enough for any format; the format's own codes are checked once it is known.
_CODE = Whole(-(2**31), 2**32 - 1)
_CODES = Span(-(2**31), 2**32 - 1)
_FRAC = Whole(-64, 64)


TABLES: tuple[Table, ...] = (
    Table("filter", "What the filter is called and which way it is applied.", required=True),
    Table("kernel", "The ideal taps, as exact rationals.", required=True),
    Table("input", "The format of the pixels that are read.", required=True),
    Table("coefficient", "How the ideal taps become integers."),
    Table("intermediate", "Makes it two passes, rounded in between to this format."),
    Table("intermediate.accumulator", "The register that sums the first of two passes."),
    Table("accumulator", "The register that sums coefficient * pixel."),
    Table("output", "The format of the pixels that are written, and how sums become codes."),
    Table("border", "How the image continues outside itself."),
    Table("image", "Image sizes, and which output positions exist."),
    Table("code", "Choices about the emitted C.", reserved=True),
    Table("goal", "What guardbit size searches word lengths for, where they are left open."),
    Table("budget", "Limits on cost.", reserved=True),
)


def _accumulator(table: str) -> tuple[Key, ...]:
    return (
        Key(
            f"{table}.bits",
            Whole(2, 64, auto=True),
            'Width of the accumulator; "auto" takes the least that no partial sum can leave.',
            Auto.AUTO,
        ),
        Key(f"{table}.signed", Flag(), "Whether the accumulator is two's complement.", True),
        Key(
            f"{table}.overflow",
            Choice(Overflow),
            "forbid: must be proved impossible; wrap: modulo 2^bits at every add; saturate: "
            "clamped at every add, in raster order.",
            Overflow.FORBID,
        ),
        Key(
            f"{table}.preload",
            Choice(Preload),
            "Where the sum starts; rounding: at half an output step, so that the requantiser "
            "only floors (needs rounding ties-to-positive).",
            Preload.ZERO,
        ),
    )


_FILTER = (
    Key(
        "filter.name",
        Identifier(),
        "Prefixes every C symbol and names the emitted files; no keyword of C or C++.",
        required=True,
    ),
    Key(
        "filter.operation",
        Choice(Operation),
        "convolution reads x[n - k] and makes the kernel the impulse response; correlation "
        "reads x[n + k].",
        Operation.CONVOLUTION,
    ),
    Key("filter.summary", Line(), "One line that says what the filter is for.", ""),
)

_KERNEL = (
    Key(
        "kernel.taps",
        Rows(),
        f"The kernel written out: at most {BOX_LIMIT} rows and columns, {TAP_LIMIT} taps "
        "that are not zero.",
        shown="one of taps, column and row, file, formula is required",
    ),
    Key("kernel.column", Numbers(), "Vertical factor of a separable kernel; needs row."),
    Key("kernel.row", Numbers(), "Horizontal factor of a separable kernel; needs column."),
    Key(
        "kernel.file",
        RelativePath(),
        "The kernel in a file: .csv cells are exact decimals or ratios, .npy floats their exact "
        "binary value, pixels of .pgm and .png their codes.",
    ),
    Key(
        "kernel.formula",
        Choice(Formula),
        "The kernel by formula. Every formula but laplacian gives a column and a row, which "
        "scalar divisor and frac fit as one matrix.",
        details=tuple(
            f"{name.value} (needs {' and '.join(recipe.needs)}): {recipe.explanation}"
            for name, recipe in RECIPES.items()
        ),
    ),
    Key("kernel.size", Size(1, BOX_LIMIT), "Size of a formula's box.", shown="by formula"),
    Key(
        "kernel.sigma",
        Positive(),
        "Standard deviation of a gaussian, in taps.",
        shown="by formula",
    ),
    Key(
        "kernel.axis",
        Choice(Direction),
        "The direction along which a derivative is taken: vertical is down the rows, "
        "horizontal along a row.",
        shown="by formula",
    ),
    Key(
        "kernel.neighbours",
        Among((4, 8)),
        "Which neighbours a laplacian sums.",
        shown="by formula",
    ),
    Key(
        "kernel.divisor",
        DivisorForm(),
        'Divides the taps; "sum" makes their sum 1. A pair divides column and row, each alone.',
        (Fraction(1),),
    ),
    Key(
        "kernel.origin",
        Two(-1024, 1024),
        "[row, column] of the tap at displacement (0, 0), from 0; it may lie outside the box.",
        shown="[(rows - 1) // 2, (columns - 1) // 2]",
    ),
)

_INPUT = (
    Key("input.bits", Whole(1, 16), "Word length of an input code.", required=True),
    Key("input.signed", Flag(), "Whether codes are two's complement.", False),
    Key(
        "input.frac",
        _FRAC,
        "Fraction bits: a code's value is (code - pedestal) * 2^-frac.",
        0,
    ),
    Key("input.pedestal", _CODE, "The code that stands for zero: a camera's black level.", 0),
    Key(
        "input.range",
        _CODES,
        "The legal codes; every bound is for inputs inside it.",
        shown="all codes of the format",
    ),
    Key(
        "input.container",
        Choice(Container),
        "The C type that stores a code.",
        shown="the smallest that holds the format",
    ),
    Key(
        "input.outside",
        Choice(Outside),
        "What a frame with codes outside the range gets: undefined results, clamped pixels, "
        "or a status code.",
        Outside.UNDEFINED,
    ),
)

_COEFFICIENT = (
    Key(
        "coefficient.bits",
        Whole(1, 32, auto=True),
        'Word length of an integer coefficient; "auto" needs taps that are exact at frac, or '
        "leaves it to the search for a [goal].",
        Auto.AUTO,
    ),
    Key("coefficient.signed", Flag(), "Whether coefficients are two's complement.", True),
    Key(
        "coefficient.frac",
        WholeOrTwo(-64, 64),
        'Fraction bits of the coefficients; "auto" takes the least at which all taps are exact, '
        "else the most that fits bits; beside a [goal] it is searched. A pair fits column and row "
        "each alone.",
        (Auto.AUTO,),
    ),
    Key(
        "coefficient.fit",
        Choice(FitRule),
        "nearest rounds each tap; gain keeps the sum exact; response comes nearest in frequency: "
        "size --pin searches it and writes pinned.",
        FitRule.NEAREST,
    ),
    Key(
        "coefficient.scale",
        Choice(Scale),
        "binary scales by 2^frac; exact takes whole taps and divides by the divisor itself.",
        Scale.BINARY,
    ),
    Key(
        "coefficient.pinned",
        PinnedForm(),
        "Integer coefficients that a search wrote here; they are used as they are.",
    ),
    Key(
        "coefficient.registers",
        RegistersForm(),
        "Coefficients are given at each call, as integers, and may be any that this allows; the "
        "kernel's own must be among them. For one pass, with a kernel fitted as one matrix.",
        shown="none: the taps are fixed",
        details=(
            "least, greatest: limits of a tap, a number for all or rows of one each; left out, "
            "those of the coefficient register.",
            "sum: what all taps add up to; the gain then is the same for all that may be loaded.",
            "magnitudes: the most that the magnitudes of all taps add up to.",
            "kernels: a list of matrices of the kernel's shape, one of which is loaded.",
            'With bits = "auto" the register is as wide as the limits need.',
        ),
    ),
)

_INTERMEDIATE = (
    Key(
        "intermediate.first",
        Choice(First),
        "The pass that runs first: vertical is the column, horizontal the row.",
        First.VERTICAL,
    ),
    Key(
        "intermediate.bits",
        Whole(2, 32, auto=True),
        'Word length between the passes; "auto" leaves it to the search for a [goal].',
        required=True,
    ),
    Key("intermediate.signed", Flag(), "Whether its codes are two's complement.", True),
    Key(
        "intermediate.frac",
        Whole(-64, 64, auto=True),
        'Fraction bits between the passes; "auto", or leaving it out beside a [goal], leaves it '
        "to the search.",
        shown="the input's",
    ),
    Key("intermediate.pedestal", _CODE, "The code that stands for zero in between.", 0),
    Key(
        "intermediate.rounding",
        Choice(Rounding),
        "How the first pass's sums are rounded.",
        Rounding.TIES_TO_POSITIVE,
    ),
    Key(
        "intermediate.overflow",
        Choice(Overflow),
        "What a rounded sum outside the format becomes.",
        Overflow.SATURATE,
    ),
)

_OUTPUT = (
    Key("output.bits", Whole(1, 32), "Word length of an output code.", shown="the input's"),
    Key("output.signed", Flag(), "Whether codes are two's complement.", shown="the input's"),
    Key("output.frac", _FRAC, "Fraction bits of an output code.", shown="the input's"),
    Key("output.pedestal", _CODE, "The output code that stands for zero.", 0),
    Key(
        "output.range",
        _CODES,
        "The codes that saturate clamps to.",
        shown="all codes of the format",
    ),
    Key(
        "output.container",
        Choice(Container),
        "The C type that stores a code.",
        shown="the smallest that holds the format",
    ),
    Key(
        "output.rounding",
        Choice(Rounding),
        "How the exact value is rounded; ties-to-positive adds half and floors.",
        Rounding.TIES_TO_POSITIVE,
    ),
    Key(
        "output.overflow",
        Choice(Overflow),
        "What a value outside the output becomes; forbid must be proved impossible.",
        Overflow.SATURATE,
    ),
)

_BORDER = (
    Key(
        "border.mode",
        Choice(BorderMode),
        "a b c d continues as: constant v v [a b c d] v v; replicate a a [a b c d] d d; "
        "half-sample b a [a b c d] d c; whole-sample c b [a b c d] c b; periodic "
        "c d [a b c d] a b.",
        BorderMode.CONSTANT,
    ),
    Key("border.value", _CODE, "The code outside a constant border.", shown="the input pedestal"),
    Key(
        "border.grid",
        Choice(Grid),
        "site continues each sublattice of spacing alone, so that a colour mosaic never mixes.",
        Grid.PIXEL,
    ),
)

_IMAGE = (
    Key(
        "image.extent",
        Choice(Extent),
        "Which positions are written: same as the image, full support, or only those that read "
        "no border.",
        Extent.SAME,
    ),
    Key("image.width", Span(1, 65535), "Legal widths in pixels.", (1, 65535)),
    Key("image.height", Span(1, 65535), "Legal heights in pixels.", (1, 65535)),
    Key("image.step", Two(1, 64), "Keeps every step-th position.", (1, 1)),
    Key("image.phase", Two(0, 63), "The first position kept; less than step.", (0, 0)),
    Key("image.spacing", Two(1, 64), "Pixels from one tap to the next.", (1, 1)),
    Key("image.channels", Whole(1, 16), "Interleaved channels, each filtered alone.", 1),
)

_RESERVED = tuple(
    Key(f"{table.name}.*", Reserved(), table.explanation) for table in TABLES if table.reserved
)

KEYS: Mapping[str, Key] = {
    key.name: key
    for key in (
        *_FILTER,
        *_KERNEL,
        *_INPUT,
        *_COEFFICIENT,
        *_INTERMEDIATE,
        *_accumulator("intermediate.accumulator"),
        *_accumulator("accumulator"),
        *_OUTPUT,
        *_BORDER,
        *_IMAGE,
        *GOAL,
        *_RESERVED,
    )
}


def keys_of(table: str) -> tuple[Key, ...]:
    """Return the keys of one table, in the order of the table."""
    return tuple(key for key in KEYS.values() if key.table == table)
