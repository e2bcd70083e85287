"""Sentences for what range analysis finds: for each kind the reason and the remedy."""

_SHOWN = (
    "in a frame of {height} rows by {width} columns, at output row {row}, column {column}, "
    "after {after} taps"
)
_OUTCOME = (
    " The sum ends there at {final}, a register of that width at {wrapped} if it wraps and at "
    "{saturated} if it saturates: {stage} code {wrapped_code} or {saturated_code}, where {code} "
    "is right."
)
_WRAP = 'Every final sum fits: with {register}.overflow = "wrap" no result changes at {bits} bits. '

WORDS: dict[str, tuple[str, str]] = {
    "accumulator-too-narrow": (
        "A sum in the {register} reaches {value}, beyond the {limit} that {bits} bits hold: "
        f"{_SHOWN}.{_OUTCOME}",
        "Set {register}.bits to at least {needed}, or to auto; or say with {register}.overflow "
        "that it may wrap or saturate.",
    ),
    "accumulator-too-narrow-wrap": (
        "A sum in the {register} reaches {value}, beyond the {limit} that {bits} bits hold: "
        f"{_SHOWN}.{_OUTCOME}",
        f"{_WRAP}Or set {{register}}.bits to at least {{needed}}, or to auto.",
    ),
    "accumulator-too-narrow-bound": (
        "A sum in the {register} may reach {value}, beyond the {limit} that {bits} bits hold.",
        "Set {register}.bits to at least {needed}, or to auto; or say with {register}.overflow "
        "that it may wrap or saturate.",
    ),
    "accumulator-negative": (
        f"The {{register}} is unsigned, but a sum in it reaches {{value}}: {_SHOWN}.{_OUTCOME}",
        "Set {register}.signed to true and {register}.bits to at least {needed}.",
    ),
    "accumulator-negative-wrap": (
        f"The {{register}} is unsigned, but a sum in it reaches {{value}}: {_SHOWN}.{_OUTCOME}",
        f"{_WRAP}Or set {{register}}.signed to true and {{register}}.bits to at least {{needed}}.",
    ),
    "accumulator-negative-bound": (
        "The {register} is unsigned, but a sum in it may reach {value}.",
        "Set {register}.signed to true and {register}.bits to at least {needed}.",
    ),
    "accumulator-over-64": (
        "The {register} needs {needed} bits, and an accumulator has at most 64.",
        "Use fewer coefficient or pixel bits.",
    ),
    "product-over-64": (
        "The saturating {register} adds products of tap {tap}, which need {needed} bits; a "
        "product has at most 64.",
        "Use fewer coefficient or intermediate bits.",
    ),
    "code-out-of-range": (
        'The {stage} code reaches {value}, outside {low}..{high}, and overflow is "forbid": '
        f"{_SHOWN}.",
        'Set {stage}.overflow to "saturate", or widen the {stage} format or range.',
    ),
    "code-out-of-range-bound": (
        'The {stage} code may reach {value}, outside {low}..{high}, and overflow is "forbid".',
        'Set {stage}.overflow to "saturate", or widen the {stage} format or range.',
    ),
    "requantiser-over-64": (
        "Rounding to the {stage} format takes a word of {needed} bits, and at most 64 are used.",
        "Lower the fraction bits that are shifted in, or use fewer accumulator bits.",
    ),
}
