"""Sentences about proofs: what the C does on some frame, or what the prover does not take.

Clauses are those of ISO/IEC 9899:1999. `shows` is the frame that shows it, `values` what the
expression can be.
"""

_AT = '"{expression}" on {model}, {size}'
_SHOWN = "{shows}"

_BROKEN: dict[str, tuple[str, str]] = {
    "signed-overflow": (
        "overflows its type{values}: undefined (6.5, paragraph 5)",
        "Widen an operand before the operation",
    ),
    "uninitialised-read": (
        "reads a value that was never stored (6.2.4, 6.7.8)",
        "Store before reading, on every path",
    ),
    "out-of-bounds-read": (
        "reads outside its array{values} (6.5.6, paragraph 8)",
        "Check the index against the size, and the border's map",
    ),
    "out-of-bounds-write": (
        "writes outside its array (6.5.6, paragraph 8)",
        "Check sizes, strides and the length of scratch",
    ),
    "null-dereference": ("follows a null pointer (6.5.3.2, paragraph 4)", "Check it first"),
    "pointer-arithmetic": (
        "moves a pointer beyond its array (6.5.6, paragraph 8)",
        "Keep it within the array or one past it",
    ),
    "pointers-of-different-arrays": (
        "compares pointers into different arrays (6.5.8, paragraph 5)",
        "Compare indices instead",
    ),
    "shift-count": (
        "shifts by a negative count, or by the width or more{values} (6.5.7, paragraph 3)",
        "Keep the count below the width of the promoted operand",
    ),
    "shift-of-negative": (
        "shifts a negative number to the left{values} (6.5.7, paragraph 4)",
        "Multiply by a power of two instead",
    ),
    "division-by-zero": ("divides by zero{values} (6.5.5, paragraph 5)", "Exclude zero first"),
    "unsequenced": (
        "changes a variable and uses it without a sequence point between (6.5, paragraph 2)",
        "Split the expression in two",
    ),
    "restrict-alias": (
        "reaches an object through two pointers, one of them restrict (6.7.3.1)",
        "Drop restrict, or give each its own memory",
    ),
    "write-to-constant": ("writes to a constant object (6.7.3, paragraph 5)", "Write elsewhere"),
    "overlapping-copy": ("copies between overlapping places (7.21.2.1)", "Use memmove"),
    "no-value-returned": (
        "ends without a return, and its value is used (6.9.1, paragraph 12)",
        "Return on every path",
    ),
    "arithmetic-shift": (
        "shifts a negative number to the right{values}: "
        "implementation-defined (6.5.7, paragraph 5)",
        "Add a bias first, or let --relaxed list it as an assumption",
    ),
    "narrowing": (
        "converts a number to a signed type that does not hold it{values}: "
        "implementation-defined (6.3.1.3, paragraph 3)",
        "Bring it into range first, or let --relaxed list it as an assumption",
    ),
}

_DIFFERS: dict[str, tuple[str, str]] = {
    "output": (
        "output row {row} column {column} channel {channel} is {got}, not {expected}",
        "Compare taps, border, rounding and limits with the contract",
    ),
    "not-written": (
        "output row {row} column {column} channel {channel} is not written",
        "Check the loops' ends",
    ),
    "not-always-written": (
        "output row {row} column {column} channel {channel} is written for some pixels only",
        "Write it on every path",
    ),
    "status": (
        "the status is {got}, not {expected}",
        "Check the arguments in the contract's order",
    ),
    "written-though-refused": (
        "the destination is written in a call that has to be refused",
        "Check everything before the first write",
    ),
    "written-between-rows": (
        "something is written between the rows of the destination",
        "Step from row to row by the stride, not by the width",
    ),
    "output-size": (
        "the output size is told wrong",
        "Compare extent, step and phase",
    ),
    "contract-in-fractions": (
        "two statements of the contract differ: {got} and {expected}",
        "This is a fault of guardbit: please report it with the spec",
    ),
}

WORDS: dict[str, tuple[str, str]] = {
    **{f"proof-{k}": (f"{_AT}: {what}. {_SHOWN}", right) for k, (what, right) in _BROKEN.items()},
    **{
        f"proof-{k}": (f"{{model}}, {{size}}: {what}. {_SHOWN}", right)
        for k, (what, right) in _DIFFERS.items()
    },
}
