"""Sentences for what fitting finds: for each kind the reason and the remedy."""

WORDS: dict[str, tuple[str, str]] = {
    "tap-too-wide": (
        "Tap {tap} (ideally {ideal}) becomes {integer}; that needs {needed} bits, and the "
        "{sign} coefficient register has {bits}.",
        'Set coefficient.bits to at least {needed}; with scale = "binary" a smaller '
        "coefficient.frac helps too.",
    ),
    "tap-over-limit": (
        "Tap {tap} (ideally {ideal}) becomes {integer}; that needs {needed} bits, and a "
        "coefficient register has at most 32.",
        'With scale = "binary" lower coefficient.frac; else scale the taps down.',
    ),
    "tap-negative": (
        "Tap {tap} (ideally {ideal}) becomes {integer}, and the coefficient register is unsigned.",
        "Set coefficient.signed to true, or leave it out.",
    ),
    "gain-impossible": (
        "No {bits}-bit integers for the {taps} taps of {part} sum to {sum}, the gain that is "
        "asked for: they reach from {least} to {greatest}.",
        "Raise coefficient.bits or lower coefficient.frac.",
    ),
    "bits-auto-inexact": (
        'bits = "auto" takes the width that holds every tap exactly, but tap {tap} = {value} is '
        "no whole multiple of 2^-frac at frac {frac}.",
        "Give coefficient.bits a number, or make every tap a multiple of a power of two.",
    ),
    "no-frac-fits": (
        "At no frac in -64..64 do the taps fit {bits} {sign} bits; look at tap {tap} = {ideal}.",
        "Raise coefficient.bits, or set coefficient.signed to true if the tap is negative.",
    ),
    "exact-tap-not-integer": (
        'scale = "exact" takes the taps as integers, but tap {tap} is {value}.',
        "Multiply the taps and kernel.divisor until the taps are integers, or set "
        'coefficient.scale to "binary".',
    ),
    "exact-divisor-not-integer": (
        'scale = "exact" divides by a positive integer, but the divisor is {divisor}.',
        "Multiply the taps and kernel.divisor until both are integers, or set "
        'coefficient.scale to "binary".',
    ),
    "divisor-sum-zero": (
        'divisor = "sum" divides by the sum of {taps}, which is zero.',
        "Give kernel.divisor a number.",
    ),
    "scalar-with-pair": (
        "{cause} asks for a pair [column's, row's], but this key has one value.",
        "Write a pair, or leave this key out.",
    ),
    "pair-needs-vectors": (
        "{cause} treats column and row apart, but the kernel is one matrix.",
        "Give the kernel as kernel.column and kernel.row, or do without {cause} here.",
    ),
    "pinned-shape": (
        "The pinned integers for {part} have the shape {given}; the kernel's is {wanted}.",
        "Pin integers of the shape {wanted}, rows x columns: a matrix for one fit, a column "
        "and a row for pairs.",
    ),
    "pinned-without-frac": (
        "The integers are pinned, but not the frac that they were found for.",
        "Write coefficient.frac as a number beside coefficient.pinned.",
    ),
    "pinned-with-exact": (
        'With scale = "exact" the taps themselves are the integers; there is nothing to pin.',
        'Remove coefficient.pinned, or set coefficient.scale to "binary".',
    ),
    "nominal-outside-limits": (
        "The kernel's own taps must be ones that may be loaded, but tap {tap} becomes {integer}, "
        "and its register's limits are {least}..{greatest}.",
        "Widen the limits in coefficient.registers, or change kernel or coefficient.frac.",
    ),
    "nominal-without-register": (
        "Tap {tap} is ideally {ideal}, and coefficient.registers lets nothing but 0 be loaded "
        "there.",
        "Allow another number there, or make the tap 0.",
    ),
    "nominal-sum": (
        "The kernel's own taps must be ones that may be loaded, but they become integers that "
        "sum to {got}, and coefficient.registers asks for {sum}.",
        'Set its sum to {got}, or look at coefficient.frac and fit = "gain", which fix the sum.',
    ),
    "nominal-magnitudes": (
        "The kernel's own taps must be ones that may be loaded, but their magnitudes sum to "
        "{got}, and coefficient.registers allows {magnitudes}.",
        "Raise its magnitudes, or change kernel or coefficient.frac.",
    ),
    "nominal-not-listed": (
        "The kernel's own taps must be ones that may be loaded, but they become {taps}, which "
        "coefficient.registers does not list.",
        "Add them to its kernels, or change kernel or coefficient.frac.",
    ),
    "response-not-pinned": (
        'fit = "response" is a search, and its result is not in the spec.',
        'Run "guardbit size --pin" on the spec: it searches and writes coefficient.pinned; or '
        'set coefficient.fit to "nearest" or "gain".',
    ),
    "pedestal-no-code": (
        "Pedestal {code} is no code of the {table} format, which has {least}..{greatest}.",
        "Write a code in {least}..{greatest}, or change {table}.bits or {table}.signed.",
    ),
    "range-reversed": (
        "The range starts at {least}, above its end {greatest}.",
        "Write [least, greatest].",
    ),
    "range-outside-format": (
        "The range holds {code}, no code of the {table} format, which has {least}..{greatest}.",
        "Keep the range in {least}..{greatest}, or change {table}.bits or {table}.signed.",
    ),
    "container-too-small": (
        "Container {container} does not hold every {sign} code of {bits} bits.",
        "Use {smallest} or a larger one, or leave container out.",
    ),
    "border-value-no-code": (
        "Border value {code} is no code of the {table} format, which has {least}..{greatest}.",
        "Write a code in {least}..{greatest}.",
    ),
    "preload-other-rounding": (
        'preload = "rounding" starts the sum at half an output step, which is right only for '
        "ties-to-positive; this requantiser rounds {rounding}.",
        'Set preload to "zero", or the rounding to "ties-to-positive".',
    ),
    "preload-with-exact": (
        'preload = "rounding" needs a shift after the sum, but scale = "exact" divides.',
        'Set preload to "zero".',
    ),
    "preload-without-shift": (
        'preload = "rounding" needs a shift right by at least 1 after the sum; here it is {shift}.',
        'Set preload to "zero".',
    ),
}
