"""Sentences about defects that were seeded in the C to measure the rungs."""

_CHANGE = '{operator}: "{before}" made "{after}"'

WORDS: dict[str, tuple[str, str]] = {
    "defect-proved": (
        f"{_CHANGE} was proved right, yet with {{compiler}} the call {{call}} gives {{how}}",
        "The proof is not sound here: report this, and do not rely on the rung proof",
    ),
    "defect-unconfirmed": (
        f"{_CHANGE} was refuted ({{clause}}), and no compiled call shows it",
        "The proof may refute what is right: report this",
    ),
}
