"""The trade's words as guardbit uses them."""

GLOSSARY: tuple[tuple[str, str], ...] = (
    ("tap", "one weight of the kernel: ideal (an exact ratio) before fitting, integer after"),
    ("coefficient", "another name for a tap, once it is the integer that the code multiplies by"),
    ("kernel", "the taps of a filter"),
    ("box", "the kernel's matrix as it was given, zeros included"),
    ("origin", "the index of the tap that stands at displacement (0, 0)"),
    ("code", "the integer stored for a pixel; its real value is (code - pedestal) * 2^-frac"),
    ("frac", "the number of fraction bits; may be negative or exceed the word length"),
    ("pedestal", "the code that stands for zero, such as a camera's black level"),
    ("accumulator", "the register that sums coefficient * pixel"),
    (
        "requantiser",
        "the unit after the accumulator: it shifts or divides, rounds, adds the output pedestal,"
        " and saturates or wraps",
    ),
    ("guard bits", "accumulator bits beyond the width of one product, there for growth"),
    (
        "spare bits",
        "accumulator bits beyond what the exact worst case needs; negative when there are too few",
    ),
    ("headroom", "the width's limit divided by the exact worst case"),
    ("witness", "a concrete input frame that attains a bound"),
    ("border", "how the image continues outside itself"),
    ("extent", "which output positions exist: same, full or valid"),
    ("LSB", "one step of the output code"),
    ("plan", "how the C carries out the integer arithmetic: passes, widths of cells, order"),
    ("rung", "one level of the ladder of verification"),
    ("certificate", "the machine-readable record of what was proved and measured for one spec"),
)


def meaning(word: str) -> str | None:
    """Return what a word of the trade means here, or None. Case and final s do not matter."""
    plain = word.strip().lower().replace("-", " ")
    for name, text in GLOSSARY:
        if plain in (name.lower(), f"{name.lower()}s"):
            return text
    return None
