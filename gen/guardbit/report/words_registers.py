"""Sentences for what a spec says of coefficients that are loaded at run time."""

WORDS: dict[str, tuple[str, str]] = {
    "registers-form": ("The registers are {got}, not in that form.", "Write {expected}."),
    "registers-with": (
        "Coefficients that are loaded at run time cannot stand beside {got}.",
        "Remove one of the two: registers are for a single pass whose kernel is fitted as one "
        "matrix by nearest or gain, with every word length given.",
    ),
    "registers-box": (
        "{entry} of the registers is {got}, and the kernel's box is {expected}.",
        "Write one whole number for every tap, zeros included.",
    ),
    "registers-without-limits": (
        'With coefficient.bits = "auto" the limits say how wide the registers are, and {missing} '
        "is left out.",
        "Write {missing}, or give coefficient.bits a number.",
    ),
    "registers-reversed": (
        "The tap in row {row}, column {column} (from 0) would lie in {least}..{greatest}, which "
        "is empty.",
        "Write a least tap that is not above the greatest.",
    ),
    "registers-empty": (
        "No tap but 0 may be loaded anywhere.",
        "Allow a tap that is not 0.",
    ),
    "registers-too-many": (
        "{got} taps can be loaded; at most {limit} can.",
        "Set least and greatest of the others to 0.",
    ),
    "registers-bits": (
        "A tap of {got} may be loaded, and a coefficient register of {bits} {sign} bits holds "
        "{low}..{high}.",
        "Change coefficient.bits or coefficient.signed, or allow only taps that fit.",
    ),
}
